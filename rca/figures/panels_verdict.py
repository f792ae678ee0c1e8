"""Panels of the verdict: explanations, weight of evidence, causes, next tests."""

from collections.abc import Callable

from rca.base.counted import counted
from rca.base.panel import Column, FigureRef, Panel, Section, Table
from rca.case.vocabulary import DISCHARGE_MECHANISMS, SUCTION_MECHANISMS
from rca.figures.numbers import bar, celsius, ratio, share
from rca.verdict.explain import CHANCE, GROUP_CAP, SCALE, TOTAL_CAP
from rca.verdict.model import VerdictCheck

LIMITS = (
    "A verdict is an opinion with limits: the numbers of the knowledge file are judgement unless "
    "marked otherwise. They were tried on simulated cases, and have not been calibrated on "
    "failures of known cause.",
    "Each item's weight is taken with all others in place; items of one bottle, sensor or "
    "observer share the chance that what they rest on is unsound.",
)


def panels_verdict(check: VerdictCheck) -> Section:
    """The section of the weighing."""
    panels = [_explanations(check), _weight(check), _robust(check), _causes(check), _tests(check)]
    return Section(stage="verdict", title="Weighing", panels=tuple(panels))


def _explanations(check: VerdictCheck) -> Panel:
    verdict = check.verdict
    rows = []
    for name, p in sorted(verdict.mechanisms.items(), key=lambda kv: -kv[1]):
        side = (
            "suction"
            if name in SUCTION_MECHANISMS
            else "discharge"
            if name in DISCHARGE_MECHANISMS
            else "neither"
        )
        ranked = sorted(check.evidence, key=lambda i: -i.by_mechanism[name])
        up = [i.id for i in ranked if i.by_mechanism[name] > 1.2][:4]
        down = [i.id for i in reversed(ranked) if i.by_mechanism[name] < 1 / 1.2][:4]
        rows.append(
            (
                name,
                side,
                share(verdict.prior[name]),
                share(p),
                ", ".join(up) or "none",
                ", ".join(down) or "none",
            )
        )
    return Panel(
        key="verdict.explanations",
        title="Explanations considered",
        question="Which mechanisms took part, and what speaks for and against each?",
        answer=verdict.words.finding,
        status=verdict.side,
        paragraphs=(
            f"Rule applied: {verdict.words.rule}.",
            *_order_words(check),
            *(f"Contradiction in the evidence: {c}." for c in verdict.contradictions),
        ),
        tables=(
            Table(
                name="verdict-mechanisms",
                title="Mechanisms",
                columns=(
                    Column(title="Mechanism"),
                    Column(title="Side"),
                    Column(title="Before", numeric=True),
                    Column(title="After", numeric=True),
                    Column(title="Strongest for"),
                    Column(title="Strongest against"),
                ),
                rows=tuple(rows),
                note="Probability that the mechanism took part; several can be true at once, so "
                "the numbers need not add up to one. Before: among failed pumps, by judgement.",
            ),
            *_changes(check),
        ),
        figures=(
            FigureRef(
                name="verdict-mechanisms",
                caption="Mechanisms before and after the evidence.",
                alt=verdict.words.finding,
            ),
            FigureRef(
                name="verdict-network",
                caption="The network in the state of this case: causes, conditions, mechanisms. "
                "Bars and numbers are probabilities; thicker frames are more probable than not; "
                "lines run where one brings about the other.",
                alt="Most probable: " + _most_probable(check) + ".",
            ),
        ),
        limits=LIMITS,
    )


def _most_probable(check: VerdictCheck) -> str:
    shown = [c.cause for c in check.causes if c.probability >= 0.5 and c.cause != "unknown"]
    shown += [name for name, p in check.verdict.mechanisms.items() if p >= 0.5]
    return ", ".join(shown) or "nothing above one half"


def _changes(check: VerdictCheck) -> tuple[Table, ...]:
    """The numbers the site put in place of the shipped ones."""
    if not check.changes:
        return ()
    return (
        Table(
            name="site-knowledge",
            title="Numbers of the site in place of the shipped ones",
            columns=(
                Column(title="Of"),
                Column(title="Number"),
                Column(title="Shipped", numeric=True),
                Column(title="Site", numeric=True),
                Column(title="Reason"),
                Column(title="Place"),
            ),
            rows=tuple(
                (
                    c.variable,
                    c.number,
                    f"{c.before:.3g}" if c.before is not None else "none",
                    f"{c.after:.3g}",
                    c.reason,
                    c.place,
                )
                for c in check.changes
            ),
            note=f"Knowledge {check.knowledge}; not comparable with verdicts under other numbers.",
        ),
    )


def _order_words(check: VerdictCheck) -> tuple[str, ...]:
    """Which side came first, where both took part."""
    order = check.verdict.order
    if order is None:
        return ()
    return (f"Which side showed first: {order.first}. {order.why}",)


