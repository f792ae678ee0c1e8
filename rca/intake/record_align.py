"""Slow records on one time base: bins that keep mean and extremes, gaps left open."""

from dataclasses import replace

import numpy as np
import numpy.typing as npt

from rca.base.source import Source
from rca.case.model import RecordFile
from rca.case.series import AlignedRecord, Series

FloatArray = npt.NDArray[np.float64]
MOST_BINS = 200_000


def align(
    slow: list[tuple[RecordFile, FloatArray, dict[str, FloatArray], float]],
    bin_s: float | None,
) -> AlignedRecord:
    """All slow files on one time base.

    ``slow`` holds of each file its record, true time [s], quantities in SI and sampling interval
    [s]. ``bin_s`` None takes the finest interval, or wider where that makes too many bins.
    """
    start = min(float(time[0]) for _, time, _, _ in slow)
    end = max(float(time[-1]) for _, time, _, _ in slow)
    finest = max(min(interval for *_, interval in slow), 1e-3)
    width = bin_s or max(finest, (end - start) / MOST_BINS)
    origin = np.floor(start / width) * width
    bins = int(np.floor((end - origin) / width)) + 1
    series: dict[str, Series] = {}
    for record, time, columns, interval in slow:
        index = np.floor((time - origin) / width).astype(np.int64)
        for quantity, values in columns.items():
            fresh = _binned(record, quantity, index, values, bins)
            fresh = _held(fresh, int(np.ceil(interval / width)))
            series[quantity] = _merged(series[quantity], fresh) if quantity in series else fresh
    centres = origin + (np.arange(bins) + 0.5) * width
    return AlignedRecord(time_s=centres, bin_s=float(width), series=series)


def _binned(
    record: RecordFile,
    quantity: str,
    index: npt.NDArray[np.int64],
    values: FloatArray,
    bins: int,
) -> Series:
    good = np.isfinite(values)
    place, value = index[good], values[good]
    count = np.bincount(place, minlength=bins)
    with np.errstate(invalid="ignore", divide="ignore"):
        mean = np.bincount(place, weights=value, minlength=bins) / count
    low, high = np.full(bins, np.inf), np.full(bins, -np.inf)
    np.minimum.at(low, place, value)
    np.maximum.at(high, place, value)
    low[count == 0] = high[count == 0] = np.nan
    return Series(
        quantity=quantity,
        unit="SI",
        mean=mean,
        low=low,
        high=high,
        source=Source(file=record.file, locator=f"column {column_of(record, quantity)}"),
    )


def _held(series: Series, bins: int) -> Series:
    """A sample stands for one sampling interval, ``bins`` long, and never for longer."""
    places = np.arange(series.mean.size)
    last = np.maximum.accumulate(np.where(np.isfinite(series.mean), places, -1))
    fill = (last >= 0) & (places - last <= bins) & (places > last)
    take = np.where(fill, last, places)
    return replace(series, mean=series.mean[take], low=series.low[take], high=series.high[take])


def _merged(one: Series, other: Series) -> Series:
    """Two files of one quantity; where both have samples the first file's stand."""
    take = np.isfinite(one.mean)
    return Series(
        quantity=one.quantity,
        unit=one.unit,
        mean=np.where(take, one.mean, other.mean),
        low=np.where(take, one.low, other.low),
        high=np.where(take, one.high, other.high),
        source=Source(
            file=one.source.file,
            locator=f"{one.source.locator}, and {other.source.file} {other.source.locator}",
        ),
    )


def column_of(record: RecordFile, quantity: str) -> str:
    """The column that holds a quantity, by the case."""
    return next(c.column for c in record.channels if c.quantity == quantity)
