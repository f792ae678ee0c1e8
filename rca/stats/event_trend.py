"""Do events come more often or less often: trend tests and reliability growth of one process.

All take ages of events [any unit of exposure], counted from the start of observation, and say
whether observation went on after the last event ("time-terminated", ``end`` given) or stopped with
it ("failure-terminated", ``end`` None). That is stated by the caller and never inferred.
Ages are positive and sorted here; equal ages are allowed (the handbook's own data hold them).

Sources: MIL-HDBK-189 (1981), App. C, for the growth model, its intervals and the
Cramér-von Mises test; NIST/SEMATECH e-Handbook of Statistical Methods 8.2.3 for Laplace's and the
military handbook's tests and for reverse arrangements.
"""

from bisect import bisect_left, insort
from collections.abc import Sequence
from dataclasses import dataclass
from math import exp, log, sqrt

import numpy as np
import numpy.typing as npt
from scipy.stats import chi2, norm

from rca.base.errors import OutOfRangeError

FloatArray = npt.NDArray[np.float64]
FEWEST_FOR_GROWTH = 5  # below this the exponent means nothing; common practice, no source

# Critical values of C2 at 10 % by M, simulated under a power law; between them by line.
_CVM_M = (10.0, 20.0, 27.0, 60.0)
_CVM_10 = (0.168, 0.172, 0.171, 0.175)


@dataclass(frozen=True, slots=True, kw_only=True)
class TrendTest:
    """One test of "no trend"; ``p`` is two-sided, ``improving`` the direction of the statistic."""

    name: str
    statistic: float
    n: int
    p: float
    improving: bool


@dataclass(frozen=True, slots=True, kw_only=True)
class Growth:
    """The power law N(t) = scale * t^exponent; an exponent below 1 means improving."""

    n: int
    end: float
    time_terminated: bool
    exponent: float  # maximum likelihood
    exponent_unbiased: float
    exponent_low: float  # two-sided interval at ``level``
    exponent_high: float
    level: float
    scale: float
    intensity: float  # events per unit of exposure at the end
    interval: float  # exposure between events at the end
    misfit: float  # Cramér-von Mises C2
    misfit_critical: float  # at 10 %; above it the power law does not fit


def laplace(ages: Sequence[float], end: float | None = None) -> TrendTest:
    """Laplace's centroid test; best against an exponential law.

    It also rejects for clustered events without a trend. Raises OutOfRangeError for fewer than two
    counted events, NaN, or an age outside (0, end].
    """
    t, total = _counted(ages, end)
    n = t.size
    u = float((t.sum() - n * total / 2) / (total * sqrt(n / 12)))
    return TrendTest(
        name="Laplace", statistic=u, n=n, p=2 * float(norm.sf(abs(u))), improving=u < 0
    )


def military_handbook(ages: Sequence[float], end: float | None = None) -> TrendTest:
    """The military handbook's test, 2 sum ln(T/t) against chi-squared; best against a power law.

    Raises OutOfRangeError as ``laplace``.
    """
    t, total = _counted(ages, end)
    x = 2 * float(np.log(total / t).sum())
    upper = float(chi2.sf(x, 2 * t.size))
    return TrendTest(
        name="military handbook",
        statistic=x,
        n=t.size,
        p=min(1.0, 2 * min(upper, 1 - upper)),
        improving=upper < 0.5,
    )


def reverse_arrangements(ages: Sequence[float]) -> TrendTest:
    """Pairs of gaps in rising order; no model is assumed. Normal approximation, two-sided.

    Equal gaps do not count, as in the e-Handbook.
    Raises OutOfRangeError for fewer than four events.
    """
    t = _ages(ages, None)
    if t.size < 4:
        raise OutOfRangeError("reverse arrangements need at least four events")
    gaps = np.diff(t, prepend=0.0)
    earlier: list[float] = []
    found = 0.0
    for gap in gaps.tolist():
        found += bisect_left(earlier, gap)
        insort(earlier, gap)
    n = gaps.size
    mean, sd = n * (n - 1) / 4, sqrt((2 * n + 5) * (n - 1) * n / 72)
    shift = 0.5 if found < mean else -0.5
    z = 0.0 if found == mean else (found - mean + shift) / sd
    return TrendTest(
        name="reverse arrangements",
        statistic=found,
        n=n,
        p=2 * float(norm.sf(abs(z))),
        improving=found > mean,
    )