def _weight(check: VerdictCheck) -> Panel:
    rows = tuple(
        (
            i.id,
            i.statement,
            i.group,
            f"{i.favours}" if i.favours != "neither way" else "neither way",
            ratio(i.likelihood_ratio),
            i.words,
        )
        for i in check.evidence
    )
    groups = tuple(
        (g.group, ", ".join(g.items), _factor(g.suction_ratio), _factor(g.discharge_ratio))
        for g in check.verdict.groups
    )
    figures = (
        (
            FigureRef(
                name="verdict-items",
                caption="What each item did to the odds of either side, all others in place.",
                alt="The items that moved the odds most: "
                + ", ".join(
                    i.id for i in sorted(check.evidence, key=lambda i: -i.likelihood_ratio)[:3]
                )
                + ".",
            ),
            FigureRef(
                name="verdict-matrix",
                caption="Items by mechanisms: plus signs speak for, bars against; size is weight.",
                alt="Matrix of evidence items against mechanisms.",
            ),
            FigureRef(
                name="verdict-running",
                caption="The sides as one group of evidence after the other is let in.",
                alt=_running_words(check),
            ),
        )
        if check.evidence
        else ()
    )
    scale = "; ".join(f"to {top:g}: {words}" for top, words in SCALE)
    return Panel(
        key="verdict.weight",
        title="Weight of evidence",
        question="What did each item contribute, and how strongly?",
        answer=(
            f"{counted(len(check.evidence), 'item')} weighed, in "
            f"{counted(len(check.verdict.groups), 'group')}."
            if check.evidence
            else "No item weighs; nothing was looked at."
        ),
        paragraphs=tuple(w for w in (check.verdict.words.together, check.verdict.words.caps) if w),
        tables=(
            Table(
                name="evidence",
                title="Items of evidence",
                columns=(
                    Column(title="Id"),
                    Column(title="Finding"),
                    Column(title="Group"),
                    Column(title="Favours"),
                    Column(title="Ratio", numeric=True),
                    Column(title="In words"),
                ),
                rows=rows,
                shown=60,
                note=f"Ratio: odds with the item over odds without it. Words by ratio: {scale}; "
                "above: extremely strong support.",
            ),
            Table(
                name="verdict-groups",
                title="Groups of evidence",
                columns=(
                    Column(title="Group"),
                    Column(title="Items"),
                    Column(title="Odds of suction", numeric=True),
                    Column(title="Odds of discharge", numeric=True),
                ),
                rows=groups,
                note="Factor on the odds when the whole group is left in, against left out; "
                f"held to {GROUP_CAP:g} a group and {TOTAL_CAP:g} in all, which is as far as "
                "judgement may go.",
            ),
        )
        if check.evidence
        else (),
        figures=figures,
    )


def _running_words(check: VerdictCheck) -> str:
    steps = check.verdict.running
    if len(steps) < 2:
        return "No evidence was let in."
    jump = max(
        range(1, len(steps)),
        key=lambda n: max(
            abs(steps[n].suction - steps[n - 1].suction),
            abs(steps[n].discharge - steps[n - 1].discharge),
        ),
    )
    return f"The largest step comes with the group {steps[jump].group!r}."


def _factor(x: float) -> str:
    return f"\u00d7 {ratio(x)}" if x >= 1 else f"\u00f7 {ratio(1 / x)}"


def _robust(check: VerdictCheck) -> Panel:
    r = check.verdict.robustness
    flip = ", ".join(r.flip_set) if r.flip_set else "none of up to three"
    agrees = "agrees" if r.second_agrees else "does not agree"
    rows = (
        ("Same side over the draws", f"{100 * r.same_side:.0f} % of {r.draws}"),
        ("Suction, 5 to 95 % of the draws", f"{share(r.suction.p05)} to {share(r.suction.p95)}"),
        (
            "Discharge, 5 to 95 % of the draws",
            f"{share(r.discharge.p05)} to {share(r.discharge.p95)}",
        ),
        ("Smallest set of items whose removal changes the side", flip),
        (
            "Factor on the prior odds at which suction stands at 0.75",
            _factor(r.prior_at_flip["suction"]),
        ),
        (
            "Factor on the prior odds at which discharge stands at 0.75",
            _factor(r.prior_at_flip["discharge"]),
        ),
        ("Second method (strongest item of each group)", f"{r.second_method}; {agrees}"),
    )
    return Panel(
        key="verdict.robustness",
        title="How far this could move",
        question="What would change the verdict?",
        answer=check.verdict.words.biggest_doubt,
        tables=(
            Table(
                name="verdict-robustness",
                title="Robustness",
                columns=(Column(title="Question"), Column(title="Answer")),
                rows=rows,
                note="Draws: all numbers of the knowledge file varied together between their low "
                "and high values.",
            ),
        ),
        figures=(
            FigureRef(
                name="verdict-tornado",
                caption="Each side with one item left out: the items that would move it most.",
                alt=check.verdict.words.biggest_doubt,
            ),
        )
        if check.evidence
        else (),
    )


