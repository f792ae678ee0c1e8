"""An ignition delay sampled on a regular grid, as the bubble kernels read it."""

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from rca.base.errors import OutOfRangeError

Floats = npt.NDArray[np.float64]
Delay = Callable[[Floats, Floats], Floats]


@dataclass(frozen=True, slots=True, kw_only=True)
class DelayGrid:
    """ln(delay [s]) at equal steps of 1/T and ln p; the kernel goes on linearly past the edges.

    ``t_range`` [K] and ``p_range`` [Pa] are where the source function was asked; beyond them the
    delay is an extrapolation and a result that leans on it must say so.
    """

    log_delay: Floats  # shape (rows in 1/T, columns in ln p)
    frame: Floats  # 1/T of row 0, its step, ln p of column 0, its step
    t_range: tuple[float, float]
    p_range: tuple[float, float]


def delay_grid(
    delay: Delay,
    *,
    t_range: tuple[float, float],
    p_range: tuple[float, float],
    rows: int = 60,
    columns: int = 25,
) -> DelayGrid:
    """Sample ``delay(T [K], p [Pa]) -> [s]`` on a grid of ``rows`` x ``columns``.

    Interpolation error falls with the square of the spacing; 60 x 25 keeps it below the reading
    error of any published table. Raises OutOfRangeError for an empty range or a delay that is not
    positive and finite.
    """
    if not (0 < t_range[0] < t_range[1] and 0 < p_range[0] < p_range[1]):
        raise OutOfRangeError(f"delay_grid needs rising positive ranges; got {t_range}, {p_range}")
    inverse = np.linspace(1 / t_range[1], 1 / t_range[0], rows)
    log_p = np.linspace(np.log(p_range[0]), np.log(p_range[1]), columns)
    t, p = np.meshgrid(1 / inverse, np.exp(log_p), indexing="ij")
    values = np.asarray(delay(np.clip(t, *t_range), np.clip(p, *p_range)), dtype=float)
    if not np.all(np.isfinite(values) & (values > 0)):
        raise OutOfRangeError(
            "delay_grid: the ignition delay is not positive and finite everywhere"
        )
    frame = np.array([inverse[0], inverse[1] - inverse[0], log_p[0], log_p[1] - log_p[0]])
    return DelayGrid(log_delay=np.log(values), frame=frame, t_range=t_range, p_range=p_range)


def never_ignites() -> DelayGrid:
    """A delay of 1e20 s everywhere: for histories that ask nothing about ignition."""
    return delay_grid(
        lambda t, _: np.full_like(t, 1e20), t_range=(300.0, 3000.0), p_range=(1e4, 1e9)
    )
