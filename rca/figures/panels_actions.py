"""Panels of the actions: the register, what records prove, whether the fix did its work."""

from rca.actions.effect import Effect, Match
from rca.actions.proof import ClauseOutcome, Proof
from rca.actions.review import ActionReview, ActionsCheck
from rca.base.panel import Column, FigureRef, Panel, Section, Table
from rca.base.units import QUANTITY_DIMENSIONS
from rca.figures.actions import FIGURE, drawn
from rca.figures.numbers import bar, celsius

CAUTION = "Software output authorises nothing; a competent person decides."


def panels_actions(check: ActionsCheck) -> Section:
    """The section of the actions."""
    panels = [_register(check)]
    if check.effects:
        panels.append(_effect_panel(check))
    return Section(stage="actions", title="Actions", panels=tuple(panels))


def _register(check: ActionsCheck) -> Panel:
    day = check.as_of.isoformat() if check.as_of else "an unknown day"
    return Panel(
        key="actions.register",
        title="Corrective actions",
        question="What is being done, and is it proved?",
        answer=f"{_counts(check)}, as of {day}." if check.actions else "No action is on record.",
        tables=(_actions(check), _proof(check)) if check.actions else (),
        limits=(CAUTION,),
    )


def _counts(check: ActionsCheck) -> str:
    n = len(check.actions)
    parts = [f"{n} action{'s' if n != 1 else ''}"]
    late = sum(a.overdue for a in check.actions)
    parts += [f"{late} overdue"] if late else []
    for proof in Proof:
        found = sum(a.proof is proof for a in check.actions)
        parts += [f"{found} {proof.value}"] if found else []
    return ", ".join(parts)


def _actions(check: ActionsCheck) -> Table:
    return Table(
        name="actions",
        title="Actions",
        columns=(
            Column(title="Id"),
            Column(title="Kind"),
            Column(title="Action"),
            Column(title="Cause it addresses"),
            Column(title="Owner"),
            Column(title="Due"),
            Column(title="Done"),
            Column(title="Status"),
            Column(title="Proof"),
        ),
        rows=tuple(
            (
                a.id,
                a.kind,
                a.text,
                a.cause or "none named",
                a.owner,
                a.due.isoformat() if a.due else "",
                a.done.isoformat() if a.done else "",
                a.status + (" (overdue)" if a.overdue else ""),
                a.proof.value,
            )
            for a in check.actions
        ),
        marks=tuple(
            "beyond" if a.overdue or a.proof is Proof.REFUTED else "" for a in check.actions
        ),
        shown=40,
    )


def _proof(check: ActionsCheck) -> Table:
    return Table(
        name="actions-proof",
        title="Proof and objections",
        columns=(
            Column(title="Id"),
            Column(title="Condition"),
            Column(title="Measured"),
            Column(title="What the records say"),
            Column(title="Objections"),
        ),
        rows=tuple(_proof_row(a) for a in check.actions),
        note="The owner of an action can't verify it; nothing closes without proof. Records after "
        "the day of the work count, at least 90 % of the time asked for, the pump running.",
        shown=40,
    )


def _proof_row(a: ActionReview) -> tuple[str, ...]:
    measured = "; ".join(text for c in a.clauses if (text := _measured(c)))
    objections = "; ".join(a.objections) or "none"
    return (a.id, a.verify or "no condition", measured or "nothing yet", a.reason, objections)


def _measured(c: ClauseOutcome) -> str:
    if c.silence_p is not None:
        return f"silent for {c.days_covered:.0f} d; by chance {c.silence_p:.2f}"
    if c.measured is None:
        return ""
    hours = f" in {c.running_hours:.0f} h of running" if c.running_hours is not None else ""
    return f"{_field(c.quantity, c.measured)}{hours}"


def _field(quantity: str, value: float) -> str:
    """A measured value in the unit people use."""
    dimension = QUANTITY_DIMENSIONS[quantity]
    if dimension == "pressure":
        return f"{bar(value)} bar(a)"
    if dimension == "pressure difference":
        return f"{bar(value, digits=3)} bar"
    if dimension == "temperature":
        return f"{celsius(value)} °C"
    factor, unit = {
        "speed": (60.0, "rpm"),
        "flow": (60000.0, "L/min"),
        "length": (1.0, "m"),
        "acceleration": (1.0, "m/s²"),
        "ratio": (1.0, ""),
    }[dimension]
    return f"{value * factor:.3g} {unit}".strip()


def _effect_panel(check: ActionsCheck) -> Panel:
    measured = [e for e in check.effects if e.gain is not None]
    return Panel(
        key="actions.effect",
        title="Did the fix do what the physics said it would?",
        question="How much inlet pressure did each fix promise, and how much did it give?",
        answer=_effect_words(check.effects),
        figures=tuple(
            FigureRef(
                name=FIGURE,
                caption="Predicted gain of inlet pressure (bar: 5 to 95 %) and measured gain "
                "(mark), warm and running.",
                alt=_effect_words(check.effects),
            )
            for _ in range(drawn(check))
        ),
        tables=(
            Table(
                name="actions-effect",
                title="Predicted and measured effect",
                columns=(
                    Column(title="Id"),
                    Column(title="Put right"),
                    Column(title="Predicted gain", unit="bar", numeric=True),
                    Column(title="Measured gain", unit="bar", numeric=True),
                    Column(title="Before", unit="bar(a)", numeric=True),
                    Column(title="After", unit="bar(a)", numeric=True),
                    Column(title="Hours after", numeric=True),
                    Column(title="Match"),
                    Column(title="Why"),
                ),
                rows=tuple(_effect_row(e) for e in check.effects),
                marks=tuple("beyond" if e.match is Match.LESS else "" for e in check.effects),
            ),
        ),
        limits=(
            "The prediction rests on the record before the work only. Medians of warm running; "
            "the transducer's constant error drops out of a difference. A standard uncertainty "
            "of 0.01 bar stands for load and weather (common practice, no source)."
            if measured
            else "The prediction rests on the record before the work only.",
            CAUTION,
        ),
    )


def _effect_words(found: tuple[Effect, ...]) -> str:
    measured = [e for e in found if e.gain is not None]
    if not measured:
        return "Not one fix can be held against its prediction yet: " + "; ".join(
            dict.fromkeys(f"{e.action}: {e.reason}" for e in found)
        )
    first = [
        f"{e.action} gave {bar(e.gain)} bar, {bar(e.predicted_gain.p05)} to "
        f"{bar(e.predicted_gain.p95)} bar were predicted: {e.match.value}"
        for e in measured
        if e.gain is not None and e.predicted_gain is not None
    ]
    return "; ".join(first) + "."


def _effect_row(e: Effect) -> tuple[str, ...]:
    gain = e.predicted_gain
    together = f"; done the same day: {', '.join(e.together_with)}" if e.together_with else ""
    return (
        e.action,
        e.change,
        f"{bar(gain.p50)} ({bar(gain.p05)} to {bar(gain.p95)})" if gain is not None else "",
        bar(e.gain) if e.gain is not None else "",
        bar(e.before) if e.before is not None else "",
        bar(e.after) if e.after is not None else "",
        f"{e.hours_after:.0f}" if e.gain is not None else "",
        e.match.value,
        e.reason + together,
    )
