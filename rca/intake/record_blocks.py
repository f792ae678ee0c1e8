"""A record file as blocks of stamps and numbers, whatever wrote it: CSV or Parquet."""

from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass, field, replace
from io import BytesIO
from pathlib import Path
from tempfile import TemporaryDirectory
from typing import TYPE_CHECKING

import numpy as np
import numpy.typing as npt

from rca.base.errors import Problem, Severity
from rca.case.model import RecordFile
from rca.intake.record_cells import Marks, marks_of, numbers
from rca.intake.record_text import header, other_kind, rewrite, rewriting
from rca.intake.record_time import AMBIGUOUS, Clock, StampError, choose_format, read_stamps
from rca.intake.words import nearest

if TYPE_CHECKING:
    import polars as pl

FloatArray = npt.NDArray[np.float64]
BLOCK_ROWS = 50_000  # keeps the peak of memory under 600 MB for any length
HEAD_ROWS = 2000
TAIL_BYTES = 200_000
START_BYTES = 4000


class RecordError(ValueError):
    """A record can't be read; carries the problem."""

    def __init__(self, problem: Problem) -> None:
        self.problem = problem
        super().__init__(str(problem))


@dataclass(frozen=True, slots=True)
class Block:
    """Some rows in the file's order: seconds since 1970 UTC and values in the file's units."""

    stamps: FloatArray  # NaN where unreadable
    columns: dict[str, FloatArray]  # by column name
    bad_cells: dict[str, int]
    examples: dict[str, str] = field(default_factory=dict)  # one of the bad cells


@dataclass(frozen=True, slots=True)
class OpenRecord:
    """A file whose columns and time format are settled."""

    record: RecordFile
    path: Path
    parquet: bool
    separator: str
    title_lines: int
    form: str  # of the time stamps
    rival: str  # another form that reads the stamps as well
    clean: tuple[str, ...]  # columns whose sampled cells are plain numbers
    rows: int | None  # known only where there is no time column
    names: tuple[str, ...] = ()  # of the header, as a person reads them
    marks: dict[str, Marks] = field(default_factory=dict)  # of columns of text

    @property
    def columns(self) -> tuple[str, ...]:
        """The columns of the channels."""
        return tuple(dict.fromkeys(c.column for c in self.record.channels))


@contextmanager
def opened(folder: Path, record: RecordFile) -> Iterator[OpenRecord]:
    """The file, ready to be read in blocks; UTF-16 is written anew as UTF-8 for the time being.

    Raises RecordError for an empty or unreadable file and for a missing column.
    """
    path = folder / record.file
    try:
        with path.open("rb") as stream:
            start = stream.read(START_BYTES)
    except OSError as error:
        raise record_error(
            record, f"a file that can't be read ({error.strerror})", "CSV or Parquet", "Copy it."
        ) from error
    if not start.strip(b"\0"):
        raise record_error(record, "an empty file", "a header row and samples", "Export it again.")
    kind = other_kind(start)
    if kind is not None:
        raise record_error(record, kind[0], "CSV or Parquet", kind[1])
    parquet = start.startswith(b"PAR1")
    encoding = None if parquet else rewriting(start)
    with TemporaryDirectory() as scratch:
        if encoding is not None:
            path = rewrite(path, Path(scratch) / "record.csv", encoding)
        yield _settled(record, path, parquet=parquet)


def blocks(file: OpenRecord) -> Iterator[Block]:
    """All rows, at most ``BLOCK_ROWS`` at a time.

    Columns that looked clean are parsed as numbers by the reader itself; where that fails, the
    caller starts over with ``slowly``. Raises polars' errors, and RecordError for naive stamps
    without a zone.
    """
    yield from _read(file, frozenset(file.clean))


def slowly(file: OpenRecord) -> Iterator[Block]:
    """All rows with every cell looked at as text.

    Raises RecordError where the rows can't be read at all.
    """
    import polars as pl  # noqa: PLC0415  its thread pool must not exist before a fork

    try:
        yield from _read(file, frozenset())
    except pl.exceptions.PolarsError as error:
        raise record_error(
            file.record,
            f"rows that can't be read ({error})",
            "one format throughout",
            "Look at the rows near the end of the file.",
        ) from error


