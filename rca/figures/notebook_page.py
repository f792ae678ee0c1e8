"""A section as one piece of HTML for a notebook: escaped text, tables, figures as SVG."""

import base64
import html
from collections.abc import Mapping

from matplotlib.figure import Figure

from rca.base.panel import Panel, Section, Table
from rca.figures.style import svg_bytes


def section_html(section: Section, figures: Mapping[str, Figure]) -> str:
    """Panels in order; a figure that was not drawn is named as missing."""
    parts = [_panel(panel, figures) for panel in section.panels]
    return f"<section><h2>{html.escape(section.title)}</h2>{''.join(parts)}</section>"


def _panel(panel: Panel, figures: Mapping[str, Figure]) -> str:
    parts = [
        f"<h3>{html.escape(panel.title)}</h3>",
        f"<p><em>{html.escape(panel.question)}</em></p>",
        f"<p><strong>{html.escape(panel.answer)}</strong></p>",
    ]
    parts += [f"<p>{html.escape(text)}</p>" for text in panel.paragraphs]
    for reference in panel.figures:
        figure = figures.get(reference.name)
        drawn = "<p>figure not drawn</p>" if figure is None else _image(figure, reference.alt)
        parts.append(
            f"<figure>{drawn}<figcaption>{html.escape(reference.caption)}</figcaption></figure>"
        )
    parts += [_table(table) for table in panel.tables]
    parts += [f"<p><small>{html.escape(text)}</small></p>" for text in panel.limits]
    return "".join(parts)


def _image(figure: Figure, alt: str) -> str:
    encoded = base64.b64encode(svg_bytes(figure)).decode()
    return f'<img alt="{html.escape(alt)}" src="data:image/svg+xml;base64,{encoded}">'


def _table(table: Table) -> str:
    head = "".join(
        f'<th scope="col">{html.escape(f"{c.title} [{c.unit}]" if c.unit else c.title)}</th>'
        for c in table.columns
    )
    body = "".join(
        "<tr>" + "".join(f"<td>{html.escape(cell)}</td>" for cell in row) + "</tr>"
        for row in table.rows[: table.shown]
    )
    note = f"<p><small>{html.escape(table.note)}</small></p>" if table.note else ""
    return (
        f"<table><caption>{html.escape(table.title)}</caption>"
        f"<thead><tr>{head}</tr></thead><tbody>{body}</tbody></table>{note}"
    )
