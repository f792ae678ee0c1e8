"""Where a series changed its level, if anywhere: exploratory, never a proof."""

from collections.abc import Sequence
from dataclasses import dataclass
from math import exp

import numpy as np
from scipy.stats import rankdata

from rca.base.errors import OutOfRangeError


@dataclass(frozen=True, slots=True, kw_only=True)
class Pettitt:
    """The split that separates the ranks most."""

    k: float
    last_before: int  # place of the last value before the change, from 0
    p: float  # approximate, two-sided
    mean_before: float
    mean_after: float


def pettitt(values: Sequence[float]) -> Pettitt:
    """K = max |2 R_t - t (n+1)| over the splits, p ~ 2 exp(-6 K^2/(n^3+n^2)).

    Source: A. N. Pettitt, Applied Statistics 28 (1979) 126. The approximation of p is good below
    0.5 and errs high for short series. A trend also makes a split. At least 4 values.
    """
    x = np.asarray(values, dtype=float)
    n = x.size
    if n < 4 or not np.all(np.isfinite(x)):
        raise OutOfRangeError(f"pettitt needs at least 4 finite values; got {tuple(values)}")
    t = np.arange(1, n)
    u = 2.0 * np.cumsum(rankdata(x))[:-1] - t * (n + 1.0)
    place = int(np.argmax(np.abs(u)))
    k = float(abs(u[place]))
    return Pettitt(
        k=k,
        last_before=place,
        p=min(1.0, 2.0 * exp(-6.0 * k * k / (n**3 + n**2))),
        mean_before=float(x[: place + 1].mean()),
        mean_after=float(x[place + 1 :].mean()),
    )
