"""Links from an item's id to its row in the table of evidence; the id stays plain text else."""

import re
from collections.abc import Callable, Iterable

from markupsafe import Markup, escape

from rca.base.panel import Panel

_LIST = re.compile(r"E\d+(?:, E\d+)*")
_LEADING = re.compile(r"(E\d+)(: .*)", re.DOTALL)


def shown_ids(panels: Iterable[Panel]) -> frozenset[str]:
    """Ids of the evidence rows that stand on the page, so that no link leads nowhere."""
    return frozenset(
        row[0]
        for panel in panels
        for table in panel.tables
        if table.name == "evidence"
        for row in table.rows[: table.shown]
    )


def linker(ids: frozenset[str]) -> Callable[[str], Markup]:
    """A filter for the page: links a list of ids, or the id a text begins with.

    Ids inside running text stay plain: an exhibit of a case may carry the same letters.
    """

    def one(name: str) -> Markup:
        if name not in ids:
            return escape(name)
        return Markup('<a class="ref" href="#{0}">{0}</a>').format(name)

    def linked(text: str) -> Markup:
        if _LIST.fullmatch(text):
            return Markup(", ").join(one(name) for name in text.split(", "))
        leading = _LEADING.fullmatch(text)
        if leading:
            return one(leading[1]) + escape(leading[2])
        return escape(text)

    return linked
