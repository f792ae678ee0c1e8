"""Links to evidence rows: only where the row is on the page, never from hostile or running text."""

from rca.base.panel import Column, Panel, Table
from rca.report.references import linker, shown_ids


def _panel(*ids: str, shown: int) -> Panel:
    table = Table(
        name="evidence",
        title="Items",
        columns=(Column(title="Id"),),
        rows=tuple((name,) for name in ids),
        shown=shown,
    )
    return Panel(key="verdict.weight", title="W", question="?", answer="A.", tables=(table,))


def test_only_rows_on_the_page_are_targets() -> None:
    assert shown_ids([_panel("E01", "E02", "E03", shown=2)]) == {"E01", "E02"}


def test_a_list_of_ids_is_linked_and_unknown_ones_stay_text() -> None:
    html = str(linker(frozenset({"E01"}))("E01, E99"))
    assert html == '<a class="ref" href="#E01">E01</a>, E99'


def test_the_id_a_text_begins_with_is_linked_and_the_rest_escaped() -> None:
    html = str(linker(frozenset({"E01"}))("E01: <b>found</b> on E01"))
    assert html == '<a class="ref" href="#E01">E01</a>: &lt;b&gt;found&lt;/b&gt; on E01'


def test_other_text_is_only_escaped() -> None:
    linked = linker(frozenset({"E01"}))
    assert str(linked("exhibit E01 <script>")) == "exhibit E01 &lt;script&gt;"
