"""Panels a knowledge version: what keeps coming back, and base rates."""

from rca.base.counted import counted
from rca.base.panel import Column, FigureRef, Panel, Table
from rca.compare.base_rates import CAUTION, ENOUGH, BaseRate
from rca.compare.check import Comparison, KnowledgeGroup
from rca.compare.pareto import FEW, Bar, Ranking, ordered
from rca.figures.numbers import share
from rca.stats.event_rate import Estimate

GROUPS_SHOWN = 4
FEWEST_FOR_RATES = 5  # fewer cases give base rates not worth a table


def group_panels(check: Comparison, figures: frozenset[str]) -> tuple[Panel, ...]:
    """Panels of the versions with most cases; a closing one names what is not shown."""
    found = [
        panel
        for number, group in enumerate(check.groups[:GROUPS_SHOWN])
        for panel in _panels(check, number, group, figures)
    ]
    return tuple(found)


def apart(check: Comparison) -> str:
    """What is said where more than one version of the knowledge is on the page."""
    if len(check.groups) < 2:
        return ""
    return (
        f"The cases were weighed with {len(check.groups)} versions of the knowledge. Their "
        "probabilities do not compare, so each version stands apart; --reweigh weighs again what "
        "can be weighed again."
    )


def _panels(
    check: Comparison, number: int, group: KnowledgeGroup, figures: frozenset[str]
) -> tuple[Panel, ...]:
    n = len(group.cases)
    several = len(check.groups) > 1
    name = f" ({group.knowledge})" if several else ""
    rankings = {r.by: r for r in group.rankings}
    few = f" With {counted(n, 'case')} this is a list, not a ranking." if n < FEW else ""
    causes = ordered(rankings["cause"], "count")
    return (
        Panel(
            key=f"compare.pareto.{number}",
            title=f"What keeps coming back{name}",
            question="Which mechanisms and causes come most often, cost most hours, most money?",
            answer=f"{_leading(rankings['mechanism'])} {_leading(rankings['cause'])}{few}",
            paragraphs=tuple(text for text in (apart(check) if number == 0 else "",) if text),
            figures=tuple(
                FigureRef(
                    name=f"compare-{by}-{number}",
                    caption=f"Incidents by {by}.",
                    alt=f"Incidents by {by}: {_leading(rankings[by])}",
                )
                for by in ("mechanism", "cause")
                if f"compare-{by}-{number}" in figures
            ),
            tables=tuple(_table(rankings[by], number) for by in ("mechanism", "cause")),
            limits=(
                "A mechanism counts where it is more likely than not to have taken part; one "
                "incident may have several, and its hours and money then count in full for each. "
                "A cause counts where it is the likeliest and more likely than not.",
            ),
        ),
        *((_rates(number, name, group, bool(causes)),) if n >= FEWEST_FOR_RATES else ()),
    )


def _leading(ranking: Ranking) -> str:
    shown = [b for b in ordered(ranking, "count") if b.name != "not determined"]
    if not shown:
        return f"No {ranking.by} stands out."
    top = shown[0]
    others = [b for b in shown[1:] if b.count == top.count]
    if others:
        names = ", ".join(b.name for b in [top, *others][:3])
        more = " and others" if len(others) > 2 else ""
        return f"Most often by {ranking.by}: {names}{more}, {top.count} of {ranking.n} each."
    return f"Most often by {ranking.by}: {top.name}, {top.count} of {ranking.n}."


def _table(ranking: Ranking, number: int) -> Table:
    by_time = {b.name: n for n, b in enumerate(ordered(ranking, "downtime"), start=1)}
    currencies = sorted({c for b in ranking.bars for c in b.cost})
    by_cost = {
        c: {b.name: n for n, b in enumerate(ordered(ranking, "cost", c), start=1)}
        for c in currencies
    }
    return Table(
        name=f"compare-{ranking.by}-{number}",
        title=f"By {ranking.by}",
        columns=(
            Column(title=ranking.by.capitalize()),
            Column(title="Incidents", numeric=True),
            Column(title="Share, 90 % interval", numeric=True),
            Column(title="Sum of probabilities", numeric=True),
            Column(title="Downtime", unit="h", numeric=True),
            Column(title="Rank by downtime", numeric=True),
            *(
                column
                for c in currencies
                for column in (
                    Column(title=f"Cost {c}", numeric=True),
                    Column(title=f"Rank by {c}", numeric=True),
                )
            ),
        ),
        rows=tuple(_row(b, by_time, by_cost) for b in ranking.bars),
        shown=14,
        note=_known(ranking),
    )


def _row(b: Bar, by_time: dict[str, int], by_cost: dict[str, dict[str, int]]) -> tuple[str, ...]:
    money = [
        cell
        for c, ranks in by_cost.items()
        for cell in (
            f"{b.cost[c]:,.0f}".replace(",", "\u202f") if c in b.cost else "",
            str(ranks.get(b.name, "")),
        )
    ]
    return (
        b.name,
        str(b.count),
        interval(b.share),
        f"{b.expected:.1f}" if b.expected is not None else "",
        f"{b.downtime_h:.0f} ({b.downtime_known} known)" if b.downtime_known else "not recorded",
        str(by_time.get(b.name, "")),
        *money,
    )


def _known(ranking: Ranking) -> str:
    downtime = sum(b.downtime_known for b in ranking.bars)
    cost = sum(b.cost_known for b in ranking.bars)
    if not downtime and not cost:
        return "No case states its downtime or cost ([case] downtime, cost in case.toml)."
    return "Downtime and cost hold the incidents that state them."


def interval(e: Estimate) -> str:
    """A share with its interval in whole per cent."""
    return f"{100 * e.value:.0f} % ({100 * e.low:.0f} to {100 * e.high:.0f})"


def _rates(number: int, name: str, group: KnowledgeGroup, has_causes: bool) -> Panel:
    n = len(group.cases)
    enough = f"{counted(n, 'case')}."
    if n < ENOUGH:
        enough = f"{counted(n, 'case')}; below {ENOUGH} of known cause they move no prior."
    learned = [r for r in group.base_rates if r.learned is not None]
    return Panel(
        key=f"compare.base-rates.{number}",
        title=f"Base rates{name}",
        question="What do the cases say about how often each mechanism and cause occurs here?",
        answer=enough
        + ("" if learned else " None of them stores the priors used, so they stay in the counts."),
        tables=(
            Table(
                name=f"compare-base-rates-{number}",
                title="Base rates",
                columns=(
                    Column(title="Kind"),
                    Column(title="Name"),
                    Column(title="n", numeric=True),
                    Column(title="More likely than not in", numeric=True),
                    Column(title="Prior used", numeric=True),
                    Column(title="Base rate, prior taken out", numeric=True),
                    Column(title="n of that", numeric=True),
                ),
                rows=tuple(
                    _rate_row(r) for r in group.base_rates if r.kind == "mechanism" or has_causes
                ),
                shown=40,
            ),
        ),
        limits=(CAUTION,),
    )


def _rate_row(r: BaseRate) -> tuple[str, ...]:
    learned = r.learned
    return (
        r.kind,
        r.name,
        str(r.n),
        interval(r.counted),
        share(r.mean_prior) if r.mean_prior is not None else "not stored",
        f"{share(learned.value)} ({learned.low:.2f} to {learned.high:.2f})"
        if learned is not None
        else "not possible",
        str(r.learned_n),
    )
