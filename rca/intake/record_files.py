"""Pressure, temperature, speed and level records: CSV and Parquet, read in blocks, in SI.

A slow record (below ``FAST_HZ``) is pooled into bins that keep mean and extremes; of a fast one
the longest unbroken stretch is handed on as a burst. Memory is that of the bins and the burst,
whatever the length of the file. Time is the file's stamps in the stated zone, plus the stated
offset and drift. What can't be read is counted and said, never filled in.
"""

from collections.abc import Callable, Iterator
from dataclasses import dataclass
from pathlib import Path

import numpy as np
import numpy.typing as npt

from rca.base.errors import Problem
from rca.base.source import Source
from rca.base.units import Scale, channel_scale
from rca.case.model import Case, RecordFile
from rca.case.series import AlignedRecord, Spell
from rca.intake.record_bins import Bins, TimeBase, aligned, column_of
from rca.intake.record_blocks import (
    Block,
    OpenRecord,
    RecordError,
    blocks,
    ends,
    opened,
    record_error,
    slowly,
)
from rca.intake.record_cells import without_error_values
from rca.intake.record_remarks import column_remarks, file_remarks
from rca.intake.record_spells import SpellFinder, Stretch
from rca.intake.record_steps import Steps, Timing, sampling_interval

FloatArray = npt.NDArray[np.float64]
FAST_HZ = 500.0
BURST_SAMPLES = 4_000_000
STRAY_S = 86400.0  # stamps further than this outside the file's own ends are of a lost clock ...
STRAY_SHARE = 0.05  # more of them than this: the file has no order that could be relied upon
IMPOSSIBLE = -0.05e5  # [Pa], an absolute pressure below it is a spike
INLET = "inlet pressure"


@dataclass(frozen=True, slots=True, kw_only=True)
class Burst:
    """A fast record of one quantity, evenly sampled, in SI."""

    quantity: str
    start_s: float
    rate_hz: float
    values: FloatArray
    source: Source


