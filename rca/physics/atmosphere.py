"""The standard atmosphere of the lowest 11 km."""

import numpy as np
import numpy.typing as npt

from rca.base.errors import OutOfRangeError

SEA_LEVEL_PRESSURE = 101325.0  # [Pa], ISO 2533:1975
WEATHER_SPREAD = 0.01  # standard uncertainty of station pressure about the standard, relative;
# common practice, no source: highs and lows of +/-3 % taken as three standard deviations


def standard_atmosphere(height: float | npt.NDArray[np.float64]) -> npt.NDArray[np.float64]:
    """Air pressure at a geopotential height [m], absolute [Pa].

    p = 101325 (1 - 2.25577e-5 h)^5.25588, valid -500 m to 11000 m; weather adds about +/-3 %.
    Source: ISO 2533:1975, standard atmosphere, troposphere.
    Raises OutOfRangeError outside the range or for NaN.
    """
    h = np.asarray(height, dtype=float)
    if not np.all((h >= -500.0) & (h <= 11000.0)):
        raise OutOfRangeError(
            f"standard_atmosphere holds from -500 m to 11000 m (ISO 2533:1975); got {height} m"
        )
    return np.asarray(SEA_LEVEL_PRESSURE * (1.0 - 2.25577e-5 * h) ** 5.25588)
