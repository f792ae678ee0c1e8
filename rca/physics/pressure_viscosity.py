"""How pressure thickens oil: Barus, Roelands, and estimates of the coefficient."""

import numpy as np
import numpy.typing as npt

from rca.base.errors import OutOfRangeError

Floats = npt.NDArray[np.float64]

BARUS_LIMIT = 0.1e9  # [Pa]; above, an exponential law overshoots badly
ROELANDS_LIMIT = 1.0e9  # [Pa]
ROELANDS_PRESSURE = 1.962e8  # [Pa]; 1/5.1e-9
ROELANDS_Z = (0.5, 0.7)  # mineral oils; from memory
COEFFICIENT_SPREAD = 0.25  # relative standard scatter of the estimates about the measured table
# Measured coefficients [1/Pa] at 30, 60 and 100 degC: Stachowiak and Batchelor, Engineering
# Tribology, table 2.3.
MEASURED: dict[str, tuple[float, float, float]] = {
    "spindle oil": (20e-9, 16e-9, 13e-9),
    "light machine oil": (28e-9, 20e-9, 16e-9),
    "heavy machine oil": (23.7e-9, 20.5e-9, 15.8e-9),
    "medicinal white oil": (29.6e-9, 22.8e-9, 17.8e-9),
    "cylinder oil": (34e-9, 28e-9, 22e-9),
    "water": (0.0, 0.0, 0.0),
}


def _checked(pressure: npt.ArrayLike, limit: float, law: str) -> Floats:
    p = np.asarray(pressure, dtype=float)
    if not np.all((p >= 0) & (p <= limit)):
        raise OutOfRangeError(f"{law} is used from 0 to {limit / 1e6:g} MPa; got {pressure!r} Pa")
    return p


def barus_factor(pressure: npt.ArrayLike, coefficient: npt.ArrayLike) -> Floats:
    """Dynamic viscosity at a pressure over that at atmospheric pressure: exp(alpha p) [-].

    ``pressure`` over atmospheric [Pa], up to 100 MPa; ``coefficient`` alpha [1/Pa], 10e-9 to
    35e-9 for mineral oil. Good to a few per cent up to 20-40 MPa; above it errs high. Inputs
    broadcast. Source: Barus, Am. J. Sci. 45 (1893) 87.
    Raises OutOfRangeError outside the range, for a coefficient outside 0 to 60e-9, or NaN.
    """
    p = _checked(pressure, BARUS_LIMIT, "Barus' law")
    alpha = np.asarray(coefficient, dtype=float)
    if not np.all((alpha >= 0) & (alpha <= 60e-9)):
        raise OutOfRangeError(f"barus_factor needs 0 <= alpha <= 60e-9 1/Pa; got {coefficient!r}")
    return np.asarray(np.exp(alpha * p))


def roelands_factor(
    pressure: npt.ArrayLike, viscosity: npt.ArrayLike, *, z: npt.ArrayLike = 0.6
) -> Floats:
    """Dynamic viscosity at a pressure over that at atmospheric pressure, by Roelands [-].

    exp{(ln mu0 + 9.67)[(1 + p/1.962e8)^Z - 1]}; ``pressure`` [Pa] up to 1 GPa, ``viscosity`` mu0
    [Pa s] at atmospheric pressure, ``z`` 0.5 to 0.7 for mineral oil. Inputs broadcast. Errs low
    above 0.5 GPa (no glass transition in it). Source: Roelands, thesis, Delft 1966 (form from
    memory, as in the textbooks on elastohydrodynamics).
    Raises OutOfRangeError outside the range, unless 1e-4 < mu0 < 100 and 0 < Z < 1.5, or NaN.
    """
    p = _checked(pressure, ROELANDS_LIMIT, "Roelands' law")
    mu, exponent = np.asarray(viscosity, dtype=float), np.asarray(z, dtype=float)
    if not np.all((mu > 1e-4) & (mu < 100) & (exponent > 0) & (exponent < 1.5)):
        raise OutOfRangeError(
            f"roelands_factor needs 1e-4 < viscosity < 100 Pa s and 0 < z < 1.5; got "
            f"{viscosity!r}, {z!r}"
        )
    grow = (1.0 + p / ROELANDS_PRESSURE) ** exponent - 1.0
    return np.asarray(np.exp((np.log(mu) + 9.67) * grow))


