"""Ignition delay of a heavy-alkane vapour in air, as tabulated from detailed kinetics."""

from functools import cache

import numpy as np
import numpy.typing as npt

from rca.base.errors import OutOfRangeError
from rca.physics.delay_grid import DelayGrid, delay_grid

Floats = npt.NDArray[np.float64]

T_RANGE = (650.0, 1300.0)  # [K]
P_RANGE = (10e5, 350e5)  # [Pa]
PUBLISHED_TO = 60e5  # [Pa]; shock-tube and RCM data for such fuels end near here (from memory)
_T = np.array([650.0, 700, 750, 800, 850, 900, 1000, 1100, 1200, 1300])
_P = np.array([10.0, 30, 50, 80, 120, 170, 250, 350]) * 1e5
# Microseconds, phi = 1, constant pressure; mechanism: Wang, Ra, Jia, Reitz, Fuel 136 (2014) 25-36.
_DELAY_US = np.array([
    [26300, 12000, 8660, 6450, 5030, 4080, 3240, 2650],
    [9030, 3070, 2050, 1460, 1100, 875, 683, 553],
    [5850, 1340, 761, 485, 342, 259, 194, 153],
    [4970, 945, 465, 254, 159, 110, 75.7, 56.6],
    [4430, 795, 383, 197, 111, 69.0, 42.7, 28.7],
    [4630, 722, 335, 174, 99.4, 59.9, 33.6, 20.8],
    [1860, 664, 360, 185, 99.8, 58.9, 33.9, 21.3],
    [389, 183, 126, 88.2, 63.7, 47.0, 32.3, 22.4],
    [101, 52.9, 38.0, 27.7, 20.9, 16.4, 12.6, 9.9],
    [34.5, 18.6, 13.8, 10.3, 7.9, 6.3, 4.8, 3.9],
])  # fmt: skip


def ignition_delay(temperature: npt.ArrayLike, pressure: npt.ArrayLike) -> Floats:
    """Delay of stoichiometric n-dodecane vapour in air at constant pressure [s]; inputs broadcast.

    ``temperature`` 650-1300 K, ``pressure`` 10-350 bar absolute [Pa]; above about 60 bar the
    mechanism is used beyond published experiments. Evaporation and mixing are left out, so the
    true delay is longer; oxygen-rich released air about halves it. Kinetics good to 50 %.
    Source: Wang, Ra, Jia, Reitz, Fuel 136 (2014) 25-36, computed with Cantera; bilinear in ln(tau)
    over 1/T and ln p. Raises OutOfRangeError outside the range or for NaN.
    """
    t, p = np.broadcast_arrays(
        np.asarray(temperature, dtype=float), np.asarray(pressure, dtype=float)
    )
    slack = 1e-9
    if not np.all(
        (t >= T_RANGE[0] * (1 - slack)) & (t <= T_RANGE[1] * (1 + slack))
        & (p >= P_RANGE[0] * (1 - slack)) & (p <= P_RANGE[1] * (1 + slack))
    ):  # fmt: skip
        raise OutOfRangeError(
            "ignition_delay is tabulated for 650-1300 K and 10-350 bar absolute (Wang et al."
            f" 2014); got {temperature!r} K, {pressure!r} Pa"
        )
    rows, columns = -1.0 / _T, np.log(_P)
    x, y = -1.0 / t, np.log(p)
    i = np.clip(np.searchsorted(rows, x, side="right") - 1, 0, _T.size - 2)
    j = np.clip(np.searchsorted(columns, y, side="right") - 1, 0, _P.size - 2)
    a = (x - rows[i]) / (rows[i + 1] - rows[i])
    b = (y - columns[j]) / (columns[j + 1] - columns[j])
    table = np.log(_DELAY_US * 1e-6)
    low = table[i, j] * (1 - b) + table[i, j + 1] * b
    high = table[i + 1, j] * (1 - b) + table[i + 1, j + 1] * b
    return np.asarray(np.exp(low * (1 - a) + high * a))


@cache
def delays() -> DelayGrid:
    """``ignition_delay`` as the bubble kernels read it."""
    return delay_grid(ignition_delay, t_range=T_RANGE, p_range=P_RANGE)
