"""Record files as they come: each is read right, or refused with a mend."""

from collections.abc import Callable
from datetime import UTC, datetime
from pathlib import Path

import numpy as np
import pytest

from rca.base.source import Source
from rca.case.model import Case, Channel, Header, RecordFile, TimeAxis
from rca.intake import record_blocks
from rca.intake.record_files import RecordReading, read_records

NOON = 1767614400.0  # 2026-01-05 12:00 UTC
SIZE = 40


def read(folder: Path, raw: bytes, *, unit: str = "bar(a)", **axis: object) -> RecordReading:
    """The reading of one file of those bytes."""
    (folder / "r.csv").write_bytes(raw)
    time = TimeAxis(**({"column": "t", "zone": "UTC"} | axis))  # type: ignore[arg-type]
    channel = Channel(column="P", quantity="inlet pressure", unit=unit)
    source = Source(file="case.toml", locator="r")
    record = RecordFile(file="r.csv", time=time, channels=(channel,), source=source)
    case = Case(header=Header(id="T", title="T"), records=(record,))
    return read_records(folder, case, atmosphere=101325.0, limit=0.8e5)


def stamp(k: int, form: str = "%Y-%m-%d %H:%M:%S", *, shift: float = 0.0) -> str:
    """The stamp of second ``k``."""
    return datetime.fromtimestamp(NOON + shift + k, tz=UTC).strftime(form)


def table(
    write: Callable[[int], object] = stamp,
    value: str = "0.9",
    *,
    mark: str = ",",
    first: int = 0,
    size: int = SIZE,
) -> str:
    """Rows without a header."""
    return "".join(f"{write(k)}{mark}{value}\n" for k in range(first, first + size))


def is_whole(reading: RecordReading, pressure: float = 0.9e5, rows: int = SIZE) -> None:
    """Every second from noon on, at that pressure."""
    summary = reading.files[0]
    assert summary.rows == rows
    assert summary.start_s == pytest.approx(NOON, abs=1e-3)
    assert summary.end_s == pytest.approx(NOON + rows - 1, abs=1e-3)
    assert reading.aligned is not None
    mean = reading.aligned.series["inlet pressure"].mean
    assert mean[np.isfinite(mean)] == pytest.approx(pressure)


HALF_MONTH = 15 * 86400.0


@pytest.mark.outside_value(source="calendar: 2026-01-05 12:00 UTC is 1767614400 s since 1970")
@pytest.mark.parametrize(
    "write",
    [
        lambda k: f"{46027.5 + k / 86400:.8f}",
        lambda k: int(NOON) + k,
        lambda k: (int(NOON) + k) * 1000,
        lambda k: (int(NOON) + k) * 1_000_000,
        lambda k: (int(NOON) + k) * 1_000_000_000,
        lambda k: stamp(k, "%d.%m.%y %H:%M:%S"),
        lambda k: stamp(k, "%d-%b-%Y %H:%M:%S"),
        lambda k: stamp(k, "%Y%m%d %H:%M:%S"),
        lambda k: stamp(k, "%Y-%m-%dT%H:%M:%S+00:00"),
    ],
    ids=["serial", "s", "ms", "us", "ns", "short year", "month name", "compact", "zoned"],
)
def test_stamps(tmp_path: Path, write: Callable[[int], object]) -> None:
    is_whole(read(tmp_path, ("t,P\n" + table(write)).encode()))


@pytest.mark.parametrize(
    "form",
    ["%m/%d/%Y %I:%M:%S %p", "%d/%m/%Y %I:%M:%S %p", "%d-%m-%Y %H:%M:%S", "%m-%d-%Y %H:%M:%S"],
)
def test_day_and_month_first(tmp_path: Path, form: str) -> None:
    """Twelve-hour clocks too; on the twentieth of a month there is no doubt."""
    text = "t,P\n" + table(lambda k: stamp(k, form, shift=HALF_MONTH))
    summary = read(tmp_path, text.encode()).files[0]
    assert summary.start_s == NOON + HALF_MONTH
    assert summary.end_s == NOON + HALF_MONTH + SIZE - 1