def growth(ages: Sequence[float], end: float | None = None, *, level: float = 0.8) -> Growth:
    """Maximum-likelihood power law with its exponent's interval and its misfit.

    Valid for one unit, or units pooled at equal age; errs where units of unlike ages are pooled.
    Raises OutOfRangeError for fewer than five events, NaN, or an age outside (0, end].
    """
    t = _ages(ages, end)
    n = t.size
    if n < FEWEST_FOR_GROWTH:
        raise OutOfRangeError(
            f"a growth curve needs at least {FEWEST_FOR_GROWTH} events, there are {n}"
        )
    timed = end is not None
    total = float(end) if end is not None else float(t[-1])
    logs = float(np.log(total / t).sum())
    if logs <= 0:
        raise OutOfRangeError("all events lie at the end of the observation; no curve fits")
    b = n / logs
    unbiased = b * (n - 1) / n if timed else b * (n - 2) / n
    # 2 n b / b_hat is chi-squared with 2n degrees (time) or 2(n - 1) (failure terminated)
    degrees = 2 * n if timed else 2 * (n - 1)
    low = float(chi2.ppf((1 - level) / 2, degrees)) * b / (2 * n)
    high = float(chi2.ppf((1 + level) / 2, degrees)) * b / (2 * n)
    scale = n / total**b
    intensity = n * b / total
    misfit, critical = _misfit(t, total, timed=timed)
    return Growth(
        n=n,
        end=total,
        time_terminated=timed,
        exponent=b,
        exponent_unbiased=unbiased,
        exponent_low=low,
        exponent_high=high,
        level=level,
        scale=scale,
        intensity=intensity,
        interval=1 / intensity,
        misfit=misfit,
        misfit_critical=critical,
    )


def _misfit(t: FloatArray, total: float, *, timed: bool) -> tuple[float, float]:
    used = t if timed else t[:-1]
    m = used.size
    b = (m - 1) / float(np.log(total / used).sum())
    ranks = (2 * np.arange(1, m + 1) - 1) / (2 * m)
    c2 = float(1 / (12 * m) + (((used / total) ** b - ranks) ** 2).sum())
    return c2, float(np.interp(m, _CVM_M, _CVM_10))


def holm(p_values: Sequence[float]) -> tuple[float, ...]:
    """P values corrected for how many tests were made (Holm, Scand. J. Stat. 6 (1979) 65)."""
    order = sorted(range(len(p_values)), key=lambda k: p_values[k])
    out, running = [1.0] * len(p_values), 0.0
    for rank, k in enumerate(order):
        running = max(running, min(1.0, (len(p_values) - rank) * p_values[k]))
        out[k] = running
    return tuple(out)


def _counted(ages: Sequence[float], end: float | None) -> tuple[FloatArray, float]:
    """Ages that count, and the length of observation: to the last event where no end is given."""
    t = _ages(ages, end)
    total = float(end) if end is not None else float(t[-1])
    used = t if end is not None else t[:-1]
    if used.size < 2:
        raise OutOfRangeError("a trend test needs at least two events (three without an end)")
    return used, total


def _ages(ages: Sequence[float], end: float | None) -> FloatArray:
    t = np.sort(np.asarray(ages, dtype=float))
    if t.size == 0:
        raise OutOfRangeError("there are no events")
    if not np.isfinite(t).all() or (end is not None and not np.isfinite(end)):
        raise OutOfRangeError("an age or the end of observation is not a finite number")
    if t[0] <= 0:
        raise OutOfRangeError(
            f"the age {t[0]:g} is not positive; count ages from the start of observation"
        )
    if end is not None and t[-1] > end:
        raise OutOfRangeError(f"an event at {t[-1]:g} lies after the end of observation {end:g}")
    return t


def none_expected(expected: float) -> float:
    """P(no event) where ``expected`` are expected: exp(-m). Three give 0.05.

    Raises OutOfRangeError for a negative or non-finite expectation.
    """
    if not np.isfinite(expected) or expected < 0:
        raise OutOfRangeError(f"an expected count of {expected!r} is not possible")
    return exp(-expected)


def exposure_for(probability: float) -> float:
    """Old intervals to watch so that silence has only that probability without improvement.

    Raises OutOfRangeError outside (0, 1).
    """
    if not 0 < probability < 1:
        raise OutOfRangeError(f"{probability!r} is no probability between 0 and 1")
    return -log(probability)
