"""The panel of oil trends: lines per fill on hours, and what splits them."""

from rca.base.panel import Column, FigureRef, Panel, Table
from rca.figures.oil import CHEMISTRY, WEAR, shown_properties
from rca.oil.check import OilCheck
from rca.oil.trends import LEAST, Trend
from rca.oil.words import property_name, unit_text


def trends_panel(check: OilCheck) -> Panel:
    """What moved over the life of the oil that failed."""
    of_last = [t for t in check.trends if t.fill == check.fill]
    moving = sorted((t for t in of_last if t.verdict in ("rises", "falls")), key=_rank)
    tested = [t for t in of_last if t.verdict not in ("too few results", "not testable")]
    if moving:
        words = "; ".join(_trend_words(t) for t in moving[:5])
        answer = f"On the fill that failed {words}."
    elif tested:
        answer = (
            "On the fill that failed no trend beyond chance and R is shown in "
            f"{len(tested)} properties."
        )
    else:
        answer = (
            "The fill that failed has too few results for a trend "
            f"(fewer than {LEAST} a property)."
        )
    return Panel(
        key="oil.trends",
        title="Trends over the running hours",
        question="What moved over the life of this oil?",
        answer=answer,
        status="supported" if moving else "not shown",
        paragraphs=_trend_paragraphs(check, of_last),
        tables=(_trend_table(check),),
        figures=_figures(check),
        limits=(
            "Mann-Kendall test, exact where small; Theil-Sen slope on hours; pairs are compared "
            "inside one fill and one laboratory only. A trend is shown only where its two-sided "
            "probability by chance is under 0.05 and its change over the fill exceeds R.",
            "Results below a limit of detection are kept as limits and ordered as far as they "
            "can be; nothing is put in their place.",
        ),
    )


def _trend_words(trend: Trend) -> str:
    rate = f"{abs(trend.per_1000h or 0.0):.2g} {unit_text(trend.unit)}".strip()
    chance = f"p = {trend.p:.2g}" if trend.p is not None else ""
    return f"{property_name(trend.property)} {trend.verdict} by {rate} per 1000 h ({chance})"


def _trend_paragraphs(check: OilCheck, trends: list[Trend]) -> tuple[str, ...]:
    said = [
        f"{e.when}: {e.kind} ({e.known_from})."
        for e in check.events
        if e.kind in ("oil change", "laboratory change", "hour meter set back")
    ]
    paragraphs = []
    if said:
        paragraphs.append("The series is split at known events. " + " ".join(said))
    flagged = [
        f"{property_name(t.property)} in {', '.join(t.outliers)}" for t in trends if t.outliers
    ]
    if flagged:
        paragraphs.append(
            "Results far from their line are flagged and kept; they need a re-test or a reason: "
            + "; ".join(flagged)
            + "."
        )
    steps = [
        f"{property_name(t.property)} {t.laboratory_step:+.2g}"
        for t in trends
        if t.laboratory_step is not None and abs(t.laboratory_step) > t.noise
    ]
    if steps:
        paragraphs.append(
            "Between laboratories the level shifts by more than R: " + "; ".join(steps) + "."
        )
    hints = [
        f"{property_name(t.property)} after {t.change_after} (p = {t.change_p:.2g})"
        for t in trends
        if t.change_after and t.change_p is not None
    ]
    if hints:
        paragraphs.append(
            "Changes of level found by search, exploratory: " + "; ".join(hints) + "."
        )
    return tuple(paragraphs)


def _trend_table(check: OilCheck) -> Table:
    rows = [_trend_row(t) for t in sorted(check.trends, key=lambda t: (-t.fill, *_rank(t)))]
    return Table(
        name="oil-trends",
        title="Trends of every fill",
        columns=(
            Column(title="Fill", numeric=True),
            Column(title="Property"),
            Column(title="Results", numeric=True),
            Column(title="Axis"),
            Column(title="Per 1000 h", numeric=True),
            Column(title="95 % interval", numeric=True),
            Column(title="p", numeric=True),
            Column(title="Over the fill", numeric=True),
            Column(title="R", numeric=True),
            Column(title="Judged"),
        ),
        rows=tuple(rows),
        marks=tuple("near" if row[-1] in ("rises", "falls") else "" for row in rows),
        note="p is two-sided and exact in small series. Days count 24 h.",
    )


def _rank(trend: Trend) -> tuple[bool, float, str]:
    """Trends that are shown first, by how far they exceed the noise floor."""
    over = abs(trend.change or 0.0) / trend.noise if trend.noise else 0.0
    return trend.verdict not in ("rises", "falls"), -over, trend.property


def _near_zero(value: float | None) -> str:
    return "0" if value is None or abs(value) < 1e-9 else f"{value:.2g}"


def _trend_row(t: Trend) -> tuple[str, ...]:
    tested = t.per_1000h is not None and t.low is not None and t.high is not None
    return (
        str(t.fill + 1),
        property_name(t.property),
        f"{t.points}" + (f" ({t.limits} limits)" if t.limits else ""),
        t.axis + (", top-ups added back" if t.corrected else ""),
        f"{t.per_1000h:+.2g}" if tested else "–",
        f"{_near_zero(t.low)} to {_near_zero(t.high)}" if tested else "–",
        f"{t.p:.2g}" if t.p is not None else "–",
        f"{t.change:+.2g}" if t.change is not None else "–",
        f"{t.noise:.2g}" if tested else "–",
        t.verdict,
    )


def _figures(check: OilCheck) -> tuple[FigureRef, ...]:
    refs = []
    for name, words in ((CHEMISTRY, "Condition of the oil"), (WEAR, "Wear metals and dirt")):
        shown = shown_properties(check, name)
        if shown:
            refs.append(
                FigureRef(
                    name=name,
                    caption=(
                        f"{words} at {check.point or 'the sample point'}. Shaded: new oil ± R; "
                        "dashed: limit; full upright line: oil change; dotted: laboratory change; "
                        "open mark: limit of detection; cross: set aside; one marker a laboratory."
                    ),
                    alt=_alt(check, shown),
                )
            )
    return tuple(refs)


def _alt(check: OilCheck, shown: tuple[str, ...]) -> str:
    parts = []
    for name in shown:
        one = check.judged.get(name)
        if one is None:
            continue
        verdict = one.trend.verdict if one.trend is not None else "not tested"
        change = f", {one.change:+.2g} from new" if one.change is not None else ""
        parts.append(f"{property_name(name)} {one.text} {unit_text(one.unit)}{change}: {verdict}")
    return ("; ".join(parts) or "No result on the last fill") + "."
