"""Panels of the suction line's resistances, what explains the drop, and what would mend it."""

from rca.base.panel import Card, Column, FigureRef, Panel, Table
from rca.figures.numbers import bar, celsius, day, share
from rca.suction.check import SuctionCheck
from rca.suction.counterfactual import Change, Counterfactual
from rca.suction.explanations import Explanations
from rca.suction.inverse import Inverse, Track
from rca.suction.priors import NOTICED
from rca.suction.rows import STARVED
from rca.suction.spread import Spread

METHOD = (
    "Losses are taken as a part that follows viscosity and flow, a part that follows the square "
    "of the flow, a depression of the reservoir while running, and an offset that stays at rest; "
    "all move in time along straight pieces between the dots. Transitional pipe flow is neither "
    "and is shared between the first two.",
    "Bayesian linear regression; before the record the line is believed as described (15 % on "
    "line losses, 35 % on the strainer, common practice) or to start or run off anywhere, each of "
    "the four equally. Bands are widened for autocorrelation (Flyvbjerg and Petersen 1989) and "
    "hold 90 %; losses can't be negative.",
    "Flow is speed times displacement unless it is recorded: a pump set back draws less, and a "
    "resistance found with it is then too small.",
)
CHANGE_LIMITS = (
    "Each change gives back what its explanation takes beyond the clean line and leaves the rest "
    "as found; losses linear down to 0.05 bar(a), where in truth the pump starves.",
    "Released air by the time the oil reaches the pump, first order, time constant 0.1 to 10 s.",
)


def panels_inverse(check: SuctionCheck) -> tuple[Panel, ...]:
    """Resistances, explanations and changes, or what is missing for them."""
    inverse, found = check.inverse, check.explanations
    if inverse is None or found is None:
        return (
            Panel(
                key="suction.resistances",
                title="Resistance of the suction line over the record",
                question="Did the line's resistance change, and which part of it?",
                answer=f"Not assessed; {check.inverse_missing}.",
                status="not assessed",
            ),
        )
    panels = [_resistances(inverse), _explanations(found)]
    if check.counterfactuals:
        panels.append(_changes(check))
    return tuple(panels)


def interval(spread: Spread, *, digits: int = 3) -> str:
    """Median and 90 % interval in bar; no negative zero."""
    low, mid, high = (
        bar(1e5 * (round(v / 1e5, digits) + 0.0), digits=digits)
        for v in (spread.p05, spread.p50, spread.p95)
    )
    return f"{mid} ({low} to {high})"


def _resistances(inverse: Inverse) -> Panel:
    moved = [t for t in _tracks(inverse) if t.p05[-1] > t.p95[0] or t.p95[-1] < t.p05[0]]
    unclear = [t for t in _tracks(inverse) if not t.identified_at_end]
    if inverse.contradicted:
        answer = (
            "The record does not fit the line: it asks for a negative "
            f"{' and '.join(inverse.contradicted)}. Transducer, flow or viscosity is not what it "
            "is taken for."
        )
        status = "not assessed"
    else:
        answer = " ".join(_change_words(t) for t in moved) or (
            "No part of the loss changed beyond its interval over the record."
        )
        status = "not identifiable" if unclear else "identified"
        if unclear:
            names = ", ".join(t.name for t in unclear)
            answer += f" Not told by this record: {names}."
    e = inverse.excitation
    return Panel(
        key="suction.resistances",
        title="Resistance of the suction line over the record",
        question="Did the line's resistance change, and which part of it?",
        answer=answer,
        status=status,
        paragraphs=(
            f"{inverse.rows} bins of the running pump and {inverse.rest_rows} at rest; oil "
            f"{celsius(e.temperature_low)} to {celsius(e.temperature_high)} \u00b0C (1 to 99 %), "
            f"viscosity by a factor of {e.viscosity_ratio:.2f}, flow by {e.flow_ratio:.2f}; "
            f"condition number {e.condition:.0f} (above 30 the losses look alike). Noise of a bin "
            f"{bar(inverse.noise, digits=4)} bar; {inverse.inflation:.0f} bins weigh as one "
            "independent one.",
            *inverse.remarks,
        ),
        tables=(_end_table(inverse),),
        figures=(
            FigureRef(
                name="suction-resistances",
                caption=f"Losses at {inverse.reference_flow * 60e3:.0f} L/min and "
                f"{celsius(inverse.reference_temperature)} \u00b0C over the record, median and "
                "90 % band; dotted: the clean line as described.",
                alt=" ".join(_change_words(t) for t in _tracks(inverse)[:1]),
            ),
            FigureRef(
                name="suction-predicted",
                caption="Every running bin: measured inlet pressure against what the clean line "
                "predicts, and against the resistances found. Line: equal.",
                alt="With the resistances found, prediction and reading agree bin by bin as far "
                "as the root mean square printed in the figure.",
            ),
            FigureRef(
                name="suction-map",
                caption="Inlet pressure of the line as found over flow and oil temperature "
                "(grey); the limit for the line as found (orange) and clean (green, dashed); "
                "recorded bins, orange squares below the limit.",
                alt="Where the recorded flow and temperature lie against the limit of the line as "
                "found and clean.",
            ),
        ),
        limits=METHOD,
        card=_card(inverse),
    )


