"""Long inlet records, block by block: every sample against the clean line, pooled for the rest.

Memory holds one block, one table of the clean line and the pooled bins, whatever the length of the
record.
"""

from collections.abc import Iterable
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from rca.base.source import Source
from rca.case.model import Case
from rca.case.series import AlignedRecord, Series
from rca.physics.sample_kernels import bilinear, pool
from rca.records.running import RUNNING_SHARE
from rca.suction.budget import pressure_budget, pump_flow
from rca.suction.measured import NEAR_VAPOUR
from rca.suction.state import inlet_limit

FloatArray = npt.NDArray[np.float64]
Mask = npt.NDArray[np.bool_]
MOST_BINS = 100_000
FLOWS, TEMPERATURES = 129, 321  # nodes of the table
STEP = 100.0  # [Pa], of the histogram of residuals
REACH = 2.0e5  # [Pa], its half width
PIECE = 1 << 16  # samples worked at a time, small enough for the processor's cache


@dataclass(frozen=True, slots=True, kw_only=True)
class Block:
    """A run of samples in SI; arrays of equal length, NaN where there is none."""

    time: FloatArray  # [s], rising
    pressure: FloatArray  # [Pa]
    speed: FloatArray  # [1/s]
    temperature: FloatArray  # [K]


@dataclass(frozen=True, slots=True, kw_only=True)
class SampleStats:
    """Every sample of the running pump against the clean line [Pa]."""

    samples: int
    running: int
    outside: int  # running, but outside the table or not recorded
    mean: float  # measured minus predicted
    rms: float
    p05: float
    p50: float
    p95: float
    below_limit: int | None  # samples of the running pump below the limit
    near_vapour: int
    lowest: float


class LineTable:
    """Inlet pressure of the clean line on a grid of flow and temperature, bilinear between.

    Within 100 Pa of the budget itself for 99 of 100 places over -20 to 100 degC, and within
    250 Pa where the flow turns from laminar to turbulent (held in the tests for one line).
    """

    def __init__(self, case: Case, top_flow: float, low: float, high: float) -> None:
        self.top_flow, self.low, self.high = top_flow, low, high
        flows = np.linspace(0.0, top_flow, FLOWS)
        temperatures = np.linspace(low, high, TEMPERATURES)
        q, t = np.meshgrid(np.maximum(flows, 1e-9 * top_flow), temperatures, indexing="ij")
        self.values = np.ascontiguousarray(pressure_budget(case, q, t).inlet)
        self.per_flow = (FLOWS - 1) / top_flow
        self.per_kelvin = (TEMPERATURES - 1) / (high - low)

    def __call__(self, flow: FloatArray, temperature: FloatArray) -> FloatArray:
        """Inlet pressure [Pa]; NaN outside the table."""
        x, y = flow * self.per_flow, (temperature - self.low) * self.per_kelvin
        return np.asarray(bilinear(self.values, x, y))


def evaluate_blocks(
    case: Case, blocks: Iterable[Block], *, start: float, end: float, source: Source
) -> tuple[SampleStats, AlignedRecord]:
    """Every sample of a long record against the clean line, and the record pooled into bins.

    ``start`` and ``end`` [s] span the record. The pooled record goes on to ``measure_inlet`` and
    ``estimate_resistances``. Raises ValueError where the case lacks what the budget needs, or a
    sample lies outside the span.
    """
    flow = pump_flow(case)
    if flow is None or case.pump.speed is None or case.pump.displacement is None:
        raise ValueError("evaluate_blocks needs the pump's displacement and speed")
    table = LineTable(case, 1.5 * float(flow), 243.15, 383.15)
    count = _Counts(case, table)
    bins = _Bins(start, end)
    for block in blocks:
        for begin in range(0, block.time.size, PIECE):
            part = slice(begin, begin + PIECE)
            piece = Block(
                time=block.time[part],
                pressure=block.pressure[part],
                speed=block.speed[part],
                temperature=block.temperature[part],
            )
            count.add(piece)
            bins.add(piece)
    return count.result(), bins.result(source)


