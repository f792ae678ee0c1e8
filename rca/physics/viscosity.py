"""Kinematic viscosity of a hydraulic oil against temperature."""

import numpy as np
import numpy.typing as npt

from rca.base.errors import OutOfRangeError
from rca.physics.viscosity_index import viscosity_at_100

FloatArray = npt.NDArray[np.float64]
_MM2 = 1e-6


def walther_constants(nu_1: float, t_1: float, nu_2: float, t_2: float) -> tuple[float, float]:
    """Constants A and B of log10 log10 Z = A - B log10 T from two points.

    ``nu`` [m2/s], ``t`` [K]. Source: ASTM D341-20, eq. (1) and (2), Z with the low-range term.
    Raises OutOfRangeError unless both viscosities are 0.21e-6 to 2e7e-6 m2/s and differ.
    """
    for nu in (nu_1, nu_2):
        if not 0.21 * _MM2 <= nu <= 2e7 * _MM2:
            raise OutOfRangeError(
                f"ASTM D341 holds from 0.21 to 2e7 mm2/s; got {nu / _MM2:g} mm2/s"
            )
    if not (t_1 > 0 and t_2 > 0 and t_1 != t_2 and (nu_1 - nu_2) * (t_2 - t_1) > 0):
        raise OutOfRangeError("viscosity must fall as temperature rises between the two points")
    w_1, w_2 = (float(np.log10(np.log10(_z(np.asarray(nu / _MM2))))) for nu in (nu_1, nu_2))
    b = (w_1 - w_2) / float(np.log10(t_2) - np.log10(t_1))
    return w_1 + b * float(np.log10(t_1)), b


def kinematic_viscosity(
    temperature: float | FloatArray, nu_40: float, nu_100: float
) -> FloatArray:
    """Kinematic viscosity [m2/s] at a temperature [K] from the values at 40 and 100 degC.

    Newtonian oil without wax. Good to 1 % between the anchors; more than 20 K below the colder
    one it errs low, as wax and yield stress are not in it. Source: ASTM D341-20, eq. (1) to (3).
    Raises OutOfRangeError outside 203 K to 573 K or for NaN.
    """
    t = np.asarray(temperature, dtype=float)
    if not np.all((t >= 203.0) & (t <= 573.0)):
        raise OutOfRangeError(
            f"ASTM D341 is used here from 203 K to 573 K; got {np.min(t):g} to {np.max(t):g} K"
        )
    a, b = walther_constants(nu_40, 313.15, nu_100, 373.15)
    z = 10.0 ** (10.0 ** (a - b * np.log10(t)))
    return np.asarray(_nu(z) * _MM2)


def grade_viscosities(iso_vg: int, *, viscosity_index: float = 100.0) -> tuple[float, float]:
    """Viscosity at 40 and 100 degC [m2/s] of an ISO grade at its mid-point.

    The grade allows +/-10 % at 40 degC (ISO 3448:1992); the value at 100 degC follows from the
    viscosity index by ASTM D2270. Both are class values, not this oil's.
    Raises OutOfRangeError for a grade outside 10 to 1500 or an index no oil of it can have.
    """
    if not 10 <= iso_vg <= 1500:
        raise OutOfRangeError(f"class values are offered for ISO VG 10 to 1500; got {iso_vg}")
    return iso_vg * _MM2, viscosity_at_100(iso_vg * _MM2, viscosity_index)


def _z(nu: FloatArray) -> FloatArray:
    """Z of ASTM D341 from viscosity [mm2/s], with the term for below 2 mm2/s."""
    return np.asarray(nu + 0.7 + np.exp(-1.47 - 1.84 * nu - 0.51 * nu**2))


def _nu(z: FloatArray) -> FloatArray:
    """Viscosity [mm2/s] from Z, ASTM D341 eq. (3)."""
    y = np.asarray(z) - 0.7
    return np.asarray(y - np.exp(-0.7487 - 3.295 * y + 0.6119 * y**2 - 0.3193 * y**3))