def _tracks(inverse: Inverse) -> tuple[Track, ...]:
    return inverse.viscous, inverse.quadratic, inverse.depression, inverse.offset


NAMES = {
    "viscous": "The loss that follows viscosity",
    "quadratic": "The loss that follows the square of the flow",
    "depression": "The depression of the reservoir",
    "offset": "The offset of transducer and level",
}


def _change_words(track: Track) -> str:
    return (
        f"{NAMES[track.name]} goes from {bar(track.p50[0], digits=3)} to "
        f"{bar(track.p50[-1], digits=3)} bar "
        f"({bar(track.p05[-1], digits=3)} to {bar(track.p95[-1], digits=3)} bar)."
    )


def _end_table(inverse: Inverse) -> Table:
    clean = inverse.clean
    expected = (
        (clean.viscous, clean.quadratic, clean.depression, 0.0) if clean else (None,) * 3 + (0.0,)
    )
    rows = []
    for track, reference in zip(_tracks(inverse), expected, strict=True):
        rows.append(
            (
                NAMES[track.name].removeprefix("The "),
                _cell(track, 0),
                _cell(track, -1),
                bar(reference, digits=3) if reference is not None else "",
                "yes" if track.identified_at_end else "no",
                f"{track.narrowing[-1]:.2f}",
            )
        )
    a, b = inverse.viscous_resistance, inverse.quadratic_resistance
    return Table(
        name="suction-resistances",
        title="Losses at warm, full flow",
        columns=(
            Column(title="Part"),
            Column(title=f"Start, {day(inverse.knots_s[0])}", unit="bar", numeric=True),
            Column(title=f"End, {day(inverse.knots_s[-1])}", unit="bar", numeric=True),
            Column(title="Clean line", unit="bar", numeric=True),
            Column(title="Identified"),
            Column(title="Narrowed to", numeric=True),
        ),
        rows=tuple(rows),
        note=(
            "Median and 90 % interval. Narrowed: width of the interval over the width believed "
            f"before. At the end, viscous resistance {a.p50:.2g} 1/m\u00b3 ({a.p05:.2g} to "
            f"{a.p95:.2g}), quadratic {b.p50:.2g} 1/m\u2074 ({b.p05:.2g} to {b.p95:.2g}), in "
            "dp = a \u03bd\u03c1Q + b \u03c1Q\u00b2."
        ),
    )


def _cell(track: Track, place: int) -> str:
    return (
        f"{bar(track.p50[place], digits=3)} ({bar(track.p05[place], digits=3)} to "
        f"{bar(track.p95[place], digits=3)})"
    )


def _card(inverse: Inverse) -> Card:
    clear = sum(t.identified_at_end for t in _tracks(inverse))
    kept = inverse.rows / max(inverse.rows + inverse.set_aside.starved, 1)
    return Card(
        verification=(
            3,
            "synthetic records with known truth: intervals and a confusion table in the tests",
        ),
        validation=(
            2,
            f"against this unit's own record, {bar(inverse.noise, digits=4)} bar a bin left over",
        ),
        input_pedigree=(
            3 if inverse.rest_rows else 2,
            "transducer checked at standstill"
            if inverse.rest_rows
            else "transducer never seen at standstill",
        ),
        range_of_use=(
            3 if kept > 0.99 else 2,
            f"{100 * kept:.1f} % of the running bins have a known flow",
        ),
        uncertainty=(
            3,
            "credible intervals with autocorrelated noise and unknown drift",
        ),
        robustness=(
            min(clear, 4),
            f"{clear} of 4 unknowns told by this record",
        ),
    )


def _explanations(found: Explanations) -> Panel:
    return Panel(
        key="suction.explanations",
        title="What explains the inlet pressure",
        question="By how much could each explanation account for the drop at the inlet?",
        answer=_leading_words(found),
        status="not identifiable" if found.leading == "not identifiable" else "identified",
        paragraphs=(
            f"To explain at warm, full flow, end of the record, counted from "
            f"{found.counted_from}: {interval(found.drop)} bar.",
            _cold_words(found),
        ),
        tables=(
            Table(
                name="suction-explanations",
                title="Explanations",
                columns=(
                    Column(title="Explanation"),
                    Column(title="Lowers the inlet by", unit="bar", numeric=True),
                    Column(title="Change over the record", unit="bar", numeric=True),
                    Column(title="Probability it is the largest", numeric=True),
                    Column(title="Told apart"),
                    Column(title="Note"),
                ),
                rows=tuple(
                    (
                        s.explanation.value,
                        interval(s.amount),
                        interval(s.growth),
                        share(s.probability),
                        "yes" if s.identified else "no",
                        ("In one step. " if s.stepwise else "") + s.note,
                    )
                    for s in found.shares
                ),
                note=f"Median and 90 % interval; counted where above {bar(NOTICED)} bar.",
            ),
        ),
        figures=(
            FigureRef(
                name="suction-explanations",
                caption="How far each explanation lowers the inlet, against the drop there is to "
                "explain (band).",
                alt=_leading_words(found),
            ),
        ),
        limits=(
            "Counted from the line as described; what is wrong in the description is counted too.",
            "A pinch and a closed valve follow the square of the flow; a hose pressed flat over a "
            "length, or a strainer, follows viscosity.",
        ),
    )


