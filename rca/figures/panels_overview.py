"""Panels that speak of the whole case: sequence of events, suction path, causal tree, barriers."""

from collections.abc import Mapping, Sequence

from matplotlib.figure import Figure

from rca.base.counted import counted
from rca.base.panel import Column, FigureRef, Panel, Section, Table
from rca.case.model import Case
from rca.case.oil import OilSample
from rca.case.sequence import DAY_S, Entry, case_zone, sequence
from rca.figures.causal_tree import causal_tree_figure
from rca.figures.circuit import circuit
from rca.figures.numbers import bar, share, written
from rca.figures.timeline import Coverage, numbered, timeline
from rca.suction.check import SuctionCheck
from rca.verdict.causal_tree import Role, TreeNode, causal_tree
from rca.verdict.knowledge import Knowledge
from rca.verdict.model import VerdictCheck

ALL_ROWS = 60


def panels_overview(
    case: Case,
    *,
    samples: Sequence[OilSample],
    records: Sequence[Coverage],
    suction: SuctionCheck,
    verdict: VerdictCheck,
    knowledge: Knowledge,
) -> tuple[Section, dict[str, Figure]]:
    """The section and its figures."""
    entries = sequence(case, samples)
    nodes = causal_tree(verdict, knowledge, case.header.title)
    figures: dict[str, Figure] = {}
    if entries or records:
        figures["overview-sequence"] = timeline(entries, records, case_zone(case))
    if case.suction_line or suction.normal is not None:
        figures["overview-circuit"] = circuit(case, suction)
    if nodes:
        figures["overview-causes"] = causal_tree_figure(nodes)
    section = Section(
        stage="overview",
        title="The case as a whole",
        panels=(
            _sequence(case, entries, records, figures),
            _circuit(case, suction, figures),
            _causes(nodes, suction, verdict, figures),
            _barriers(case),
            _elsewhere(case),
        ),
    )
    return section, figures


def _sequence(
    case: Case,
    entries: Sequence[Entry],
    records: Sequence[Coverage],
    figures: Mapping[str, Figure],
) -> Panel:
    rows = tuple(
        (
            str(number),
            entry.written,
            _within(entry.within_s),
            entry.type.value,
            entry.kind,
            entry.text,
            f"{entry.source.file}, {entry.source.locator}",
        )
        for number, entry in numbered(entries)
        if number is not None
    )
    tables = []
    if rows:
        tables.append(
            Table(
                name="sequence",
                title="Sequence of events",
                columns=(
                    Column(title="No.", numeric=True),
                    Column(title="When"),
                    Column(title="Within"),
                    Column(title="Type"),
                    Column(title="Kind"),
                    Column(title="As written"),
                    Column(title="Source"),
                ),
                rows=rows,
                shown=ALL_ROWS,
                note=f"Times in the zone of the failure ({_zone_words(case)}). Within: how well "
                "the time is known. Event: something that happened; condition: a state met with. "
                "Oil samples stand in the section on oil.",
            )
        )
    if case.records:
        tables.append(_clocks(case))
    gaps = sum(len(r.gaps) for r in records)
    count = len(entries)
    return Panel(
        key="overview.sequence",
        title="Sequence of events",
        question="What happened when, by which clock, and when did nobody record?",
        answer=(
            f"{counted(count, 'dated entry', 'dated entries')}; "
            f"{counted(len(records), 'record')} with {counted(gaps, 'gap')}."
            if count or records
            else "Nothing in the case carries a date."
        ),
        tables=tuple(tables),
        figures=(
            FigureRef(
                name="overview-sequence",
                caption="Dated entries by origin. Filled: event; open diamond: condition; grey "
                "bar: slow record, hatched where it has a gap; triangle: fast record. Numbers "
                "are rows of the table.",
                alt=f"Timeline of {count} dated entries up to the failure and of "
                f"{counted(len(records), 'record')} with {counted(gaps, 'gap')}.",
            ),
        )
        if "overview-sequence" in figures
        else (),
    )


def _within(seconds: float) -> str:
    return "the day" if seconds >= DAY_S else "a minute"


def _zone_words(case: Case) -> str:
    occurred = case.header.occurred
    if occurred is None or occurred.tzinfo is None:
        return "UTC; no zone is stated"
    return f"UTC{occurred.strftime('%z')[:3]}:{occurred.strftime('%z')[3:]}"


def _clocks(case: Case) -> Table:
    rows = []
    for record in case.records:
        axis = record.time
        spread = f" \u00b1 {axis.offset_u_s:g}" if axis.offset_u_s is not None else ""
        drift = f", drift {axis.drift_ppm:g} ppm" if axis.drift_ppm else ""
        rows.append(
            (
                record.file,
                axis.zone or ("in the stamps" if axis.column else "in the start"),
                f"{axis.offset_s:+g}{spread}{drift}".replace("-", "\u2212"),
                axis.offset_method or "not stated",
            )
        )
    return Table(
        name="clocks",
        title="Clocks of the recorders",
        columns=(
            Column(title="Record"),
            Column(title="Zone"),
            Column(title="Added to its stamps", unit="s"),
            Column(title="How that was found"),
        ),
        rows=tuple(rows),
        shown=ALL_ROWS,
    )


