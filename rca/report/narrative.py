"""The report's narrative as an editable DOCX: words and tables, for people who must write on.

It is a copy to work with, not the report: what is signed stays the PDF and results.json. Figures
are named where they belong and stand in the PDF.
"""

import io
import re
from collections.abc import Sequence
from typing import Any

from docx import Document
from docx.oxml import OxmlElement
from docx.oxml.ns import qn
from docx.shared import Mm, Pt, RGBColor

from rca.base.panel import Panel, Section, Table
from rca.report.fixed_zip import EPOCH, fixed_zip

NOTICE = (
    "An editable copy of the words. The report that counts is report.pdf with results.json; "
    "changes made here are nobody's finding until they are signed."
)
FAMILY = "Source Sans 3"
_CONTROL = re.compile(r"[\x00-\x08\x0b\x0c\x0e-\x1f]")
MOST_COLUMNS = 7  # wider tables stay in the workbook


def narrative_bytes(
    *,
    title: str,
    subtitle: str,
    summary: Sequence[tuple[str, Sequence[str]]],
    sections: Sequence[Section],
    cautions: Sequence[str],
    language: str = "en",
) -> bytes:
    """The document: summary, then each section's panels, then the cautions.

    ``summary`` holds heads with their paragraphs. The same words give the same bytes.
    """
    document = Document()
    _styles(document, language)
    properties = document.core_properties
    properties.title, properties.author, properties.language = _plain(title), "rca", language
    properties.created = properties.modified = EPOCH
    properties.revision = 1
    document.add_heading(_plain(title), level=0)
    document.add_paragraph(_plain(subtitle))
    document.add_paragraph().add_run(NOTICE).italic = True
    for head, paragraphs in summary:
        document.add_heading(_plain(head), level=1)
        for text in paragraphs:
            document.add_paragraph(_plain(text))
    for section in sections:
        document.add_heading(_plain(section.title), level=1)
        for panel in section.panels:
            _panel(document, panel)
    document.add_heading("Before anyone acts on this", level=1)
    for text in cautions:
        document.add_paragraph(_plain(text), style="List Bullet")
    out = io.BytesIO()
    document.save(out)
    return fixed_zip(out.getvalue())


def _panel(document: Any, panel: Panel) -> None:
    document.add_heading(_plain(panel.title), level=2)
    document.add_paragraph().add_run(_plain(panel.question)).italic = True
    answer = document.add_paragraph()
    answer.add_run(_plain(panel.answer)).bold = True
    if panel.status:
        answer.add_run(f" ({_plain(panel.status)})")
    for text in panel.paragraphs:
        document.add_paragraph(_plain(text))
    for figure in panel.figures:
        words = f"[Figure in report.pdf: {figure.caption} {figure.alt}]"
        document.add_paragraph(_plain(words))
    for table in panel.tables:
        _table(document, table)
    for text in panel.limits:
        document.add_paragraph(_plain(text), style="List Bullet")


def _table(document: Any, table: Table) -> None:
    document.add_paragraph().add_run(_plain(table.title)).bold = True
    if len(table.columns) > MOST_COLUMNS or len(table.rows) > table.shown:
        document.add_paragraph(
            f"{len(table.rows)} rows of {len(table.columns)} columns: tables/{table.name}.csv"
        )
        return
    made = document.add_table(rows=1, cols=len(table.columns), style="Light List")
    _repeat_head(made.rows[0])
    for cell, column in zip(made.rows[0].cells, table.columns, strict=True):
        _fill(cell, f"{column.title} [{column.unit}]" if column.unit else column.title, bold=True)
    for row in table.rows:
        for cell, text in zip(made.add_row().cells, row, strict=True):
            _fill(cell, text)
    if table.note:
        document.add_paragraph(_plain(table.note))


def _fill(cell: Any, text: str, *, bold: bool = False) -> None:
    run = cell.paragraphs[0].add_run(_plain(text))
    run.bold = bold
    run.font.size = Pt(8.5)


def _repeat_head(row: Any) -> None:
    """The head row comes again on every page the table runs over."""
    mark = OxmlElement("w:tblHeader")
    mark.set(qn("w:val"), "true")
    row._tr.get_or_add_trPr().append(mark)  # noqa: SLF001  the library has no call for it


def _styles(document: Any, language: str) -> None:
    section = document.sections[0]
    section.page_width, section.page_height = Mm(210), Mm(297)
    section.left_margin = section.right_margin = Mm(22)
    normal = document.styles["Normal"]
    normal.font.name, normal.font.size = FAMILY, Pt(10)
    normal.paragraph_format.space_after = Pt(5)
    tag = OxmlElement("w:lang")
    tag.set(qn("w:val"), {"en": "en-GB", "de": "de-DE"}.get(language, language))
    normal.element.get_or_add_rPr().append(tag)
    for name, size in (("Title", 22), ("Heading 1", 15), ("Heading 2", 12)):
        style = document.styles[name]
        style.font.name, style.font.size = FAMILY, Pt(size)
        style.font.color.rgb = RGBColor(0x1D, 0x24, 0x29)
        fonts = style.element.get_or_add_rPr().get_or_add_rFonts()
        for kind in ("w:asciiTheme", "w:hAnsiTheme", "w:eastAsiaTheme", "w:cstheme"):
            fonts.attrib.pop(qn(kind), None)
        fonts.set(qn("w:ascii"), FAMILY)
        fonts.set(qn("w:hAnsi"), FAMILY)


def _plain(text: str) -> str:
    """Text without the control characters a document can't hold."""
    return _CONTROL.sub("\ufffd", text)
