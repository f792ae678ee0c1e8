"""The comparison in words and tables, section by section."""

from rca.base.counted import counted
from rca.base.panel import Column, FigureRef, Panel, Section, Table
from rca.compare.check import Comparison
from rca.compare.gather import Refused
from rca.compare.panels_actions import actions_panel, outcomes_panel
from rca.compare.panels_groups import group_panels
from rca.compare.panels_recurrence import came_back_panel, recurrence_panel
from rca.compare.similar import DOUBT, Likeness
from rca.compare.table import IncidentTable

SHOWN_REASONS = 6


def panels_comparison(
    table: IncidentTable,
    check: Comparison,
    *,
    refused: tuple[Refused, ...] = (),
    replaced: tuple[str, ...] = (),
    figures: frozenset[str] = frozenset(),
) -> Section:
    """Every panel of the comparison, in reading order; ``figures`` names those drawn."""
    return Section(
        stage="compare",
        title="Incidents compared",
        panels=(
            _time(table, check, figures),
            came_back_panel(check),
            *group_panels(check, figures),
            recurrence_panel(check, figures),
            _alike(table, check),
            outcomes_panel(table, check),
            actions_panel(check.register),
            _read(table, check, refused, replaced),
        ),
    )


def _time(table: IncidentTable, check: Comparison, figures: frozenset[str]) -> Panel:
    days = [d for k in range(len(table)) if (d := table.day(k)) is not None]
    span = f", {min(days)} to {max(days)}" if days else ""
    machines = len(set(table.machines))
    limits = [f"Observed until {check.until}."]
    if check.undated:
        limits.append(
            f"{counted(len(check.undated), 'case')} without a date: in no figure over time."
        )
    if check.invented:
        limits.append(
            f"{check.invented} of {check.n} cases say themselves that they are invented."
        )
    ranking = check.rankings[0]
    return Panel(
        key="compare.time",
        title="Incidents in time",
        question="What happened when, on which machine, from which side?",
        answer=f"{counted(check.n, 'incident')} on {counted(machines, 'machine')}{span}.",
        figures=tuple(
            FigureRef(
                name="compare-time",
                caption="Each incident a mark; the pale bar is the time its machine was watched. "
                "The machines with most incidents, at most 24.",
                alt=f"{check.n} incidents over time on the machines with most of them.",
            )
            for _ in range("compare-time" in figures)
        ),
        tables=(
            Table(
                name="compare-machines",
                title="By machine",
                columns=(
                    Column(title="Machine"),
                    Column(title="Incidents", numeric=True),
                    Column(title="Downtime", unit="h", numeric=True),
                    Column(title="Downtime known in", numeric=True),
                    Column(title="Cost", numeric=True),
                    Column(title="Cost known in", numeric=True),
                ),
                rows=tuple(
                    (
                        b.name or "not named",
                        str(b.count),
                        f"{b.downtime_h:.0f}" if b.downtime_known else "not recorded",
                        f"{b.downtime_known} of {b.count}",
                        money(b.cost),
                        f"{b.cost_known} of {b.count}",
                    )
                    for b in ranking.bars
                ),
                note="A sum holds the incidents whose downtime or cost is stated; the others are "
                "unknown, not zero. Currencies are not added together.",
            ),
        ),
        limits=tuple(limits),
    )


def money(cost: dict[str, float]) -> str:
    """Amounts by currency, thousands set apart by a thin space."""
    amounts = (f"{c} {amount:,.0f}".replace(",", "\u202f") for c, amount in cost.items())
    return "; ".join(amounts) or "not recorded"


def _alike(table: IncidentTable, check: Comparison) -> Panel:
    return Panel(
        key="compare.alike",
        title=f"Most like {check.asked}" if check.asked else "Most like this one",
        question="Which earlier incidents looked like this one, and why?",
        answer=_alike_words(table, check),
        tables=_alike_tables(table, check),
        limits=(
            f"Likeness = agreeing bits / (compared bits + {DOUBT:g}). A sign counts by how rare "
            "it is among the cases read; only signs and conditions looked at in both count; what "
            "was concluded does not. Other cases in the table change the bits.",
        ),
    )


