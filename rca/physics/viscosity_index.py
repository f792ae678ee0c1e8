"""Viscosity index by ASTM D2270, both procedures."""

import numpy as np
import numpy.typing as npt

from rca.base.errors import OutOfRangeError

Floats = npt.NDArray[np.float64]

LOWEST_100, HIGHEST_100 = 2.0e-6, 500.0e-6  # [m2/s] at 100 degC
# Lower end of each interval of the viscosity at 100 degC [mm2/s] with the coefficients of
# L = a Y^2 + b Y + c and H = d Y^2 + e Y + f. ASTM D2270-10(2016), equations for computers (from
# memory; a test holds every entry of the method's Table 1 against them, 0.1 %).
_INTERVALS: Floats = np.array(
    [
        [2.0, 1.14673, 1.7576, -0.109, 0.84155, 1.5521, -0.077],
        [3.8, 3.38095, -15.4952, 33.196, 0.78571, 1.7929, -0.183],
        [4.4, 2.50000, -7.2143, 13.812, 0.82143, 1.5679, 0.119],
        [5.0, 0.10100, 16.6350, -45.469, 0.04985, 9.1613, -18.557],
        [6.4, 3.35714, -23.5643, 78.466, 0.22619, 7.7369, -16.656],
        [7.0, 0.01191, 21.4750, -72.870, 0.79762, -0.7321, 14.610],
        [7.7, 0.41858, 16.1558, -56.040, 0.05794, 10.5156, -28.240],
        [9.0, 0.88779, 7.5527, -16.600, 0.26665, 6.7015, -10.810],
        [12.0, 0.76720, 10.7972, -38.180, 0.20073, 8.4658, -22.490],
        [15.0, 0.97305, 5.3135, -2.200, 0.28889, 5.9741, -4.930],
        [18.0, 0.97256, 5.2500, -0.980, 0.24504, 7.4160, -16.730],
        [22.0, 0.91413, 7.4759, -21.820, 0.20323, 9.1267, -34.230],
        [28.0, 0.87031, 9.7157, -50.770, 0.18411, 10.1015, -46.750],
        [40.0, 0.84703, 12.6752, -133.310, 0.17029, 11.4866, -80.620],
        [55.0, 0.85921, 11.1009, -83.190, 0.17130, 11.3680, -76.940],
        [70.0, 0.83531, 14.6731, -216.246, 0.16841, 11.8493, -96.947],
    ]
)


def reference_viscosities(nu_100: npt.ArrayLike) -> tuple[Floats, Floats]:
    """Viscosities at 40 degC of the two reference oils, L (index 0) and H (index 100) [m2/s].

    ``nu_100`` [m2/s], 2 to 500 mm2/s. Within 0.1 % of the method's table.
    Source: ASTM D2270. Raises OutOfRangeError outside the range or for NaN.
    """
    y = np.asarray(nu_100, dtype=float)
    if not np.all((y >= LOWEST_100) & (y <= HIGHEST_100)):
        raise OutOfRangeError(
            "ASTM D2270 is defined from 2 mm2/s at 100 degC and used here to 500; got "
            f"{nu_100!r} m2/s"
        )
    y = y * 1e6
    row = np.clip(np.searchsorted(_INTERVALS[:, 0], y, side="right") - 1, 0, None)
    a, b, c, d, e, f = np.moveaxis(_INTERVALS[row, 1:], -1, 0)
    return np.asarray(((a * y + b) * y + c) * 1e-6), np.asarray(((d * y + e) * y + f) * 1e-6)


def viscosity_index(nu_40: npt.ArrayLike, nu_100: npt.ArrayLike) -> Floats:
    """Viscosity index [-], unrounded; inputs broadcast.

    ``nu_40``, ``nu_100`` [m2/s] at 40 and 100 degC. Procedure A, 100 (L - U)/(L - H), up to 100;
    Procedure B, 100 + (10^N - 1)/0.00715 with N = log(H/U)/log(Y), above. The method rounds to
    whole numbers; an error of 1 % in either viscosity moves the index by 1 to 3 points. A
    negative index is a result, not an error.
    Source: ASTM D2270. Raises OutOfRangeError below 2 mm2/s at 100 degC, for viscosities that do
    not fall with temperature, and for NaN.
    """
    u, y = np.broadcast_arrays(np.asarray(nu_40, dtype=float), np.asarray(nu_100, dtype=float))
    low, high = reference_viscosities(y)
    if not np.all((u > y) & np.isfinite(u)):
        raise OutOfRangeError(
            f"viscosity_index needs a viscosity at 40 degC above that at 100 degC; got "
            f"{nu_40!r} and {nu_100!r} m2/s"
        )
    first = 100.0 * (low - u) / (low - high)
    power = np.log(np.maximum(high / u, 1.0)) / np.log(y * 1e6)
    second = 100.0 + (10.0**power - 1.0) / 0.00715
    return np.asarray(np.where(u < high, second, first))


def viscosity_at_100(nu_40: float, index: float) -> float:
    """Viscosity at 100 degC of an oil of that index [m2/s]; the inverse of ``viscosity_index``.

    ``nu_40`` [m2/s]; bisection to 1e-12. Where an index is stated and no second viscosity is.
    Raises OutOfRangeError where no viscosity of 2 mm2/s or more has that index.
    """
    low, high = LOWEST_100, min(HIGHEST_100, nu_40 * (1 - 1e-9))
    if not (high > low and _at(nu_40, low) <= index <= _at(nu_40, high)):
        raise OutOfRangeError(
            f"no oil of {nu_40 * 1e6:g} mm2/s at 40 degC and 2 mm2/s or more at 100 degC has a "
            f"viscosity index of {index:g} (ASTM D2270)"
        )
    while high - low > 1e-12 * high:
        middle = 0.5 * (low + high)
        low, high = (middle, high) if _at(nu_40, middle) < index else (low, middle)
    return 0.5 * (low + high)


def _at(nu_40: float, nu_100: float) -> float:
    return float(viscosity_index(nu_40, nu_100))
