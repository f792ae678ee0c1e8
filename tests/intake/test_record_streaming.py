"""Long files: what is found does not depend on where a block ends, and memory not on length."""

from datetime import UTC, datetime
from pathlib import Path

import numpy as np
import polars as pl
import pytest
from hypothesis import given
from hypothesis import strategies as st

from rca.base.source import Source
from rca.case.model import Case, Channel, Header, RecordFile, TimeAxis
from rca.intake import record_blocks
from rca.intake.record_files import RecordReading, read_records
from rca.intake.record_time import fixed_width

CHANNEL = Channel(column="P", quantity="inlet pressure", unit="bar(a)")
NOON = datetime(2026, 1, 5, 12, 0, tzinfo=UTC).timestamp()
LIMIT = 0.8e5


def read(
    folder: Path, text: str, *, encoding: str = "utf-8", bin_s: float | None = None
) -> RecordReading:
    """The reading of one file of that text."""
    (folder / "r.csv").write_text(text, encoding=encoding)
    record = RecordFile(
        file="r.csv",
        time=TimeAxis(column="t", zone="UTC"),
        channels=(CHANNEL,),
        source=Source(file="case.toml", locator="r"),
    )
    case = Case(header=Header(id="T", title="T"), records=(record,))
    return read_records(folder, case, atmosphere=101325.0, bin_s=bin_s, limit=LIMIT)


def rows(values: dict[int, str | float], size: int = 3000, *, step: float = 1.0) -> str:
    """A healthy record of ``size`` samples with some of them replaced."""
    return "t,P\n" + "".join(f"{NOON + step * k},{values.get(k, 0.95)}\n" for k in range(size))


@pytest.mark.parametrize("block", [7, 100, 1000, 250_000])
def test_spells_run_across_blocks(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, block: int
) -> None:
    monkeypatch.setattr(record_blocks, "BLOCK_ROWS", block)
    low = dict.fromkeys(range(95, 107), 0.6) | {2100: 0.5, 2101: 0.4}
    reading = read(tmp_path, rows(low), bin_s=300.0)
    assert reading.spells is not None
    assert [(s.start_s - NOON, s.duration_s, s.lowest) for s in reading.spells] == [
        (95.0, pytest.approx(12.0), pytest.approx(0.6e5)),
        (2100.0, pytest.approx(2.0), pytest.approx(0.4e5)),
    ]
    assert reading.aligned is not None
    assert reading.aligned.time_s.size == 10  # the bins are far wider than the spells


def test_a_hole_in_the_record_ends_a_spell(tmp_path: Path) -> None:
    text = "t,P\n" + "".join(
        f"{NOON + k},{0.6 if 90 <= k < 410 else 0.95}\n" for k in range(600) if not 100 <= k < 400
    )
    reading = read(tmp_path, text)
    assert reading.spells is not None
    assert [s.duration_s for s in reading.spells] == [10.0, 10.0]
    assert reading.files[0].gaps == ((NOON + 99, NOON + 400),)


def test_impossible_samples_are_no_spell(tmp_path: Path) -> None:
    reading = read(tmp_path, rows({100: -3.0, 101: -3.0}))
    assert reading.spells == ()


def test_a_bad_cell_far_into_the_file_costs_itself_only(tmp_path: Path) -> None:
    """Neither end of the file shows it; the other cells are read as ever."""
    size = 30_000
    reading = read(tmp_path, rows({15_000: "I/O Timeout", 15_001: "", 15_002: 0.5}, size))
    summary = reading.files[0]
    assert summary.rows == size
    assert summary.bad_cells == {"inlet pressure": 1}
    assert reading.spells is not None
    assert [s.lowest for s in reading.spells] == [pytest.approx(0.5e5)]


def test_a_clock_that_lost_the_time_for_a_few_rows_does_not_stretch_the_record(
    tmp_path: Path,
) -> None:
    text = rows({}).replace(f"{NOON + 1500}", "0").replace(f"{NOON + 1501}", "1")
    reading = read(tmp_path, text)
    assert reading.files[0].bad_stamps == 2
    assert any("clock" in p.mend for p in reading.problems)
    assert reading.aligned is not None
    assert reading.aligned.time_s.size == 3000


def test_rows_in_no_order_of_time_are_refused(tmp_path: Path) -> None:
    rng = np.random.default_rng(3)
    days = rng.permutation(5000) * 3600.0
    days[:40], days[-40:] = np.arange(40) * 60.0, np.arange(40) * 60.0
    text = "t,P\n" + "".join(f"{NOON + d},0.95\n" for d in days)
    reading = read(tmp_path, text)
    assert reading.aligned is None
    assert "Sort the file by time" in reading.problems[0].mend


def test_the_newest_row_first_reads_as_well(tmp_path: Path) -> None:
    lines = rows({1200: 0.5}).splitlines()
    reading = read(tmp_path, "\n".join([lines[0], *reversed(lines[1:])]) + "\n")
    summary = reading.files[0]
    assert (summary.start_s, summary.end_s) == (NOON, NOON + 2999)
    assert summary.interval_s == 1.0
    assert summary.gaps == ()
    assert reading.spells is None  # the bins tell the events instead
    assert reading.aligned is not None
    assert float(np.nanmin(reading.aligned.series["inlet pressure"].low)) == pytest.approx(0.5e5)


@pytest.mark.parametrize("encoding", ["utf-16", "utf-8-sig", "latin-1"])
def test_encodings(tmp_path: Path, encoding: str) -> None:
    reading = read(tmp_path, rows({}, 50), encoding=encoding)
    assert reading.files[0].rows == 50
    assert not reading.problems


def test_a_wrong_column_is_answered_with_the_nearest(tmp_path: Path) -> None:
    reading = read(tmp_path, rows({}, 50).replace("t,P", "t,P1"))
    assert "Did you mean 'P1'?" in reading.problems[0].mend


@pytest.mark.parametrize(
    "form", ["%Y-%m-%d %H:%M:%S", "%Y-%m-%dT%H:%M:%S", "%d.%m.%Y %H:%M:%S", "%m/%d/%Y %H:%M:%S"]
)
@given(
    stamps=st.lists(
        st.datetimes(datetime(1905, 1, 1), datetime(2190, 1, 1)),
        min_size=1,
        max_size=30,
    ),
    digits=st.integers(0, 6),
)
def test_stamps_read_by_digits_are_those_of_the_calendar(
    form: str, stamps: list[datetime], digits: int
) -> None:
    """Against the standard library's own calendar."""
    whole = [
        s.replace(microsecond=s.microsecond // 10 ** (6 - digits) * 10 ** (6 - digits))
        for s in stamps
    ]
    part = [f".{s.microsecond:06d}"[: digits + 1] if digits else "" for s in whole]
    text = pl.Series(
        [s.strftime(form).rjust(19, "0") + p for s, p in zip(whole, part, strict=True)]
    )
    found = fixed_width(text, form + "%.f")
    assert found is not None
    assert found == pytest.approx([s.replace(tzinfo=UTC).timestamp() for s in whole], abs=1e-6)


@pytest.mark.parametrize(
    "stamp",
    ["2026-02-30 00:00:00", "2026-13-01 00:00:00", "2026-01-01 24:00:00", "2026-01-0x 00:00:00"],
)
def test_a_stamp_that_is_no_date_is_left_to_the_general_reading(stamp: str) -> None:
    assert fixed_width(pl.Series(["2026-01-01 00:00:00", stamp]), "%Y-%m-%d %H:%M:%S%.f") is None
