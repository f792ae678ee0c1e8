"""CSV and XLSX tables as text, with the address of every cell; nothing is coerced."""

import csv
import io
from dataclasses import dataclass
from datetime import date, datetime
from pathlib import Path
from zipfile import BadZipFile

import openpyxl
from charset_normalizer import from_bytes
from openpyxl.utils import get_column_letter
from openpyxl.utils.exceptions import InvalidFileException

from rca.base.errors import Problem, Severity

LARGEST_BYTES = 64_000_000  # a table of a case; records have readers of their own
DELIMITERS = ",;\t|"


@dataclass(frozen=True, slots=True, kw_only=True)
class Cell:
    """One cell: its text as it stands, and where it stands."""

    text: str
    address: str  # "row 7, column Fe" style for CSV, "Sheet!C7" for XLSX
    typed: str = ""  # of a workbook cell: "number" or "date"; its text then has a decimal point


@dataclass(frozen=True, slots=True, kw_only=True)
class RawTable:
    """All rows of a table; rows may differ in length."""

    file: str
    rows: tuple[tuple[Cell, ...], ...]
    encoding: str = ""
    delimiter: str = ""


class TableError(ValueError):
    """A table can't be read at all; carries the problem."""

    def __init__(self, problem: Problem) -> None:
        self.problem = problem
        super().__init__(str(problem))


def read_table(path: Path, name: str, *, sheet: str = "") -> RawTable:
    """A CSV or XLSX file as rows of text cells.

    Raises TableError for a missing, empty, oversized, mislabelled or broken file.
    """
    if not path.exists():
        raise _error(name, "no such file", "a CSV or XLSX file", "Check the name and the folder.")
    if not path.is_file():
        raise _error(name, "a folder", "a CSV or XLSX file", "Name the file itself.")
    size = path.stat().st_size
    if size == 0:
        raise _error(name, "an empty file", "a header row and data", "Export it again.")
    if size > LARGEST_BYTES:
        raise _error(
            name,
            f"{size / 1e6:.0f} MB",
            f"at most {LARGEST_BYTES / 1e6:.0f} MB for a table",
            "Long records belong under [[records]].",
        )
    content = path.read_bytes()
    if content[:4] == b"PK\x03\x04":
        return _xlsx(content, name, sheet)
    if path.suffix.lower() in (".xlsx", ".xlsm", ".xls"):
        raise _error(
            name,
            "a file that is no XLSX workbook in spite of its name",
            "an XLSX workbook",
            "Open it in a spreadsheet and save it as XLSX or CSV.",
        )
    return _csv(content, name)


def _csv(content: bytes, name: str) -> RawTable:
    text, encoding = _decoded(content, name)
    lines = [line for line in text.splitlines() if line.strip()]
    counts = {d: [line.count(d) for line in lines[:20]] for d in DELIMITERS}
    delimiter = max(DELIMITERS, key=lambda d: (min(counts[d], default=0), sum(counts[d])))
    rows = []
    reader = csv.reader(io.StringIO(text, newline=""), delimiter=delimiter, strict=True)
    try:
        for row in reader:
            rows.append(
                tuple(
                    Cell(text=cell, address=f"line {reader.line_num}, column {number}")
                    for number, cell in enumerate(row, start=1)
                )
            )
    except csv.Error as error:
        raise _error(
            name,
            f"line {reader.line_num}: {error}",
            "a CSV table with balanced quotes",
            "Mend the line in a text editor.",
        ) from error
    return RawTable(file=name, rows=tuple(rows), encoding=encoding, delimiter=delimiter)


def _decoded(content: bytes, name: str) -> tuple[str, str]:
    if b"\0" in content[:4096] and content[:2] not in (b"\xff\xfe", b"\xfe\xff"):
        raise _error(name, "binary data", "a text table", "Export it as CSV or XLSX.")
    for encoding in ("utf-8-sig", "utf-16"):
        if encoding == "utf-16" and content[:2] not in (b"\xff\xfe", b"\xfe\xff"):
            continue
        try:
            return content.decode(encoding), encoding
        except UnicodeDecodeError:
            continue
    best = from_bytes(content, cp_isolation=["cp1252", "cp1250", "latin_1", "mac_roman"]).best()
    if best is None:
        raise _error(name, "bytes of no known encoding", "UTF-8 text", "Export it as UTF-8.")
    return str(best), str(best.encoding)


def _xlsx(content: bytes, name: str, sheet: str) -> RawTable:
    try:
        book = openpyxl.load_workbook(io.BytesIO(content), read_only=True, data_only=True)
    except (BadZipFile, InvalidFileException, KeyError, ValueError, OSError) as error:
        raise _error(
            name, f"a broken workbook ({error})", "an XLSX workbook", "Save it again as XLSX."
        ) from error
    if sheet and sheet not in book.sheetnames:
        raise _error(
            name,
            f"no sheet {sheet!r}",
            f"one of {', '.join(book.sheetnames)}",
            "Mend the key  sheet  in case.toml.",
        )
    page = book[sheet] if sheet else book[book.sheetnames[0]]
    rows = tuple(
        tuple(
            Cell(
                text=_text(value),
                address=f"{page.title}!{get_column_letter(c)}{r}",
                typed=_typed(value),
            )
            for c, value in enumerate(row, start=1)
        )
        for r, row in enumerate(page.iter_rows(values_only=True), start=1)
    )
    return RawTable(file=name, rows=rows, encoding="xlsx")


def _typed(value: object) -> str:
    if isinstance(value, date):
        return "date"
    return "number" if isinstance(value, int | float) and not isinstance(value, bool) else ""


def _text(value: object) -> str:
    if value is None:
        return ""
    if isinstance(value, datetime):
        midnight = (value.hour, value.minute, value.second) == (0, 0, 0)
        return value.date().isoformat() if midnight else value.isoformat()
    if isinstance(value, date):
        return value.isoformat()
    if isinstance(value, float):
        return repr(int(value)) if value.is_integer() and abs(value) < 1e15 else repr(value)
    return str(value)


def _error(name: str, found: str, expected: str, mend: str) -> TableError:
    return TableError(
        Problem(
            severity=Severity.ERROR, file=name, place="", found=found, expected=expected, mend=mend
        )
    )
