"""Panels of actions across cases: what they did, how they stand, and the cautions."""

from rca.base.counted import counted
from rca.base.panel import Column, Panel, Table
from rca.compare.check import Comparison
from rca.compare.open_actions import Register, Row, Standing
from rca.compare.outcomes import KindOutcome, Result
from rca.compare.table import IncidentTable

CAUTIONS = (
    "Isolate and lock every energy, accumulators and held loads too, before any of these actions; "
    "a gauge at zero proves nothing.",
    "This list authorises nothing: a competent person decides about work and return to service.",
)


def outcomes_panel(table: IncidentTable, check: Comparison) -> Panel:
    """Did earlier actions of the same kind work?"""
    done = sum(len(g.actions) for g in check.outcomes)
    back = sum(g.count(Result.CAME_BACK) for g in check.outcomes)
    held = sum(g.count(Result.HELD) for g in check.outcomes)
    answer = (
        f"{counted(done, 'action')} done: after {back} the cause came back, after {held} the "
        f"machine stayed silent long enough to count, {done - back - held} can't be told yet."
        if done
        else "No case records an action that was done."
    )
    return Panel(
        key="compare.outcomes",
        title="Did earlier actions work?",
        question="What followed the actions done against each cause?",
        answer=answer,
        tables=(
            (_by_kind(check.outcomes), _one_by_one(table, check.outcomes))
            if check.outcomes
            else ()
        ),
        limits=(
            "An action failed where an incident with its cause followed on the same machine. "
            "Silence counts from three old intervals on: then no incident had a probability of "
            "0.05 without improvement. The old interval leaves out the incident that set the "
            "action off. What followed an action need not have followed from it.",
        ),
    )


def _by_kind(groups: tuple[KindOutcome, ...]) -> Table:
    return Table(
        name="compare-outcomes",
        title="By kind of action and cause",
        columns=(
            Column(title="Kind"),
            Column(title="Against"),
            Column(title="Done", numeric=True),
            Column(title="Came back", numeric=True),
            Column(title="Silent long enough", numeric=True),
            Column(title="Too short to tell", numeric=True),
            Column(title="No measure", numeric=True),
            Column(title="Proved by records", numeric=True),
            Column(title="Refuted by records", numeric=True),
        ),
        rows=tuple(
            (
                g.kind,
                g.cause,
                str(len(g.actions)),
                *(str(g.count(r)) for r in Result),
                str(sum(a.proof == "proved" for a in g.actions)),
                str(sum(a.proof == "refuted" for a in g.actions)),
            )
            for g in groups
        ),
        shown=20,
    )


def _one_by_one(table: IncidentTable, groups: tuple[KindOutcome, ...]) -> Table:
    rows = [
        (
            table.ids[a.row],
            a.action.id,
            a.action.text,
            a.cause,
            a.action.done.isoformat() if a.action.done else "",
            a.result.value + (f" after {a.after_days:.0f} d" if a.after_days is not None else ""),
            f"{a.watched_days:.0f}",
            f"{a.old_interval_days:.0f}, {a.interval_of}"
            if a.old_interval_days is not None
            else "not known",
            f"{a.silence_p:.2f}" if a.silence_p is not None else "",
            a.proof or "not stored",
        )
        for g in groups
        for a in g.actions
    ]
    return Table(
        name="compare-outcomes-each",
        title="Action by action",
        columns=(
            Column(title="Case"),
            Column(title="Id"),
            Column(title="Action"),
            Column(title="Against"),
            Column(title="Done"),
            Column(title="What followed"),
            Column(title="Days watched", numeric=True),
            Column(title="Old interval", unit="d", numeric=True),
            Column(title="P of silence", numeric=True),
            Column(title="Records say"),
        ),
        rows=tuple(rows),
        shown=15,
    )


def actions_panel(found: Register) -> Panel:
    """Open and overdue actions on the last day of observation."""
    urgent = [r for r in found.rows if r.standing not in (Standing.PROVED, Standing.ENDED)]
    return Panel(
        key="compare.actions",
        title="Open and overdue actions",
        question="What is still to be done or proved?",
        answer=register_words(found),
        tables=(
            Table(
                name="compare-actions",
                title=f"Actions as of {found.today}",
                columns=(
                    Column(title="Standing"),
                    Column(title="Case"),
                    Column(title="Id"),
                    Column(title="Action"),
                    Column(title="Owner"),
                    Column(title="Due"),
                    Column(title="Days late", numeric=True),
                    Column(title="Why"),
                ),
                rows=tuple(_row(r) for r in urgent),
                marks=tuple(
                    "beyond" if r.standing in (Standing.OVERDUE, Standing.REFUTED) else ""
                    for r in urgent
                ),
                shown=25,
            ),
        )
        if urgent
        else (),
        limits=CAUTIONS,
    )


def register_words(found: Register) -> str:
    """How many actions stand how, in one line."""
    if not found.rows:
        return "No case has an action on record."
    parts = [f"{n} {s.value}" for s in Standing if (n := found.count(s))]
    return f"{counted(len(found.rows), 'action')} as of {found.today}: {', '.join(parts)}."


def _row(r: Row) -> tuple[str, ...]:
    a = r.action
    why = "; ".join(text for text in (a.reason, *r.warnings, *a.objections) if text)
    return (
        r.standing.value,
        r.case,
        a.id,
        a.text,
        a.owner or "nobody",
        a.due.isoformat() if a.due else "none",
        str(r.late_days) if r.late_days is not None and r.late_days > 0 else "",
        why,
    )
