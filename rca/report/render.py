"""Stored results to ``report.html`` and ``report.pdf`` from one set of templates."""

import hashlib
import shutil
from dataclasses import dataclass
from datetime import UTC, datetime
from importlib.resources import files
from pathlib import Path
from typing import Any

import jinja2

from rca.archive.codec import dumps
from rca.archive.store import Store
from rca.base.shipped import shipped_folder
from rca.case.model import Case
from rca.figures.style import font_folder
from rca.report.catalogue import reader
from rca.report.pdf import Attached, write_pdf
from rca.report.photos import shrink_photos
from rca.report.references import linker, shown_ids
from rca.report.revisions import Revision
from rca.report.view import build_page

FIRST = Revision(number=0, results_sha256="", issued="", who="", reason="first issue")


@dataclass(frozen=True, slots=True, kw_only=True)
class RenderedReport:
    """What was written; ``pdf`` is None where Pango is missing, and ``advice`` says what to do."""

    html: Path
    pdf: Path | None
    advice: str = ""


def render_report(
    case: Case,
    case_dir: Path,
    store: Store,
    results: dict[str, Any],
    *,
    paper: str = "",
    language: str = "",
    revisions: tuple[Revision, ...] = (FIRST,),
) -> RenderedReport:
    """Write the report into the store's own folder.

    Paper and language are those of case.toml where none is given here.
    Raises RenderError for a warning of the renderer, jinja2.UndefinedError for a template that
    names something the page does not have.
    """
    out = store.folder
    digest = hashlib.sha256(dumps(results).encode()).hexdigest()
    plates = shrink_photos(case_dir, case.photos, out / "photos")
    _fonts(out / "fonts")
    words = reader(language or case.commission.language)
    page = build_page(
        case,
        store,
        results,
        digest,
        plates,
        paper=paper or case.commission.paper,
        reader=words,
        revisions=revisions,
    )
    environment = jinja2.Environment(
        loader=jinja2.FileSystemLoader(shipped_folder("templates")),
        autoescape=True,
        undefined=jinja2.StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
    )
    environment.filters["t"] = words.frame
    environment.filters["w"] = words.said
    environment.filters["num"] = words.number
    environment.filters["linked"] = linker(shown_ids(page.verdict_panels))
    style = environment.get_template("report.css").render(page=page)
    html = environment.get_template("report.html.j2").render(page=page, style=style)
    target = out / "report.html"
    target.write_text(html, encoding="utf-8")
    pdf, advice = write_pdf(html, out, out / "report.pdf", _attached(case, out, results))
    return RenderedReport(html=target, pdf=pdf, advice=advice)


def _attached(case: Case, out: Path, results: dict[str, Any]) -> list[Attached]:
    """What the archive must hold beside the pages: results, evidence list, knowledge."""
    issued = case.commission.issued
    dated = datetime(issued.year, issued.month, issued.day, tzinfo=UTC) if issued else None
    knowledge = files("rca.verdict").joinpath("knowledge.toml").read_bytes()
    rows = [
        ("results.json", dumps(results).encode(), "All results of this report", "Data"),
        ("knowledge.toml", knowledge, "The numbers the weighing used", "Source"),
    ]
    evidence = out / "tables" / "evidence.csv"
    if evidence.is_file():
        rows.append(("evidence.csv", evidence.read_bytes(), "Items of evidence", "Data"))
    return [
        Attached(name=name, content=content, description=told, relation=relation, dated=dated)
        for name, content, told, relation in rows
    ]


def _fonts(out: Path) -> None:
    out.mkdir(parents=True, exist_ok=True)
    for path in sorted(font_folder().iterdir()):
        if path.suffix in {".ttf", ".md"}:
            shutil.copyfile(path, out / path.name)
