"""Effective bulk modulus of oil with entrained air, in four published forms.

The forms fall into two groups: those that only compress the air, and those that let it dissolve
as well. Which is right depends on amount, size and rate, so a judgement should span them:
``modulus_span`` does. Comparison of the forms: Gholizadeh, Burton, Schoenau, Int. J. Fluid Power
13 (2012) no. 1; experiment agrees with theory only under specific conditions (same authors and
Bitner, FPMC2013-4493).
"""

from enum import StrEnum

import numpy as np
import numpy.typing as npt

from rca.base.errors import OutOfRangeError
from rca.physics.bulk_modulus import PRESSURE_SLOPE

Floats = npt.NDArray[np.float64]

ATMOSPHERE = 101325.0  # [Pa]
ICE_POINT = 273.15  # [K]


class Form(StrEnum):
    """What the air does and how stiff the liquid is."""

    COMPRESSION = "compression only"  # constant liquid modulus; Merritt 1967, Nykaenen 2000
    STIFFENING = "compression only, stiffening liquid"  # liquid modulus linear in pressure
    GRADUAL = "compression and gradual dissolution"  # free share by a smooth step up to p_full
    EQUILIBRIUM = "compression and dissolution at equilibrium"  # Henry's law at once


def effective_modulus(
    pressure: npt.ArrayLike,
    air_fraction: npt.ArrayLike,
    liquid_modulus: npt.ArrayLike,
    *,
    form: Form = Form.COMPRESSION,
    exponent: float = 1.4,
    reference_pressure: float = ATMOSPHERE,
    dissolved_at: float = 100e5,
    bunsen: float = 0.09,
    temperature: float = 323.15,
) -> Floats:
    """Effective tangent bulk modulus -V dp/dV of oil with free air [Pa]; inputs broadcast.

    ``pressure`` [Pa abs] at or above ``reference_pressure``; ``air_fraction`` share of the
    mixture's volume that is free air at the reference pressure [-], 0 to 0.5;
    ``liquid_modulus`` [Pa] of the bubble-free oil at low pressure; ``exponent`` polytropic, 1 to
    1.4 (1.4 is stiffer below about 3 bar and softer above). ``dissolved_at`` [Pa] where the last
    air is in solution (GRADUAL only); ``bunsen`` [-] and ``temperature`` [K] for EQUILIBRIUM,
    which takes the free air as isothermal and the oil as saturated at the reference pressure.
    Compression only errs low (soft) under pressure, as some air dissolves; equilibrium errs high
    for anything faster than seconds. Bubble size, hysteresis and surface tension are not in it.
    Source: Gholizadeh, Burton, Schoenau, Int. J. Fluid Power 13 (2012) no. 1 (the two groups);
    Merritt, Hydraulic Control Systems, 1967. Raises OutOfRangeError outside the range or for NaN.
    """
    p, a, k = np.broadcast_arrays(
        *(np.asarray(x, dtype=float) for x in (pressure, air_fraction, liquid_modulus))
    )
    _refuse(p, a, k, exponent, reference_pressure, dissolved_at, bunsen, temperature)
    liquid, liquid_rate = _liquid(p - reference_pressure, k, form)
    gas_0 = a / (1.0 - a)
    if form is Form.EQUILIBRIUM:
        gas, gas_rate = _equilibrium(
            p, gas_0, reference_pressure, bunsen * temperature / ICE_POINT
        )
    else:
        free, free_rate = _free_share(p, form, reference_pressure, dissolved_at)
        whole = gas_0 * (reference_pressure / p) ** (1.0 / exponent)
        gas = whole * free
        gas_rate = whole * (free / (exponent * p) - free_rate)
    return np.asarray((liquid + gas) / (liquid_rate + gas_rate))


def modulus_span(
    pressure: npt.ArrayLike,
    air_fraction: npt.ArrayLike,
    liquid_modulus: npt.ArrayLike,
    *,
    temperature: float = 323.15,
    bunsen: float = 0.09,
) -> tuple[Floats, Floats]:
    """Lowest and highest effective modulus over all forms and exponents 1 to 1.4 [Pa].

    Arguments, range and source as ``effective_modulus``. The honest answer where nobody measured
    the air's size and the oil's saturation. Raises OutOfRangeError.
    """
    found = np.stack([
        effective_modulus(
            pressure, air_fraction, liquid_modulus, form=form, exponent=n,
            temperature=temperature, bunsen=bunsen,
        )
        for form in Form
        for n in (1.0, 1.4)
    ])  # fmt: skip
    return np.asarray(found.min(axis=0)), np.asarray(found.max(axis=0))


