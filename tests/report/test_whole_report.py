"""The sample case becomes a report: every page holds what it must, nothing else is fetched."""

import json
import re
import shutil
from pathlib import Path

import pypdf
import pytest
from click.testing import CliRunner

from rca.archive.results import validate
from rca.base.errors import RenderError
from rca.cli.main import main
from rca.report.pdf import write_pdf
from tests.report.pdf_audit import faults, headings, validator_failures
from tests.report.test_archive_pdf import needs_validator

pytestmark = [pytest.mark.notebook, pytest.mark.pdf]


@pytest.fixture(scope="module")
def report(tmp_path_factory: pytest.TempPathFactory) -> Path:
    sample = Path(__file__).resolve().parents[2] / "sample_case"
    out = tmp_path_factory.mktemp("out") / "report"
    done = CliRunner().invoke(main, ["report", str(sample), "--out", str(out)])
    assert done.exit_code == 0, done.output
    return out


def test_the_folder_holds_what_the_contract_names(report: Path) -> None:
    for name in ("report.pdf", "report.html", "results.json", "record.json"):
        assert (report / name).stat().st_size > 0
    assert len(list((report / "notebooks").glob("*.ipynb"))) == 9
    assert list((report / "figures").glob("*.svg"))
    assert list((report / "tables").glob("*.csv"))


def test_results_fit_their_schema_and_hold_no_clock(report: Path) -> None:
    text = (report / "results.json").read_text(encoding="utf-8")
    validate(json.loads(text))
    assert "started" not in json.loads(text)["record"]


def test_the_finding_follows_from_the_data(report: Path) -> None:
    results = json.loads((report / "results.json").read_text(encoding="utf-8"))
    assert results["verdict"]["side"] == "both"
    assert results["causes"][0]["cause"] == "suction strainer clogged"
    assert {e["source"]["file"] for e in results["evidence"]} >= {
        "teardown/findings.csv",
        "history.csv",
        "oil/lab-b-2026.xlsx",
    }


def test_the_pdf_says_the_same_as_the_results(report: Path) -> None:
    results = json.loads((report / "results.json").read_text(encoding="utf-8"))
    pdf = pypdf.PdfReader(report / "report.pdf")
    first = " ".join(pdf.pages[0].extract_text().split())
    assert results["case"]["title"] in first
    assert "May it run now?" in first
    assert "Where it could be wrong" in first
    assert "Decision needed" in first
    assert f"{results['verdict']['sides']['both']:.2f}" in first
    text = " ".join(" ".join(p.extract_text() for p in pdf.pages).split())
    assert "End of report" in text
    assert "Before anyone puts a hand on the unit" in text
    assert 10 <= len(pdf.pages) <= 34
    assert pdf.trailer["/Root"]["/MarkInfo"]["/Marked"]
    assert pdf.trailer["/Root"]["/Lang"]
    assert len(pdf.outline) >= 10


def test_the_pdf_can_be_kept_and_read_aloud(report: Path) -> None:
    assert faults(report / "report.pdf") == []
    html = (report / "report.html").read_text(encoding="utf-8")
    assert headings(report / "report.pdf") == [int(n) for n in re.findall(r"<h([1-6])\b", html)]


@needs_validator
@pytest.mark.outside_value(source="rules of the validator 'page' for PDF/A-3a and PDF/UA-1")
@pytest.mark.parametrize("profile", ["3a", "ua1"])
def test_an_independent_validator_passes_the_pdf(report: Path, profile: str) -> None:
    assert validator_failures(report / "report.pdf", profile) == []


def test_every_id_of_the_html_stands_once_and_every_figure_has_words(report: Path) -> None:
    html = (report / "report.html").read_text(encoding="utf-8")
    ids = re.findall(r'\bid="([^"]+)"', html)
    assert len(ids) == len(set(ids))
    assert all(alt.strip() for alt in re.findall(r'alt="([^"]*)"', html))
    assert not re.search(r'(src|href)="(https?:|file:|//)', html)


def test_hostile_text_is_escaped_everywhere(tmp_path: Path, sample_dir: Path) -> None:
    case = tmp_path / "case"
    shutil.copytree(
        sample_dir, case, ignore=shutil.ignore_patterns("report*", "*.parquet", "slow.csv")
    )
    text = (case / "case.toml").read_text()
    text = text[: text.index("[[records]]")] + text[text.index("[[excluded]]") :]
    evil = "<script>alert(1)</script> {{ 7*7 }} {% raw %}"
    text = text.replace("Main pump failed on the daylight press", evil)
    (case / "case.toml").write_text(text)
    findings = (case / "teardown" / "findings.csv").read_text()
    (case / "teardown" / "findings.csv").write_text(
        findings.replace("inside all nine bores", "=cmd|' /C calc'!A0")
    )
    out = tmp_path / "report"
    done = CliRunner().invoke(main, ["report", str(case), "--out", str(out)])
    assert done.exit_code == 0, done.output
    html = (out / "report.html").read_text(encoding="utf-8")
    assert "<script>alert" not in html
    assert "{{ 7*7 }}" in html
    table = (out / "tables" / "damage-findings.csv").read_text(encoding="utf-8")
    assert ",=cmd" not in table
    assert "'=cmd" in table


@pytest.mark.parametrize(
    "link",
    [
        "file:///etc/passwd",
        "http://127.0.0.1:9/x.png",
        "figures/missing.svg",
        "../../etc/passwd",
        "https://report.invalid/../secret.svg",
    ],
)
def test_the_renderer_serves_only_the_reports_own_files(tmp_path: Path, link: str) -> None:
    html = f'<html lang="en"><head><title>x</title></head><body><img src="{link}" alt="x"></body>'
    target = tmp_path / "x.pdf"
    with pytest.raises(RenderError, match="not part of this report"):
        write_pdf(html, tmp_path, target)
    assert not target.exists()
