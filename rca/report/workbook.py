"""Tables as one XLSX workbook: real numbers and dates, and text that is never a formula."""

import io
import re
from collections.abc import Iterable
from datetime import date, datetime, time

from openpyxl import Workbook
from openpyxl.cell import Cell, WriteOnlyCell
from openpyxl.styles import Alignment, Font
from openpyxl.utils import get_column_letter
from openpyxl.worksheet._write_only import WriteOnlyWorksheet

from rca.base.panel import Table
from rca.report.fixed_zip import EPOCH, fixed_zip

WIDEST = 60  # [characters]
NAME_LENGTH = 31  # of a sheet, the format's own limit
LONGEST = 32_767  # characters of a cell, the format's own limit
_NUMBER = re.compile(r"[-+]?\d+(?:\.\d+)?")
_DATE = re.compile(r"\d{4}-\d{2}-\d{2}")
_CONTROL = re.compile(r"[\x00-\x08\x0b\x0c\x0e-\x1f]")
_NOT_IN_NAME = re.compile(r"[\[\]:*?/\\']")


def workbook_bytes(tables: Iterable[Table], *, about: Iterable[tuple[str, str]]) -> bytes:
    """A workbook with a sheet a table, all rows, after a sheet that says what it is.

    A cell becomes a number where its column is numeric and the whole text is one, a date where the
    whole text is one; everything else is text, also where it begins with = + - or @. The same
    tables give the same bytes.
    """
    book = Workbook(write_only=True)
    book.properties.creator = "rca"
    book.properties.created = book.properties.modified = EPOCH
    first = book.create_sheet("About")
    first.column_dimensions["A"].width = 24
    first.column_dimensions["B"].width = 100
    for name, text in about:
        first.append([_text(first, name, bold=True), _text(first, text)])
    taken = {"about"}
    for table in tables:
        _sheet(book, table, _name(table.title, taken))
    out = io.BytesIO()
    book.save(out)
    return fixed_zip(out.getvalue())


def _sheet(book: Workbook, table: Table, name: str) -> None:
    sheet = book.create_sheet(name)
    heads = [f"{c.title} [{c.unit}]" if c.unit else c.title for c in table.columns]
    for k, head in enumerate(heads, start=1):
        longest = max([len(head), *(len(row[k - 1]) for row in table.rows)])
        sheet.column_dimensions[get_column_letter(k)].width = min(longest + 2, WIDEST)
    sheet.freeze_panes = "A2"
    sheet.append([_text(sheet, head, bold=True) for head in heads])
    for row in table.rows:
        sheet.append(
            [
                _cell(sheet, text, numeric=column.numeric)
                for text, column in zip(row, table.columns, strict=True)
            ]
        )
    if table.rows:
        sheet.auto_filter.ref = f"A1:{get_column_letter(len(heads))}{len(table.rows) + 1}"
    if table.note:
        sheet.append([])
        sheet.append([_text(sheet, table.note)])


def _cell(sheet: WriteOnlyWorksheet, text: str, *, numeric: bool) -> Cell:
    plain = text.replace("\u2212", "-").replace("\u202f", "")
    if numeric and _NUMBER.fullmatch(plain):
        return WriteOnlyCell(sheet, value=float(plain) if "." in plain else int(plain))
    if _DATE.fullmatch(text):
        try:
            day = datetime.combine(date.fromisoformat(text), time.min)
        except ValueError:
            return _text(sheet, text)
        cell = WriteOnlyCell(sheet, value=day)
        cell.number_format = "yyyy-mm-dd"
        return cell
    return _text(sheet, text)


def _text(sheet: WriteOnlyWorksheet, text: str, *, bold: bool = False) -> Cell:
    """A text cell; typed and marked so that no spreadsheet takes it for a formula."""
    cell = WriteOnlyCell(sheet, value="")
    cell.value = _CONTROL.sub("\ufffd", text)[:LONGEST]
    cell.data_type = "s"
    cell.alignment = Alignment(wrap_text=True, vertical="top")
    if text.startswith(("=", "+", "-", "@", "\t", "\r")):
        cell.quotePrefix = True
    if bold:
        cell.font = Font(bold=True)
    return cell


def _name(title: str, taken: set[str]) -> str:
    """A sheet's name from a table's title, not used yet."""
    base = _NOT_IN_NAME.sub(" ", title).strip()[:NAME_LENGTH] or "Table"
    name, n = base, 2
    while name.casefold() in taken:
        tail = f" {n}"
        name, n = base[: NAME_LENGTH - len(tail)] + tail, n + 1
    taken.add(name.casefold())
    return name