def _alike_words(table: IncidentTable, check: Comparison) -> str:
    if not check.asked:
        return "No case is dated, so none could be taken for the latest."
    if not check.alike:
        words = "No other case has a sign or condition on record that was looked at here too."
        if check.same_finding:
            words += " Cases with a like finding are listed instead; that is weaker."
        return words
    first = check.alike[0]
    words = f"{table.ids[first.other]} is nearest, likeness {first.score:.2f} of 1"
    if first.score < 0.4:
        words += "; none is near"
    if check.not_comparable:
        words += f". {check.not_comparable} cases share nothing looked at with it"
    return words + "."


def _alike_tables(table: IncidentTable, check: Comparison) -> tuple[Table, ...]:
    made = []
    if check.alike:
        made.append(
            Table(
                name="compare-alike",
                title="The nearest incidents",
                columns=(
                    Column(title="Case"),
                    Column(title="Date"),
                    Column(title="Machine"),
                    Column(title="Likeness", numeric=True),
                    Column(title="Alike in"),
                    Column(title="Unlike in"),
                    Column(title="It turned out to be"),
                ),
                rows=tuple(_alike_row(table, one) for one in check.alike),
            )
        )
    if check.same_finding:
        made.append(
            Table(
                name="compare-same-finding",
                title="Like findings, in cases whose signs are not on record",
                columns=(
                    Column(title="Case"),
                    Column(title="Machine"),
                    Column(title="Overlap of mechanisms", numeric=True),
                    Column(title="Side found"),
                    Column(title="Main cause"),
                ),
                rows=tuple(
                    (
                        table.ids[k],
                        table.machines[k],
                        f"{overlap:.2f}",
                        table.sides[k],
                        table.main_causes[k],
                    )
                    for k, overlap in check.same_finding
                ),
                note="This compares conclusions, not what was seen.",
            )
        )
    return tuple(made)


def _alike_row(table: IncidentTable, one: Likeness) -> tuple[str, ...]:
    shared = [f"{f.name} ({f.words})" for f in one.shared[:SHOWN_REASONS]]
    different = [f"{f.name} ({f.words})" for f in one.different[:SHOWN_REASONS]]
    day = table.day(one.other)
    return (
        table.ids[one.other],
        day.isoformat() if day else "not recorded",
        table.machines[one.other],
        f"{one.score:.2f}",
        "; ".join(shared) or "nothing",
        "; ".join(different) or "nothing",
        f"{table.sides[one.other]}; {table.main_causes[one.other]}",
    )


def _read(
    table: IncidentTable,
    check: Comparison,
    refused: tuple[Refused, ...],
    replaced: tuple[str, ...],
) -> Panel:
    tables = [
        Table(
            name="compare-cases",
            title="Cases read",
            columns=(
                Column(title="Case"),
                Column(title="Date"),
                Column(title="Machine"),
                Column(title="Side"),
                Column(title="Main cause"),
                Column(title="Title"),
            ),
            rows=tuple(
                (
                    table.ids[k],
                    d.isoformat() if (d := table.day(k)) else "not recorded",
                    table.machines[k],
                    table.sides[k],
                    table.main_causes[k],
                    table.titles[k],
                )
                for k in range(len(table))
            ),
            shown=30,
        )
    ]
    if refused:
        tables.append(
            Table(
                name="compare-refused",
                title="Files left out",
                columns=(Column(title="File"), Column(title="Why")),
                rows=tuple((r.source, r.reason) for r in refused),
            )
        )
    if replaced:
        tables.append(
            Table(
                name="compare-replaced",
                title="Copies and older revisions, not counted",
                columns=(Column(title="File"),),
                rows=tuple((source,) for source in replaced),
            )
        )
    left = counted(len(refused), "file")
    return Panel(
        key="compare.read",
        title="What was read",
        question="Which files stand behind this, and which could not be used?",
        answer=f"{counted(check.n, 'case')}; {left} could not be used; "
        f"{counted(len(replaced), 'copy', 'copies')} or older revisions not counted.",
        tables=tuple(tables),
    )