@pytest.mark.parametrize(
    ("mark", "value", "pressure"),
    [
        (";", "0,9", 90.0),
        (",", '"0,9"', 90.0),
        (";", "1.013,25", 101325.0),
        (";", "1,013.25", 101325.0),
        (",", '"1,013.25"', 101325.0),
        (";", "1 013,25", 101325.0),
        (";", "1\u202f013,25", 101325.0),
        (";", "1'013.25", 101325.0),
        (";", "+1.01325E+3", 101325.0),
        ("|", "1013.25", 101325.0),
    ],
)
def test_decimal_and_thousands_marks(
    tmp_path: Path, mark: str, value: str, pressure: float
) -> None:
    text = f"t{mark}P\n" + table(value=value, mark=mark)
    is_whole(read(tmp_path, text.encode(), unit="mbar(a)"), pressure)


def test_a_thousand_that_may_be_one_is_said(tmp_path: Path) -> None:
    """Nobody can know; the reading is named, and so is the doubt."""
    reading = read(tmp_path, ("t;P\n" + table(value="1,013", mark=";")).encode())
    is_whole(reading, 1.013e5)
    assert "decimal comma" in reading.problems[0].mend


@pytest.mark.parametrize(
    "encoding", ["utf-8", "utf-8-sig", "utf-16", "utf-16-le", "utf-16-be", "utf-32", "cp1252"]
)
def test_encodings(tmp_path: Path, encoding: str) -> None:
    text = "Prüfstand\nt,P\n" + table()
    is_whole(read(tmp_path, text.encode(encoding)))


def test_a_header_in_an_old_encoding_is_found_by_its_words(tmp_path: Path) -> None:
    text = ("Zeit für Öl,P\n" + table()).encode("cp1252")
    is_whole(read(tmp_path, text, column="Zeit für Öl"))


@pytest.mark.parametrize("end", ["\r\n", "\r", "\n\n"])
def test_line_ends(tmp_path: Path, end: str) -> None:
    reading = read(tmp_path, ("t,P\n" + table()).replace("\n", end).encode())
    is_whole(reading)
    assert reading.files[0].bad_stamps == 0


@pytest.mark.parametrize(
    ("before", "after"),
    [
        ("Logger 7\nSerial, 12, 9, A\n\nt,P\n", ""),
        ("sep=,\nt,P\n", ""),
        ("t,P\n,bar\n", ""),
        ("t,P\ns,bar\n", ""),
        ("t,P,\n", ""),
        ('"t","P"\n', ""),
        (" t , P \n", ""),
        ("t,P\n", "End of data,\nMax,0.9\n"),
        ("t,P\n", "\0" * 300),
    ],
)
def test_what_stands_round_the_rows(tmp_path: Path, before: str, after: str) -> None:
    is_whole(read(tmp_path, (before + table() + after).encode()))


def test_a_header_repeated_inside(tmp_path: Path) -> None:
    text = "t,P\n" + table(size=20) + "t,P\n" + table(first=20, size=20)
    reading = read(tmp_path, text.encode())
    is_whole(reading)
    assert reading.files[0].bad_stamps == 1


def test_shift_logs_put_together_in_the_wrong_order(tmp_path: Path) -> None:
    text = "t,P\n" + table(first=20, size=20) + "t,P\n" + table(size=20)
    reading = read(tmp_path, text.encode())
    is_whole(reading)
    assert reading.files[0].backward_stamps == 1


@pytest.mark.parametrize(
    "word",
    ["NaN", "---", "Bad", "I/O Timeout", "#REF!", "#N/A", "null", "inf", "1.2.3", "0.9 bar"],
)
def test_words_are_no_numbers(tmp_path: Path, word: str) -> None:
    """Counted, left out, and where there are many of them said with an example."""
    text = "t,P\n" + table(size=20) + f"{stamp(20)},{word}\n" + table(first=21, size=19)
    reading = read(tmp_path, text.encode())
    is_whole(reading)
    assert reading.files[0].bad_cells == {"inlet pressure": 1}
    all_bad = read(tmp_path, ("t,P\n" + table(value=word)).encode())
    assert any(word in p.found or "NaN" in p.found for p in all_bad.problems)


