"""What keeps coming back, ranked by count, by downtime and by cost.

A mechanism counts for an incident where it is more likely than not to have taken part, so the
counts of mechanisms may add up to more than the incidents; downtime and cost then count in full
for each. Causes, assets and sides count once an incident. Sums say how many incidents they rest
on: a missing downtime is not zero.
"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from rca.compare.incident import TOOK_PART
from rca.compare.table import IncidentTable
from rca.stats.event_rate import Estimate, share

MEASURES = ("count", "downtime", "cost")
FEW = 10  # below this many incidents a ranking is a list, not a Pareto; common practice, no source
Mask = npt.NDArray[np.bool_]


@dataclass(frozen=True, slots=True, kw_only=True)
class Bar:
    """One row of a ranking."""

    name: str
    count: int
    share: Estimate  # of all incidents ranked, Jeffreys' interval
    expected: float | None  # sum of the probabilities, of a mechanism or a cause
    downtime_h: float
    downtime_known: int  # incidents of the count with a stated downtime
    cost: dict[str, float]  # by currency
    cost_known: int


@dataclass(frozen=True, slots=True, kw_only=True)
class Ranking:
    """A ranking of n incidents by one property."""

    by: str  # "mechanism", "cause", "machine", "site" or "side"
    n: int
    bars: tuple[Bar, ...]  # by count, then by name
    overlap: bool  # an incident may stand in several bars


def rank(table: IncidentTable, by: str) -> Ranking:
    """Rank the incidents by "mechanism", "cause", "machine", "site" or "side"."""
    if by == "mechanism":
        names: Sequence[str] = table.mechanism_names
        masks = [column >= TOOK_PART for column in table.mechanisms.T]
        expected = [float(np.nansum(column)) for column in table.mechanisms.T]
    else:
        words = {
            "cause": table.main_causes,
            "machine": table.machines,
            "site": table.sites,
            "side": table.sides,
        }[by]
        names = sorted(set(words))
        column = np.array(words, dtype=object)
        masks = [column == name for name in names]
        expected = []
        if by == "cause":
            found = {
                name: float(np.nansum(p))
                for name, p in zip(table.cause_names, table.causes.T, strict=True)
            }
            expected = [found.get(name, float("nan")) for name in names]
    bars = [
        _bar(table, name, np.asarray(mask), expected[k] if expected else None)
        for k, (name, mask) in enumerate(zip(names, masks, strict=True))
        if mask.any()
    ]
    bars.sort(key=lambda b: (-b.count, b.name))
    return Ranking(by=by, n=len(table), bars=tuple(bars), overlap=by == "mechanism")


def _bar(table: IncidentTable, name: str, mask: Mask, expected: float | None) -> Bar:
    downtime, cost = table.downtime_h[mask], table.cost[mask]
    currencies = np.array(table.currencies, dtype=object)[mask]
    count = int(mask.sum())
    return Bar(
        name=name,
        count=count,
        share=share(count, len(table)),
        expected=None if expected is None or np.isnan(expected) else expected,
        downtime_h=float(np.nansum(downtime)),
        downtime_known=int(np.isfinite(downtime).sum()),
        cost={
            str(c): float(np.nansum(cost[currencies == c]))
            for c in sorted(set(currencies.tolist()) - {""})
        },
        cost_known=int(np.isfinite(cost).sum()),
    )


def ordered(ranking: Ranking, measure: str, currency: str = "") -> tuple[Bar, ...]:
    """The bars that have something of a measure, the greatest first."""

    def size(bar: Bar) -> float:
        if measure == "count":
            return float(bar.count)
        return bar.downtime_h if measure == "downtime" else bar.cost.get(currency, 0.0)

    return tuple(
        sorted((b for b in ranking.bars if size(b) > 0), key=lambda b: (-size(b), b.name))
    )
