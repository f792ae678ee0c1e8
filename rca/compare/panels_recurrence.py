"""Panels of what came back and of trends."""

from dataclasses import replace

from rca.base.counted import counted
from rca.base.panel import Column, FigureRef, Panel, Table
from rca.compare.check import Comparison
from rca.compare.recurrence import FEWEST_FOR_TREND, SIGNIFICANT, Recurrence

PER = {"machine-days": (365.25, "a machine-year"), "running hours": (1000.0, "1000 running hours")}


def came_back_panel(check: Comparison) -> Panel:
    """Causes found twice or more on one machine."""
    found = check.came_back
    if found:
        first = found[0]
        times = counted(len(first.cases), "incident")
        answer = (
            f"{first.cause} came back on {first.machine}: {times}. "
            f"{len(found)} pairs of machine and cause came back in all."
        )
    else:
        answer = "No cause was found twice on the same machine."
    return Panel(
        key="compare.came-back",
        title="What came back on the same machine",
        question="Which cause was found again where it had been found before?",
        answer=answer,
        tables=(
            Table(
                name="compare-came-back",
                title="Causes that came back",
                columns=(
                    Column(title="Machine"),
                    Column(title="Cause"),
                    Column(title="Times", numeric=True),
                    Column(title="Cases"),
                    Column(title="Days between", numeric=True),
                    Column(title="Days since the last", numeric=True),
                ),
                rows=tuple(
                    (
                        c.machine,
                        c.cause,
                        str(len(c.cases)),
                        ", ".join(c.cases),
                        ", ".join(f"{g:.0f}" for g in c.gaps_days),
                        f"{c.open_days:.0f}",
                    )
                    for c in found
                ),
                note="The interval since the last is still open and longer than it looks.",
            ),
        )
        if found
        else (),
        limits=("The main cause counts, where it is more likely than not.",),
    )


def recurrence_panel(check: Comparison, figures: frozenset[str]) -> Panel:
    """Rates over exposure, trend tests and growth."""
    several = len(check.groups) > 1
    rows = [*check.recurrences]
    for group in check.groups:
        version = f" ({group.knowledge.split(' ')[0]})" if several else ""
        rows += [replace(r, name=f"{r.name}{version}") for r in group.recurrences]
    return Panel(
        key="compare.recurrence",
        title="How often, and is it getting better?",
        question="How often do incidents come for the time watched, and more or less than before?",
        answer=_trend_words(check.recurrences[0]),
        figures=tuple(
            FigureRef(
                name="compare-course",
                caption="Counted incidents over the exposure of all machines. Pale: a constant "
                "rate. A curve bending below it means improving.",
                alt=_trend_words(check.recurrences[0]),
            )
            for _ in range("compare-course" in figures)
        ),
        tables=(_rates(rows), _trends(rows)) if any(r.chosen for r in rows) else (_rates(rows),),
        limits=_limits(check, several=several),
    )


def _trend_words(fleet: Recurrence) -> str:
    per, unit = PER[fleet.unit]
    if fleet.rate is None:
        return "No machine was watched for any time, so there is no rate."
    words = (
        f"{counted(fleet.events, 'counted incident')} in {fleet.exposure:,.0f} {fleet.unit}: "
        f"{fleet.rate.value * per:.2g} a {unit.removeprefix('a ')} "
        f"(90 % interval {fleet.rate.low * per:.2g} to {fleet.rate.high * per:.2g})."
    ).replace(",", "\u202f")
    if fleet.chosen is None:
        return f"{words} Too few for a trend, which needs {FEWEST_FOR_TREND}."
    if fleet.chosen.p < SIGNIFICANT:
        way = "less often" if fleet.chosen.improving else "more often"
        return f"{words} They come {way} than before (p = {fleet.chosen.p:.2g})."
    return f"{words} No trend can be told from chance (p = {fleet.chosen.p:.2g})."