def roelands_exponent(coefficient: npt.ArrayLike, viscosity: npt.ArrayLike) -> Floats:
    """Exponent Z at which Roelands has the slope of Barus at p = 0 [-].

    Z = alpha 1.962e8/(ln mu0 + 9.67); ``coefficient`` [1/Pa], ``viscosity`` [Pa s]. Identity.
    Raises OutOfRangeError unless both are positive and mu0 > 1e-4 Pa s.
    """
    alpha, mu = np.asarray(coefficient, dtype=float), np.asarray(viscosity, dtype=float)
    if not np.all((alpha > 0) & (mu > 1e-4) & np.isfinite(alpha) & np.isfinite(mu)):
        raise OutOfRangeError(
            f"roelands_exponent needs alpha > 0 and viscosity > 1e-4 Pa s; got {coefficient!r}, "
            f"{viscosity!r}"
        )
    return np.asarray(alpha * ROELANDS_PRESSURE / (np.log(mu) + 9.67))


def wooster_coefficient(viscosity: npt.ArrayLike) -> Floats:
    """Pressure-viscosity coefficient of a mineral oil from its viscosity [1/Pa].

    alpha = (0.6 + 0.965 log10 mu) 1e-8 with mu in cP; ``viscosity`` [Pa s], 2e-3 to 1. Scatter
    some 25 % about measured values, naphthenic oils higher. Source: Wooster, as given in
    Stachowiak and Batchelor, Engineering Tribology, ch. 2 (from memory).
    Raises OutOfRangeError outside the range or for NaN.
    """
    mu = np.asarray(viscosity, dtype=float)
    if not np.all((mu >= 2e-3) & (mu <= 1.0)):
        raise OutOfRangeError(
            f"wooster_coefficient is used from 2e-3 to 1 Pa s, mineral oil; got {viscosity!r}"
        )
    return np.asarray((0.6 + 0.965 * np.log10(mu * 1e3)) * 1e-8)


def so_klaus_coefficient(
    viscosity: npt.ArrayLike, density: npt.ArrayLike, slope: npt.ArrayLike
) -> Floats:
    """Pressure-viscosity coefficient from kinematic viscosity, density and D341 slope [1/Pa].

    ``viscosity`` nu0 [m2/s] and ``density`` [kg/m3] at the temperature asked for, atmospheric
    pressure; ``slope`` B of log10 log10 Z = A - B log10 T [-]. alpha/1e-8 = 1.216 + 4.143
    (log nu)^3.0627 + 2.848e-4 B^5.1903 (log nu)^1.5976 - 3.999 (log nu)^3.0975 rho^0.1162, nu in
    mm2/s, rho in g/cm3. Mineral and synthetic hydrocarbons, esters; scatter about 20 %.
    Source: So and Klaus, ASLE Trans. 23 (1980) 409-421 (from memory).
    Raises OutOfRangeError outside 2 to 1000 mm2/s, 700-1200 kg/m3, slope 2.5-4.5, or for NaN.
    """
    nu, rho, b = np.broadcast_arrays(
        *(np.asarray(x, dtype=float) for x in (viscosity, density, slope))
    )
    inside = (nu >= 2e-6) & (nu <= 1e-3) & (rho >= 700) & (rho <= 1200) & (b >= 2.5) & (b <= 4.5)
    if not np.all(inside):
        raise OutOfRangeError(
            "so_klaus_coefficient is used for 2-1000 mm2/s, 700-1200 kg/m3 and a D341 slope of "
            f"2.5-4.5; got {viscosity!r} m2/s, {density!r} kg/m3, {slope!r}"
        )
    x = np.log10(nu * 1e6)
    value = (
        1.216
        + 4.143 * x**3.0627
        + 2.848e-4 * b**5.1903 * x**1.5976
        - 3.999 * x**3.0975 * (rho / 1000.0) ** 0.1162
    )
    return np.asarray(value * 1e-8)