def _cold_words(found: Explanations) -> str:
    begin = f"At the coldest running, {celsius(found.coldest)} \u00b0C, the line as found "
    if found.cold_inlet < STARVED:
        return begin + "would take more than there is at full flow: the pump starves."
    return begin + (
        f"loses {bar(found.cold_drop)} bar more than warm, which leaves "
        f"{bar(found.cold_inlet)} bar(a)."
    )


def _leading_words(found: Explanations) -> str:
    if found.leading == "not identifiable":
        return (
            f"Not told by this record: {_listed(found.between)} together hold most of the "
            "probability."
        )
    if found.leading == "normal vacuum":
        return (
            f"Nothing lowers the inlet noticeably beyond {found.counted_from} "
            f"(probability {share(found.leading_probability)}); an air leak is not excluded by "
            "that."
        )
    lead = next(s for s in found.shares if s.explanation.value == found.leading)
    if found.leading == "cold oil":
        return (
            f"Cold oil and nothing else: at {celsius(found.coldest)} \u00b0C its viscosity takes "
            f"{interval(lead.amount, digits=2)} bar in a line whose resistance is not raised; "
            f"probability {share(found.leading_probability)}."
        )
    return (
        f"The {found.leading} lowers the inlet most, by {interval(lead.amount)} bar; probability "
        f"{share(found.leading_probability)} that it is the largest."
    )


def _listed(names: tuple[str, ...]) -> str:
    return names[0] if len(names) == 1 else f"{', '.join(names[:-1])} and {names[-1]}"


def _changes(check: SuctionCheck) -> Panel:
    rows = check.counterfactuals
    single = [r for r in rows if r.change not in (Change.ALL, Change.WARM_OIL)]
    best = max(single, key=lambda r: r.gain.p50)
    return Panel(
        key="suction.changes",
        title="What each mend would do",
        question="Had one thing been right, where would the inlet pressure have been?",
        answer=_best_words(best),
        status="",
        tables=(
            Table(
                name="suction-changes",
                title="One change at a time",
                columns=(
                    Column(title="Change"),
                    Column(title="As found", unit="bar(a)", numeric=True),
                    Column(title="After", unit="bar(a)", numeric=True),
                    Column(title="Gain", unit="bar", numeric=True),
                    Column(title="Above the limit", unit="bar", numeric=True),
                    Column(title="Above air release", unit="bar", numeric=True),
                    Column(title="Released air", unit="%", numeric=True),
                    Column(title="Told apart"),
                ),
                rows=tuple(_change_row(r) for r in rows),
                note="Median and 90 % interval of one draw. " + _leak_note(rows),
            ),
        ),
        paragraphs=tuple(f"{n.change.value.capitalize()}: {n.why}." for n in check.not_computed),
        figures=(
            FigureRef(
                name="suction-changes",
                caption="Inlet pressure as found and after each change.",
                alt=_best_words(best),
            ),
        ),
        limits=CHANGE_LIMITS,
    )


def _best_words(best: Counterfactual) -> str:
    if best.gain.p50 < NOTICED:
        return "No single change moves the inlet noticeably."
    told = "" if best.identified else "; the record does not tell this gain from others"
    return (
        f"The largest gain is {best.change.value}: from {bar(best.before.p50)} to "
        f"{bar(best.after.p50)} bar(a), {interval(best.gain, digits=2)} bar{told}."
    )


def _leak_note(rows: tuple[Counterfactual, ...]) -> str:
    return next((r.basis for r in rows if r.change.value == "leak closed"), "")


def _change_row(row: Counterfactual) -> tuple[str, ...]:
    return (
        row.change.value,
        bar(row.before.p50),
        interval(row.after, digits=2),
        interval(row.gain, digits=2),
        bar(row.margin) if row.margin is not None else "",
        bar(row.air_margin),
        f"{_gas(row.released_before, row.starved_before)} to "
        f"{_gas(row.released_after, row.starved)}",
        "yes" if row.identified else "no",
    )


def _gas(released: Spread, starved: float) -> str:
    return "starved" if starved > 0.5 else f"{100 * released.p50:.1f}"