def _limits(check: Comparison, *, several: bool) -> tuple[str, ...]:
    texts = [
        "A machine without an exposure table is watched from its first incident, which starts the "
        f"watch and is not counted, to {check.until}. {check.exposure_given} machines have a "
        "table (--exposure: asset, from, to, running_hours).",
        f"The military handbook's test was chosen beforehand (best against a power law); trends "
        f"need {FEWEST_FOR_TREND} counted incidents. P values in brackets are corrected for the "
        "number of groups tested (Holm). Tests also reject for clustered incidents without trend.",
        "Growth after MIL-HDBK-189 (1981), observation going on after the last incident. Machines "
        "of unlike ages are pooled over common exposure, not over their own age.",
    ]
    if several:
        texts.append(
            "Rates by mechanism and cause hold the cases of one knowledge version only, so with "
            "several versions they are at least so high."
        )
    return tuple(texts)


def _rates(rows: list[Recurrence]) -> Table:
    return Table(
        name="compare-rates",
        title="Rates",
        columns=(
            Column(title="By"),
            Column(title="Name"),
            Column(title="Incidents", numeric=True),
            Column(title="Counted", numeric=True),
            Column(title="Exposure", numeric=True),
            Column(title="Rate, 90 % interval", numeric=True),
            Column(title="Since the last", numeric=True),
        ),
        rows=tuple(_rate_row(r) for r in rows),
        shown=24,
    )


def _rate_row(r: Recurrence) -> tuple[str, ...]:
    per, unit = PER[r.unit]
    return (
        r.kind,
        r.name,
        str(r.seen),
        str(r.events),
        f"{r.exposure:,.0f} {r.unit}".replace(",", "\u202f"),
        f"{r.rate.value * per:.2g} ({r.rate.low * per:.2g} to {r.rate.high * per:.2g}) per "
        f"{unit.removeprefix('a ')}"
        if r.rate is not None
        else "no exposure",
        f"{r.since_last:,.0f}".replace(",", "\u202f") if r.since_last is not None else "",
    )


def _trends(rows: list[Recurrence]) -> Table:
    tested = [r for r in rows if r.chosen is not None]
    return Table(
        name="compare-trends",
        title="Trends and growth",
        columns=(
            Column(title="By"),
            Column(title="Name"),
            Column(title="n", numeric=True),
            Column(title="Direction"),
            Column(title="Handbook p (corrected)", numeric=True),
            Column(title="Laplace U, p", numeric=True),
            Column(title="Reverse arr. R, p", numeric=True),
            Column(title="Exponent, 80 % interval", numeric=True),
            Column(title="Fits"),
            Column(title="Interval now", numeric=True),
        ),
        rows=tuple(_trend_row(r) for r in tested),
        shown=20,
        marks=tuple(
            "beyond" if r.corrected_p is not None and r.corrected_p < SIGNIFICANT else ""
            for r in tested
        ),
        note=f"A direction is named where the corrected p is below {SIGNIFICANT}. Fits: Cramér-"
        "von Mises below its 10 % point. An exponent below 1 means improving.",
    )


def _trend_row(r: Recurrence) -> tuple[str, ...]:
    assert r.chosen is not None
    told = r.corrected_p is not None and r.corrected_p < SIGNIFICANT
    direction = ("less often" if r.chosen.improving else "more often") if told else "not told"
    found = {t.name: t for t in r.others}
    first, second = found["Laplace"], found["reverse arrangements"]
    curve = r.growth
    return (
        r.kind,
        r.name,
        str(r.events),
        direction,
        f"{r.chosen.p:.2g} ({r.corrected_p:.2g})",
        f"{first.statistic:.2f}, {first.p:.2g}".replace("-", "\u2212"),
        f"{second.statistic:.0f}, {second.p:.2g}",
        f"{curve.exponent_unbiased:.2f} ({curve.exponent_low:.2f} to {curve.exponent_high:.2f})"
        if curve is not None
        else r.why_no_trend,
        ("yes" if curve.misfit <= curve.misfit_critical else "no") if curve is not None else "",
        f"{curve.interval:,.0f} {r.unit}".replace(",", "\u202f") if curve is not None else "",
    )