def mixture_sound_speed(
    pressure: npt.ArrayLike,
    void: npt.ArrayLike,
    *,
    liquid_modulus: float,
    liquid_density: float,
    gas_density: float = 1.1,
    exponent: float = 1.4,
) -> Floats:
    """Speed of sound in oil with bubbles far below their resonance [m/s]; inputs broadcast.

    1/(rho c^2) = void/(n p) + (1 - void)/K; ``void`` share of gas by volume at ``pressure``
    [Pa abs], 0 to 1; densities [kg/m3]. Isothermal exponent 1 for fine bubbles or slow waves.
    No dissolution, no surface tension. Source: Wood, A Textbook of Sound, 1930.
    Raises OutOfRangeError unless the inputs are positive, void in 0-1, exponent 1-1.4.
    """
    p, share = (np.asarray(x, dtype=float) for x in (pressure, void))
    fixed = (liquid_modulus, liquid_density, gas_density)
    if not (
        np.all((p > 0) & np.isfinite(p) & (share >= 0) & (share <= 1))
        and min(fixed) > 0 and 1 <= exponent <= 1.4
    ):  # fmt: skip
        raise OutOfRangeError(
            "mixture_sound_speed needs positive pressure, modulus and densities, void 0 to 1 and "
            f"exponent 1 to 1.4; got {pressure!r}, {void!r}, {fixed}, {exponent}"
        )
    density = share * gas_density + (1.0 - share) * liquid_density
    give = share / (exponent * p) + (1.0 - share) / liquid_modulus
    return np.asarray(1.0 / np.sqrt(density * give))


def _liquid(over: Floats, k: Floats, form: Form) -> tuple[Floats, Floats]:
    """Volume of the liquid over its volume at the reference pressure, and -dV/dp of it."""
    if form is Form.STIFFENING:
        volume = (1.0 + PRESSURE_SLOPE * over / k) ** (-1.0 / PRESSURE_SLOPE)
        return np.asarray(volume), np.asarray(volume / (k + PRESSURE_SLOPE * over))
    # constant modulus in its usual first-order form, volume kept at one
    return np.ones_like(over), 1.0 / k


def _free_share(
    p: Floats, form: Form, reference: float, dissolved_at: float
) -> tuple[Floats, Floats]:
    """Share of the air that is still free and its slope over pressure."""
    if form is not Form.GRADUAL:
        return np.ones_like(p), np.zeros_like(p)
    x = np.clip((p - reference) / (dissolved_at - reference), 0.0, 1.0)
    share = 1.0 - x**3 * (10.0 - 15.0 * x + 6.0 * x**2)
    slope = -30.0 * x**2 * (1.0 - x) ** 2 / (dissolved_at - reference)
    return np.asarray(share), np.asarray(slope)


def _equilibrium(
    p: Floats, gas_0: Floats, reference: float, ostwald: float
) -> tuple[Floats, Floats]:
    """Free air at solution equilibrium: (v0 + L) p0/p - L until it is gone; isothermal."""
    volume = (gas_0 + ostwald) * reference / p - ostwald
    rate = (gas_0 + ostwald) * reference / p**2
    free = volume > 0
    return np.where(free, volume, 0.0), np.where(free, rate, 0.0)


def _refuse(
    p: Floats,
    a: Floats,
    k: Floats,
    exponent: float,
    reference: float,
    dissolved_at: float,
    bunsen: float,
    temperature: float,
) -> None:
    if not np.all(
        (p >= reference) & (p <= 1e8) & (a >= 0) & (a <= 0.5) & (k > 0) & np.isfinite(k)
    ):
        raise OutOfRangeError(
            f"effective_modulus needs reference pressure ({reference:g} Pa) <= pressure <= 1e8 Pa "
            f"absolute, 0 <= air_fraction <= 0.5 and liquid_modulus > 0; got {p!r}, {a!r}, {k!r}"
        )
    if not (
        1.0 <= exponent <= 1.4 and reference > 0 and dissolved_at > reference
        and 0 < bunsen < 0.5 and 200 < temperature < 500
    ):  # fmt: skip
        raise OutOfRangeError(
            "effective_modulus needs exponent 1 to 1.4, dissolved_at above the reference "
            f"pressure, Bunsen coefficient 0 to 0.5, 200-500 K; got {exponent}, {dissolved_at}, "
            f"{reference}, {bunsen}, {temperature}"
        )
