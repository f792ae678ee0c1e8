"""Vapour pressure of hydraulic fluids, and how far from ignitable the vapour in a bubble is.

No vapour pressure of a formulated oil is published that reaches down to 50 degC; it is anchored
at the flash point, where the vapour is at its lean limit under one atmosphere, and carried from
there by Clausius and Clapeyron. A little solvent, fuel or cracked oil lowers the flash point and
raises the vapour pressure by decades: a measured flash point wins over any class value.
"""

from dataclasses import dataclass
from typing import Final

import numpy as np
import numpy.typing as npt

from rca.base.errors import OutOfRangeError
from rca.physics.compression import AIR_GAS_CONSTANT, UNIVERSAL_GAS_CONSTANT
from rca.physics.consequences import FUEL_PER_AIR
from rca.physics.fluid_class import class_values

Floats = npt.NDArray[np.float64]

ATMOSPHERE = 101325.0  # [Pa]
LEAN_SHARE = 0.55  # lean limit over stoichiometric of heavy alkanes; Jones, as in Bur. Mines
# Bulletin 627, 1965 (from memory)
AIR_OXYGEN = 0.2095


@dataclass(frozen=True, slots=True, kw_only=True)
class VapourClass:
    """What a class of fluid evaporates as."""

    lean_limit: float  # mole fraction in air at 1 atm [-]
    vaporisation: float  # heat of vaporisation [J/mol], between 50 degC and the flash point
    log_spread: float  # standard deviation of ln(vapour pressure) at 50 degC, class value of flash


# Lean limits 0.55 of stoichiometric for C24 (mineral), C30 (PAO), C27 H52 O8-like polyol ester,
# triaryl phosphate; heats of vaporisation 80-120 kJ/mol; all common practice, no source. The
# spread comes from +/-12 K of the flash point and +/-10 kJ/mol.
_CLASSES: Final[dict[str, VapourClass]] = {
    "mineral": VapourClass(lean_limit=0.0031, vaporisation=100e3, log_spread=1.5),
    "PAO": VapourClass(lean_limit=0.0025, vaporisation=105e3, log_spread=1.7),
    "ester": VapourClass(lean_limit=0.0035, vaporisation=115e3, log_spread=2.0),
    "phosphate ester": VapourClass(lean_limit=0.0060, vaporisation=105e3, log_spread=2.0),
}
_USUAL_REACH = 1 / 323.15 - 1 / 488.15  # [1/K], from 50 degC to a mineral oil's flash point
WATER_ACTIVITY = (0.70, 0.80, 0.88)  # of water glycol with 35-50 % water; common practice


def stoichiometric_fraction(carbon: npt.ArrayLike) -> Floats:
    """Mole fraction of an n-alkane of that many carbon atoms in a stoichiometric mixture with air.

    CnH(2n+2) + (3n+1)/2 O2. ``carbon`` 1 to 60 [-]. Exact stoichiometry with 20.95 % oxygen.
    Raises OutOfRangeError outside the range or for NaN.
    """
    n = np.asarray(carbon, dtype=float)
    if not np.all((n >= 1) & (n <= 60)):
        raise OutOfRangeError(
            f"stoichiometric_fraction needs 1 to 60 carbon atoms; got {carbon!r}"
        )
    return np.asarray(1.0 / (1.0 + (1.5 * n + 0.5) / AIR_OXYGEN))


def vapour_pressure_from_flash(
    temperature: npt.ArrayLike,
    flash_point: npt.ArrayLike,
    *,
    lean_limit: npt.ArrayLike = 0.0031,
    vaporisation: npt.ArrayLike = 100e3,
) -> Floats:
    """Vapour pressure [Pa] anchored at the flash point; inputs broadcast.

    p = LEL 101325 exp[-(dH/R)(1/T - 1/T_flash)]; ``temperature`` [K] 230-750, ``flash_point`` [K]
    230-750 (closed cup; an open cup reads 5-15 K higher and makes the pressure err low by a
    third to a half), ``lean_limit`` mole fraction [-], ``vaporisation`` [J/mol]. Within a factor
    of two at the anchor (pure n-alkanes), within a factor of ten 150 K away.
    Source: Clausius-Clapeyron identity; definition of the flash point.
    Raises OutOfRangeError outside the range or for NaN.
    """
    t, flash, lean, heat = (
        np.asarray(x, dtype=float) for x in (temperature, flash_point, lean_limit, vaporisation)
    )
    inside = (
        (t >= 230) & (t <= 750) & (flash >= 230) & (flash <= 750)
        & (lean > 0) & (lean < 0.2) & (heat >= 2e4) & (heat <= 2e5)
    )  # fmt: skip
    if not np.all(inside):
        raise OutOfRangeError(
            "vapour_pressure_from_flash needs 230-750 K, a flash point of 230-750 K, a lean limit "
            f"of 0-0.2 and 20-200 kJ/mol; got {temperature!r} K, {flash_point!r} K, "
            f"{lean_limit!r}, {vaporisation!r}"
        )
    power = heat / UNIVERSAL_GAS_CONSTANT * (1.0 / t - 1.0 / flash)
    return np.asarray(lean * ATMOSPHERE * np.exp(-power))


