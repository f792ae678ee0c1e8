"""Heat capacity, conductivity, latent heat and surface tension of hydraulic oils."""

import numpy as np
import numpy.typing as npt

from rca.base.errors import OutOfRangeError

Floats = npt.NDArray[np.float64]

WATER_15 = 999.0  # [kg/m3], water at 15.6 degC; relative density d = density_15/999
HEAT_CAPACITY_SPREAD = 0.04  # relative standard uncertainty, Cragoe's own tolerance (from memory)
CONDUCTIVITY_SPREAD = 0.10  # likewise
TENSION_SLOPE = -0.07e-3  # [N/(m K)]; mineral oil, common practice, no source
TENSION_SPREAD = 0.10  # relative


def _relative(
    name: str, temperature: npt.ArrayLike, density_15: npt.ArrayLike
) -> tuple[Floats, Floats]:
    t, rho = np.asarray(temperature, dtype=float), np.asarray(density_15, dtype=float)
    if not np.all((t >= 233.15) & (t <= 573.15) & (rho >= 700) & (rho <= 1000)):
        raise OutOfRangeError(
            f"{name} holds for petroleum oils of 700-1000 kg/m3, -40 to 300 degC (Cragoe, NBS "
            f"Misc. Publ. 97, 1929); got {temperature!r} K, {density_15!r} kg/m3"
        )
    return t - 273.15, rho / WATER_15


def petroleum_heat_capacity(temperature: npt.ArrayLike, density_15: npt.ArrayLike) -> Floats:
    """Heat capacity cp of a petroleum oil [J/(kg K)]; inputs broadcast.

    (1.685 + 0.0034 t)/sqrt(d) kJ/(kg K), t [degC]; ``temperature`` [K], ``density_15`` [kg/m3].
    Within 4 %; some 6 % low for pure paraffins and polyalphaolefins.
    Source: Cragoe, NBS Misc. Publ. 97 (1929) (from memory).
    Raises OutOfRangeError outside 233-573 K, 700-1000 kg/m3, or for NaN.
    """
    t, d = _relative("petroleum_heat_capacity", temperature, density_15)
    return np.asarray(1e3 * (1.685 + 0.0034 * t) / np.sqrt(d))


def petroleum_conductivity(temperature: npt.ArrayLike, density_15: npt.ArrayLike) -> Floats:
    """Thermal conductivity of a petroleum oil [W/(m K)]; inputs broadcast.

    0.1172 (1 - 0.00054 t)/d, t [degC]; ``temperature`` [K], ``density_15`` [kg/m3]. Within 10 %;
    some 15 % high for light paraffins. Source and refusals as ``petroleum_heat_capacity``.
    """
    t, d = _relative("petroleum_conductivity", temperature, density_15)
    return np.asarray(0.1172 * (1.0 - 0.00054 * t) / d)


def petroleum_latent_heat(temperature: npt.ArrayLike, density_15: npt.ArrayLike) -> Floats:
    """Heat of vaporisation of a petroleum oil at atmospheric pressure [J/kg]; inputs broadcast.

    (110.9 - 0.09 tF)/d Btu/lb, tF [degF]; ``temperature`` [K], ``density_15`` [kg/m3]. Within
    10 %. Source and refusals as ``petroleum_heat_capacity``.
    """
    t, d = _relative("petroleum_latent_heat", temperature, density_15)
    return np.asarray(2326.0 * (110.9 - 0.09 * (1.8 * t + 32.0)) / d)


def surface_tension(temperature: npt.ArrayLike, tension_20: npt.ArrayLike) -> Floats:
    """Surface tension against air [N/m]: falls by 0.07 mN/m per kelvin from 20 degC.

    ``temperature`` [K] 233-473, ``tension_20`` [N/m] 0.015 to 0.08 (mineral oil 0.031, polyol
    ester 0.029; a measured value wins). Within 10 %; silicone anti-foam lowers the surface's, not
    the bulk's, value further. Source: common practice, no source; n-alkanes fall by 0.08-0.09.
    Raises OutOfRangeError outside the range or for NaN.
    """
    t, s = np.asarray(temperature, dtype=float), np.asarray(tension_20, dtype=float)
    if not np.all((t >= 233.15) & (t <= 473.15) & (s >= 0.015) & (s <= 0.08)):
        raise OutOfRangeError(
            f"surface_tension is used from 233 K to 473 K and 0.015-0.08 N/m; got "
            f"{temperature!r} K, {tension_20!r} N/m"
        )
    return np.asarray(s + TENSION_SLOPE * (t - 293.15))


def isentropic_heating(
    pressure_rise: npt.ArrayLike,
    *,
    temperature: float,
    expansion: float,
    density: float,
    heat_capacity: float,
) -> Floats:
    """Warming of bubble-free oil by a fast pressure rise [K]: beta T dp/(rho cp).

    ``pressure_rise`` [Pa], ``temperature`` [K], ``expansion`` [1/K], ``density`` [kg/m3],
    ``heat_capacity`` [J/(kg K)]. Properties taken constant: errs high by some 5 % at 400 bar.
    Source: thermodynamic identity. Raises OutOfRangeError unless all are positive and finite.
    """
    return _heating("isentropic_heating", pressure_rise, temperature, expansion, density,
                    heat_capacity, expansion * temperature)  # fmt: skip


def throttling_heating(
    pressure_drop: npt.ArrayLike,
    *,
    temperature: float,
    expansion: float,
    density: float,
    heat_capacity: float,
) -> Floats:
    """Warming of oil let down through a throttle [K]: (1 - beta T) dp/(rho cp).

    Arguments as ``isentropic_heating``, ``pressure_drop`` [Pa]. The usual dp/(rho cp) errs high by
    a quarter to a third. Source: isenthalpic throttling. Raises OutOfRangeError likewise.
    """
    return _heating("throttling_heating", pressure_drop, temperature, expansion, density,
                    heat_capacity, 1.0 - expansion * temperature)  # fmt: skip


def _heating(
    name: str,
    pressure: npt.ArrayLike,
    temperature: float,
    expansion: float,
    density: float,
    heat_capacity: float,
    share: float,
) -> Floats:
    dp = np.asarray(pressure, dtype=float)
    fixed = (temperature, expansion, density, heat_capacity)
    if not (np.all((dp >= 0) & np.isfinite(dp)) and all(0 < v < np.inf for v in fixed)):
        raise OutOfRangeError(
            f"{name} needs a pressure difference >= 0 Pa and positive temperature, expansion, "
            f"density and heat capacity; got {pressure!r}, {fixed}"
        )
    return np.asarray(share * dp / (density * heat_capacity))
