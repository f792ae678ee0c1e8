"""Pressure, temperature, speed and level records: CSV and Parquet, read in blocks, in SI.

A slow record (below ``FAST_HZ``) is pooled into bins that keep mean and extremes; a fast one is
handed on as a burst. Time is the file's stamps in the stated zone, plus the stated offset and
drift. What can't be read is counted and said, never filled in.
"""

from collections.abc import Callable, Iterator
from dataclasses import dataclass, field, replace
from pathlib import Path

import numpy as np
import numpy.typing as npt

from rca.base.errors import Problem, Severity
from rca.base.source import Source
from rca.base.units import Scale, channel_scale
from rca.case.model import Case, RecordFile
from rca.case.series import AlignedRecord
from rca.intake.record_align import align, column_of
from rca.intake.record_time import choose_format, read_stamps

FloatArray = npt.NDArray[np.float64]
FAST_HZ = 500.0
BLOCK_ROWS = 500_000
BURST_SAMPLES = 4_000_000
GAP_INTERVALS = 5.0  # a step this many sampling intervals long is a gap


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
    bad_stamps: int
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


@dataclass(slots=True)
class _Collected:
    """Samples of one file before alignment."""

    time: list[FloatArray] = field(default_factory=list)
    columns: dict[str, list[FloatArray]] = field(default_factory=dict)


class RecordError(ValueError):
    """A record can't be read; carries the problem."""

    def __init__(self, problem: Problem) -> None:
        self.problem = problem
        super().__init__(str(problem))


def read_records(
    folder: Path, case: Case, *, atmosphere: float, bin_s: float | None = None
) -> RecordReading:
    """Every record of the case; a file that can't be read becomes a problem, the rest goes on."""
    problems: list[Problem] = []
    slow: list[tuple[RecordFile, FloatArray, dict[str, FloatArray], FileSummary]] = []
    bursts: list[Burst] = []
    files: list[FileSummary] = []
    for record in case.records:
        try:
            time, columns, summary = read_file(folder, record, atmosphere=atmosphere)
        except RecordError as error:
            problems.append(error.problem)
            continue
        files.append(summary)
        problems += summary.remarks
        if summary.fast:
            bursts += _bursts(record, time, columns, summary)
        else:
            slow.append((record, time, columns, summary))
    return RecordReading(
        aligned=align([(r, t, c, f.interval_s) for r, t, c, f in slow], bin_s) if slow else None,
        bursts=tuple(bursts),
        files=tuple(files),
        problems=tuple(problems),
    )


def read_file(
    folder: Path, record: RecordFile, *, atmosphere: float
) -> tuple[FloatArray, dict[str, FloatArray], FileSummary]:
    """One record file: true time [s since 1970 UTC] and each quantity in SI.

    Raises RecordError for a missing column, no readable time or an unreadable file.
    """
    scales = {
        c.column: (c.quantity, channel_scale(c.quantity, c.unit))
        for i, c in enumerate(record.channels)
        if c.quantity not in [earlier.quantity for earlier in record.channels[:i]]
    }
    collected = _Collected(columns={quantity: [] for quantity, _ in scales.values()})
    bad_cells = dict.fromkeys(collected.columns, 0)
    bad_stamps = seen = 0
    path = folder / record.file
    form, rival = _time_format(lambda: _blocks(path, record, only_time=True), record)
    for frame in _blocks(path, record):
        stamps = _stamps(frame, record, seen, form)
        seen += stamps.size
        known = np.isfinite(stamps)
        bad_stamps += int((~known).sum())
        collected.time.append(stamps[known])
        for column, (quantity, scale) in scales.items():
            values, bad = _numbers(frame, column, record)
            bad_cells[quantity] += bad
            collected.columns[quantity].append(_si(values, scale, atmosphere)[known])
    if not collected.time or not sum(t.size for t in collected.time):
        raise _error(
            record,
            "no row with a readable time",
            "a time in every row",
            "Check the time column and its format.",
        )
    time = np.concatenate(collected.time)
    columns = {q: np.concatenate(collected.columns.pop(q)) for q in list(collected.columns)}
    backward = int(np.sum(np.diff(time) < 0))
    if backward:
        order = np.argsort(time, kind="stable")
        time, columns = time[order], {q: v[order] for q, v in columns.items()}
    first = time[0]
    time = time + record.time.offset_s + (time - first) * record.time.drift_ppm * 1e-6
    summary = _summary(record, time, bad_stamps, backward, bad_cells)
    return time, columns, replace(summary, remarks=_remarks(record, scales, rival, form))


