"""The rerun as panels: integrity, agreement, reasons, differences, edges."""

from collections.abc import Sequence

from rca.base.panel import Column, Panel, Section, Table
from rca.rerun.model import WORDS, Difference, RerunCheck, RunClass

SHOWN = 40
LEFT_OUT = "…"
LONGEST = 90


def panels_rerun(check: RerunCheck) -> Section:
    """What the rerun report says, in the auditor's order of questions."""
    panels = [_integrity(check)]
    if check.runnable:
        panels += [_agreement(check), _reasons(check), _differences(check)]
    panels.append(_edges(check))
    return Section(stage="rerun", title="What was checked", panels=tuple(panels))


def _integrity(check: RerunCheck) -> Panel:
    rows = tuple((b.kind, b.area, b.name, b.expected, b.found) for b in check.breaches)
    many = len(rows)
    answer = (
        f"{many} {'thing is' if many == 1 else 'things are'} not as issued."
        if rows
        else "Every file that could be checked is as it was issued."
    )
    table = Table(
        name="rerun-integrity",
        title="Not as issued",
        columns=tuple(Column(title=t) for t in ("What", "Where", "Name", "Expected", "Found")),
        rows=tuple(tuple(_short(cell) for cell in row) for row in rows),
        shown=SHOWN,
    )
    return Panel(
        key="rerun.integrity",
        title="Integrity",
        question="Is everything still as it was issued?",
        answer=answer,
        status="changed" if rows else "unchanged",
        paragraphs=(check.signature,) if check.signature else (),
        tables=(table,) if rows else (),
        limits=(
            "Digests prove that a file is the same as the one recorded, not that the record is "
            "true; a signature on the bundle says who vouched for it.",
        ),
    )


def _agreement(check: RerunCheck) -> Panel:
    counts = check.counts or {}
    rows = tuple(
        (str(one.value), WORDS[one], str(counts.get(one.name, 0)))
        for one in RunClass
        if one not in (RunClass.SAME_CONTENT, RunClass.NOT_RUNNABLE)
    )
    margins = tuple(
        (
            m.side,
            f"{m.issued:.6f}",
            f"{m.recomputed:.6f}",
            f"{m.moved_log10_odds:+.2g}".replace("-", "−"),
            f"{m.distance_log10_odds:+.2f}".replace("-", "−"),
        )
        for m in check.margins
    )
    same = sum(f.same for f in check.files)
    files = f"{same} of {len(check.files)} files have the same bytes." if check.files else ""
    differing = ", ".join(f.name for f in check.files if not f.same)
    return Panel(
        key="rerun.agreement",
        title="Agreement",
        question="Do the numbers come out again?",
        answer=f"Class {check.run_class.value}: {WORDS[check.run_class]}.",
        paragraphs=tuple(
            text
            for text in (files, differing and f"Other bytes: {_short(differing, 400)}.")
            if text
        ),
        tables=(
            Table(
                name="rerun-classes",
                title="Quantities by class",
                columns=(
                    Column(title="Class"),
                    Column(title="Meaning"),
                    Column(title="Quantities", numeric=True),
                ),
                rows=rows,
            ),
            Table(
                name="rerun-margins",
                title="How far the answer moved, and how far it is from its threshold",
                columns=(
                    Column(title="Side"),
                    Column(title="Issued", numeric=True),
                    Column(title="Recomputed", numeric=True),
                    Column(title="Moved", unit="log10 odds", numeric=True),
                    Column(title="Above the threshold", unit="log10 odds", numeric=True),
                ),
                rows=margins,
                note="A side is held at or above a probability of "
                f"{check.margins[0].threshold:.2f}.",
            ),
        ),
    )


def _reasons(check: RerunCheck) -> Panel:
    rows = tuple((r.kind, _short("; ".join(r.details), 400)) for r in check.reasons)
    table = Table(
        name="rerun-reasons",
        title="What is not the same as at issue",
        columns=(Column(title="Kind"), Column(title="Which")),
        rows=rows,
        shown=SHOWN,
    )
    why = check.differences[0].reason if check.differences else ""
    if why:
        answer = f"The differences come from: {why}."
    elif rows:
        answer = "Something besides the results differs, and no number moved by it."
    else:
        answer = "Evidence, knowledge, code, parameters and libraries are the same."
    return Panel(
        key="rerun.reasons",
        title="Reasons",
        question="What differs besides the numbers?",
        answer=answer,
        tables=(table,) if rows else (),
        limits=("Where several things differ, one rerun can't tell their shares apart.",),
    )


def _differences(check: RerunCheck) -> Panel:
    rows = tuple(_row(d) for d in check.differences)
    table = Table(
        name="rerun-differences",
        title="Quantities that differ, worst first",
        columns=(
            Column(title="Class", numeric=True),
            Column(title="Quantity"),
            Column(title="Issued", numeric=True),
            Column(title="Recomputed", numeric=True),
            Column(title="Over tolerance", numeric=True),
            Column(title="Rule"),
        ),
        rows=rows,
        shown=SHOWN,
        note="Over tolerance: distance divided by the tolerance of the rule; up to 1 is within.",
    )
    many = len(rows)
    worst = max((d.ratio for d in check.differences if d.ratio is not None), default=None)
    answer = "None differs." if not many else f"{many} of {_total(check)} differ."
    if worst is not None:
        answer += f" The largest distance is {worst:.2g} tolerances."
    return Panel(
        key="rerun.differences",
        title="Differences",
        question="Which quantities differ, and by how much?",
        answer=answer,
        tables=(table,) if rows else (),
    )


def _edges(check: RerunCheck) -> Panel:
    many = len(check.near_edges)
    return Panel(
        key="rerun.edges",
        title="Near an edge",
        question="Which values lie so near a threshold that a small change would turn a word?",
        answer=f"{many} were named when the report was issued." if many else "None.",
        paragraphs=check.near_edges[:SHOWN],
    )


def _row(one: Difference) -> tuple[str, ...]:
    ratio = "" if one.ratio is None else f"{one.ratio:.2g}"
    return (
        str(one.run_class.value),
        _short(one.quantity),
        _value(one.issued),
        _value(one.recomputed),
        ratio,
        one.rule,
    )


def _value(value: object) -> str:
    return _short(f"{value:.12g}" if isinstance(value, float) else str(value), 40)


def _total(check: RerunCheck) -> int:
    return sum((check.counts or {}).values())


def _short(text: str, longest: int = LONGEST) -> str:
    return text if len(text) <= longest else text[: longest - 1] + LEFT_OUT


def tables_of_panels(panels: Sequence[Panel]) -> tuple[Table, ...]:
    """Every table of the panels, for the CSV files beside the report."""
    return tuple(table for panel in panels for table in panel.tables)
