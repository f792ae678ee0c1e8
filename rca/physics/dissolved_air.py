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
    """Solubility H in c = H p [mol/(m3 Pa)] from a Bunsen coefficient [-]; exact by definition."""
    return bunsen / (GAS_CONSTANT * ICE_POINT)


def ostwald_d2779(temperature: float, density_15: float, gas: str = "air") -> float:
    """Ostwald coefficient [-] of a gas in a petroleum liquid.

    L = 0.300 exp[0.639 (700 - T)/T ln(3.333 Lo)], times 7.70 (0.980 - d) for the density.
    Source: ASTM D2779-92(2020). Valid for petroleum liquids of 630 to 900 kg/m3, 228 K to 423 K;
    its density factor falls to zero at 980 kg/m3, so esters and phosphate esters are refused.
    Raises OutOfRangeError outside that range.
    """
    if not (630.0 <= density_15 <= 900.0 and 228.0 <= temperature <= 423.0):
        raise OutOfRangeError(
            "ASTM D2779 holds for petroleum liquids of 630 to 900 kg/m3 from 228 K to 423 K; got "
            f"{density_15:g} kg/m3 at {temperature:g} K"
        )
    if gas not in OSTWALD_273:
        raise OutOfRangeError(f"no coefficient for {gas!r}; known are {', '.join(OSTWALD_273)}")
    raw = 0.300 * np.exp(
        0.639 * (700.0 - temperature) / temperature * np.log(3.333 * OSTWALD_273[gas])
    )
    return float(raw * 7.70 * (0.980 - density_15 / 1000.0))


def oxygen_share_dissolved(temperature: float = 298.15) -> float:
    """Share of oxygen in air dissolved at saturation [-], by D2779 at a temperature [K].

    About a third, against 0.2095 in free air (argon counted with D2779's 0.18). An upper bound:
    an ageing oil uses its oxygen up.
    """
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
    Raises OutOfRangeError for a pressure that is not positive.
    """
    p = np.asarray(pressure, dtype=float)
    if not np.all(p > 0.0):
        raise OutOfRangeError("released_ratio needs an absolute pressure above zero")
    excess = np.maximum(np.asarray(saturation) - p, 0.0)
    return np.asarray(bunsen * excess / p * np.asarray(temperature) / ICE_POINT)


def released_share_in_time(time: float | FloatArray, tau: float | FloatArray) -> FloatArray:
    """Share of the equilibrium release reached after a time [-]: 1 - exp(-t/tau).

    First-order release as in lumped pump models; tau 0.1 s to 10 s, see ``TAU_RELEASE``.
    """
    return np.asarray(1.0 - np.exp(-np.asarray(time, dtype=float) / tau))


def void_fraction(ratio: float | FloatArray) -> FloatArray:
    """Share of the mixture's volume that is gas: v/(1 + v)."""
    v = np.asarray(ratio, dtype=float)
    return np.asarray(v / (1.0 + v))


def stokes_rise(diameter: float, nu: float) -> float:
    """Rise speed [m/s] of a small bubble with a rigid surface: g d^2/(18 nu); Stokes, Re < 1."""
    return 9.80665 * diameter**2 / (18.0 * nu)


def carried_over_diameter(depth: float, dwell: float, nu: float) -> float:
    """Largest bubble [m] that does not rise out of a reservoir of that depth in the dwell time."""
    return float(np.sqrt(18.0 * nu * depth / (9.80665 * dwell)))