@pytest.mark.parametrize("value", ["-9999", "9999", "-999.25", "32767"])
def test_numbers_that_mean_no_value(tmp_path: Path, value: str) -> None:
    """Left out and said; a plain spike is left to the sensor checks."""
    text = "t,P\n" + table(size=20) + f"{stamp(20)},{value}\n" + table(first=21, size=19)
    reading = read(tmp_path, text.encode())
    is_whole(reading)
    assert "loggers write for no value" in reading.problems[0].found


def test_a_size_like_the_others_is_a_value(tmp_path: Path) -> None:
    text = "t,P\n" + table(size=20, value="9800") + f"{stamp(20)},9999\n"
    reading = read(tmp_path, text.encode(), unit="mbar(a)")
    assert not reading.problems
    assert reading.aligned is not None
    assert np.nanmax(reading.aligned.series["inlet pressure"].high) == pytest.approx(9999e2)


@pytest.mark.parametrize(
    "write",
    [lambda k: k, lambda k: f"{k / 10:.1f}", lambda k: f"0:00:{k:02d}"],
    ids=["s", "tenths", "clock"],
)
def test_time_from_zero_asks_for_its_start(tmp_path: Path, write: Callable[[int], object]) -> None:
    text = ("t,P\n" + table(write)).encode()
    refused = read(tmp_path, text)
    assert refused.aligned is None
    assert "start =" in refused.problems[0].mend
    known = read(tmp_path, text, start=datetime.fromtimestamp(NOON, tz=UTC))
    assert known.files[0].start_s == NOON


@pytest.mark.parametrize("block", [5, 9, 1000])
@pytest.mark.parametrize("newest_first", [False, True])
@pytest.mark.outside_value(
    source="IANA time zone database: Vienna leaves summer time 2025-10-26 01:00 UTC"
)
def test_the_hour_that_occurs_twice_wherever_a_block_ends(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, block: int, *, newest_first: bool
) -> None:
    monkeypatch.setattr(record_blocks, "BLOCK_ROWS", block)
    clock = [f"2025-10-26 0{h}:{m}0:00,0.9\n" for h in (1, 2, 2, 3) for m in range(6)]
    rows = reversed(clock) if newest_first else clock
    summary = read(tmp_path, ("t,P\n" + "".join(rows)).encode(), zone="Europe/Vienna").files[0]
    assert summary.end_s - summary.start_s == 23 * 600
    assert summary.gaps == ()
    assert summary.repeated_stamps == 0


@pytest.mark.outside_value(
    source="IANA time zone database: Vienna skips 2026-03-29 02:00 to 03:00; Etc/GMT-1 is UTC+1"
)
def test_an_hour_that_there_never_was_tells_the_wrong_zone(tmp_path: Path) -> None:
    clock = [f"2026-03-29 0{h}:{m}0:00" for h in (1, 2, 3) for m in range(6)]
    text = ("t,P\n" + "".join(f"{c},0.9\n" for c in clock)).encode()
    refused = read(tmp_path, text, zone="Europe/Vienna")
    assert "Etc/GMT-1" in refused.problems[0].mend
    summary = read(tmp_path, text, zone="Etc/GMT-1").files[0]
    assert summary.end_s - summary.start_s == 17 * 600


@pytest.mark.parametrize(
    ("raw", "mend"),
    [
        (b"PK\x03\x04" + b"\0" * 99, "CSV"),
        (b"\xd0\xcf\x11\xe0" + b"\0" * 99, "CSV"),
        (b"\x1f\x8b" + b"\0" * 99, "Unpack"),
        (b"\0" * 500, "Export it again"),
        (("t,P\n" + table() + '"' + table()).encode(), "quotation mark"),
        (b"t,P\n", "time column"),
        (b"t  P\n1  2\n", "column name"),
    ],
)
def test_refused_with_a_mend(tmp_path: Path, raw: bytes, mend: str) -> None:
    reading = read(tmp_path, raw)
    assert reading.aligned is None
    assert mend in reading.problems[0].mend


def test_two_columns_of_one_name_are_said(tmp_path: Path) -> None:
    text = "t,P,P\n" + "".join(f"{stamp(k)},0.9,0.5\n" for k in range(SIZE))
    reading = read(tmp_path, text.encode())
    is_whole(reading)
    assert "two columns" in reading.problems[0].found
