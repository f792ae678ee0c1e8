"""Bulk modulus and density of bubble-free oil against pressure and temperature."""

import numpy as np
import numpy.typing as npt

from rca.base.errors import OutOfRangeError

Floats = npt.NDArray[np.float64]

# Growth of the tangent modulus with pressure [-]: 10-12, Hayward 1970; Klaus and O'Brien, ASME J.
# Basic Eng. 86 (1964) 469-474 (from memory). The secant modulus grows half as fast.
PRESSURE_SLOPE = 11.0
TEMPERATURE_SLOPE = -0.010  # of the modulus, relative [1/K]: -0.008 to -0.012, same sources
MODULUS_SPREAD = 0.05  # relative standard uncertainty of a class value or of Hayward's rule
REFERENCE_TEMPERATURE = 323.15  # [K], of the class values
HIGHEST_PRESSURE = 0.1e9  # [Pa]
COLDEST, HOTTEST = 253.15, 393.15  # [K]


def _refuse(name: str, pressure: Floats, temperature: Floats) -> None:
    inside = (
        (pressure >= 0) & (pressure <= HIGHEST_PRESSURE)
        & (temperature >= COLDEST) & (temperature <= HOTTEST)
    )  # fmt: skip
    if not np.all(inside):
        raise OutOfRangeError(
            f"{name} is used from 0 to 100 MPa and 253.15 K to 393.15 K (Hayward 1970); got "
            f"{pressure!r} Pa, {temperature!r} K"
        )


def tangent_modulus(
    pressure: npt.ArrayLike,
    temperature: npt.ArrayLike,
    modulus_50: npt.ArrayLike,
    *,
    slope: float = PRESSURE_SLOPE,
    per_kelvin: float = TEMPERATURE_SLOPE,
) -> Floats:
    """Tangent bulk modulus -V dp/dV at a pressure and temperature [Pa]; inputs broadcast.

    K = K50 exp(b (T - 323.15 K)) + m p. ``pressure`` [Pa abs] 0-100 MPa, ``temperature`` [K],
    ``modulus_50`` [Pa] at 50 degC and low pressure: isentropic in, isentropic out; isothermal in,
    isothermal out. Isentropic for anything faster than about 0.1 s, isothermal for minutes. Within
    5 % where ``modulus_50`` is measured. Gas bubbles are not in it: see effective_bulk_modulus.
    Source: Hayward, Hydraul. Pneum. Power 16 (1970) 28-40 (slopes, from memory).
    Raises OutOfRangeError outside the range, unless modulus_50 > 0, or for NaN.
    """
    p, t, k = (np.asarray(x, dtype=float) for x in (pressure, temperature, modulus_50))
    _refuse("tangent_modulus", p, t)
    if not np.all((k > 0) & np.isfinite(k)):
        raise OutOfRangeError(f"tangent_modulus needs modulus_50 > 0 Pa; got {modulus_50!r}")
    return np.asarray(k * np.exp(per_kelvin * (t - REFERENCE_TEMPERATURE)) + slope * p)


def secant_from_tangent(tangent_0: npt.ArrayLike, pressure: npt.ArrayLike) -> Floats:
    """Secant modulus V0 p/(V0 - V) at a pressure from the tangent modulus at none [Pa].

    Exact for a tangent modulus that grows linearly by ``PRESSURE_SLOPE``: V/V0 = (1 + m p/K)^-1/m.
    ``pressure`` [Pa] up to 100 MPa. Raises OutOfRangeError unless tangent_0 > 0, pressure inside.
    """
    k, p = (np.asarray(x, dtype=float) for x in (tangent_0, pressure))
    if not np.all((k > 0) & np.isfinite(k) & (p >= 0) & (p <= HIGHEST_PRESSURE)):
        raise OutOfRangeError(
            f"secant_from_tangent needs tangent_0 > 0 and 0 <= pressure <= 1e8 Pa; got "
            f"{tangent_0!r}, {pressure!r}"
        )
    small = p < 1.0
    safe = np.where(small, 1.0, p)
    lost = -np.expm1(-np.log1p(PRESSURE_SLOPE * safe / k) / PRESSURE_SLOPE)
    return np.asarray(np.where(small, k, safe / lost))


def hayward_secant_modulus(
    pressure: npt.ArrayLike, temperature: npt.ArrayLike, nu_20: npt.ArrayLike
) -> Floats:
    """Isentropic secant bulk modulus of a mineral oil from its viscosity at 20 degC [Pa].

    K = (1.57 + 0.15 log10 nu20) 10^(0.0024 (20 - t)) GPa + 5.6 p, nu20 in mm2/s, t in degC.
    ``pressure`` [Pa abs] up to 100 MPa, ``temperature`` [K], ``nu_20`` [m2/s] 5 to 5000 mm2/s.
    Within 5 % for mineral oils, says nothing about other fluids; no bubbles in it.
    Source: Hayward, Hydraul. Pneum. Power 16 (1970) 28-40 (from memory).
    Raises OutOfRangeError outside the range or for NaN.
    """
    return _hayward(pressure, temperature, nu_20, first=1.57, fall=0.0024)


