"""Order between results some of which are only known to lie below or above a limit.

A result is a pair (operator, number); "<" 1 is anything under 1, ">" 8 anything over 8. Two
results are ordered only where every value they may stand for is ordered; else they tie. No number
is ever put in place of a censored one.

Source: D. R. Helsel, Nondetects and Data Analysis, Wiley 2005; M. G. Akritas, S. A. Murphy,
M. P. LaValley, J. Am. Stat. Assoc. 90 (1995) 170.
"""

from collections.abc import Sequence

import numpy as np
import numpy.typing as npt

from rca.base.errors import OutOfRangeError

FloatArray = npt.NDArray[np.float64]
OPERATORS = ("=", "~", "<", ">")


def checked(values: Sequence[float], ops: Sequence[str]) -> tuple[FloatArray, tuple[str, ...]]:
    """Values as an array with one operator each ("~" counts as "=").

    Raises OutOfRangeError for NaN, infinity, an unknown operator or unequal lengths.
    """
    x = np.asarray(values, dtype=float)
    marks = tuple("=" if op == "~" else op for op in ops) if ops else ("=",) * x.size
    if not np.all(np.isfinite(x)):
        raise OutOfRangeError(f"values must be finite numbers; got {tuple(values)}")
    if len(marks) != x.size or set(marks) - set(OPERATORS):
        raise OutOfRangeError(f"one operator of {OPERATORS} a value is needed; got {tuple(ops)}")
    return x, marks


def rises(values: FloatArray, ops: Sequence[str]) -> npt.NDArray[np.int8]:
    """Matrix of +1 where result j is surely above result i, -1 where surely below, else 0.

    ``values`` [n], ``ops`` [n] -> [n, n], antisymmetric.
    """
    marks = np.asarray(ops)
    low = np.where(marks == "<", -np.inf, values)
    high = np.where(marks == ">", np.inf, values)
    touching = (marks == "<")[:, None] | (marks == ">")[None, :]
    above = (low[None, :] > high[:, None]) | ((low[None, :] == high[:, None]) & touching)
    up = above.astype(np.int8)
    np.fill_diagonal(up, 0)
    signed: npt.NDArray[np.int8] = up - up.T
    return signed