def ends(file: OpenRecord) -> tuple[FloatArray, FloatArray]:
    """Stamps of the first and the last rows, as far as they can be read."""
    if file.rows is not None:
        first = _counted(file.record, 0, min(file.rows, HEAD_ROWS))
        return first, _counted(
            file.record, max(file.rows - HEAD_ROWS, 0), min(file.rows, HEAD_ROWS)
        )
    column = file.record.time.column
    head, tail = (_times(file, frame.get_column(column)) for frame in _head_and_tail(file))
    return head[np.isfinite(head)], tail[np.isfinite(tail)]


def record_error(record: RecordFile, found: str, expected: str, mend: str) -> RecordError:
    """An error of that record."""
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


def _settled(record: RecordFile, path: Path, *, parquet: bool) -> OpenRecord:
    import polars as pl  # noqa: PLC0415

    wanted = [c.column for c in record.channels]
    wanted += [record.time.column] if record.time.column else []
    found = None if parquet else header(path, wanted)
    bare = OpenRecord(
        record=record,
        path=path,
        parquet=parquet,
        separator=found.separator if found else ",",
        title_lines=found.title_lines if found else 0,
        form="",
        rival="",
        clean=(),
        rows=None,
        names=found.names if found else (),
    )
    try:
        return _looked_at(bare, wanted)
    except (pl.exceptions.PolarsError, OSError) as error:
        raise record_error(
            record,
            f"a file that can't be read ({str(error).splitlines()[0][:120]})",
            "rows of one table, CSV or Parquet",
            "Look for a quotation mark that never closes, or export it again.",
        ) from error


def _looked_at(bare: OpenRecord, wanted: list[str]) -> OpenRecord:
    """Columns, marks and time format, from the first and last rows."""
    import polars as pl  # noqa: PLC0415

    record = bare.record
    names = _lazy(bare, frozenset()).collect_schema().names()
    for column in wanted:
        if column not in names:
            near = nearest(column, names, most=1)
            raise record_error(
                record,
                f"no column {column!r}",
                f"one of {', '.join(names[:40])}"[:300],
                (f"Did you mean {near[0]!r}? " if near else "")
                + "Mend the column name in case.toml; capitals and spaces count.",
            )
    head, tail = _head_and_tail(bare)
    clean = tuple(c for c in bare.columns if _is_clean(head, c) and _is_clean(tail, c))
    text = [c for c in bare.columns if c not in clean]
    marks = {c: marks_of(pl.concat([head.get_column(c), tail.get_column(c)])) for c in text}
    form, rival = _time_format(bare, head)
    rows = None
    if not record.time.column:
        rows = int(_lazy(bare, frozenset()).select(pl.len()).collect().item())
    return replace(bare, form=form, rival=rival, clean=clean, rows=rows, marks=marks)


def _lazy(file: OpenRecord, typed: frozenset[str]) -> "pl.LazyFrame":
    import polars as pl  # noqa: PLC0415

    if file.parquet:
        lazy = pl.scan_parquet(file.path)
        return lazy.rename({name: name.strip() for name in lazy.collect_schema().names()})
    raw = _scan(file, {}).collect_schema().names()
    # the second of two equal names, and a name past the header's end, keep the reader's own
    read = [
        file.names[k] if k < len(file.names) and file.names[k] not in file.names[:k] else name
        for k, name in enumerate(name.strip() for name in raw)
    ]
    numeric = {
        name: pl.Float64 for name, as_read in zip(raw, read, strict=True) if as_read in typed
    }
    return _scan(file, numeric).rename(dict(zip(raw, read, strict=True)))


def _scan(file: OpenRecord, numeric: dict[str, type["pl.Float64"]]) -> "pl.LazyFrame":
    import polars as pl  # noqa: PLC0415

    return pl.scan_csv(
        file.path,
        separator=file.separator,
        skip_lines=file.title_lines,
        infer_schema=False,
        schema_overrides=numeric,
        truncate_ragged_lines=True,
        encoding="utf8-lossy",
    )