def hayward_isothermal_secant_modulus(
    pressure: npt.ArrayLike, temperature: npt.ArrayLike, nu_20: npt.ArrayLike
) -> Floats:
    """Isothermal secant bulk modulus of a mineral oil from its viscosity at 20 degC [Pa].

    K = (1.30 + 0.15 log10 nu20) 10^(0.0023 (20 - t)) GPa + 5.6 p; arguments, range, direction and
    source as ``hayward_secant_modulus``. Raises OutOfRangeError.
    """
    return _hayward(pressure, temperature, nu_20, first=1.30, fall=0.0023)


def _hayward(
    pressure: npt.ArrayLike,
    temperature: npt.ArrayLike,
    nu_20: npt.ArrayLike,
    *,
    first: float,
    fall: float,
) -> Floats:
    p, t, nu = (np.asarray(x, dtype=float) for x in (pressure, temperature, nu_20))
    _refuse("Hayward's rule", p, t)
    if not np.all((nu >= 5e-6) & (nu <= 5e-3)):
        raise OutOfRangeError(
            f"Hayward's rule is used for mineral oils of 5 to 5000 mm2/s at 20 degC; got {nu_20!r}"
        )
    cold = 10.0 ** (fall * (293.15 - t))
    return np.asarray(1e9 * (first + 0.15 * np.log10(nu * 1e6)) * cold + 5.6 * p)


def heat_capacity_ratio(
    isentropic: npt.ArrayLike,
    *,
    expansion: npt.ArrayLike,
    temperature: npt.ArrayLike,
    density: npt.ArrayLike,
    heat_capacity: npt.ArrayLike,
) -> Floats:
    """Isentropic over isothermal bulk modulus [-]: 1 + beta^2 T K_s/(rho cp).

    ``isentropic`` K_s [Pa], ``expansion`` beta [1/K], ``temperature`` [K], ``density`` [kg/m3],
    ``heat_capacity`` cp [J/(kg K)]. Exact thermodynamic identity; mineral oil about 1.15-1.2.
    Raises OutOfRangeError unless all are positive.
    """
    values = [
        np.asarray(x, dtype=float)
        for x in (isentropic, expansion, temperature, density, heat_capacity)
    ]
    if not all(bool(np.all((v > 0) & np.isfinite(v))) for v in values):
        raise OutOfRangeError(
            "heat_capacity_ratio needs positive modulus, expansion, temperature, density and heat "
            f"capacity; got {values!r}"
        )
    k, beta, t, rho, cp = values
    return np.asarray(1.0 + beta**2 * t * k / (rho * cp))


def density_under_pressure(
    density_0: npt.ArrayLike, pressure: npt.ArrayLike, tangent_0: npt.ArrayLike
) -> Floats:
    """Density at a pressure [kg/m3] from that at none, for a modulus linear in pressure.

    rho = rho0 (1 + m p/K)^(1/m), m = 11; ``density_0`` [kg/m3], ``pressure`` [Pa] up to 100 MPa,
    ``tangent_0`` [Pa] isothermal at rest, isentropic for a fast rise. Within 0.3 % up to 40 MPa.
    Source: Murnaghan, Proc. Natl. Acad. Sci. 30 (1944) 244 (form).
    Raises OutOfRangeError outside the range or for NaN.
    """
    rho = np.asarray(density_0, dtype=float)
    k, p = (np.asarray(x, dtype=float) for x in (tangent_0, pressure))
    if not np.all((rho > 0) & np.isfinite(rho) & (k > 0) & (p >= 0) & (p <= HIGHEST_PRESSURE)):
        raise OutOfRangeError(
            "density_under_pressure needs positive density and modulus and 0 <= pressure <= 1e8 "
            f"Pa; got {density_0!r}, {tangent_0!r}, {pressure!r}"
        )
    return np.asarray(rho * (1.0 + PRESSURE_SLOPE * p / k) ** (1.0 / PRESSURE_SLOPE))


def dowson_higginson_ratio(pressure: npt.ArrayLike) -> Floats:
    """Density of a mineral oil at a pressure over that at none [-]: 1 + 0.6 p/(1 + 1.7 p), GPa.

    Isothermal, one curve for all mineral oils near room temperature; 0 to 0.4 GPa.
    Source: Dowson and Higginson, Elastohydrodynamic Lubrication, 1966 (from memory).
    Raises OutOfRangeError outside the range or for NaN.
    """
    p = np.asarray(pressure, dtype=float) / 1e9
    if not np.all((p >= 0) & (p <= 0.4)):
        raise OutOfRangeError(
            f"dowson_higginson_ratio is used from 0 to 0.4 GPa; got {pressure!r} Pa"
        )
    return np.asarray(1.0 + 0.6 * p / (1.0 + 1.7 * p))
