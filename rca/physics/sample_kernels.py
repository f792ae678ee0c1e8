"""Compiled loops over samples: bilinear interpolation, and pooling into bins."""

import numpy as np
import numpy.typing as npt
from numba import njit

FloatArray = npt.NDArray[np.float64]


@njit(cache=True, nogil=True)
def bilinear(table: FloatArray, x: FloatArray, y: FloatArray) -> FloatArray:
    """Value of ``table`` (n, m) at places ``x``, ``y`` in units of its nodes; NaN outside.

    Exact for a function linear in each variable; elsewhere the error falls with the square of the
    spacing.
    """
    n, m = table.shape
    out = np.empty(x.size)
    for k in range(x.size):
        if not (0.0 <= x[k] <= n - 1 and 0.0 <= y[k] <= m - 1):
            out[k] = np.nan
            continue
        i, j = min(int(x[k]), n - 2), min(int(y[k]), m - 2)
        u, v = x[k] - i, y[k] - j
        lower = table[i, j] * (1.0 - v) + table[i, j + 1] * v
        upper = table[i + 1, j] * (1.0 - v) + table[i + 1, j + 1] * v
        out[k] = lower * (1.0 - u) + upper * u
    return out


@njit(cache=True, nogil=True)
def pool(
    index: npt.NDArray[np.int64],
    values: FloatArray,
    count: npt.NDArray[np.int64],
    total: FloatArray,
    low: FloatArray,
    high: FloatArray,
) -> None:
    """Add samples to bins: count, sum and extremes; NaN is left out. Changes the last four."""
    for k in range(values.size):
        value = values[k]
        if value != value:  # noqa: PLR0124  # the test for NaN
            continue
        place = index[k]
        count[place] += 1
        total[place] += value
        low[place] = min(low[place], value)
        high[place] = max(high[place], value)
