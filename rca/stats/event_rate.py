"""Rates and shares from few events: exact intervals, two rates compared, a base rate learned.

Sources: Garwood, Biometrika 28 (1936) 437 (interval of a Poisson rate); Przyborowski and
Wilenski, Biometrika 31 (1940) 313 (two rates); Jeffreys' prior for a share, Brown, Cai and
DasGupta, Statist. Sci. 16 (2001) 101; Nelson, J. Qual. Technol. 27 (1995) 147 (mean cumulative
function).
"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
from scipy.stats import beta, binom, chi2

from rca.base.errors import OutOfRangeError

FloatArray = npt.NDArray[np.float64]
GRID = 2001


@dataclass(frozen=True, slots=True, kw_only=True)
class Estimate:
    """A value with an interval at ``level``; ``n`` is what it rests on."""

    value: float
    low: float
    high: float
    level: float
    n: int


def rate(events: int, exposure: float, *, level: float = 0.9) -> Estimate:
    """Events per unit of exposure, exact two-sided interval.

    Raises OutOfRangeError for a negative count or an exposure that is not positive.
    """
    if events < 0 or not exposure > 0 or not np.isfinite(exposure):
        raise OutOfRangeError(f"{events} events in an exposure of {exposure:g} give no rate")
    tail = (1 - level) / 2
    low = float(chi2.ppf(tail, 2 * events)) / 2 if events else 0.0
    high = float(chi2.ppf(1 - tail, 2 * events + 2)) / 2
    return Estimate(
        value=events / exposure, low=low / exposure, high=high / exposure, level=level, n=events
    )


def mean_time_lower(events: int, exposure: float, *, level: float = 0.9) -> float:
    """One-sided lower bound of the exposure between events, time-terminated.

    Raises OutOfRangeError as ``rate``.
    """
    if events < 0 or not exposure > 0:
        raise OutOfRangeError(f"{events} events in an exposure of {exposure:g} give no interval")
    return 2 * exposure / float(chi2.ppf(level, 2 * events + 2))


def fewer_after(before: int, exposure_before: float, after: int, exposure_after: float) -> float:
    """P(so few or fewer after | the rate did not change), given the total; one-sided.

    Raises OutOfRangeError for negative counts or exposures that are not positive.
    """
    if min(before, after) < 0 or not min(exposure_before, exposure_after) > 0:
        raise OutOfRangeError("two rates need counts of zero or more and positive exposures")
    share = exposure_after / (exposure_before + exposure_after)
    return float(binom.cdf(after, before + after, share))


def share(k: float, n: int, *, level: float = 0.9) -> Estimate:
    """A share k/n with Jeffreys' interval; ``k`` may be a sum of probabilities.

    Raises OutOfRangeError unless 0 <= k <= n and n > 0.
    """
    if n <= 0 or not 0 <= k <= n:
        raise OutOfRangeError(f"{k:g} of {n} is no share")
    tail = (1 - level) / 2
    made = beta(k + 0.5, n - k + 0.5)
    return Estimate(
        value=k / n,
        low=0.0 if k == 0 else float(made.ppf(tail)),
        high=1.0 if k == n else float(made.ppf(1 - tail)),
        level=level,
        n=n,
    )


def base_rate(
    posterior: Sequence[float], prior: Sequence[float], *, level: float = 0.9
) -> Estimate:
    """The base rate behind findings, with the prior that went into each taken out again.

    Shapes [n], [n]: probability of the state found and assumed beforehand, a case each. Each case
    gives the ratio of its odds; the base rate's density is Jeffreys' prior times the product of
    (rate * ratio + 1 - rate), on a grid. Averaging the findings themselves would count the old
    prior again in every case. Errs where cases are chosen for what was found.
    Raises OutOfRangeError for unlike lengths, no case, or a value outside (0, 1).
    """
    p, q = np.asarray(posterior, dtype=float), np.asarray(prior, dtype=float)
    if p.size == 0 or p.shape != q.shape:
        raise OutOfRangeError("a base rate needs one finding and one prior a case")
    if not (((q > 0) & (q < 1)).all() and ((p >= 0) & (p <= 1)).all()):
        raise OutOfRangeError("a finding lies outside [0, 1] or a prior outside (0, 1)")
    p = np.clip(p, 1e-9, 1 - 1e-9)
    ratio = (p / (1 - p)) / (q / (1 - q))
    edges = np.linspace(0.0, 1.0, GRID)
    grid = (edges[1:] + edges[:-1]) / 2
    density = np.diff(beta(0.5, 0.5).cdf(edges))  # the prior's own mass in each cell
    logs = np.log(np.maximum(density, 1e-300))
    for part in np.array_split(ratio, ratio.size // 256 + 1):
        logs += np.log(np.outer(part, grid) + (1 - grid)).sum(axis=0)
    mass = np.exp(logs - logs.max())
    mass /= mass.sum()
    cumulative = np.cumsum(mass)
    tail = (1 - level) / 2
    return Estimate(
        value=float((grid * mass).sum()),
        low=float(grid[np.searchsorted(cumulative, tail)]),
        high=float(grid[np.searchsorted(cumulative, 1 - tail)]),
        level=level,
        n=p.size,
    )


def mean_cumulative(
    events: Sequence[Sequence[float]], ends: Sequence[float]
) -> tuple[FloatArray, FloatArray]:
    """Mean number of events a unit by age, for units watched to unlike ages.

    ``events`` holds the ages of each unit's events, ``ends`` how long each was watched. Returns
    ages and the function just after each. Raises OutOfRangeError for an event after its end.
    """
    watched = np.asarray(ends, dtype=float)
    for unit, end in zip(events, ends, strict=True):
        if any(age > end for age in unit):
            raise OutOfRangeError("an event lies after its unit's last day of observation")
    ages = np.sort(np.array([a for unit in events for a in unit], dtype=float))
    at_risk = np.array([(watched >= age).sum() for age in ages], dtype=float)
    return ages, np.cumsum(1.0 / at_risk) if ages.size else ages
