"""The pages of a comparison: one to read and print, one to filter; both work offline."""

import json
import shutil
from dataclasses import dataclass
from datetime import date
from pathlib import Path

import jinja2

from rca.base.panel import Section
from rca.base.shipped import shipped_folder
from rca.compare.panels_actions import CAUTIONS
from rca.figures.style import font_folder
from rca.report.catalogue import reader
from rca.report.pdf import write_pdf

HTML = "compare.html"
PDF = "compare.pdf"
EXPLORE = "explore.html"


@dataclass(frozen=True, slots=True, kw_only=True)
class Pages:
    """What was written; ``pdf`` is None where Pango is missing, and ``advice`` says what to do."""

    html: Path
    explore: Path
    pdf: Path | None
    advice: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class _Head:
    """What the page's frame and its style sheet ask for."""

    case_id: str
    digest: str
    paper: str
    until: date
    revision: int = 1
    language: str = "en"
    chapters: tuple[str, ...] = ()


def write_pages(
    out: Path, section: Section, *, explorer: str, digest: str, until: date, paper: str
) -> Pages:
    """Lay out a finished comparison.

    ``explorer`` is the JSON of the interactive page. Raises RenderError for a warning of the
    renderer, jinja2.UndefinedError for a template that names something the page does not have.
    """
    fonts = out / "fonts"
    fonts.mkdir(parents=True, exist_ok=True)
    for path in sorted(font_folder().iterdir()):
        if path.suffix in {".ttf", ".md"}:
            shutil.copyfile(path, fonts / path.name)
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
    environment.filters["linked"] = str  # evidence ids of one report mean nothing beside others
    head = _Head(case_id="Incidents compared", digest=digest[:12], paper=paper, until=until)
    style = environment.get_template("report.css").render(page=head)
    html = environment.get_template("compare.html.j2").render(
        page=head, style=style, section=section, cautions=CAUTIONS
    )
    target = out / HTML
    target.write_text(html, encoding="utf-8")
    explore = environment.get_template("compare_explore.html.j2").render(
        page=head, data=_inside_script(explorer)
    )
    (out / EXPLORE).write_text(explore, encoding="utf-8")
    pdf, advice = write_pdf(html, out, out / PDF)
    return Pages(html=target, explore=out / EXPLORE, pdf=pdf, advice=advice)


def _inside_script(text: str) -> str:
    """JSON that can stand in a script element: nothing in it can end the element."""
    packed = json.dumps(json.loads(text), ensure_ascii=True, separators=(",", ":"))
    return packed.replace("<", "\\u003c").replace(">", "\\u003e").replace("&", "\\u0026")
