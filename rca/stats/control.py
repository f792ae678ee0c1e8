"""Control charts: individuals, EWMA and CUSUM.

They suit a quantity that should stay level (silicon, water) or the residuals of a fitted line,
not a quantity that rises by design.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from math import sqrt

import numpy as np

from rca.base.errors import OutOfRangeError

D2_OF_PAIRS = 1.128  # mean range of two normal results over sigma; ASTM E2587
D4_OF_PAIRS = 3.267


@dataclass(frozen=True, slots=True, kw_only=True)
class Individuals:
    """Limits of single results from their moving range of two."""

    mean: float
    moving_range: float
    low: float
    high: float
    range_high: float
    signals: tuple[int, ...]  # places outside the limits, from 0


@dataclass(frozen=True, slots=True, kw_only=True)
class Ewma:
    """Exponentially weighted moving average and its limits, point by point."""

    values: tuple[float, ...]
    low: tuple[float, ...]
    high: tuple[float, ...]
    signals: tuple[int, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Cusum:
    """Sums of the deviations up and down beyond the slack, and where they pass the limit."""

    up: tuple[float, ...]
    down: tuple[float, ...]
    signals: tuple[int, ...]


def individuals(values: Sequence[float]) -> Individuals:
    """Mean +/- 2.66 mean moving range (3/1.128). Source: ASTM E2587. At least 3 points."""
    x = _finite(values, 3)
    ranges = np.abs(np.diff(x))
    mean, spread = float(x.mean()), float(ranges.mean())
    reach = 3.0 / D2_OF_PAIRS * spread
    outside = np.nonzero((x < mean - reach) | (x > mean + reach))[0]
    return Individuals(
        mean=mean,
        moving_range=spread,
        low=mean - reach,
        high=mean + reach,
        range_high=D4_OF_PAIRS * spread,
        signals=tuple(int(k) for k in outside),
    )


def ewma(
    values: Sequence[float], *, target: float, sd: float, weight: float = 0.3, width: float = 3.0
) -> Ewma:
    """Z = weight x + (1 - weight) z from ``target``, limits that widen to their final value.

    Source: NIST/SEMATECH e-Handbook of Statistical Methods, 6.3.2.4.
    Raises OutOfRangeError for a weight outside 0 to 1 or a standard deviation of 0 or less.
    """
    x = _finite(values, 1)
    if not 0.0 < weight <= 1.0 or sd <= 0.0:
        raise OutOfRangeError(f"weight in (0, 1] and sd above 0; got {weight}, {sd}")
    z, low, high = [], [], []
    level = target
    for t, one in enumerate(x, start=1):
        level = weight * float(one) + (1.0 - weight) * level
        reach = width * sd * sqrt(weight / (2.0 - weight) * (1.0 - (1.0 - weight) ** (2 * t)))
        z.append(level)
        low.append(target - reach)
        high.append(target + reach)
    signals = tuple(k for k, one in enumerate(z) if not low[k] <= one <= high[k])
    return Ewma(values=tuple(z), low=tuple(low), high=tuple(high), signals=signals)


def cusum(values: Sequence[float], *, target: float, slack: float, limit: float) -> Cusum:
    """Tabular CUSUM; ``slack`` K and ``limit`` H in the unit of the values.

    Source: NIST/SEMATECH e-Handbook of Statistical Methods, 6.3.2.3.
    Raises OutOfRangeError for a negative slack or limit.
    """
    x = _finite(values, 1)
    if slack < 0.0 or limit < 0.0:
        raise OutOfRangeError(f"slack and limit must not be negative; got {slack}, {limit}")
    up, down = [], []
    high = low = 0.0
    for one in x.tolist():
        high = max(0.0, high + one - target - slack)
        low = max(0.0, low + target - slack - one)
        up.append(high)
        down.append(low)
    signals = tuple(k for k, pair in enumerate(zip(up, down, strict=True)) if max(pair) > limit)
    return Cusum(up=tuple(up), down=tuple(down), signals=signals)


def _finite(values: Sequence[float], least: int) -> np.ndarray:
    x = np.asarray(values, dtype=float)
    if x.size < least or not np.all(np.isfinite(x)):
        raise OutOfRangeError(f"at least {least} finite values are needed; got {tuple(values)}")
    return x
