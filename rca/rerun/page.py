"""The rerun report: JSON for machines, HTML and PDF for the auditor to sign."""

import hashlib
import shutil
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import jinja2

from rca.archive.codec import dumps, to_plain
from rca.archive.store import Store
from rca.base.shipped import shipped_folder
from rca.figures.style import font_folder
from rca.report.catalogue import reader
from rca.report.pdf import write_pdf
from rca.rerun.model import WORDS, RerunCheck
from rca.rerun.panels import panels_rerun, tables_of_panels

JSON = "rerun.json"
HTML = "rerun.html"
PDF = "rerun.pdf"


@dataclass(frozen=True, slots=True, kw_only=True)
class RerunPages:
    """What was written; ``pdf`` is None where Pango is missing, and ``advice`` says what to do."""

    html: Path
    pdf: Path | None
    advice: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class _Page:
    """What the template and its style sheet ask for."""

    case_id: str
    title: str
    answer: str
    facts: tuple[tuple[str, str], ...]
    digest: str
    paper: str
    revision: str = "0"
    language: str = "en"


def rerun_json(check: RerunCheck, run: Mapping[str, Any]) -> dict[str, Any]:
    """The rerun as plain JSON; ``run`` says where, when and on what it was made."""
    plain: dict[str, Any] = to_plain(check)
    for row in plain["differences"]:
        row["words"] = WORDS[row["run_class"]]
    return {
        "format": 1,
        "class": int(check.run_class),
        "words": WORDS[check.run_class],
        "agrees": check.agrees,
        **plain,
        "run": dict(run),
        "review": {"rerun_by": None, "explained_by": None, "date": None, "explanation": None},
    }


def write_rerun(out: Path, check: RerunCheck, run: Mapping[str, Any], *, paper: str) -> RerunPages:
    """Write ``rerun.json``, the tables and the pages into ``out``.

    Raises RenderError for a warning of the renderer.
    """
    text = dumps(rerun_json(check, run))
    (out / JSON).write_text(text, encoding="utf-8")
    section = panels_rerun(check)
    store = Store(out)
    for table in tables_of_panels(section.panels):
        store.write_table(table)
    fonts = out / "fonts"
    fonts.mkdir(exist_ok=True)
    for path in sorted(font_folder().iterdir()):
        if path.suffix in {".ttf", ".md"}:
            shutil.copyfile(path, fonts / path.name)
    page = _Page(
        case_id=check.case_id,
        title=check.title,
        answer=check.answer,
        facts=_facts(check, run),
        digest=hashlib.sha256(text.encode()).hexdigest()[:12],
        paper=paper,
    )
    environment = jinja2.Environment(
        loader=jinja2.FileSystemLoader(shipped_folder("templates")),
        autoescape=True,
        undefined=jinja2.StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
    )
    words = reader("en")
    environment.filters["t"] = words.frame
    environment.filters["w"] = words.said
    environment.filters["num"] = words.number
    environment.filters["linked"] = str
    style = environment.get_template("report.css").render(page=page)
    html = environment.get_template("rerun.html.j2").render(
        page=page, style=style, section=section
    )
    (out / HTML).write_text(html, encoding="utf-8")
    pdf, advice = write_pdf(html, out, out / PDF)
    return RerunPages(html=out / HTML, pdf=pdf, advice=advice)


def _facts(check: RerunCheck, run: Mapping[str, Any]) -> tuple[tuple[str, str], ...]:
    rows = (
        ("Case", check.case_id),
        ("Rerun of", check.source),
        ("Rerun ended", str(run.get("ended", ""))),
        ("Program", str(run.get("program", ""))),
        ("Machine", str(run.get("machine", ""))),
        ("results.json as issued, SHA-256", check.issued_sha256),
        ("results.json recomputed, SHA-256", check.recomputed_sha256 or "none"),
    )
    return tuple((key, value) for key, value in rows if value)
