"""Mean, spread and median of results some of which are only known to lie below a limit.

Nothing is put in place of a limit. Source: D. R. Helsel, Nondetects and Data Analysis, 2005.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from math import exp, log, sqrt

import numpy as np
from scipy.optimize import minimize
from scipy.stats import norm

from rca.base.errors import OutOfRangeError, SolverError


@dataclass(frozen=True, slots=True, kw_only=True)
class Summary:
    """Mean, standard deviation (None where the method gives none) and median."""

    mean: float
    sd: float | None
    median: float


def kaplan_meier(values: Sequence[float], below: Sequence[bool]) -> Summary:
    """Product-limit estimate turned round for limits from below.

    Where the smallest entry is a limit it stands for itself (errs high); where more than half the
    results lie below the smallest number, that number is given as the median (errs high).
    Source: E. Kaplan and P. Meier, J. Am. Stat. Assoc. 53 (1958) 457; Helsel ch. 6.
    """
    x, censored = _checked(values, below)
    share, mean = 1.0, 0.0  # share: estimated part of the results at or below the value
    median = float(x[~censored].max())
    for value in np.unique(x[~censored])[::-1].tolist():
        if share >= 0.5 - 1e-12:
            median = value
        at_risk = int(np.sum(x <= value))
        deaths = int(np.sum((x == value) & ~censored))
        following = share * (1.0 - deaths / at_risk)
        mean += value * (share - following)
        share = following
    return Summary(mean=mean + share * float(x.min()), sd=None, median=median)


def regression_on_order(values: Sequence[float], below: Sequence[bool]) -> Summary:
    """Limits filled from a lognormal line through the plotting positions of the numbers.

    For a summary only: the filled values must never enter a trend. Source: D. R. Helsel and
    T. A. Cohn, Water Resour. Res. 24 (1988) 1997. Needs 3 numbers above 0, two of them different.
    """
    x, censored = _checked(values, below)
    if np.any(x <= 0) or int((~censored).sum()) < 3:
        raise OutOfRangeError("regression on order needs 3 numbers and all values above 0")
    filled, positions = x.copy(), _positions(x, censored)
    line = np.polyfit(norm.ppf(positions[~censored]), np.log(x[~censored]), 1)
    filled[censored] = np.exp(np.polyval(line, norm.ppf(positions[censored])))
    return Summary(
        mean=float(filled.mean()), sd=float(filled.std(ddof=1)), median=float(np.median(filled))
    )


def lognormal_likelihood(values: Sequence[float], below: Sequence[bool]) -> Summary:
    """Lognormal fitted by maximum likelihood. Source: Helsel ch. 6. All values above 0."""
    x, censored = _checked(values, below)
    if np.any(x <= 0) or int((~censored).sum()) < 2:
        raise OutOfRangeError("the lognormal fit needs 2 numbers and all values above 0")
    logs = np.log(x)

    def badness(parameters: np.ndarray) -> float:
        centre, spread = parameters[0], exp(parameters[1])
        numbers = norm.logpdf(logs[~censored], centre, spread).sum()
        return -float(numbers + norm.logcdf(logs[censored], centre, spread).sum())

    start = [float(logs.mean()), log(max(float(logs.std()), 0.1))]
    fit = minimize(badness, start, method="Nelder-Mead", options={"xatol": 1e-9, "fatol": 1e-12})
    if not fit.success:
        raise SolverError(f"the lognormal fit did not settle: {fit.message}")
    centre, variance = float(fit.x[0]), exp(2.0 * float(fit.x[1]))
    mean = exp(centre + variance / 2.0)
    return Summary(mean=mean, sd=mean * sqrt(exp(variance) - 1.0), median=exp(centre))


def exceedance(values: Sequence[float], below: Sequence[bool]) -> dict[float, float]:
    """Share of results at or above each limit, from the highest limit down.

    Source: T. A. Cohn's formula in Helsel and Cohn 1988 (after R. Hirsch and J. Stedinger 1987).
    """
    x, censored = _checked(values, below)
    shares: dict[float, float] = {}
    above = 0.0
    upper = np.inf
    for limit in np.unique(x[censored])[::-1].tolist():
        numbers = int(np.sum(~censored & (x >= limit) & (x < upper)))
        lower = int(np.sum(~censored & (x < limit))) + int(np.sum(censored & (x <= limit)))
        if numbers + lower:
            above = above + numbers / (numbers + lower) * (1.0 - above)
        shares[limit] = above
        upper = limit
    return shares


def _positions(x: np.ndarray, censored: np.ndarray) -> np.ndarray:
    shares = exceedance(x.tolist(), censored.tolist())
    limits = sorted(shares)
    edges = [-np.inf, *limits]
    exceed = [1.0, *(shares[limit] for limit in limits)]
    positions = np.empty_like(x)
    for k, edge in enumerate(edges):
        upper = edges[k + 1] if k + 1 < len(edges) else np.inf
        inside = np.nonzero(~censored & (x >= edge) & (x < upper))[0]
        after = exceed[k + 1] if k + 1 < len(exceed) else 0.0
        for rank, place in enumerate(inside[np.argsort(x[inside], kind="stable")], start=1):
            share = rank / (inside.size + 1.0)
            positions[place] = (1.0 - exceed[k]) + (exceed[k] - after) * share
        if k:
            tied = np.nonzero(censored & (x == edge))[0]
            for rank, place in enumerate(tied, start=1):
                positions[place] = (1.0 - exceed[k]) * rank / (tied.size + 1.0)
    return positions


def _checked(values: Sequence[float], below: Sequence[bool]) -> tuple[np.ndarray, np.ndarray]:
    x, censored = np.asarray(values, dtype=float), np.asarray(below, dtype=bool)
    if x.shape != censored.shape or x.size == 0 or not np.all(np.isfinite(x)):
        raise OutOfRangeError("finite values and one mark a value are needed")
    if censored.all():
        raise OutOfRangeError("every result is a limit; nothing can be said of mean or spread")
    return x, censored