def _remarks(
    record: RecordFile, scales: dict[str, tuple[str, Scale]], rival: str, form: str
) -> tuple[Problem, ...]:
    """What a person should look at, though the file was read."""
    found = []
    for channel in record.channels:
        if channel.column not in scales:
            found.append(
                Problem(
                    severity=Severity.WARNING,
                    file=record.file,
                    place=f"column {channel.column}",
                    found=f"a second channel of {channel.quantity}",
                    expected="one channel a quantity; the first one is used",
                    mend="Keep the better sensor first, or remove the other from case.toml.",
                )
            )
    if rival:
        found.append(
            Problem(
                severity=Severity.WARNING,
                file=record.file,
                place=f"column {record.time.column}",
                found=f"stamps that read equally well as {form} and as {rival}",
                expected="stamps that tell day from month",
                mend=f"They are read as {form}; check the date, or export ISO 8601 stamps.",
            )
        )
    return tuple(found)


def _summary(
    record: RecordFile, time: FloatArray, bad_stamps: int, backward: int, bad: dict[str, int]
) -> FileSummary:
    steps = np.diff(time)
    # differences of epoch seconds hold only 0.2 us; a stated rate is exact
    stated = record.time.rate_hz if not record.time.column else None
    interval = 1.0 / stated if stated else _interval(steps)
    places = (
        np.flatnonzero(steps > GAP_INTERVALS * interval) if interval > 0 else np.array([], int)
    )
    return FileSummary(
        file=record.file,
        rows=int(time.size),
        start_s=float(time[0]),
        end_s=float(time[-1]),
        interval_s=interval,
        gaps=tuple((float(time[i]), float(time[i + 1])) for i in places[:200]),
        bad_stamps=bad_stamps,
        backward_stamps=backward,
        bad_cells={q: n for q, n in bad.items() if n},
        offset_s=record.time.offset_s,
        channels=tuple(c.quantity for c in record.channels),
        fast=interval > 0 and 1.0 / interval >= FAST_HZ,
        repeated_stamps=int(np.sum(steps <= 0)),
    )


def _interval(steps: FloatArray) -> float:
    """The sampling interval [s]; under a clock coarser than the sampling, tick over samples."""
    forward = steps[steps > 0]
    if not forward.size:
        return 0.0
    if forward.size > 0.8 * steps.size:
        return float(np.median(forward))
    return float(np.median(forward)) * forward.size / steps.size


def _blocks(path: Path, record: RecordFile, *, only_time: bool = False) -> Iterator[object]:
    """Frames of text (CSV) or typed columns (Parquet), at most ``BLOCK_ROWS`` rows each."""
    import polars as pl  # noqa: PLC0415  its thread pool must not exist before a fork

    wanted = [c.column for c in record.channels]
    wanted += [record.time.column] if record.time.column else []
    try:
        with path.open("rb") as stream:
            magic = stream.read(4)
        if not magic:
            raise _error(record, "an empty file", "a header row and samples", "Export it again.")
        if magic == b"PAR1":
            lazy = pl.scan_parquet(path)
        else:
            lazy = pl.scan_csv(
                path,
                separator=_separator(path, wanted)[0],
                skip_lines=_separator(path, wanted)[1],
                infer_schema=False,
                truncate_ragged_lines=True,
                encoding="utf8-lossy",
            )
        names = [name.strip() for name in lazy.collect_schema().names()]
        lazy = lazy.rename(dict(zip(lazy.collect_schema().names(), names, strict=True)))
    except (pl.exceptions.PolarsError, OSError) as error:
        raise _error(
            record, f"a file that can't be read ({error})", "CSV or Parquet", "Export it again."
        ) from error
    if only_time:
        wanted = [record.time.column]
    for column in wanted:
        if column not in names:
            raise _error(
                record,
                f"no column {column!r}",
                f"one of {', '.join(names[:40])}",
                "Mend the column name in case.toml; capitals and spaces count.",
            )
    try:
        yield from lazy.select(wanted).collect_batches(
            chunk_size=BLOCK_ROWS, maintain_order=True, engine="streaming"
        )
    except pl.exceptions.PolarsError as error:
        raise _error(
            record,
            f"rows that can't be read ({error})",
            "one format throughout",
            "Look at the rows near the end of the file.",
        ) from error


