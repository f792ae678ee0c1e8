"""The whole comparison of a table of incidents: one pure function, one typed result."""

from collections.abc import Sequence
from dataclasses import dataclass
from datetime import date

import numpy as np

from rca.base.errors import ArchiveError
from rca.compare.base_rates import BaseRate, base_rates
from rca.compare.exposure import Watch, watches
from rca.compare.incident import PastAction
from rca.compare.open_actions import CaseActions, Register, register
from rca.compare.outcomes import KindOutcome, outcomes
from rca.compare.pareto import Ranking, rank
from rca.compare.recurrence import CameBack, Recurrence, came_back, recurrences
from rca.compare.similar import Likeness, likeness_to, most_like, same_finding
from rca.compare.table import IncidentTable

LIKE = 5
OVERLAP = 0.3  # of mechanisms, from which a case is named at all; own choice


@dataclass(frozen=True, slots=True, kw_only=True)
class KnowledgeGroup:
    """The incidents weighed with one version of the knowledge."""

    knowledge: str
    cases: tuple[str, ...]
    rankings: tuple[Ranking, ...]  # by mechanism, cause, side
    recurrences: tuple[Recurrence, ...]  # by mechanism, cause
    base_rates: tuple[BaseRate, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Comparison:
    """What the cases together show."""

    until: date
    since: date | None
    n: int
    undated: tuple[str, ...]
    invented: int
    watched: tuple[Watch, ...]
    exposure_given: int  # machines whose watch was given, not taken from their first incident
    rankings: tuple[Ranking, ...]  # by machine, site
    recurrences: tuple[Recurrence, ...]  # all, by machine
    came_back: tuple[CameBack, ...]
    groups: tuple[KnowledgeGroup, ...]
    asked: str  # the case the likeness is asked for
    alike: tuple[Likeness, ...]
    not_comparable: int  # incidents that share nothing looked at with it
    same_finding: tuple[tuple[int, float], ...]  # of those: row and overlap of mechanisms
    outcomes: tuple[KindOutcome, ...]
    register: Register


def compare_cases(
    table: IncidentTable,
    *,
    until: date,
    since: date | None = None,
    given: Sequence[Watch] = (),
    like: str = "",
) -> Comparison:
    """Everything the page shows, from the incidents.

    ``until`` is the last day of observation. ``like`` is the id of the case to find others for;
    the latest dated one where none is named. Raises ArchiveError for an id not in the table.
    """
    watched = watches(table, given, until=until, since=since)
    row = _row_of(table, like)
    apart = _not_comparable(table, row)
    alike = most_like(table, row, count=LIKE) if row is not None else ()
    knowledge = sorted(set(table.knowledge), key=lambda k: (-table.knowledge.count(k), k))
    return Comparison(
        until=until,
        since=since,
        n=len(table),
        undated=tuple(i for k, i in enumerate(table.ids) if table.day(k) is None),
        invented=int(table.invented.sum()),
        watched=watched,
        exposure_given=len({w.machine for w in given} & set(table.machines)),
        rankings=(rank(table, "machine"), rank(table, "site")),
        recurrences=recurrences(table, watched, kinds=("all", "machine")),
        came_back=came_back(table, until=until),
        groups=tuple(_group(table, watched, name) for name in knowledge),
        asked=table.ids[row] if row is not None else "",
        alike=alike,
        not_comparable=len(apart),
        same_finding=_same_finding(table, row, apart),
        outcomes=outcomes(table, watched, until=until),
        register=register(case_actions(table), today=until),
    )


def case_actions(table: IncidentTable) -> tuple[CaseActions, ...]:
    """The actions of the table, case by case."""
    by_row: dict[int, list[PastAction]] = {}
    for row, action in table.actions:
        by_row.setdefault(row, []).append(action)
    return tuple(
        CaseActions(
            case=table.ids[row],
            title=table.titles[row],
            asset=table.assets[row],
            site=table.sites[row],
            source=table.sources[row],
            actions=tuple(by_row[row]),
        )
        for row in sorted(by_row)
    )


def _group(table: IncidentTable, watched: Sequence[Watch], knowledge: str) -> KnowledgeGroup:
    part = table.rows(np.array([name == knowledge for name in table.knowledge], dtype=bool))
    return KnowledgeGroup(
        knowledge=knowledge,
        cases=part.ids,
        rankings=tuple(rank(part, by) for by in ("mechanism", "cause", "side")),
        recurrences=recurrences(part, watched, kinds=("mechanism", "cause")),
        base_rates=base_rates(part),
    )


def _row_of(table: IncidentTable, like: str) -> int | None:
    if like:
        if like not in table.ids:
            near = ", ".join(table.ids[-5:])
            raise ArchiveError(f"no case {like!r} is among the {len(table)} read; e.g. {near}")
        return table.ids.index(like)
    dated = [k for k in range(len(table)) if table.day(k) is not None]
    return max(dated, key=lambda k: (table.days[k], table.ids[k]), default=None)


def _not_comparable(table: IncidentTable, row: int | None) -> tuple[int, ...]:
    if row is None:
        return ()
    _, compared = likeness_to(table, row)
    return tuple(int(k) for k in np.flatnonzero(compared == 0) if k != row)


def _same_finding(
    table: IncidentTable, row: int | None, apart: Sequence[int]
) -> tuple[tuple[int, float], ...]:
    if row is None:
        return ()
    overlap = same_finding(table, row)
    ranked = sorted(apart, key=lambda k: (-overlap[k], table.ids[k]))
    return tuple((k, float(overlap[k])) for k in ranked[:LIKE] if overlap[k] >= OVERLAP)