def _read(file: OpenRecord, typed: frozenset[str]) -> Iterator[Block]:
    import polars as pl  # noqa: PLC0415

    column = file.record.time.column
    wanted = [*file.columns, *([column] if column and column not in file.columns else [])]
    seen, clock = 0, Clock(file.record.time.zone)
    frames = (
        _lazy(file, typed)
        .select(wanted)
        .collect_batches(chunk_size=BLOCK_ROWS, maintain_order=True, engine="streaming")
    )
    for whole in frames:
        frame = whole
        if column and frame.get_column(column).null_count():
            frame = whole.filter(~pl.all_horizontal(pl.all().is_null()))  # empty lines are no rows
        stamps = (
            _times(file, frame.get_column(column), clock)
            if column
            else _counted(file.record, seen, frame.height)
        )
        seen += frame.height
        read = {n: numbers(frame.get_column(n), file.marks.get(n, Marks())) for n in file.columns}
        yield Block(
            stamps,
            {n: c.values for n, c in read.items()},
            {n: c.bad for n, c in read.items()},
            {n: c.example for n, c in read.items() if c.bad},
        )


def _times(file: OpenRecord, column: "pl.Series", clock: Clock | None = None) -> FloatArray:
    """Seconds since 1970 UTC, NaN where a stamp can't be read."""
    axis = file.record.time
    try:
        return read_stamps(
            column,
            file.form,
            clock or Clock(axis.zone),
            start=axis.start.timestamp() if axis.start is not None else None,
        )
    except StampError as error:
        raise record_error(file.record, error.found, error.expected, error.mend) from error


def _counted(record: RecordFile, before: int, rows: int) -> FloatArray:
    axis = record.time
    assert axis.start is not None  # a record has a time column or a start and a rate
    assert axis.rate_hz is not None
    return np.asarray(axis.start.timestamp() + (before + np.arange(rows)) / axis.rate_hz)


def _head_and_tail(file: OpenRecord) -> tuple["pl.DataFrame", "pl.DataFrame"]:
    """The first and the last rows; as text where the file is text."""
    import polars as pl  # noqa: PLC0415

    lazy = _lazy(file, frozenset())
    head = lazy.head(HEAD_ROWS).collect()
    if file.parquet:
        return head, lazy.tail(HEAD_ROWS).collect()
    size = file.path.stat().st_size
    if size <= 2 * TAIL_BYTES:
        return head, lazy.tail(HEAD_ROWS).collect()
    with file.path.open("rb") as stream:
        for _ in range(file.title_lines):
            stream.readline()
        titles = stream.readline()
        stream.seek(-TAIL_BYTES, 2)
        stream.readline()  # the rest of a cut line
        tail = stream.read()
    frame = pl.read_csv(
        BytesIO(titles + tail),
        separator=file.separator,
        infer_schema=False,
        truncate_ragged_lines=True,
        encoding="utf8-lossy",
    )
    names = head.columns[: frame.width]
    return head, frame.rename(dict(zip(frame.columns, names, strict=True)))


def _is_clean(frame: "pl.DataFrame", column: str) -> bool:
    import polars as pl  # noqa: PLC0415

    cells = frame.get_column(column)
    if cells.dtype != pl.String:
        return True
    return cells.cast(pl.Float64, strict=False).null_count() == cells.null_count()


def _time_format(file: OpenRecord, head: "pl.DataFrame") -> tuple[str, str]:
    """The format of the time column, and a tied rival.

    Most are settled by the first rows; day-first and month-first are told apart by stamps spread
    over the whole file.
    """
    import polars as pl  # noqa: PLC0415

    name = file.record.time.column
    if not name or head.get_column(name).dtype != pl.String:
        return "", ""
    first = choose_format(head.get_column(name))
    if first[0] and not first[0].startswith(AMBIGUOUS):
        return first
    parts: list[pl.Series] = []
    for frame in (
        _lazy(file, frozenset())
        .select(name)
        .collect_batches(chunk_size=BLOCK_ROWS, maintain_order=True, engine="streaming")
    ):
        column = frame.get_column(name)
        parts += [column.head(100), column.gather_every(max(1, frame.height // 200))]
    return choose_format(pl.concat(parts)) if parts else ("", "")
