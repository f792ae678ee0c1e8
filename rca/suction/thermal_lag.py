"""A thermometer that runs behind or ahead of the oil in the line, found from the fit itself.

While the oil warms up, a reading that lags pairs the loss with the wrong viscosity, and part of
the viscous loss is taken for something else. The lag that makes the losses fit best is used, where
it does so by far.
"""

from collections.abc import Callable
from dataclasses import replace

import numpy as np
import numpy.typing as npt

from rca.case.model import Case
from rca.case.series import AlignedRecord, Series
from rca.suction.rows import Rows, suction_rows
from rca.suction.varying_fit import CLIP, Course, fit_varying

FloatArray = npt.NDArray[np.float64]
LAGS_S = (-1800.0, -1200.0, -600.0, -300.0, 300.0, 600.0, 900.0, 1200.0, 1800.0, 2700.0)
Regress = Callable[[Rows], FloatArray]
GAIN = 10.0  # natural logarithm of the likelihood ratio a lag has to bring; judgement
MEMORY_S = 7200.0  # disturbances longer than this do not bear on a lag
MOST_ROWS, LEAST_ROWS = 30_000, 60
VIEW = 8  # knots of the quick fit
FREE = (
    Course(mean=0.0, sd=0.3e5, walk=0.3e5, weight=1.0),
    Course(mean=0.0, sd=0.3e5, walk=0.15e5, weight=1.0),
    Course(mean=0.0, sd=0.2e5, walk=0.15e5, weight=1.0),
    Course(mean=0.0, sd=0.2e5, walk=0.15e5, weight=1.0),
)


def with_lag(aligned: AlignedRecord, lag: float) -> AlignedRecord:
    """The record with the oil temperature taken ``lag`` [s] later, as for one that is behind."""
    temperature = aligned.get("oil temperature")
    bins = round(lag / aligned.bin_s)
    if temperature is None or bins == 0:
        return aligned
    moved = replace(
        temperature,
        mean=_moved(temperature.mean, bins),
        low=_moved(temperature.low, bins),
        high=_moved(temperature.high, bins),
    )
    series: dict[str, Series] = aligned.series | {"oil temperature": moved}
    return replace(aligned, series=series)


def thermometer_lag(case: Case, aligned: AlignedRecord, regress: Regress) -> float:
    """Lag of the oil thermometer [s]; zero where no lag fits better by far.

    ``regress`` makes the regressors of rows. Errs: a true lag is a slow response, not a shift.
    """
    aligned = _thinned(aligned)
    rows = suction_rows(case, aligned)
    if isinstance(rows, str):
        return 0.0
    reference = _misfit(rows, regress, None)
    if reference is None:
        return 0.0
    scale, start, weight = reference
    best, least = 0.0, start
    for lag in sorted({round(s / aligned.bin_s) * aligned.bin_s for s in LAGS_S} - {0.0}):
        moved = suction_rows(case, with_lag(aligned, lag))
        found = None if isinstance(moved, str) else _misfit(moved, regress, scale)
        if found is not None and found[1] < least:
            best, least = float(lag), found[1]
    return best if weight * (start - least) > GAIN else 0.0


def _misfit(
    rows: Rows, regress: Regress, scale: float | None
) -> tuple[float, float, float] | None:
    """Noise, mean squared misfit in that noise (outliers held), and half the independent rows."""
    if int(rows.running.sum()) < LEAST_ROWS:
        return None
    knots = np.linspace(rows.time[0], rows.time[-1], VIEW)
    y = rows.pressure - rows.still
    fit = fit_varying(rows.time, y, regress(rows), knots, tuple((c,) for c in FREE))
    noise = scale if scale is not None else fit.noise
    if noise <= 0.0:
        return None
    z = np.clip(fit.residual / noise, -CLIP, CLIP)[rows.running]
    return noise, float(np.mean(z**2)), 0.5 * z.size / _memory(z, rows)


def _memory(z: FloatArray, rows: Rows) -> float:
    """Rows that carry the information of one, for disturbances of up to MEMORY_S."""
    step = float(np.median(np.diff(rows.time)))
    length = int(np.clip(MEMORY_S / max(step, 1e-3), 1, max(z.size // 16, 1)))
    total = float(np.var(z))
    if length < 2 or total <= 0.0:
        return 1.0
    blocks = z[: z.size // length * length].reshape(-1, length).mean(axis=1)
    return max(1.0, length * float(np.var(blocks)) / total)


def _thinned(aligned: AlignedRecord) -> AlignedRecord:
    """Every so many bins, so that the search stays short; its lags are then coarser too."""
    step = aligned.time_s.size // MOST_ROWS
    if step < 2:
        return aligned
    return AlignedRecord(
        time_s=aligned.time_s[::step],
        bin_s=aligned.bin_s * step,
        series={
            k: replace(v, mean=v.mean[::step], low=v.low[::step], high=v.high[::step])
            for k, v in aligned.series.items()
        },
    )


def _moved(values: FloatArray, bins: int) -> FloatArray:
    out = np.full_like(values, np.nan)
    if bins > 0:
        out[:-bins] = values[bins:]
    else:
        out[-bins:] = values[:bins]
    return out
