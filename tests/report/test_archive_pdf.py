"""The PDF carries both markers in one packet, its attachments once, and the same bytes twice."""

import importlib.util
from datetime import UTC, datetime
from pathlib import Path

import pypdf
import pytest

from rca.report.pdf import Attached, write_pdf
from tests.report.pdf_audit import elements, faults, headings, validator_failures

PAGE = (
    '<html lang="en"><head><title>x</title><style>'
    '@page { @top-left { content: "running head"; } } section { break-before: page; }'
    "</style></head><body><main><h1>T</h1><table><caption>C</caption>"
    '<thead><tr><th scope="col">a</th><th scope="col">b</th></tr></thead>'
    '<tbody><tr><th scope="row">c</th><td>1</td></tr></tbody></table>'
    '<section><h2>U</h2><p>on the next page</p><img src="figures/dot.png" alt="a dot"></section>'
    "</main></body></html>"
)
needs_validator = pytest.mark.skipif(
    importlib.util.find_spec("page") is None,
    reason="the validator has no build for this platform",
)


@pytest.fixture
def pdf(tmp_path: Path) -> Path:
    from PIL import Image

    (tmp_path / "figures").mkdir()
    Image.new("RGB", (4, 4)).save(tmp_path / "figures" / "dot.png")
    write_pdf(PAGE, tmp_path, tmp_path / "one.pdf", [attached(b"{}")])
    return tmp_path / "one.pdf"


def attached(content: bytes, dated: datetime | None = None) -> Attached:
    return Attached(
        name="results.json", content=content, description="d", relation="Data", dated=dated
    )


@pytest.mark.pdf
@pytest.mark.outside_value(source="ISO 19005-3 (PDF/A-3) and ISO 14289-1 (PDF/UA-1), from memory")
def test_nothing_that_the_standards_ask_for_is_missing(pdf: Path) -> None:
    assert faults(pdf) == []
    assert headings(pdf) == [1, 2]


@needs_validator
@pytest.mark.pdf
@pytest.mark.outside_value(source="rules of the validator 'page' for PDF/A-3a and PDF/UA-1")
@pytest.mark.parametrize("profile", ["3a", "ua1"])
def test_an_independent_validator_finds_nothing(pdf: Path, profile: str) -> None:
    assert validator_failures(pdf, profile) == []


@pytest.mark.pdf
def test_heads_say_what_they_head_and_running_heads_are_not_read(pdf: Path) -> None:
    root = pypdf.PdfReader(pdf).trailer["/Root"]
    scopes = [e["/A"]["/Scope"] for e in elements(root["/StructTreeRoot"]) if e["/S"] == "/TH"]
    assert scopes == ["/Column", "/Column", "/Row"]
    for page in pypdf.PdfReader(pdf).pages:
        content = page.get_contents().get_data()
        assert content.count(b"/Type /Pagination") == 1
    parents = root["/StructTreeRoot"]["/ParentTree"]["/Nums"]
    assert all(isinstance(k, pypdf.generic.NullObject) for k in (parents[1][-1], parents[3][-1]))


@pytest.mark.pdf
def test_the_same_report_has_the_same_bytes(pdf: Path) -> None:
    again = pdf.with_name("two.pdf")
    write_pdf(PAGE, pdf.parent, again, [attached(b"{}")])
    assert pdf.read_bytes() == again.read_bytes()


@pytest.mark.pdf
def test_an_attachment_bears_the_day_of_issue_never_the_clock(pdf: Path) -> None:
    target = pdf.with_name("dated.pdf")
    write_pdf(PAGE, pdf.parent, target, [attached(b"{}", datetime(2026, 4, 2, tzinfo=UTC))])
    file = pypdf.PdfReader(target).trailer["/Root"]["/AF"][0]["/EF"]["/F"]
    assert file["/Params"]["/ModDate"].startswith("D:20260402")
    file = pypdf.PdfReader(pdf).trailer["/Root"]["/AF"][0]["/EF"]["/F"]
    assert file["/Params"]["/ModDate"].startswith("D:20260101")
