"""Theil and Sen's slope over real times, inside groups, and its censored form."""

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from math import sqrt

import numpy as np
import numpy.typing as npt
from scipy.stats import norm

from rca.base.errors import OutOfRangeError
from rca.stats.censored_order import checked, rises
from rca.stats.mann_kendall import mann_kendall, variance_of_s

FloatArray = npt.NDArray[np.float64]
BISECTIONS = 80


@dataclass(frozen=True, slots=True, kw_only=True)
class Slope:
    """Slope per unit of time with its confidence interval, and the line's level at time 0."""

    slope: float
    intercept: float  # median(x) - slope * median(t), of the first group where there are groups
    low: float
    high: float
    level: float  # of confidence, e.g. 0.95
    censored: bool


def theil_sen(
    times: Sequence[float],
    values: Sequence[float],
    *,
    groups: Sequence[object] = (),
    level: float = 0.95,
) -> Slope:
    """Median of the slopes of all pairs at different times, pairs inside a group only.

    Shapes [n], [n]. Source: P. K. Sen, J. Am. Stat. Assoc. 63 (1968) 1379. One wild value in
    four does not move it far. Raises OutOfRangeError for NaN or without two different times.
    """
    t, x, labels = _points(times, values, groups)
    i, j = np.triu_indices(t.size, k=1)
    good = (t[j] != t[i]) & (labels[j] == labels[i])
    if not good.any():
        raise OutOfRangeError("theil_sen needs at least two different times in one group")
    slopes = np.sort((x[j] - x[i])[good] / (t[j] - t[i])[good])
    slope = float(np.median(slopes))
    variance = 1.0
    if t.size > 2:
        variance = variance_of_s(x.tolist(), labels.tolist())
    half = float(norm.ppf(0.5 + level / 2)) * sqrt(variance)
    low = max(int(np.rint((slopes.size - half) / 2.0)) - 1, 0)
    high = min(int(np.rint((slopes.size + half) / 2.0)), slopes.size - 1)
    first = labels == labels[0]
    return Slope(
        slope=slope,
        intercept=float(np.median(x[first]) - slope * np.median(t[first])),
        low=float(slopes[low]),
        high=float(slopes[high]),
        level=level,
        censored=False,
    )


def censored_slope(
    times: Sequence[float],
    values: Sequence[float],
    ops: Sequence[str],
    *,
    groups: Sequence[object] = (),
    level: float = 0.95,
) -> Slope:
    """The slope that leaves residuals without a trend, where some results are limits.

    The residual of a limit is a limit. Source: Akritas, Murphy and LaValley, J. Am. Stat.
    Assoc. 90 (1995) 170. The interval is where the residuals' S stays inside its normal bounds.
    Raises OutOfRangeError for NaN, or where no slope is determined (all results are limits).
    """
    t, x, labels = _points(times, values, groups)
    _, marks = checked(values, ops)
    if sum(mark == "=" for mark in marks) < 2:
        raise OutOfRangeError("censored_slope needs at least two results that are numbers")
    order = np.argsort(t, kind="stable")
    t, x, labels = t[order], x[order], labels[order]
    marks = tuple(marks[k] for k in order)
    used = np.triu((labels[:, None] == labels[None, :]) & (t[:, None] != t[None, :]), k=1)

    def s_at(slope: float) -> float:
        return float(rises(x - slope * t, marks)[used].sum(dtype=np.int64))

    steps = _bounds(t, x, used)
    variance = mann_kendall(x.tolist(), ops=marks, groups=tuple(labels.tolist())).variance
    half = float(norm.ppf(0.5 + level / 2)) * sqrt(variance)
    upper, lower = _crossing(s_at, 0.5, steps), _crossing(s_at, -0.5, steps)
    slope = 0.5 * (upper + lower)
    first = (labels == labels[0]) & (np.asarray(marks) == "=")
    if not first.any():
        first = np.asarray(marks) == "="
    return Slope(
        slope=slope,
        intercept=float(np.median(x[first]) - slope * np.median(t[first])),
        low=_crossing(s_at, half, steps),
        high=_crossing(s_at, -half, steps),
        level=level,
        censored=True,
    )


def _points(
    times: Sequence[float], values: Sequence[float], groups: Sequence[object]
) -> tuple[FloatArray, FloatArray, npt.NDArray[np.int64]]:
    t, x = np.asarray(times, dtype=float), np.asarray(values, dtype=float)
    if t.shape != x.shape or t.ndim != 1:
        raise OutOfRangeError("times and values must be two rows of one length")
    if not (np.all(np.isfinite(t)) and np.all(np.isfinite(x))):
        raise OutOfRangeError("times and values must be finite numbers")
    names = list(dict.fromkeys(groups))
    labels = np.array([names.index(g) for g in groups] if groups else [0] * t.size, dtype=np.int64)
    if labels.shape != t.shape:
        raise OutOfRangeError("one group a point is needed")
    return t, x, labels


def _bounds(t: FloatArray, x: FloatArray, used: npt.NDArray[np.bool_]) -> tuple[float, float]:
    """A bracket that holds every slope of a pair."""
    i, j = np.nonzero(used)
    if i.size == 0:
        raise OutOfRangeError("a slope needs at least two different times in one group")
    slopes = (x[j] - x[i]) / (t[j] - t[i])
    reach = float(np.max(np.abs(slopes))) or 1.0
    return -2.0 * reach, 2.0 * reach


def _crossing(s_at: Callable[[float], float], target: float, bounds: tuple[float, float]) -> float:
    """Largest slope whose residuals still have S above ``target``; S falls with the slope."""
    low, high = bounds
    if s_at(low) <= target:
        return low
    if s_at(high) > target:
        return high
    for _ in range(BISECTIONS):
        middle = 0.5 * (low + high)
        if s_at(middle) > target:
            low = middle
        else:
            high = middle
        if high - low <= 1e-12 * max(abs(low), abs(high), 1e-300):
            break
    return 0.5 * (low + high)