def _separator(path: Path, wanted: list[str]) -> tuple[str, int]:
    """The delimiter, and how many title lines stand above the header."""
    with path.open("rb") as stream:
        head = stream.read(20_000).decode("utf-8-sig", errors="replace").splitlines()[:60]
    for number, line in enumerate(head):
        for delimiter in ";\t,":
            names = [cell.strip().strip('"').strip() for cell in line.split(delimiter)]
            if len(names) > 1 and all(column in names for column in wanted):
                return delimiter, number
    return max(";\t,", key=lambda d: min((line.count(d) for line in head[:10]), default=0)), 0


def _time_format(frames: Callable[[], Iterator[object]], record: RecordFile) -> tuple[str, str]:
    """The format of the time column, from stamps spread over the whole file, and a tied rival."""
    import polars as pl  # noqa: PLC0415

    if not record.time.column:
        return "", ""
    parts: list[pl.Series] = []
    for frame in frames():
        assert isinstance(frame, pl.DataFrame)
        column = frame.get_column(record.time.column)
        if column.dtype != pl.String:
            return "", ""
        if not parts:
            first = choose_format(column.head(2000))
            if first[0] and not first[0].startswith(("%d/", "%m/")):
                return first
        parts += [column.head(100), column.gather_every(max(1, frame.height // 200))]
    return choose_format(pl.concat(parts)) if parts else ("", "")


def _stamps(frame: object, record: RecordFile, before: int, form: str) -> FloatArray:
    """Seconds since 1970 UTC, NaN where a stamp can't be read."""
    import polars as pl  # noqa: PLC0415

    assert isinstance(frame, pl.DataFrame)
    axis = record.time
    if not axis.column:
        assert axis.start is not None and axis.rate_hz is not None  # noqa: PT018
        return axis.start.timestamp() + (before + np.arange(frame.height)) / axis.rate_hz

    def complain() -> Exception:
        return _error(
            record,
            "stamps without a zone",
            "a zone",
            'Add it:  time = { column = "...", zone = "Europe/Vienna" }',
        )

    return read_stamps(frame.get_column(axis.column), form, axis.zone, complain=complain)


def _numbers(frame: object, column: str, record: RecordFile) -> tuple[FloatArray, int]:
    """Values as floats, and how many cells hold something that is no number."""
    import polars as pl  # noqa: PLC0415

    del record
    assert isinstance(frame, pl.DataFrame)
    series = frame.get_column(column)
    if series.dtype.is_numeric():
        return np.asarray(series.cast(pl.Float64).to_numpy(), dtype=float), 0
    numbers = series.cast(pl.Float64, strict=False)
    bad = 0
    if numbers.null_count():
        text = series.cast(pl.String).str.strip_chars()
        if bool(text.str.contains(r"^-?\d+,\d+$").fill_null(value=False).any()):
            text = text.str.replace(",", ".", literal=True)
        numbers = text.cast(pl.Float64, strict=False)
        blank = text.is_null() | (text == "")
        bad = int((numbers.is_null() & ~blank.fill_null(value=True)).sum())
    return np.asarray(numbers.fill_null(float("nan")).to_numpy(), dtype=float), bad


def _si(values: FloatArray, scale: Scale, atmosphere: float) -> FloatArray:
    return np.asarray(values * scale.factor + scale.offset + (atmosphere if scale.gauge else 0.0))


def _bursts(
    record: RecordFile, time: FloatArray, columns: dict[str, FloatArray], summary: FileSummary
) -> list[Burst]:
    steps = np.diff(time)
    tick = float(np.median(steps[steps > 0])) if (steps > 0).any() else summary.interval_s
    edges = np.concatenate([[0], np.flatnonzero(steps > GAP_INTERVALS * tick) + 1, [time.size]])
    longest = int(np.argmax(np.diff(edges)))  # a gap is never bridged
    first, after = int(edges[longest]), int(edges[longest + 1])
    after = min(after, first + BURST_SAMPLES)
    part = f", samples {first + 1} to {after} of {time.size}" if after - first < time.size else ""
    return [
        Burst(
            quantity=quantity,
            start_s=float(time[first]),
            rate_hz=1.0 / summary.interval_s,
            values=values[first:after],
            source=Source(
                file=record.file,
                locator=f"column {column_of(record, quantity)}{part}",
            ),
        )
        for quantity, values in columns.items()
    ]


def _error(record: RecordFile, found: str, expected: str, mend: str) -> RecordError:
    return RecordError(
        Problem(
            severity=Severity.ERROR,
            file=record.file,
            place="",
            found=found,
            expected=expected,
            mend=mend,
        )
    )
