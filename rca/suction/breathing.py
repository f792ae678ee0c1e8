"""Does the reservoir breathe? Its pressure against the swing of its own level.

A reservoir whose breather is shut holds its air: when cylinders draw oil and the level falls, the
air expands and the tank's pressure falls with it, far more than the head of the oil does. A free
breather lets air in and the pressure stays. The swing of the level over minutes is enough to tell,
with any speed and any temperature.
"""

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
from scipy.ndimage import uniform_filter1d

from rca.case.model import Case
from rca.case.site import local_atmosphere
from rca.suction.rows import Rows
from rca.suction.spread import Spread

FloatArray = npt.NDArray[np.float64]
WINDOW_S = 1800.0  # slower changes are taken out of all quantities
LEAST_SWING = 0.003  # [m], 5 to 95 %, of the level; less is sensor noise
LEAST_RELIABLE = 0.5  # of the level's quick variance that must be more than sensor noise
LEAST_ROWS = 200
HEADSPACE = 0.25  # volume of air over volume of oil; common practice, no source
DEPTH = 0.5  # [m], of the oil where none is stated
SHUT, FREE = 0.2, 0.05  # shares of what a shut tank would show
NOTICED = 0.01e5  # [Pa], a swing a shut tank must be able to show for a free one to be told


@dataclass(frozen=True, slots=True, kw_only=True)
class Breathing:
    """The tank's pressure over the usual swing of its level, beyond the head of the oil."""

    level_swing: float  # [m], 5 to 95 %
    tank_swing: Spread  # [Pa], found
    shut_swing: (
        float  # [Pa], of a tank with no breather at all, isothermal; within a factor of two
    )
    verdict: str  # "free", "shut" or "not told"


def breathing(case: Case, rows: Rows, x: FloatArray) -> Breathing | None:
    """Whether the reservoir breathes; None where no level swing is on record.

    ``x`` (rows, 4) are the regressors of the losses, so that a change of speed that moves the
    level too is not taken for the tank. The level must be recorded at least every few minutes.
    """
    run = rows.running
    if rows.level is None or int(run.sum()) < LEAST_ROWS:
        return None
    time = rows.time[run]
    step = float(np.median(np.diff(time)))
    if step <= 0.0 or step > WINDOW_S / 5.0:
        return None
    width = max(5, int(WINDOW_S / step) | 1)
    level = _quick(rows.level[run], width)
    swing = float(np.subtract(*np.quantile(level, [0.95, 0.05])))
    reliable = _reliability(rows, level, width)
    if swing < LEAST_SWING or reliable < LEAST_RELIABLE:
        return None
    swing *= float(np.sqrt(reliable))
    losses = np.column_stack([_quick(column, width) for column in x[run][:, :2].T])
    quick = _quick(rows.pressure[run] - rows.still[run], width)
    good = np.abs(quick) <= 5.0 * max(1.4826 * float(np.median(np.abs(quick))), 1.0)
    slope, u = _slope(quick[good], level[good], losses[good])
    mean, sd = slope / reliable * swing, u / reliable * swing  # sensor noise flattens a slope
    depth = case.reservoir.oil_depth
    share = swing / (depth.value if depth is not None else DEPTH)
    shut = local_atmosphere(case) * share / HEADSPACE
    return Breathing(
        level_swing=swing,
        tank_swing=Spread(
            mean=mean, sd=sd, p05=mean - 1.645 * sd, p50=mean, p95=mean + 1.645 * sd
        ),
        shut_swing=shut,
        verdict=_verdict(mean, sd, shut),
    )


def _quick(values: FloatArray, width: int) -> FloatArray:
    """What changes faster than the window."""
    return np.asarray(values - uniform_filter1d(values, width, mode="nearest"))


def _reliability(rows: Rows, level: FloatArray, width: int) -> float:
    """Share of the quick level's variance that is the oil's and not the sensor's noise.

    From the level at rest where the pump was seen at rest, else from how far neighbours agree.
    """
    total = float(np.var(level))
    if total <= 0.0 or rows.level is None:
        return 0.0
    rest = rows.level[~rows.running]
    if rest.size >= LEAST_ROWS:
        return 1.0 - float(np.var(_quick(rest, width))) / total
    return float(np.mean(level[1:] * level[:-1])) / total


def _slope(y: FloatArray, level: FloatArray, losses: FloatArray) -> tuple[float, float]:
    """Pressure a metre of level [Pa/m] and its standard error, with the losses fitted beside it.

    The error is from blocks of rows, so that neighbours that go together do not count twice.
    """
    x = np.column_stack([level, losses])
    keep = np.concatenate([[True], x[:, 1:].std(axis=0) > 1e-9])
    x = x[:, keep]
    beta = np.linalg.lstsq(x, y, rcond=None)[0]
    residual = y - x @ beta
    inverse = np.linalg.pinv(x.T @ x)
    blocks = np.array_split(np.arange(y.size), min(50, y.size // 4))
    scores = np.array([x[b].T @ residual[b] for b in blocks])
    covariance = inverse @ (scores.T @ scores) @ inverse
    return float(beta[0]), float(np.sqrt(max(covariance[0, 0], 0.0)))


def _verdict(mean: float, sd: float, shut: float) -> str:
    if mean - 1.645 * sd > SHUT * shut:
        return "shut"
    if shut > NOTICED and mean + 1.645 * sd < FREE * shut:
        return "free"
    return "not told"