@dataclass(frozen=True, slots=True, kw_only=True)
class FileSummary:
    """One record file as it was read."""

    file: str
    rows: int
    start_s: float
    end_s: float
    interval_s: float
    gaps: tuple[tuple[float, float], ...]  # (start, end), seconds of true time
    bad_stamps: int  # unreadable, or of a clock that had lost the time
    backward_stamps: int
    bad_cells: dict[str, int]
    offset_s: float
    channels: tuple[str, ...]
    fast: bool
    repeated_stamps: int = 0  # equal neighbours: a clock coarser than the sampling; all are kept
    remarks: tuple[Problem, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class RecordReading:
    """All records of a case."""

    aligned: AlignedRecord | None
    bursts: tuple[Burst, ...]
    files: tuple[FileSummary, ...]
    problems: tuple[Problem, ...]
    spells: tuple[Spell, ...] | None = None  # raw samples of the inlet below the limit, where told


@dataclass(frozen=True, slots=True)
class _Planned:
    """A file and what its first and last rows say of its time."""

    record: RecordFile
    first: float  # [s], true time of its earliest and latest end
    last: float
    interval: float
    zero: float  # [s], stamp the drift counts from

    @property
    def fast(self) -> bool:
        return 0.0 < self.interval <= 1.0 / FAST_HZ


def read_records(
    folder: Path,
    case: Case,
    *,
    atmosphere: float,
    bin_s: float | None = None,
    limit: float | None = None,
) -> RecordReading:
    """Every record of the case; a file that can't be read becomes a problem, the rest goes on.

    ``atmosphere`` [Pa] is added to gauge pressures. ``limit`` [Pa absolute] asks for the spells
    of the inlet pressure below it.
    """
    problems: list[Problem] = []
    plans: list[_Planned] = []
    for record in case.records:
        with _told(problems), opened(folder, record) as file:
            plans.append(_planned(file))
    slow = [p for p in plans if not p.fast]
    base = TimeBase([(p.first, p.last, p.interval) for p in slow], bin_s) if slow else None
    series, bursts, files = [], [], []
    finders: list[SpellFinder] = []
    for plan in plans:
        with _told(problems), opened(folder, plan.record) as file:
            read = _read(file, plan, base, atmosphere, limit)
            files.append(read.summary)
            problems += read.summary.remarks
            bursts += read.bursts
            if read.bins is not None:
                series += read.bins.series(plan.record, read.summary.interval_s)
            finders += [read.finder] if read.finder is not None else []
    return RecordReading(
        aligned=aligned(base, series) if base is not None and series else None,
        bursts=tuple(bursts),
        files=tuple(files),
        problems=tuple(problems),
        spells=finders[0].spells() if len(finders) == 1 else None,
    )


class _told:  # noqa: N801  reads as a phrase
    """A record's error becomes a problem of the reading."""

    def __init__(self, problems: list[Problem]) -> None:
        self.problems = problems

    def __enter__(self) -> None:
        return None

    def __exit__(self, kind: object, error: BaseException | None, trace: object) -> bool:
        if isinstance(error, RecordError):
            self.problems.append(error.problem)
            return True
        return False


def _planned(file: OpenRecord) -> _Planned:
    head, tail = ends(file)
    if not head.size or not tail.size:
        raise record_error(
            file.record,
            "no row with a readable time",
            "a time in every row",
            "Check the time column and its format.",
        )
    stated = file.record.time.rate_hz if not file.record.time.column else None
    interval = 1.0 / stated if stated else sampling_interval(np.diff(np.sort(head)))
    # the middle of a few rows: a lost stamp at an end must not stretch the record
    a, b = float(np.median(head[:25])), float(np.median(tail[-25:]))
    reach = STRAY_S + 50.0 * interval
    both = np.concatenate([head, tail])
    near = both[(both >= min(a, b) - reach) & (both <= max(a, b) + reach)]
    zero = float(near.min())
    first, last = _true(np.array([near.min(), near.max()]), file.record, zero)
    return _Planned(file.record, float(first), float(last), interval, zero)


def _true(stamps: FloatArray, record: RecordFile, zero: float) -> FloatArray:
    """True time of stamps [s]: plus the stated offset and drift."""
    axis = record.time
    if not axis.offset_s and not axis.drift_ppm:
        return stamps
    return np.asarray(stamps + axis.offset_s + (stamps - zero) * axis.drift_ppm * 1e-6)


@dataclass(slots=True)
class _Read:
    summary: FileSummary
    bins: Bins | None
    finder: SpellFinder | None
    bursts: list[Burst]


def _read(
    file: OpenRecord,
    plan: _Planned,
    base: TimeBase | None,
    atmosphere: float,
    limit: float | None,
) -> _Read:
    """The file in one pass; in a slower one where its cells are not what its ends promised."""
    import polars as pl  # noqa: PLC0415  its thread pool must not exist before a fork

    def one(source: Callable[[OpenRecord], Iterator[Block]]) -> _Read:
        return _Pass(file, plan, base, atmosphere, limit).over(source(file))

    try:
        read = one(blocks)
    except pl.exceptions.PolarsError:
        read = one(slowly)
    return read


class _Pass:
    """One pass over the blocks of a file."""

    def __init__(
        self,
        file: OpenRecord,
        plan: _Planned,
        base: TimeBase | None,
        atmosphere: float,
        limit: float | None,
    ) -> None:
        self.file, self.plan, self.atmosphere = file, plan, atmosphere
        record = plan.record
        taken: dict[str, tuple[str, Scale]] = {}
        for channel in record.channels:
            if channel.quantity not in [q for q, _ in taken.values()]:
                scale = channel_scale(channel.quantity, channel.unit)
                taken[channel.column] = (channel.quantity, scale)
        self.scales = taken
        self.quantities = [q for q, _ in taken.values()]
        self.bad_cells = dict.fromkeys(self.quantities, 0)
        self.examples: dict[str, str] = {}
        self.error_values = dict.fromkeys(self.quantities, 0)
        self.bad_stamps = self.strays = 0
        self.steps = Steps(plan.interval)
        self.bins = Bins(base, self.quantities) if base is not None and not plan.fast else None
        self.stretch = Stretch(self.steps.gap, BURST_SAMPLES) if plan.fast else None
        wanted = limit is not None and INLET in self.quantities and not plan.fast
        self.finder = (
            SpellFinder(limit, IMPOSSIBLE, plan.interval) if wanted and limit is not None else None
        )

    def over(self, source: Iterator[Block]) -> _Read:
        """The file's samples in bins, spells and stretches, and its summary."""
        for block in source:
            self._take(block)
        timing = self.steps.timing(self.file.record.time)
        if timing is None:
            raise record_error(
                self.plan.record,
                "no row with a readable time",
                "a time in every row",
                "Check the time column and its format.",
            )
        summary = self._summary(timing)
        return _Read(summary, self.bins, self.finder, self._bursts(summary))

    def _take(self, block: Block) -> None:
        true = _true(block.stamps, self.plan.record, self.plan.zero)
        with np.errstate(invalid="ignore"):
            known = (true >= self.plan.first - STRAY_S) & (true <= self.plan.last + STRAY_S)
        self.bad_stamps += int((~known).sum())
        self.strays += int((~known & np.isfinite(true)).sum())
        whole = bool(known.all())
        time = true if whole else true[known]
        columns = {}
        for column, (quantity, scale) in self.scales.items():
            self.bad_cells[quantity] += block.bad_cells[column]
            if column in block.examples:
                self.examples.setdefault(quantity, block.examples[column])
            values, lost = without_error_values(block.columns[column])
            self.error_values[quantity] += lost
            columns[quantity] = _si(values if whole else values[known], scale, self.atmosphere)
        self.steps.add(time)
        if self.bins is not None:
            self.bins.add(time, columns)
        if self.finder is not None:
            self.finder.add(time, columns[INLET])
        if self.stretch is not None:
            self.stretch.add(time, columns)

    def _summary(self, timing: Timing) -> FileSummary:
        record = self.plan.record
        rows = timing.rows + self.bad_stamps
        if self.strays > STRAY_SHARE * rows:
            raise record_error(
                record,
                f"{self.strays} of {rows} rows outside the times of its first and last rows",
                "rows in the order of time",
                "Sort the file by time, or split it where the logger's clock was set.",
            )
        return FileSummary(
            file=record.file,
            rows=timing.rows,
            start_s=timing.start,
            end_s=timing.end,
            interval_s=timing.interval,
            gaps=timing.gaps,
            bad_stamps=self.bad_stamps,
            backward_stamps=timing.backward,
            bad_cells={q: n for q, n in self.bad_cells.items() if n},
            offset_s=record.time.offset_s,
            channels=tuple(c.quantity for c in record.channels),
            fast=self.plan.fast,
            repeated_stamps=timing.repeated,
            remarks=(
                *file_remarks(self.file, set(self.scales), self.strays),
                *(r for c, q in self.scales.items() for r in self._column(c, q[0], timing.rows)),
            ),
        )

    def _column(self, column: str, quantity: str, rows: int) -> tuple[Problem, ...]:
        return column_remarks(
            self.file,
            column,
            bad=self.bad_cells[quantity],
            example=self.examples.get(quantity, ""),
            error_values=self.error_values[quantity],
            rows=rows,
        )

    def _bursts(self, summary: FileSummary) -> list[Burst]:
        if self.stretch is None:
            return []
        first, time, columns = self.stretch.longest()
        record = self.plan.record
        size = time.size
        part = f", samples {first + 1} to {first + size} of {summary.rows}"
        return [
            Burst(
                quantity=quantity,
                start_s=float(time[0]),
                rate_hz=1.0 / summary.interval_s,
                values=values,
                source=Source(
                    file=record.file,
                    locator=f"column {column_of(record, quantity)}"
                    + (part if size < summary.rows else ""),
                ),
            )
            for quantity, values in columns.items()
        ]


def _si(values: FloatArray, scale: Scale, atmosphere: float) -> FloatArray:
    shift = scale.offset + (atmosphere if scale.gauge else 0.0)
    made = values * scale.factor
    if shift:
        made += shift
    return np.asarray(made)
