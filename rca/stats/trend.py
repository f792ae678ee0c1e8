"""Trend of a short series: Mann and Kendall's test, Theil and Sen's slope."""

from dataclasses import dataclass
from functools import cache
from math import factorial

import numpy as np
from scipy.stats import norm

from rca.base.errors import OutOfRangeError

EXACT_UP_TO = 10


@dataclass(frozen=True, slots=True, kw_only=True)
class MannKendall:
    """S, its variance with ties, and the two-sided probability of a trend by chance."""

    n: int
    s: int
    variance: float
    z: float
    p_two_sided: float
    exact: bool


def mann_kendall(values: tuple[float, ...]) -> MannKendall:
    """Mann-Kendall test; exact probabilities up to 10 points without ties.

    Source: R. Gilbert, Statistical Methods for Environmental Pollution Monitoring, 1987, ch. 16;
    variance with ties as in EPA QA/G-9S, sec. 4.3.4. Points in order of time, evenly spaced or
    not; a step counts as a trend, so known changes must be split off first.
    Raises OutOfRangeError for fewer than 3 points or NaN.
    """
    x = np.asarray(values, dtype=float)
    if x.size < 3 or not np.all(np.isfinite(x)):
        raise OutOfRangeError(f"mann_kendall needs at least 3 finite points; got {values}")
    n = int(x.size)
    s = int(sum(np.sign(x[j] - x[i]) for i in range(n) for j in range(i + 1, n)))
    _, counts = np.unique(x, return_counts=True)
    ties = sum(t * (t - 1) * (2 * t + 5) for t in counts if t > 1)
    variance = (n * (n - 1) * (2 * n + 5) - ties) / 18.0
    z = (s - np.sign(s)) / np.sqrt(variance) if variance > 0 else 0.0
    exact = n <= EXACT_UP_TO and ties == 0
    p = min(1.0, 2.0 * upper_tail(n, abs(s))) if exact else float(2.0 * norm.sf(abs(z)))
    return MannKendall(
        n=n, s=s, variance=float(variance), z=float(z), p_two_sided=p if s else 1.0, exact=exact
    )


def upper_tail(n: int, s: int) -> float:
    """P(S >= s) for n points without ties, exactly.

    Counts permutations by their number of inversions (recurrence of Kendall, Rank Correlation
    Methods, 1948). Raises OutOfRangeError for n above 60.
    """
    if not 2 <= n <= 60:
        raise OutOfRangeError(f"upper_tail counts permutations of 2 to 60 points; got {n}")
    counts = _inversions(n)
    pairs = n * (n - 1) // 2
    return sum(c for k, c in enumerate(counts) if pairs - 2 * k >= s) / factorial(n)


def theil_sen(times: tuple[float, ...], values: tuple[float, ...]) -> tuple[float, float]:
    """Median slope per unit of time, and intercept median(x) - slope median(t).

    Source: P. Sen, J. Am. Stat. Assoc. 63 (1968) 1379. Pairs at one time are left out.
    Raises OutOfRangeError without two different times.
    """
    t, x = np.asarray(times, dtype=float), np.asarray(values, dtype=float)
    i, j = np.triu_indices(t.size, k=1)
    good = t[j] != t[i]
    if not good.any():
        raise OutOfRangeError("theil_sen needs at least two different times")
    slope = float(np.median((x[j] - x[i])[good] / (t[j] - t[i])[good]))
    return slope, float(np.median(x) - slope * np.median(t))


@cache
def _inversions(n: int) -> tuple[int, ...]:
    counts = [1]
    for m in range(2, n + 1):
        grown = [0] * (len(counts) + m - 1)
        for k, c in enumerate(counts):
            for shift in range(m):
                grown[k + shift] += c
        counts = grown
    return tuple(counts)
