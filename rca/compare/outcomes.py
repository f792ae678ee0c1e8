"""Did earlier actions of the same kind work? Silence counts by the exposure it lasted.

An action done against a cause is held against what followed on the same machine: did an incident
with that main cause come after it, and if not, was the machine watched long enough for the
silence to mean anything? With an old interval T and a watch t, no event has the probability
exp(-t/T) even if nothing changed; about three old intervals bring that to 0.05. The old interval
leaves out the incident that set the action off, because actions start after bad runs. Where the
machine has too few for an interval of its own, that of all machines watched is taken: longer, so
it asks for more silence.
"""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from datetime import date
from enum import StrEnum

import numpy as np

from rca.compare.exposure import Watch
from rca.compare.incident import UNDETERMINED, PastAction
from rca.compare.table import EPOCH, IncidentTable
from rca.stats.event_trend import exposure_for, none_expected

SILENCE = 0.05  # probability without improvement below which silence counts
FEWEST_FOR_FLEET = 3  # counted incidents of a cause for an interval of all machines; own choice
NOT_TRIED = ("rejected", "superseded")


class Result(StrEnum):
    """What followed an action."""

    CAME_BACK = "came back"
    HELD = "silent long enough"
    TOO_SOON = "silent, too short to tell"
    NO_MEASURE = "silent, no earlier interval to measure it by"


@dataclass(frozen=True, slots=True, kw_only=True)
class ActionOutcome:
    """One action done, and what followed."""

    row: int  # of the incident in the table
    action: PastAction
    cause: str
    result: Result
    after_days: float | None  # to the first incident with that cause
    watched_days: float
    old_interval_days: float | None
    interval_of: str  # "this machine", "all machines" or ""
    silence_p: float | None  # of no event in the watch without improvement
    needed_days: float | None  # still to watch
    related: int  # incidents with other causes on the machine since
    proof: str  # what the records said, as the report stored it


@dataclass(frozen=True, slots=True, kw_only=True)
class KindOutcome:
    """All actions of one kind against one cause."""

    kind: str
    cause: str
    actions: tuple[ActionOutcome, ...]

    def count(self, result: Result) -> int:
        """How many had that result."""
        return sum(a.result is result for a in self.actions)


def outcomes(
    table: IncidentTable, watched: Sequence[Watch], *, until: date
) -> tuple[KindOutcome, ...]:
    """Done actions grouped by kind and cause, the most first."""
    fleet = _fleet_intervals(table, watched)
    machines: dict[tuple[str, str], list[int]] = {}
    for i in np.flatnonzero(np.isfinite(table.days)).tolist():
        machines.setdefault((table.sites[i], table.assets[i]), []).append(i)
    groups: dict[tuple[str, str], list[ActionOutcome]] = {}
    for row, action in table.actions:
        cause = action.cause or table.main_causes[row]
        if action.done is None or action.status in NOT_TRIED or cause in ("", UNDETERMINED):
            continue
        same = machines.get((table.sites[row], table.assets[row]), [])
        found = _outcome(table, row, action, cause, until, [i for i in same if i != row], fleet)
        groups.setdefault((action.kind or "kind not stated", cause), []).append(found)
    made = [KindOutcome(kind=k, cause=c, actions=tuple(a)) for (k, c), a in groups.items()]
    return tuple(sorted(made, key=lambda g: (-len(g.actions), g.cause, g.kind)))


def _outcome(
    table: IncidentTable,
    row: int,
    action: PastAction,
    cause: str,
    until: date,
    same_machine: Sequence[int],
    fleet: Mapping[str, float],
) -> ActionOutcome:
    assert action.done is not None
    done, end = _number(action.done), _number(until)
    later = [i for i in same_machine if done < table.days[i] <= end]
    again = sorted(float(table.days[i]) for i in later if table.main_causes[i] == cause)
    watched = max(end - done, 0.0)
    old, of = _old_interval(table, row, cause, same_machine, done), "this machine"
    if old is None:
        old, of = fleet.get(cause), "all machines" if cause in fleet else ""
    p = none_expected(watched / old) if old else None
    needed = max(exposure_for(SILENCE) * old - watched, 0.0) if old else None
    if again:
        result = Result.CAME_BACK
    elif p is None:
        result = Result.NO_MEASURE
    else:
        result = Result.HELD if p <= SILENCE else Result.TOO_SOON
    return ActionOutcome(
        row=row,
        action=action,
        cause=cause,
        result=result,
        after_days=again[0] - done if again else None,
        watched_days=watched,
        old_interval_days=old,
        interval_of=of,
        silence_p=p if not again else None,
        needed_days=needed if not again else None,
        related=len(later) - len(again),
        proof=action.proof,
    )


def _old_interval(
    table: IncidentTable, row: int, cause: str, same_machine: Sequence[int], done: float
) -> float | None:
    """Days between incidents with that cause before the one that set the action off."""
    trigger = float(table.days[row])
    if not np.isfinite(trigger):
        return None
    before = sorted(
        float(table.days[i])
        for i in same_machine
        if table.main_causes[i] == cause and table.days[i] < trigger
    )
    # n earlier incidents, from the first to the trigger: n - 1 counted, the first starts the watch
    if len(before) < 2 or done < trigger:
        return None
    return (trigger - before[0]) / (len(before) - 1)


def _fleet_intervals(table: IncidentTable, watched: Sequence[Watch]) -> dict[str, float]:
    """Machine-days watched for each incident, by cause; only where there are enough incidents."""
    machines, days = table.machines, sum(w.days for w in watched)
    counts: dict[str, int] = {}
    watch_of = {w.machine: w for w in watched}
    for i in np.flatnonzero(np.isfinite(table.days)).tolist():
        watch = watch_of.get(machines[i])
        if watch is None or not watch.start <= table.days[i] <= watch.end:
            continue
        if watch.starts_with_incident and table.days[i] == watch.start:
            continue
        counts[table.main_causes[i]] = counts.get(table.main_causes[i], 0) + 1
    return {cause: days / n for cause, n in counts.items() if n >= FEWEST_FOR_FLEET}


def _number(day: date) -> float:
    return float((day - EPOCH).days)
