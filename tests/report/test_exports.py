"""Workbook, narrative and calendar read back by their own libraries; nothing becomes a formula."""

import io
import zipfile
from datetime import datetime
from xml.etree import ElementTree as ET

import docx
import openpyxl
import pytest

from rca.base.panel import Column, Panel, Section, Table
from rca.report.narrative import NOTICE, narrative_bytes
from rca.report.workbook import workbook_bytes

HOSTILE = (
    "=1+1",
    "+1+cmd|' /C calc'!A0",
    "-2+3",
    "@SUM(A1)",
    "\t=1",
    '=HYPERLINK("x")',
    "\x01\x0b=x",
    "<b>&",
)
TABLE = Table(
    name="evidence",
    title="Evidence: what/was [found]",
    columns=(
        Column(title="Id"),
        Column(title="Value", unit="bar", numeric=True),
        Column(title="Date"),
    ),
    rows=(
        *((h, h, h) for h in HOSTILE),
        ("E01", "\u22120.25", "2026-03-06"),
        ("E02", "3 of 5", "2026-99-99"),
    ),
    note="=note",
)


def book(*tables: Table) -> openpyxl.Workbook:
    return openpyxl.load_workbook(io.BytesIO(workbook_bytes(tables, about=(("=A", "=B"),))))


@pytest.mark.outside_value(source="ECMA-376 18.3.1: a formula is an f element of a cell")
def test_no_cell_is_a_formula() -> None:
    content = workbook_bytes([TABLE], about=(("=A", "=B"),))
    with zipfile.ZipFile(io.BytesIO(content)) as archive:
        sheets = [n for n in archive.namelist() if n.startswith("xl/worksheets/")]
        for name in sheets:
            assert not ET.fromstring(archive.read(name)).findall(".//{*}f"), name
    assert len(sheets) == 2
    rows = list(book(TABLE).worksheets[1].iter_rows(min_row=2))
    for text, row in zip(HOSTILE[:6], rows, strict=False):
        for cell in row:
            assert (cell.value, cell.data_type) == (text, "s")
            assert cell.quotePrefix


def test_numbers_and_dates_are_numbers_and_dates() -> None:
    rows = list(book(TABLE).worksheets[1].iter_rows(min_row=2 + len(HOSTILE), values_only=True))
    assert rows[0] == ("E01", -0.25, datetime(2026, 3, 6))
    assert rows[1] == ("E02", "3 of 5", "2026-99-99")


def test_sheets_have_names_a_spreadsheet_takes() -> None:
    twice = [TABLE, TABLE, Table(name="x", title="About", columns=TABLE.columns, rows=())]
    names = book(*twice).sheetnames
    assert len({n.casefold() for n in names}) == 4
    assert all(len(n) <= 31 and not set(n) & set("[]:*?/\\") for n in names)


def test_the_same_tables_give_the_same_bytes() -> None:
    assert workbook_bytes([TABLE], about=()) == workbook_bytes([TABLE], about=())


def document() -> bytes:
    panel = Panel(
        key="a.b", title="T", question="Q?", answer="A \x01 <b>", tables=(TABLE,), limits=("L",)
    )
    return narrative_bytes(
        title="C-1: <title>",
        subtitle="s",
        summary=(("Finding", ("F",)),),
        sections=(Section(stage="a", title="S", panels=(panel,)),),
        cautions=("Isolate first.",),
    )


def test_the_narrative_opens_and_holds_words_tables_and_cautions() -> None:
    read = docx.Document(io.BytesIO(document()))
    text = "\n".join(p.text for p in read.paragraphs)
    for words in ("C-1: <title>", NOTICE, "Finding", "Q?", "A \ufffd <b>", "Isolate first."):
        assert words in text
    assert read.tables[0].rows[-2].cells[0].text == "E01"
    assert [p.style.name for p in read.paragraphs if p.text in ("S", "T")] == [
        "Heading 1",
        "Heading 2",
    ]
    assert read.core_properties.author == "rca"


def test_the_narrative_has_the_same_bytes() -> None:
    assert document() == document()