def _causes(check: VerdictCheck) -> Panel:
    shown = [c for c in check.causes if c.probability >= 0.02 or c.cause == "unknown"]
    top = shown[0] if shown else None
    return Panel(
        key="verdict.causes",
        title="Root causes",
        question="What let it start?",
        answer=(
            f"Most probable: {top.cause} (probability {share(top.probability)})."
            if top is not None and top.probability >= 0.4
            else "No root cause stands out."
        ),
        tables=(
            Table(
                name="causes",
                title="Causes by probability",
                columns=(
                    Column(title="Cause"),
                    Column(title="Probability", numeric=True),
                    Column(title="Evidence for"),
                    Column(title="Evidence against"),
                ),
                rows=tuple(
                    (
                        c.cause,
                        share(c.probability),
                        ", ".join(c.evidence) or "none of its own",
                        ", ".join(c.against) or "none",
                    )
                    for c in shown
                ),
                note="Several causes can be present at once. 'unknown' is the probability that "
                "none of the named causes was present.",
            ),
            *_without(check),
        ),
        limits=(f"Words for probabilities: {_chance_words()}.",),
    )


def _without(check: VerdictCheck) -> tuple[Table, ...]:
    """One cause taken away: what the inlet and the bubble would have been."""
    if not check.verdict.without:
        return ()
    likely = {c.cause: c.probability for c in check.causes}
    rows = tuple(
        (
            w.change,
            share(likely[w.cause]) if w.cause in likely else "",
            _pair(w.inlet_before, w.inlet_after, bar),
            _pair(w.released_before, w.released_after, lambda x: f"{100 * x:.1f}"),
            _pair(w.bubble_before, w.bubble_after, celsius),
            w.still,
        )
        for w in check.verdict.without
    )
    basis = next((w.basis for w in check.verdict.without if not w.cause and "Core" in w.basis), "")
    return (
        Table(
            name="without-causes",
            title="One thing put right, everything else as found",
            columns=(
                Column(title="Put right"),
                Column(title="Cause present", numeric=True),
                Column(title="Inlet", unit="bar(a)", numeric=True),
                Column(title="Air released", unit="% of oil", numeric=True),
                Column(title="Bubble", unit="\u00b0C", numeric=True),
                Column(title="Then"),
            ),
            rows=rows,
            note="Before and after, medians. Bubble: air compressed without heat loss, an upper "
            "bound that the inlet hardly moves; a better inlet takes away the air, not the heat. "
            + (f"Slower rise: {basis}" if basis else ""),
        ),
    )


def _pair(before: float | None, after: float | None, form: Callable[[float], str]) -> str:
    if after is None and before is None:
        return ""
    one = form(before) if before is not None else "starved"
    return f"{one} \u2192 {form(after) if after is not None else 'starved'}"


def _chance_words() -> str:
    parts, low = [], 0.0
    for top, words in CHANCE:
        parts.append(f"{low:.3g} to {min(top, 1.0):.3g} {words}")
        low = top
    return "; ".join(parts)


def _tests(check: VerdictCheck) -> Panel:
    tests = check.verdict.next_tests
    useful = [t for t in tests if t.could_change_side]
    if not tests:
        answer = "Every test this program knows was done."
    elif useful:
        answer = f"Next best test: {useful[0].name}."
    else:
        answer = "No single remaining test would change the side; the first ones perish soonest."
    return Panel(
        key="verdict.tests",
        title="Next best tests",
        question="Which test, not done yet, would tell most for its cost?",
        answer=answer,
        tables=(
            Table(
                name="next-tests",
                title="Tests not done yet",
                columns=(
                    Column(title="Test"),
                    Column(title="Tells", unit="bit", numeric=True),
                    Column(title="Cost", unit="EUR", numeric=True),
                    Column(title="Takes", unit="h", numeric=True),
                    Column(title="Alters evidence"),
                    Column(title="Perishes"),
                    Column(title="If found: suction / discharge"),
                    Column(title="If absent: suction / discharge"),
                ),
                rows=tuple(
                    (
                        t.name,
                        f"{t.information_bit:.3f}",
                        f"{t.cost:.0f}",
                        f"{t.hours:.0f}",
                        "yes" if t.alters_evidence else "no",
                        "does not" if t.perishes_days > 1000 else f"in {t.perishes_days:.0f} d",
                        f"{share(t.if_found['suction'])} / {share(t.if_found['discharge'])}",
                        f"{share(t.if_absent['suction'])} / {share(t.if_absent['discharge'])}",
                    )
                    for t in tests[:10]
                ),
                note="Perishable and harmless tests stand first, then information for cost and "
                "time. Costs and hours are judgement.",
            ),
        )
        if tests
        else (),
    )