def _circuit(case: Case, check: SuctionCheck, figures: Mapping[str, Figure]) -> Panel:
    lengths = [p.length.value * p.count for p in case.suction_line if p.length is not None]
    answer = "The parts of the suction line are not recorded."
    if case.suction_line:
        answer = f"{counted(len(case.suction_line), 'part')} from the reservoir to the pump"
        answer += f", {sum(lengths):.3g} m of line." if lengths else "."
    caption = "Suction path as stated in case.toml, lengths not to scale."
    if check.normal is not None:
        caption += " Below: pressure along it, computed for the clean line."
    return Panel(
        key="overview.circuit",
        title="Suction path, reservoir to pump",
        question="Through what does the oil reach the pump?",
        answer=answer,
        figures=(
            FigureRef(
                name="overview-circuit",
                caption=caption,
                alt="Suction path: reservoir"
                + "".join(f", {p.label or p.form or p.part.value}" for p in case.suction_line)
                + ", pump"
                + (
                    f"; {bar(check.normal.pressure.mean)} bar(a) computed at the inlet."
                    if check.normal is not None
                    else "."
                ),
            ),
        )
        if "overview-circuit" in figures
        else (),
    )


def _causes(
    nodes: Sequence[TreeNode],
    suction: SuctionCheck,
    verdict: VerdictCheck,
    figures: Mapping[str, Figure],
) -> Panel:
    removed = {c.cause: c for c in suction.counterfactuals if c.cause}
    evidence = {c.cause: c.evidence for c in verdict.causes}

    def effect(node: TreeNode) -> str:
        found = removed.get(node.name)
        if found is None:
            return "not known" if node.role is Role.ROOT else ""
        words = f"inlet {bar(found.after.p50)} in place of {bar(found.before.p50)} bar(a)"
        if found.below_limit is not None:
            words += f"; below the limit with probability {share(found.below_limit)}"
        return words if found.identified else f"{words}; the record can't tell it from others"

    shown = [n for n in nodes if n.role is not Role.OUTCOME]
    roots = [n.name for n in nodes if n.role is Role.ROOT and n.shown]
    if not nodes:
        answer = "No mechanism is shown to have taken part, so no tree is drawn."
    elif roots:
        answer = f"Behind the failure stands {' and '.join(roots)}."
    else:
        answer = "No named cause is shown behind the mechanisms; the tree ends at conditions."
    return Panel(
        key="overview.causes",
        title="Causal tree",
        question="What stood directly before the failure, and what behind that?",
        answer=answer,
        tables=(
            Table(
                name="causal-tree",
                title="Nodes of the tree",
                columns=(
                    Column(title="Node"),
                    Column(title="Role"),
                    Column(title="Probability", numeric=True),
                    Column(title="Evidence"),
                    Column(title="If it had not been there"),
                ),
                rows=tuple(
                    (
                        n.name,
                        n.role.value + ("" if n.shown else ", hypothesis"),
                        share(n.probability),
                        ", ".join(evidence.get(n.name, ())) or "",
                        effect(n),
                    )
                    for n in shown
                ),
                shown=ALL_ROWS,
                note="Root: a named cause. Contributing: a condition between. Proximate: a "
                "mechanism that took part. Hypothesis: probability below 0.5. The last column is "
                "computed with that cause alone put right.",
            ),
        )
        if shown
        else (),
        figures=(
            FigureRef(
                name="overview-causes",
                caption="Causal tree with probabilities; dashed: hypothesis, not shown.",
                alt=answer,
            ),
        )
        if "overview-causes" in figures
        else (),
    )


def _barriers(case: Case) -> Panel:
    barriers = case.commission.barriers
    held = sum(b.state.value == "worked" for b in barriers)
    return Panel(
        key="overview.barriers",
        title="Barriers",
        question="Which control should have prevented or shown it, and what became of it?",
        answer=(
            f"{counted(len(barriers), 'barrier')} looked at, {held} worked."
            if barriers
            else "Not looked into: no barrier is stated in case.toml."
        ),
        tables=(
            Table(
                name="barriers",
                title="Barriers",
                columns=(
                    Column(title="Barrier"),
                    Column(title="State"),
                    Column(title="Remark"),
                    Column(title="Source"),
                ),
                rows=tuple(
                    (written(b.name), b.state.value, written(b.note), b.source.locator)
                    for b in barriers
                ),
                shown=ALL_ROWS,
            ),
        )
        if barriers
        else (),
    )


def _elsewhere(case: Case) -> Panel:
    units = case.commission.other_units
    looked = [u for u in units if u.found]
    return Panel(
        key="overview.elsewhere",
        title="Where else",
        question="Do units of the same build, oil or duty show the same?",
        answer=(
            f"{len(units)} other units named, {len(looked)} looked at."
            if units
            else "Not looked into: no other unit is named in case.toml."
        ),
        tables=(
            Table(
                name="other-units",
                title="Other units",
                columns=(Column(title="Unit"), Column(title="Looked at"), Column(title="Found")),
                rows=tuple(
                    (
                        u.unit,
                        u.looked.isoformat() if u.looked else ("yes" if u.found else "not yet"),
                        written(u.found) or "not looked at",
                    )
                    for u in units
                ),
                shown=ALL_ROWS,
            ),
        )
        if units
        else (),
    )
