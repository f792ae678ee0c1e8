"""A distribution by a few numbers."""

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

FloatArray = npt.NDArray[np.float64]


@dataclass(frozen=True, slots=True, kw_only=True)
class Spread:
    """A distribution by its mean, standard deviation and 5, 50 and 95 % points."""

    mean: float
    sd: float
    p05: float
    p50: float
    p95: float


def spread(values: FloatArray) -> Spread:
    """Mean, standard deviation and quantiles of a sample."""
    low, mid, high = np.quantile(values, [0.05, 0.5, 0.95])
    return Spread(
        mean=float(np.mean(values)),
        sd=float(np.std(values)),
        p05=float(low),
        p50=float(mid),
        p95=float(high),
    )
