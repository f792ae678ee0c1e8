"""How often, with what exposure, and whether more or less often than before."""

from collections.abc import Sequence
from dataclasses import dataclass, replace
from datetime import date

import numpy as np

from rca.base.errors import OutOfRangeError
from rca.compare.exposure import Watch, ages, in_hours, length
from rca.compare.incident import TOOK_PART, UNDETERMINED
from rca.compare.table import IncidentTable
from rca.stats.event_rate import Estimate, rate
from rca.stats.event_trend import (
    Growth,
    TrendTest,
    growth,
    holm,
    laplace,
    military_handbook,
    reverse_arrangements,
)

FEWEST_FOR_TREND = 4  # fewer events give a test no power worth a line; own rule
SIGNIFICANT = 0.05


@dataclass(frozen=True, slots=True, kw_only=True)
class Recurrence:
    """One machine, mechanism or cause over its exposure."""

    kind: str  # "all", "machine", "mechanism" or "cause"
    name: str
    events: int  # counted: inside the watch, the incident that starts it not
    seen: int  # all incidents of the kind
    machines: int
    exposure: float
    unit: str  # "running hours" or "machine-days"
    rate: Estimate | None  # per unit of exposure
    since_last: float | None  # exposure since the last event: the open interval
    chosen: TrendTest | None  # the military handbook's test, chosen beforehand
    others: tuple[TrendTest, ...]
    corrected_p: float | None  # of the chosen test, for how many were made (Holm)
    growth: Growth | None
    why_no_trend: str
    ages: tuple[float, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class CameBack:
    """A cause that came back on the same machine."""

    machine: str
    cause: str
    cases: tuple[str, ...]
    gaps_days: tuple[float, ...]
    open_days: float  # since the last


def recurrences(
    table: IncidentTable, watched: Sequence[Watch], *, kinds: Sequence[str]
) -> tuple[Recurrence, ...]:
    """Every group of the kinds asked for, the most events first; P values corrected over all."""
    found = [
        _one(table, watched, kind, name, np.asarray(mask))
        for kind in kinds
        for name, mask in _groups(table, kind)
    ]
    tested = [k for k, r in enumerate(found) if r.chosen is not None]
    corrected = holm([t.p for k in tested if (t := found[k].chosen) is not None])
    for k, p in zip(tested, corrected, strict=True):
        found[k] = replace(found[k], corrected_p=p)
    order = {kind: n for n, kind in enumerate(kinds)}
    return tuple(sorted(found, key=lambda r: (order[r.kind], -r.seen, r.name)))


def _groups(table: IncidentTable, kind: str) -> list[tuple[str, np.ndarray]]:
    if kind == "all":
        return [("all incidents", np.ones(len(table), dtype=bool))]
    if kind == "mechanism":
        pairs = zip(table.mechanism_names, table.mechanisms.T >= TOOK_PART, strict=True)
        return [(name, mask) for name, mask in pairs if mask.any()]
    words = table.machines if kind == "machine" else table.main_causes
    column = np.array(words, dtype=object)
    return [(n, column == n) for n in sorted(set(words)) if n != UNDETERMINED]


def _one(
    table: IncidentTable, watched: Sequence[Watch], kind: str, name: str, mask: np.ndarray
) -> Recurrence:
    watch = [w for w in watched if kind != "machine" or w.machine == name]
    machines = table.machines
    events = [
        (machines[i], float(table.days[i])) for i in np.flatnonzero(mask & np.isfinite(table.days))
    ]
    found = ages(watch, events)
    total = length(watch)
    chosen, others, curve, why = _trend(found, total)
    return Recurrence(
        kind=kind,
        name=name,
        events=len(found),
        seen=int(mask.sum()),
        machines=len({w.machine for w in watch}),
        exposure=total,
        unit="running hours" if in_hours(watch) else "machine-days",
        rate=rate(len(found), total) if total > 0 else None,
        since_last=total - found[-1] if found else None,
        chosen=chosen,
        others=others,
        corrected_p=None,
        growth=curve,
        why_no_trend=why,
        ages=tuple(found),
    )


def _trend(
    found: Sequence[float], total: float
) -> tuple[TrendTest | None, tuple[TrendTest, ...], Growth | None, str]:
    """Tests and curve of one group; observation goes on after the last event, so it ends timed."""
    if len(found) < FEWEST_FOR_TREND:
        return None, (), None, f"{len(found)} counted events; a trend needs {FEWEST_FOR_TREND}"
    try:
        chosen = military_handbook(found, total)
        others = (laplace(found, total), reverse_arrangements(found))
    except OutOfRangeError as error:
        return None, (), None, str(error)
    try:
        curve = growth(found, total)
    except OutOfRangeError as error:
        return chosen, others, None, str(error)
    return chosen, others, curve, ""


def came_back(table: IncidentTable, *, until: date) -> tuple[CameBack, ...]:
    """Every cause that was found twice or more on one machine, the most often first."""
    machines = table.machines
    groups: dict[tuple[str, str], list[int]] = {}
    for i in np.argsort(table.days, kind="stable"):
        if np.isfinite(table.days[i]) and table.main_causes[i] != UNDETERMINED:
            groups.setdefault((machines[i], table.main_causes[i]), []).append(int(i))
    end = float((until - date(1970, 1, 1)).days)
    found = [
        CameBack(
            machine=machine,
            cause=cause,
            cases=tuple(table.ids[i] for i in rows),
            gaps_days=tuple(float(g) for g in np.diff(table.days[rows])),
            open_days=end - float(table.days[rows[-1]]),
        )
        for (machine, cause), rows in groups.items()
        if len(rows) > 1
    ]
    return tuple(sorted(found, key=lambda c: (-len(c.cases), c.machine, c.cause)))