class _Counts:
    def __init__(self, case: Case, table: LineTable) -> None:
        assert case.pump.displacement is not None
        assert case.pump.speed is not None
        self.table, self.volume = table, case.pump.displacement.value
        self.turning = RUNNING_SHARE * case.pump.speed.value
        self.limit, _ = inlet_limit(case)
        self.samples = self.running = self.outside = self.below = self.near = 0
        self.total = self.square = 0.0
        self.lowest = np.inf
        self.histogram = np.zeros(int(2 * REACH / STEP) + 1, dtype=np.int64)

    def add(self, piece: Block) -> None:
        self.samples += piece.time.size
        run = piece.speed > self.turning
        p = piece.pressure[run]
        residual = p - self.table(piece.speed[run] * self.volume, piece.temperature[run])
        good = np.isfinite(residual)
        self.running += p.size
        self.outside += int(p.size - np.count_nonzero(good))
        residual = residual[good]
        if not residual.size:
            return
        self.total += float(residual.sum())
        self.square += float(residual @ residual)
        place = np.clip((residual + REACH) / STEP, 0, self.histogram.size - 1).astype(np.int64)
        self.histogram += np.bincount(place, minlength=self.histogram.size)
        seen = p[good]
        self.lowest = min(self.lowest, float(seen.min()))
        self.near += int(np.count_nonzero(seen < NEAR_VAPOUR))
        if self.limit is not None:
            self.below += int(np.count_nonzero(seen < self.limit))

    def result(self) -> SampleStats:
        n = self.running - self.outside
        share = np.cumsum(self.histogram) / max(n, 1)
        low, mid, high = (
            float(np.searchsorted(share, q) + 0.5) * STEP - REACH for q in (0.05, 0.5, 0.95)
        )
        return SampleStats(
            samples=self.samples,
            running=self.running,
            outside=self.outside,
            mean=self.total / n if n else float("nan"),
            rms=float(np.sqrt(self.square / n)) if n else float("nan"),
            p05=low if n else float("nan"),
            p50=mid if n else float("nan"),
            p95=high if n else float("nan"),
            below_limit=self.below if self.limit is not None else None,
            near_vapour=self.near,
            lowest=self.lowest if n else float("nan"),
        )


class _Bins:
    """Mean and extremes of each quantity in bins of equal width."""

    NAMES = (
        ("inlet pressure", "pressure"),
        ("shaft speed", "speed"),
        ("oil temperature", "temperature"),
    )

    def __init__(self, start: float, end: float) -> None:
        if not end > start:
            raise ValueError("evaluate_blocks needs an end after the start")
        self.start, self.number = start, MOST_BINS
        self.width = max((end - start) / (MOST_BINS - 1), 1e-3)
        self.count = {q: np.zeros(MOST_BINS, dtype=np.int64) for q, _ in self.NAMES}
        self.sum = {q: np.zeros(MOST_BINS) for q, _ in self.NAMES}
        self.low = {q: np.full(MOST_BINS, np.inf) for q, _ in self.NAMES}
        self.high = {q: np.full(MOST_BINS, -np.inf) for q, _ in self.NAMES}

    def add(self, piece: Block) -> None:
        index = ((piece.time - self.start) / self.width).astype(np.int64)
        if index[0] < 0 or index[-1] >= self.number or np.any(np.diff(index) < 0):
            raise ValueError("evaluate_blocks needs rising times between start and end")
        for quantity, name in self.NAMES:
            pool(
                index,
                np.asarray(getattr(piece, name), dtype=np.float64),
                self.count[quantity],
                self.sum[quantity],
                self.low[quantity],
                self.high[quantity],
            )

    def result(self, source: Source) -> AlignedRecord:
        series = {}
        for quantity, _ in self.NAMES:
            count = self.count[quantity]
            empty = count == 0
            with np.errstate(invalid="ignore", divide="ignore"):
                mean = self.sum[quantity] / count
            low, high = self.low[quantity], self.high[quantity]
            low[empty] = high[empty] = np.nan
            series[quantity] = Series(
                quantity=quantity, unit="SI", mean=mean, low=low, high=high, source=source
            )
        centre = np.arange(self.number, dtype=np.float64) + 0.5
        time: FloatArray = np.asarray(self.start + centre * self.width)
        return AlignedRecord(time_s=time, bin_s=self.width, series=series)
