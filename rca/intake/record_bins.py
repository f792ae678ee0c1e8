"""Samples pooled into bins while a file is read: memory is that of the bins, not of the file."""

from dataclasses import replace

import numpy as np
import numpy.typing as npt

from rca.base.source import Source
from rca.case.model import RecordFile
from rca.case.series import AlignedRecord, Series

FloatArray = npt.NDArray[np.float64]
MOST_BINS = 200_000


class TimeBase:
    """Equal bins over all slow files of a case."""

    def __init__(
        self, spans: list[tuple[float, float, float]], bin_s: float | None = None
    ) -> None:
        """``spans``: (start, end, sampling interval) of each file [s].

        ``bin_s`` None takes the finest interval, or wider where that makes too many bins.
        """
        start, end = min(s for s, _, _ in spans), max(e for _, e, _ in spans)
        finest = max(min(i for *_, i in spans), 1e-3)
        self.width = float(bin_s or max(finest, (end - start) / MOST_BINS))
        self.origin = float(np.floor(start / self.width) * self.width)
        self.bins = int(np.floor((end - self.origin) / self.width)) + 1

    @property
    def centres(self) -> FloatArray:
        """The middle of every bin [s]."""
        return np.asarray(self.origin + (np.arange(self.bins) + 0.5) * self.width)


class _Groups:
    """Samples of one block that share a bin, side by side."""

    def __init__(self, place: npt.NDArray[np.int64]) -> None:
        """``place``: the bin of every sample, at least one sample."""
        steps = np.diff(place)
        self.order: npt.NDArray[np.intp] | None = None
        if steps.size and steps.min() < 0:
            self.order = np.argsort(place, kind="stable")
            place = place[self.order]
            steps = np.diff(place)
        self.starts = np.concatenate([[0], np.flatnonzero(steps) + 1])
        self.bins = place[self.starts]
        self.sizes = np.diff(np.append(self.starts, place.size))


class Bins:
    """Count, sum and extremes of each quantity of one file."""

    def __init__(self, base: TimeBase, quantities: list[str]) -> None:
        self.base = base
        self.outside = 0  # samples off the time base
        self._count = {q: np.zeros(base.bins) for q in quantities}
        self._sum = {q: np.zeros(base.bins) for q in quantities}
        self._low = {q: np.full(base.bins, np.inf) for q in quantities}
        self._high = {q: np.full(base.bins, -np.inf) for q in quantities}

    def add(self, time: FloatArray, columns: dict[str, FloatArray]) -> None:
        """Samples at true times [s], in any order; NaN values are left out."""
        place = ((time - self.base.origin) * (1.0 / self.base.width)).astype(np.int64)
        within = (time >= self.base.origin) & (place < self.base.bins)
        self.outside += int((~within).sum())
        every = _Groups(place) if within.all() else None
        for quantity, values in columns.items():
            if every is not None and not np.isnan(values.sum()):
                self._pool(quantity, every, values)
                continue
            good = within & np.isfinite(values)
            if good.any():
                self._pool(quantity, _Groups(place[good]), values[good])

    def _pool(self, quantity: str, groups: "_Groups", values: FloatArray) -> None:
        value = values if groups.order is None else values[groups.order]
        bins, starts = groups.bins, groups.starts
        low, high = self._low[quantity], self._high[quantity]
        self._count[quantity][bins] += groups.sizes
        self._sum[quantity][bins] += np.add.reduceat(value, starts)
        low[bins] = np.minimum(low[bins], np.minimum.reduceat(value, starts))
        high[bins] = np.maximum(high[bins], np.maximum.reduceat(value, starts))

    def series(self, record: RecordFile, interval: float) -> list[Series]:
        """The series of every quantity; NaN where there is no sample."""
        return [self._one(record, quantity, interval) for quantity in self._count]

    def _one(self, record: RecordFile, quantity: str, interval: float) -> Series:
        count = self._count[quantity]
        empty = count == 0
        with np.errstate(invalid="ignore", divide="ignore"):
            mean = self._sum[quantity] / count
        made = Series(
            quantity=quantity,
            unit="SI",
            mean=mean,
            low=np.where(empty, np.nan, self._low[quantity]),
            high=np.where(empty, np.nan, self._high[quantity]),
            source=Source(file=record.file, locator=f"column {column_of(record, quantity)}"),
        )
        return _held(made, int(np.ceil(interval / self.base.width)))


def aligned(base: TimeBase, series: list[Series]) -> AlignedRecord:
    """All series on the time base; of two files of one quantity the first file's samples stand."""
    merged: dict[str, Series] = {}
    for one in series:
        merged[one.quantity] = (
            _merged(merged[one.quantity], one) if one.quantity in merged else one
        )
    return AlignedRecord(time_s=base.centres, bin_s=base.width, series=merged)


def _held(series: Series, bins: int) -> Series:
    """A sample stands for one sampling interval, ``bins`` long, and never for longer."""
    places = np.arange(series.mean.size)
    last = np.maximum.accumulate(np.where(np.isfinite(series.mean), places, -1))
    fill = (last >= 0) & (places - last <= bins) & (places > last)
    take = np.where(fill, last, places)
    return replace(series, mean=series.mean[take], low=series.low[take], high=series.high[take])


def _merged(one: Series, other: Series) -> Series:
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