def class_vapour_pressure(
    name: str, temperature: npt.ArrayLike, *, flash_point: float | None = None
) -> tuple[Floats, Floats, Floats]:
    """Vapour pressure of a class of fluid [Pa]: 5 %, 50 % and 95 % points.

    ``temperature`` [K]; ``flash_point`` [K] measured, halves the spread of the class value. The
    spread shrinks towards the flash point. Water glycol: water at an activity of 0.7 to 0.88.
    Wide on purpose: for cavitation it does not matter (decades under the air's own pressure,
    water glycol excepted), for fuel the flash point does.
    Source: as ``vapour_pressure_from_flash``; water by Buck 1981.
    Raises OutOfRangeError for a class without values or a temperature out of range.
    """
    if name == "water glycol":
        water = water_vapour_pressure(temperature)
        low, middle, high = (np.asarray(a * water) for a in WATER_ACTIVITY)
        return low, middle, high
    values = class_values(name)
    kind = _CLASSES[name]
    flash = values.flash_point if flash_point is None else flash_point
    middle = vapour_pressure_from_flash(
        temperature, flash, lean_limit=kind.lean_limit, vaporisation=kind.vaporisation
    )
    away = np.abs(1 / np.asarray(temperature, dtype=float) - 1 / flash) / _USUAL_REACH
    spread = 0.3 + kind.log_spread * (0.5 if flash_point is not None else 1.0) * away
    grow = np.exp(1.6449 * spread)
    return np.asarray(middle / grow), middle, np.asarray(middle * grow)


def water_vapour_pressure(temperature: npt.ArrayLike) -> Floats:
    """Vapour pressure of liquid water [Pa]; ``temperature`` [K], 273-373.

    611.21 exp[(18.678 - t/234.5) t/(257.14 + t)], t [degC]; within 0.2 %.
    Source: Buck, J. Appl. Meteorol. 20 (1981) 1527, with the 1996 constants (from memory).
    Raises OutOfRangeError outside the range or for NaN.
    """
    t = np.asarray(temperature, dtype=float) - 273.15
    if not np.all((t >= 0) & (t <= 100)):
        raise OutOfRangeError(
            f"water_vapour_pressure is used from 273.15 K to 373.15 K; got {temperature!r} K"
        )
    return np.asarray(611.21 * np.exp((18.678 - t / 234.5) * t / (257.14 + t)))


def dense_gas_enhancement(
    pressure: npt.ArrayLike, temperature: npt.ArrayLike, *, molar_volume: float = 4.0e-4
) -> Floats:
    """Rise of the vapour pressure over a liquid under gas pressure, by Poynting [-].

    exp(V p/(R T)); ``pressure`` [Pa abs] up to 100 MPa, ``temperature`` [K], ``molar_volume`` of
    the liquid [m3/mol] (C24 about 4.2e-4). The gas's own solvent power may double or treble it,
    so it errs low. Source: Poynting 1881, thermodynamic identity for an incompressible liquid.
    Raises OutOfRangeError outside the range or for NaN.
    """
    p, t = np.asarray(pressure, dtype=float), np.asarray(temperature, dtype=float)
    if not (np.all((p > 0) & (p <= 1e8) & (t >= 250) & (t <= 700)) and 0 < molar_volume < 2e-3):
        raise OutOfRangeError(
            f"dense_gas_enhancement needs 0-100 MPa, 250-700 K and 0 < molar_volume < 2e-3 "
            f"m3/mol; got {pressure!r}, {temperature!r}, {molar_volume}"
        )
    return np.asarray(np.exp(molar_volume * p / (UNIVERSAL_GAS_CONSTANT * t)))


def vapour_equivalence(
    vapour_pressure: npt.ArrayLike,
    pressure: npt.ArrayLike,
    *,
    lean_limit: npt.ArrayLike = 0.0031,
    enhancement: npt.ArrayLike = 1.0,
) -> Floats:
    """Equivalence ratio phi of saturated vapour in a bubble [-]; inputs broadcast.

    p_v f/(x_st p) with x_st = LEL/0.55; lean limit at phi 0.55. ``vapour_pressure`` of the wall
    [Pa], ``pressure`` of the gas [Pa abs], ``enhancement`` f [-]. Equilibrium with the wall: an
    upper bound in a bubble's fraction of a millisecond.
    Source: Dalton; stoichiometry. Raises OutOfRangeError unless all are positive and finite.
    """
    pv, p, lean, gain = (
        np.asarray(x, dtype=float) for x in (vapour_pressure, pressure, lean_limit, enhancement)
    )
    if not all(bool(np.all((v > 0) & np.isfinite(v))) for v in (pv, p, lean, gain)):
        raise OutOfRangeError(
            "vapour_equivalence needs positive finite pressures, lean limit and enhancement; got "
            f"{vapour_pressure!r}, {pressure!r}, {lean_limit!r}, {enhancement!r}"
        )
    return np.asarray(pv * gain * LEAN_SHARE / (lean * p))


def stoichiometric_drop_ratio(
    inlet_pressure: npt.ArrayLike, temperature: npt.ArrayLike, *, density: float = 860.0
) -> Floats:
    """Diameter of the oil drop that makes a bubble stoichiometric, over the bubble's [-].

    Both at the inlet state: ``inlet_pressure`` [Pa abs], ``temperature`` [K], oil ``density``
    [kg/m3]; 15 kg of air burn 1 kg of oil. About 0.044: one fine drop is enough fuel, which is
    why liquid thrown into the gas, not vapour, is the fuel path. Exact stoichiometry of
    n-dodecane. Raises OutOfRangeError unless all are positive.
    """
    p, t = np.asarray(inlet_pressure, dtype=float), np.asarray(temperature, dtype=float)
    if not (np.all((p > 0) & (t > 0) & np.isfinite(p) & np.isfinite(t)) and density > 0):
        raise OutOfRangeError(
            "stoichiometric_drop_ratio needs positive pressure, temperature and density; got "
            f"{inlet_pressure!r}, {temperature!r}, {density}"
        )
    air = p / (AIR_GAS_CONSTANT * t)
    return np.asarray((FUEL_PER_AIR * air / density) ** (1.0 / 3.0))
