"""Air dissolved in oil, and how much of it comes out at a low pressure in the time it has."""

import numpy as np
import numpy.typing as npt

from rca.base.errors import OutOfRangeError

FloatArray = npt.NDArray[np.float64]
GAS_CONSTANT = 8.314462618  # [J/(mol K)], CODATA 2018, exact
ICE_POINT = 273.15  # [K]
ATMOSPHERE = 101325.0  # [Pa]
# Ostwald coefficients Lo at 273 K of ASTM D2779-92(2020), Table 1 (from memory; the method's own
# identities close on them)
OSTWALD_273: dict[str, float] = {"air": 0.098, "N2": 0.069, "O2": 0.16, "CO2": 1.45}
TAU_RELEASE = (0.1, 10.0)  # [s], bounds of a log-uniform range; common practice, no source
TAU_DISSOLUTION = (1.0, 60.0)  # [s], likewise


def henry_coefficient(bunsen: float) -> float:
    """Solubility H in c = H p [mol/(m3 Pa)] from a Bunsen coefficient [-]; exact by definition.

    Raises OutOfRangeError unless the coefficient is finite and not negative.
    """
    if not 0.0 <= bunsen < 10.0:
        raise OutOfRangeError(f"henry_coefficient needs a Bunsen coefficient >= 0; got {bunsen!r}")
    return bunsen / (GAS_CONSTANT * ICE_POINT)


def ostwald_d2779(
    temperature: float | FloatArray, density_15: float | FloatArray, gas: str = "air"
) -> FloatArray:
    """Ostwald coefficient [-] of a gas in a petroleum liquid; inputs broadcast.

    L = 0.300 exp[0.639 (700 - T)/T ln(3.333 Lo)], times 7.70 (0.980 - d) for the density.
    Source: ASTM D2779-92(2020). Valid for petroleum liquids of 630 to 900 kg/m3, 228 K to 423 K;
    its density factor falls to zero at 980 kg/m3, so esters and phosphate esters are refused.
    Raises OutOfRangeError outside that range or for NaN.
    """
    t, rho = np.asarray(temperature, dtype=float), np.asarray(density_15, dtype=float)
    if not np.all((rho >= 630.0) & (rho <= 900.0) & (t >= 228.0) & (t <= 423.0)):
        raise OutOfRangeError(
            "ASTM D2779 holds for petroleum liquids of 630 to 900 kg/m3 from 228 K to 423 K; got "
            f"{density_15!r} kg/m3 at {temperature!r} K"
        )
    if gas not in OSTWALD_273:
        raise OutOfRangeError(f"no coefficient for {gas!r}; known are {', '.join(OSTWALD_273)}")
    raw = 0.300 * np.exp(0.639 * (700.0 - t) / t * np.log(3.333 * OSTWALD_273[gas]))
    return np.asarray(raw * 7.70 * (0.980 - rho / 1000.0))


def oxygen_share_dissolved(temperature: float = 298.15) -> float:
    """Share of oxygen in air dissolved at saturation [-], by D2779 at a temperature [K].

    About a third, against 0.2095 in free air (argon counted with D2779's 0.18). An upper bound:
    an ageing oil uses its oxygen up. Raises OutOfRangeError outside 228 K to 423 K.
    """
    if not 228.0 <= temperature <= 423.0:
        raise OutOfRangeError(f"ASTM D2779 holds from 228 K to 423 K; got {temperature!r} K")
    lo = {"O2": 0.16, "N2": 0.069, "Ar": 0.18}
    air = {"O2": 0.2095, "N2": 0.7812, "Ar": 0.0093}
    exponent = 0.639 * (700.0 - temperature) / temperature
    dissolved = {gas: air[gas] * (3.333 * lo[gas]) ** exponent for gas in air}
    return float(dissolved["O2"]) / float(sum(dissolved.values()))


