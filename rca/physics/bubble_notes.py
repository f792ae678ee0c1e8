"""Compiled bookkeeping of a bubble history: peaks, times above limits, the ignition integral.

The compiled callers in ``bubble_kernel`` are cached on disk by that file's date: after a change
here, touch it too.
"""

import numpy as np
from numba import njit

from rca.physics.bubble_cells import (
    O_ABOVE_1,
    O_ABOVE_2,
    O_CORE,
    O_CORE_TIME,
    O_DELAY_INTEGRAL,
    O_MEAN,
    O_PRESSURE,
    O_RADIUS_MIN,
    O_WALL,
    P_DELAY_FACTOR,
)

H_RADIUS, H_PRESSURE, H_CORE, H_MEAN, H_WALL, H_TIME = 0, 1, 2, 3, 4, 5


@njit(cache=True, nogil=True)
def log_delay(inverse_t: float, log_p: float, grid: np.ndarray, frame: np.ndarray) -> float:
    """Ln of the ignition delay [s], bilinear in 1/T and ln p, linear beyond the edges.

    ``frame`` = 1/T of the first row, its step, ln p of the first column, its step.
    """
    a, b = (inverse_t - frame[0]) / frame[1], (log_p - frame[2]) / frame[3]
    i = min(max(int(np.floor(a)), 0), grid.shape[0] - 2)
    j = min(max(int(np.floor(b)), 0), grid.shape[1] - 2)
    a, b = a - i, b - j
    low = grid[i, j] + b * (grid[i, j + 1] - grid[i, j])
    high = grid[i + 1, j] + b * (grid[i + 1, j + 1] - grid[i + 1, j])
    return float(low + a * (high - low))


@njit(cache=True, nogil=True)
def _above(before: float, after: float, limit: float, step: float) -> float:
    """Part of a step during which a linear course lies above the limit."""
    if before >= limit and after >= limit:
        return step
    if before < limit and after < limit:
        return 0.0
    return step * (max(before, after) - limit) / abs(after - before)


@njit(cache=True, nogil=True)
def mean_temperature(n_gas: int, y: np.ndarray, mass: np.ndarray) -> float:
    """Mass mean of the gas temperature [K]."""
    total, weight = 0.0, 0.0
    for i in range(n_gas):
        total += mass[i] * y[2 + i]
        weight += mass[i]
    return total / weight


@njit(cache=True, nogil=True)
def note(
    t: float,
    h: float,
    n_gas: int,
    y: np.ndarray,
    side: np.ndarray,
    before: np.ndarray,
    mass: np.ndarray,
    par: np.ndarray,
    limits: np.ndarray,
    delays: np.ndarray,
    frame: np.ndarray,
    out: np.ndarray,
) -> None:
    """Peaks, times above limits and the delay integral after an accepted step.

    ``before`` = core temperature and 1/tau at the start of the step; updated.
    """
    core, p = y[2], side[0]
    wall = side[3] * y[1 + n_gas] + (1.0 - side[3]) * y[2 + n_gas]
    if core > out[O_CORE]:
        out[O_CORE], out[O_CORE_TIME] = core, t
    out[O_MEAN] = max(out[O_MEAN], mean_temperature(n_gas, y, mass))
    out[O_WALL] = max(out[O_WALL], wall)
    out[O_PRESSURE] = max(out[O_PRESSURE], p)
    out[O_RADIUS_MIN] = min(out[O_RADIUS_MIN], side[2])
    out[O_ABOVE_1] += _above(before[0], core, limits[0], h)
    out[O_ABOVE_2] += _above(before[0], core, limits[1], h)
    rate = 0.0
    if core > 500.0:
        rate = np.exp(-log_delay(1.0 / core, np.log(p), delays, frame)) / par[P_DELAY_FACTOR]
    out[O_DELAY_INTEGRAL] += 0.5 * h * (before[1] + rate)
    before[0], before[1] = core, rate


@njit(cache=True, nogil=True)
def record(
    t: float, n_gas: int, y: np.ndarray, side: np.ndarray, mass: np.ndarray,
    history: np.ndarray, count: int,
) -> int:  # fmt: skip
    """Append to the history; thin it to every other row when it is full."""
    size = history.shape[0]
    if size == 0:
        return 0
    if count == size:
        for i in range(size // 2):
            history[i] = history[2 * i]
        count = size // 2
    wall = side[3] * y[1 + n_gas] + (1.0 - side[3]) * y[2 + n_gas]
    row = history[count]
    row[H_TIME], row[H_RADIUS], row[H_PRESSURE] = t, side[2], side[0]
    row[H_CORE], row[H_MEAN], row[H_WALL] = y[2], mean_temperature(n_gas, y, mass), wall
    return count + 1
