"""Records as loggers write them: stamps, zones, decimal signs, gaps, clocks, units."""

from datetime import UTC, datetime
from pathlib import Path

import numpy as np
import pytest

from rca.base.source import Source
from rca.case.model import Case, Channel, Header, RecordFile, TimeAxis
from rca.intake.record_files import RecordReading, read_records

CHANNEL = Channel(column="P", quantity="inlet pressure", unit="bar(a)")
NOON = datetime(2026, 1, 5, 12, 0, tzinfo=UTC).timestamp()


def read(
    folder: Path,
    text: str,
    *,
    channels: tuple[Channel, ...] = (CHANNEL,),
    encoding: str = "utf-8",
    **axis: object,
) -> RecordReading:
    """The reading of one file of that text."""
    (folder / "r.csv").write_text(text, encoding=encoding)
    time = TimeAxis(**({"column": "t", "zone": "UTC"} | axis))  # type: ignore[arg-type]
    record = RecordFile(
        file="r.csv", time=time, channels=channels, source=Source(file="case.toml", locator="r")
    )
    case = Case(header=Header(id="T", title="T"), records=(record,))
    return read_records(folder, case, atmosphere=101325.0)


@pytest.mark.parametrize(
    ("stamps", "zone"),
    [
        (("2026-01-05 12:00:00", "2026-01-05 12:00:01"), "UTC"),
        (("2026-01-05T12:00:00.000Z", "2026-01-05T12:00:01.000Z"), ""),
        (("2026-01-05T13:00:00+01:00", "2026-01-05T13:00:01+01:00"), ""),
        (("05.01.2026 13:00:00", "05.01.2026 13:00:01"), "Europe/Vienna"),
        (("1767614400", "1767614401"), ""),
        (("1767614400000", "1767614401000"), ""),
        (("46027.5", "46027.500011574"), ""),
        (("46027,5", "46027,500011574"), ""),
    ],
)
@pytest.mark.outside_value(source="calendar: 2026-01-05 12:00 UTC is 1767614400 s since 1970")
def test_stamps_become_true_time(tmp_path: Path, stamps: tuple[str, str], zone: str) -> None:
    """Every way to write one instant gives that instant."""
    text = "t;P\n" + "".join(f"{s};0,9\n" for s in stamps)
    summary = read(tmp_path, text, zone=zone).files[0]
    assert summary.start_s == pytest.approx(1767614400.0, abs=1e-3)
    assert summary.end_s == pytest.approx(1767614401.0, abs=1e-3)


@pytest.mark.parametrize("order", ["%d/%m/%Y", "%m/%d/%Y"])
def test_day_and_month_are_told_apart_over_the_whole_file(tmp_path: Path, order: str) -> None:
    """The first days of a month look alike both ways; the rest of the file decides."""
    times = [datetime.fromtimestamp(NOON + 21600 * k, tz=UTC) for k in range(60)]
    text = "t,P\n" + "".join(f"{t.strftime(order + ' %H:%M:%S')},0.9\n" for t in times)
    reading = read(tmp_path, text)
    assert reading.files[0].start_s == NOON
    assert reading.files[0].end_s == NOON + 21600 * 59
    assert not reading.problems


def test_a_date_that_reads_both_ways_is_said(tmp_path: Path) -> None:
    """One day of slashed stamps can't tell day from month; the reader says so."""
    text = "t,P\n" + "".join(f"05/01/2026 12:00:{k:02d},0.9\n" for k in range(30))
    assert any("equally well" in p.found for p in read(tmp_path, text).problems)


@pytest.mark.outside_value(
    source="IANA time zone database: Vienna leaves summer time 2025-10-26 01:00 UTC"
)
def test_the_hour_that_occurs_twice(tmp_path: Path) -> None:
    """Ten-minute stamps over the end of summer time stay ten minutes apart."""
    clock = [f"2025-10-26 0{h}:{m}0:00" for h in (1, 2, 2, 3) for m in range(6)]
    text = "t,P\n" + "".join(f"{c},0.9\n" for c in clock)
    summary = read(tmp_path, text, zone="Europe/Vienna").files[0]
    assert summary.end_s - summary.start_s == 23 * 600
    assert (summary.backward_stamps, summary.repeated_stamps) == (0, 0)


def test_bad_cells_are_counted_and_gaps_stay_open(tmp_path: Path) -> None:
    """Words in a number column become missing samples; an hour without rows stays empty."""
    rows = [f"{NOON + k},0.9" for k in range(100)] + [f"{NOON + 3700 + k},0.8" for k in range(100)]
    rows[5] = f"{NOON + 5},OverRange"
    reading = read(tmp_path, "t,P\n" + "\n".join(rows) + "\n")
    assert reading.files[0].bad_cells == {"inlet pressure": 1}
    assert len(reading.files[0].gaps) == 1
    assert reading.aligned is not None
    inlet = reading.aligned.series["inlet pressure"].mean
    assert np.isnan(inlet[150:3650]).all()


def test_title_lines_offset_drift_and_gauge(tmp_path: Path) -> None:
    """A header below title lines; true time is stamp plus offset plus drift; gauge to absolute."""
    rows = "".join(f"{NOON + 1000 * k};-0,20\n" for k in range(1001))
    reading = read(
        tmp_path,
        "Logger 7\nSite: north\nt;P\n" + rows,
        channels=(Channel(column="P", quantity="inlet pressure", unit="bar(g)"),),
        offset_s=-42.0,
        drift_ppm=10.0,
    )
    assert reading.files[0].start_s == NOON - 42.0
    assert reading.files[0].end_s == pytest.approx(NOON + 1e6 - 42.0 + 10.0)
    assert reading.aligned is not None
    assert reading.aligned.series["inlet pressure"].mean[0] == pytest.approx(81325.0)


def test_a_clock_coarser_than_the_sampling_loses_no_dip(tmp_path: Path) -> None:
    """Ten samples under each whole-second stamp: the one low sample is still there."""
    rows = "".join(f"{int(NOON) + k // 10},{0.3 if k == 505 else 0.9}\n" for k in range(1000))
    reading = read(tmp_path, "t,P\n" + rows)
    assert reading.files[0].interval_s == pytest.approx(0.1, rel=0.02)
    assert reading.files[0].rows == 1000
    assert reading.aligned is not None
    assert np.nanmin(reading.aligned.series["inlet pressure"].low) == pytest.approx(0.3e5)


def test_two_channels_of_one_quantity_are_said(tmp_path: Path) -> None:
    """The first is used, the other is named."""
    text = "t,P,Q\n" + "".join(f"{NOON + k},0.9,0.5\n" for k in range(50))
    both = (CHANNEL, Channel(column="Q", quantity="inlet pressure", unit="bar(a)"))
    reading = read(tmp_path, text, channels=both)
    assert any(p.place == "column Q" for p in reading.problems)
    assert reading.aligned is not None
    assert np.nanmax(reading.aligned.series["inlet pressure"].mean) == pytest.approx(0.9e5)


@pytest.mark.parametrize("text", ["", "t,X\n1,2\n", "t,P\nsoon,0.9\nlater,0.9\n"])
def test_a_file_that_cannot_be_read_is_a_problem(tmp_path: Path, text: str) -> None:
    """No exception, one problem naming the file."""
    reading = read(tmp_path, text)
    assert [p.file for p in reading.problems] == ["r.csv"]
    assert reading.aligned is None
