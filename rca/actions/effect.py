"""Did the fix do what the physics said it would? Predicted gain of inlet pressure beside measured.

The prediction is the counterfactual of the record up to the day before the work: one thing put
right, all else as found. The measurement is the warm, running inlet after the work less that of
the last warm running time before it, by the same transducer, so that its constant error drops out.
Records after the work never enter the prediction.
"""

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from datetime import UTC, date, datetime, time
from enum import StrEnum

import numpy as np
import numpy.typing as npt

from rca.actions.proof import end_of
from rca.case.model import Action, Case
from rca.case.series import AlignedRecord
from rca.case.vocabulary import ActionKind
from rca.suction.counterfactual import CAUSE_REMOVED, Change, Counterfactual, counterfactuals
from rca.suction.inverse import estimate_resistances
from rca.suction.measured import MeasuredInlet, Regime, measure_inlet
from rca.suction.spread import Spread
from rca.suction.state import inlet_limit

LEAST_HOURS = 24.0  # warm, running, after the work; own choice
REPEAT_U = 0.01e5  # [Pa], standard uncertainty of a difference by one transducer: load and weather
# differ between the two times; common practice, no source
TELLABLE = 0.03e5  # [Pa], a predicted gain below this can't be told from weather; own choice
COLD_SHARE = 0.05  # of the running hours; more than this is "still runs cold"
Mask = npt.NDArray[np.bool_]


class Match(StrEnum):
    """The measured gain against the predicted one."""

    AS_PREDICTED = "as predicted"
    LESS = "less than predicted"
    MORE = "more than predicted"
    TOO_SMALL = "predicted gain too small to tell"
    NOT_MEASURED = "not yet measured"
    NOT_PREDICTED = "not predicted"


@dataclass(frozen=True, slots=True, kw_only=True)
class Effect:
    """One action done; pressures absolute [Pa], gains differences [Pa]."""

    action: str
    cause: str
    change: str
    match: Match
    reason: str
    predicted_gain: Spread | None = None
    predicted_after: Spread | None = None
    identified: bool = True
    before: float | None = None  # medians, warm and running; cold for the warming of oil
    after: float | None = None
    gain: float | None = None
    hours_after: float = 0.0
    together_with: tuple[str, ...] = ()  # actions whose effect can't be told from this one's


def effects(
    case: Case, actions: Sequence[Action], record: AlignedRecord | None, *, seed: int
) -> tuple[Effect, ...]:
    """The effect of every correction and corrective action done against a cause of a low inlet."""
    changes = {cause: change for change, cause in CAUSE_REMOVED.items() if cause}
    made = []
    for action in actions:
        change = changes.get(action.cause)
        lasting = action.kind in (ActionKind.CORRECTION, ActionKind.CORRECTIVE)
        if action.done is None or change is None or not lasting:
            continue
        made.append(_effect(case, action, change, actions, record, seed))
    return tuple(made)


def _effect(
    case: Case,
    action: Action,
    change: Change,
    actions: Sequence[Action],
    record: AlignedRecord | None,
    seed: int,
) -> Effect:
    assert action.done is not None

    def answer(match: Match, reason: str) -> Effect:
        return Effect(
            action=action.id, cause=action.cause, change=change.value, match=match, reason=reason
        )

    if record is None:
        return answer(Match.NOT_MEASURED, "there is no slow record")
    before = part(record, record.time_s < _start_of(action.done))
    following = _next_work(action, actions)
    inside: Mask = record.time_s >= end_of(action.done)
    if following is not None:
        inside &= record.time_s < _start_of(following)
    limit, _ = inlet_limit(case)
    now = measure_inlet(case, part(record, inside), limit=limit)
    if now is None or now.warm is None or now.warm.hours < LEAST_HOURS:
        hours = now.warm.hours if now is not None and now.warm is not None else 0.0
        return answer(
            Match.NOT_MEASURED,
            f"{hours:.0f} h of warm running are recorded after the work, {LEAST_HOURS:.0f} are "
            "needed",
        )
    then = measure_inlet(case, before, limit=limit)
    found, not_found = counterfactuals(
        case, estimate_resistances(case, before, seed=seed), seed=seed
    )
    predicted = next((c for c in found if c.change is change), None)
    if predicted is None or then is None:
        why = next((n.why for n in not_found if n.change is change), "no record before the work")
        return answer(Match.NOT_PREDICTED, why)
    return _compared(answer, predicted, then, now, _same_day(action, actions))


def _compared(
    answer: Callable[[Match, str], Effect],
    predicted: Counterfactual,
    then: MeasuredInlet,
    now: MeasuredInlet,
    together: tuple[str, ...],
) -> Effect:
    cold = predicted.change is Change.WARM_OIL
    first = then.cold if cold else then.last
    assert now.warm is not None
    if first is None:
        return answer(Match.NOT_MEASURED, "no such running is recorded before the work")
    gain = now.warm.median - first.median
    match, reason = _match(predicted, gain, now.cold if cold else None, now.warm)
    return replace(
        answer(match, reason),
        predicted_gain=predicted.gain,
        predicted_after=predicted.after,
        identified=predicted.identified,
        before=first.median,
        after=now.warm.median,
        gain=gain,
        hours_after=now.warm.hours,
        together_with=together,
    )


def _match(
    predicted: Counterfactual, gain: float, still_cold: Regime | None, warm: Regime
) -> tuple[Match, str]:
    if still_cold is not None and still_cold.hours > COLD_SHARE * (still_cold.hours + warm.hours):
        return Match.LESS, f"the oil was still cold for {still_cold.hours:.0f} h after the work"
    low = predicted.gain.p05 - 1.645 * REPEAT_U
    high = predicted.gain.p95 + 1.645 * REPEAT_U
    if predicted.change is Change.LEAK_CLOSED:
        return Match.NOT_PREDICTED, predicted.basis
    if predicted.gain.p95 < TELLABLE:
        return Match.TOO_SMALL, "the record before the work shows no such restriction to remove"
    if gain < low:
        return Match.LESS, "the restriction was elsewhere too, or is not removed"
    if gain > high:
        return Match.MORE, "something else changed for the better as well"
    wide = "" if predicted.identified else "; the record before does not pin the prediction down"
    return Match.AS_PREDICTED, f"the measured gain lies in the predicted range{wide}"


def part(record: AlignedRecord, mask: Mask) -> AlignedRecord:
    """The bins of a record that a mask picks."""
    return AlignedRecord(
        time_s=record.time_s[mask],
        bin_s=record.bin_s,
        series={
            name: replace(s, mean=s.mean[mask], low=s.low[mask], high=s.high[mask])
            for name, s in record.series.items()
        },
    )


def _start_of(day: date) -> float:
    return datetime.combine(day, time.min, tzinfo=UTC).timestamp()


def _next_work(action: Action, actions: Sequence[Action]) -> date | None:
    """The day of the next action done, where the after-time of this one ends."""
    later = [
        a.done
        for a in actions
        if a.done is not None and action.done is not None and a.done > action.done
    ]
    return min(later, default=None)


def _same_day(action: Action, actions: Sequence[Action]) -> tuple[str, ...]:
    return tuple(a.id for a in actions if a.done == action.done and a.id != action.id)