def released_ratio(
    pressure: float | FloatArray,
    *,
    bunsen: float | FloatArray,
    temperature: float | FloatArray,
    saturation: float | FloatArray = ATMOSPHERE,
) -> FloatArray:
    """Free gas per volume of oil at equilibrium, at local pressure and temperature [-].

    alpha (p_sat - p)/p T/273.15, zero where the oil is not supersaturated. An upper bound in a
    suction line: release takes time. Source: definition of the Bunsen coefficient, Henry's law.
    Raises OutOfRangeError for a pressure that is not positive, or NaN anywhere.
    """
    p, alpha, t, sat = (
        np.asarray(x, dtype=float) for x in (pressure, bunsen, temperature, saturation)
    )
    if not (np.all(p > 0.0) and np.all(alpha >= 0.0) and np.all(t > 0.0) and np.all(sat >= 0.0)):
        raise OutOfRangeError(
            "released_ratio needs an absolute pressure above zero, a Bunsen coefficient and a "
            "saturation pressure that are not negative, and a temperature in K; got "
            f"{pressure!r}, {bunsen!r}, {saturation!r}, {temperature!r}"
        )
    return np.asarray(alpha * np.maximum(sat - p, 0.0) / p * t / ICE_POINT)


def released_share_in_time(time: float | FloatArray, tau: float | FloatArray) -> FloatArray:
    """Share of the equilibrium release reached after a time [-]: 1 - exp(-t/tau).

    First-order release as in lumped pump models; tau 0.1 s to 10 s, see ``TAU_RELEASE``.
    Raises OutOfRangeError for a negative time, a tau that is not positive, or NaN.
    """
    t, constant = np.asarray(time, dtype=float), np.asarray(tau, dtype=float)
    if not (np.all(t >= 0.0) and np.all(constant > 0.0)):
        raise OutOfRangeError(
            f"released_share_in_time needs time >= 0 s and tau > 0 s; got {time!r}, {tau!r}"
        )
    return np.asarray(-np.expm1(-t / constant))


def void_fraction(ratio: float | FloatArray) -> FloatArray:
    """Share of the mixture's volume that is gas [-]: v/(1 + v); exact.

    ``ratio`` gas per volume of oil [-]. Raises OutOfRangeError for a negative ratio or NaN.
    """
    v = np.asarray(ratio, dtype=float)
    if not np.all(v >= 0.0):
        raise OutOfRangeError(f"void_fraction needs a ratio >= 0; got {ratio!r}")
    return np.asarray(v / (1.0 + v))


def stokes_rise(diameter: float | FloatArray, nu: float | FloatArray) -> FloatArray:
    """Rise speed [m/s] of a small bubble with a rigid surface: g d^2/(18 nu); inputs broadcast.

    ``diameter`` [m], ``nu`` [m2/s]; Re < 1. Above Re 1 the formula errs high, so such inputs are
    refused. A clean surface rises up to half as fast again. Source: Stokes 1851, gas density
    neglected. Raises OutOfRangeError above Re 1, unless both are positive, or for NaN.
    """
    d, v = np.asarray(diameter, dtype=float), np.asarray(nu, dtype=float)
    if not (np.all(d > 0.0) and np.all(v > 0.0)):
        raise OutOfRangeError(f"stokes_rise needs positive inputs; got {diameter!r}, {nu!r}")
    speed = 9.80665 * d**2 / (18.0 * v)
    if np.any(speed * d / v > 1.0):
        raise OutOfRangeError(
            f"stokes_rise holds for a Reynolds number up to 1; got {diameter!r} m, {nu!r} m2/s"
        )
    return np.asarray(speed)


def carried_over_diameter(depth: float, dwell: float, nu: float) -> float:
    """Largest bubble [m] that does not rise out of a reservoir of that depth in the dwell time.

    ``depth`` [m], ``dwell`` [s], ``nu`` [m2/s]; Stokes' rise through still oil. Currents and short
    cuts carry larger bubbles over, so it errs low. Raises OutOfRangeError unless all are positive.
    """
    if not (depth > 0 and dwell > 0 and nu > 0):
        raise OutOfRangeError(
            f"carried_over_diameter needs positive inputs; got {depth=}, {dwell=}, {nu=}"
        )
    return float(np.sqrt(18.0 * nu * depth / (9.80665 * dwell)))
