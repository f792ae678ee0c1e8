"""Values that lie apart: flagged for a person to look at, never deleted."""

from collections.abc import Sequence
from dataclasses import dataclass
from math import sqrt

import numpy as np
from scipy.stats import t as student

from rca.base.errors import OutOfRangeError

NORMAL_MAD = 1.4826  # sigma over the median absolute deviation of normal values


@dataclass(frozen=True, slots=True, kw_only=True)
class Grubbs:
    """The value farthest from the mean, in standard deviations, and its critical values."""

    g: float
    place: int
    critical_one_sided: float
    critical_two_sided: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Esd:
    """Generalised ESD: statistics, critical values, and the places that lie apart."""

    r: tuple[float, ...]
    critical: tuple[float, ...]
    places: tuple[int, ...]


def grubbs(values: Sequence[float], *, alpha: float = 0.05) -> Grubbs:
    """G = max|x - mean|/s. Source: F. Grubbs, Technometrics 11 (1969) 1; ASTM E178.

    For normal values with one outlier at most; two mask each other. At least 3 values that are
    not all equal.
    """
    x = _spread(values, 3)
    deviations = np.abs(x - x.mean())
    place = int(np.argmax(deviations))
    n = x.size
    return Grubbs(
        g=float(deviations[place] / x.std(ddof=1)),
        place=place,
        critical_one_sided=_critical(n, alpha / n),
        critical_two_sided=_critical(n, alpha / (2 * n)),
    )


def generalised_esd(values: Sequence[float], most: int, *, alpha: float = 0.05) -> Esd:
    """Up to ``most`` outliers; their number is the LARGEST i with R_i above its critical value.

    Source: B. Rosner, Technometrics 25 (1983) 165. For about 25 normal values and more.
    Raises OutOfRangeError for ``most`` outside 1 to n - 3.
    """
    x = _spread(values, 4)
    if not 1 <= most <= x.size - 3:
        raise OutOfRangeError(f"most must lie in 1 to {x.size - 3}; got {most}")
    left = list(range(x.size))
    r, critical, taken = [], [], []
    for i in range(1, most + 1):
        rest = x[left]
        sd = float(rest.std(ddof=1))
        if sd == 0.0:
            break
        far = int(np.argmax(np.abs(rest - rest.mean())))
        r.append(float(abs(rest[far] - rest.mean()) / sd))
        n = x.size - i + 1
        critical.append(_critical(n, alpha / (2 * n)))
        taken.append(left.pop(far))
    count = max(
        (i for i, (a, b) in enumerate(zip(r, critical, strict=True), 1) if a > b), default=0
    )
    return Esd(r=tuple(r), critical=tuple(critical), places=tuple(taken[:count]))


def dixon_q(values: Sequence[float]) -> float:
    """Gap over range of the end value that lies farther apart. Source: ASTM E178 (r10)."""
    x = np.sort(_spread(values, 3))
    return float(max(x[1] - x[0], x[-1] - x[-2]) / (x[-1] - x[0]))


def apart_from_median(values: Sequence[float], *, width: float = 3.5) -> tuple[int, ...]:
    """Places more than ``width`` robust standard deviations from the median.

    Source: B. Iglewicz and D. Hoaglin, How to Detect and Handle Outliers, ASQC 1993. Where more
    than half the values are equal the spread is 0 and nothing is flagged.
    """
    x = np.asarray(values, dtype=float)
    if x.size < 3 or not np.all(np.isfinite(x)):
        raise OutOfRangeError(f"at least 3 finite values are needed; got {tuple(values)}")
    deviations = np.abs(x - np.median(x))
    spread = NORMAL_MAD * float(np.median(deviations))
    if spread == 0.0:
        return ()
    return tuple(int(k) for k in np.nonzero(deviations > width * spread)[0])


def _critical(n: int, tail: float) -> float:
    quantile = float(student.isf(tail, n - 2))
    return (n - 1) / sqrt(n) * sqrt(quantile**2 / (n - 2 + quantile**2))


def _spread(values: Sequence[float], least: int) -> np.ndarray:
    x = np.asarray(values, dtype=float)
    if x.size < least or not np.all(np.isfinite(x)):
        raise OutOfRangeError(f"at least {least} finite values are needed; got {tuple(values)}")
    if np.ptp(x) == 0.0:
        raise OutOfRangeError("all values are equal; nothing can lie apart")
    return x
