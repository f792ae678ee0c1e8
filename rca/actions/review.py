"""Corrective actions reviewed: states, guards, and whether later records prove them.

States and guards are common practice in corrective-action systems (ISO 9001:2015 10.2 asks for
evidence of the nature, the actions and their results; nothing closes without proof; the owner
does not verify his own action).
"""

from collections.abc import Callable
from dataclasses import dataclass
from datetime import UTC, date, datetime, time
from enum import StrEnum

import numpy as np

from rca.actions.condition import Clause, ConditionError, parse_condition
from rca.case.model import Action
from rca.case.series import AlignedRecord, FloatArray, Series
from rca.case.vocabulary import CAUSES, ActionKind

STATES = (
    "proposed",
    "accepted",
    "rejected",
    "planned",
    "in progress",
    "implemented",
    "verified in place",
    "under watch",
    "effective",
    "closed",
    "on hold",
    "superseded",
    "ineffective",
    "reopened",
)
_IMPLEMENTED = ("implemented", "verified in place", "under watch", "effective", "closed")
COVERAGE = 0.9  # share of the window that must hold samples; common practice, no source
RUNNING = 0.1  # share of the greatest recorded speed above which the pump counts as running

Convert = Callable[[str, str], float]  # (value with unit, quantity) -> SI


class Proof(StrEnum):
    """What the records say of an action's condition."""

    PROVED = "proved"
    REFUTED = "refuted"
    NOT_YET = "not yet provable"
    UNCHECKABLE = "cannot be checked"


@dataclass(frozen=True, slots=True, kw_only=True)
class ClauseOutcome:
    """One clause held against the records."""

    clause: str
    proof: Proof
    reason: str
    measured: float | None = None  # SI, of the clause's function over the window
    limit: float | None = None  # SI
    days_covered: float = 0.0
    days_needed: float | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class ActionReview:
    """One action as it stands."""

    id: str
    kind: str
    text: str
    cause: str
    owner: str
    due: date | None
    done: date | None
    status: str
    verified_by: str
    verify: str
    proof: Proof
    reason: str
    clauses: tuple[ClauseOutcome, ...] = ()
    objections: tuple[str, ...] = ()  # guards this row breaks
    overdue: bool = False


@dataclass(frozen=True, slots=True, kw_only=True)
class ActionsCheck:
    """All actions of a case."""

    as_of: date | None  # last day of the evidence; overdue is judged against it
    actions: tuple[ActionReview, ...] = ()


def review_actions(
    actions: tuple[Action, ...],
    record: AlignedRecord | None,
    *,
    convert: Convert,
    as_of: date | None,
) -> ActionsCheck:
    """Review every action against its guards and against the records.

    ``as_of`` is the day the review stands on: the last day of the evidence, never the clock, so
    that a rerun says the same.
    """
    return ActionsCheck(
        as_of=as_of, actions=tuple(_review(a, record, convert, as_of) for a in actions)
    )


def _review(
    action: Action, record: AlignedRecord | None, convert: Convert, as_of: date | None
) -> ActionReview:
    outcomes: tuple[ClauseOutcome, ...] = ()
    if not action.verify.strip():
        proof, reason = Proof.UNCHECKABLE, "no verify condition is given; nobody can check it"
    else:
        try:
            clauses = parse_condition(action.verify)
            outcomes = tuple(_outcome(c, action, record, convert) for c in clauses)
            proof, reason = _joined(outcomes)
        except ConditionError as error:
            proof, reason = Proof.UNCHECKABLE, str(error)
    overdue = (
        action.due is not None
        and as_of is not None
        and action.done is None
        and action.due < as_of
        and action.status not in ("rejected", "superseded")
    )
    return ActionReview(
        id=action.id,
        kind=action.kind.value if action.kind else "",
        text=action.text,
        cause=action.cause,
        owner=action.owner,
        due=action.due,
        done=action.done,
        status=action.status,
        verified_by=action.verified_by,
        verify=action.verify,
        proof=proof,
        reason=reason,
        clauses=outcomes,
        objections=_objections(action, proof),
        overdue=overdue,
    )


def _objections(action: Action, proof: Proof) -> tuple[str, ...]:
    owner, verifier = action.owner.strip().casefold(), action.verified_by.strip().casefold()
    tests = (
        (action.status not in STATES, f"status {action.status!r} is not one of the known states"),
        (action.kind is None, "its kind is not one of the known kinds"),
        (not owner, "it has no owner"),
        (action.due is None and action.done is None, "it has no due date"),
        (bool(owner) and owner == verifier, "its owner is also the one who verifies it"),
        (
            action.kind is ActionKind.CORRECTIVE and action.cause not in CAUSES,
            "a corrective action must name the cause it removes",
        ),
        (
            action.status in _IMPLEMENTED and action.done is None,
            f"status is {action.status!r} but no done date is given",
        ),
        (
            action.status in ("effective", "closed") and proof is not Proof.PROVED,
            f"status is {action.status!r} but its condition is {proof.value}",
        ),
    )
    return tuple(words for broken, words in tests if broken)


def _joined(outcomes: tuple[ClauseOutcome, ...]) -> tuple[Proof, str]:
    for proof in (Proof.REFUTED, Proof.UNCHECKABLE, Proof.NOT_YET):
        reasons = [o.reason for o in outcomes if o.proof is proof]
        if reasons:
            return proof, "; ".join(reasons)
    return Proof.PROVED, "; ".join(o.reason for o in outcomes)


def _outcome(
    clause: Clause, action: Action, record: AlignedRecord | None, convert: Convert
) -> ClauseOutcome:
    try:
        limit = convert(clause.value, clause.quantity)
    except ValueError as error:
        raise ConditionError(f"{clause.text!r}: {error}") from error
    needed = clause.hours / 24 if clause.hours is not None else None

    def answer(
        proof: Proof, reason: str, *, measured: float | None = None, covered: float = 0.0
    ) -> ClauseOutcome:
        return ClauseOutcome(
            clause=clause.text,
            proof=proof,
            reason=reason,
            measured=measured,
            limit=limit,
            days_covered=covered,
            days_needed=needed,
        )

    anchor = clause.anchor or action.done
    if anchor is None:
        return answer(Proof.NOT_YET, "the action has no done date yet")
    series = record.get(clause.quantity) if record is not None else None
    if record is None or series is None:
        return answer(Proof.NOT_YET, f"no usable record of {clause.quantity}")
    window = _window(record, anchor, clause.hours) & _running(record) & np.isfinite(series.mean)
    if not window.any():
        return answer(Proof.NOT_YET, f"no record of {clause.quantity} in service after {anchor}")
    measured = _measure(clause.function, series, window)
    if not _holds(measured, clause.comparison, limit):
        return answer(
            Proof.REFUTED,
            f"{clause.function}({clause.quantity}) does not keep {clause.comparison} "
            f"{clause.value}",
            measured=measured,
            covered=_days(record, window),
        )
    covered = _span_days(record, anchor)
    if needed is not None and covered < COVERAGE * needed:
        return answer(
            Proof.NOT_YET,
            f"holds so far, but the records cover {covered:.1f} of {needed:g} days",
            measured=measured,
            covered=covered,
        )
    return answer(Proof.PROVED, f"{clause.text} holds", measured=measured, covered=covered)


def _window(
    record: AlignedRecord, anchor: date, hours: float | None
) -> np.ndarray[tuple[int], np.dtype[np.bool_]]:
    start = _midnight_after(anchor)
    inside = record.time_s >= start
    if hours is not None:
        inside &= record.time_s < start + hours * 3600.0
    return inside


def _midnight_after(day: date) -> float:
    """The end of the done day, UTC: the day of the work itself proves nothing."""
    return datetime.combine(day, time.min, tzinfo=UTC).timestamp() + 86400.0


def _running(record: AlignedRecord) -> np.ndarray[tuple[int], np.dtype[np.bool_]]:
    speed = record.get("shaft speed")
    if speed is None or not np.isfinite(speed.mean).any():
        return np.ones(record.time_s.shape, dtype=bool)
    return speed.low > RUNNING * float(np.nanmax(speed.mean))


def _measure(
    function: str, series: Series, window: np.ndarray[tuple[int], np.dtype[np.bool_]]
) -> float:
    if function == "min":
        return float(np.nanmin(series.low[window]))
    if function == "max":
        return float(np.nanmax(series.high[window]))
    values: FloatArray = series.mean[window]
    if function == "mean":
        return float(np.nanmean(values))
    quantile = {"median": 0.5, "p05": 0.05, "p95": 0.95}[function]
    return float(np.nanquantile(values, quantile))


def _holds(measured: float, comparison: str, limit: float) -> bool:
    return {
        ">=": measured >= limit,
        ">": measured > limit,
        "<=": measured <= limit,
        "<": measured < limit,
    }[comparison]


def _days(record: AlignedRecord, window: np.ndarray[tuple[int], np.dtype[np.bool_]]) -> float:
    return float(window.sum()) * record.bin_s / 86400.0


def _span_days(record: AlignedRecord, anchor: date) -> float:
    after = record.time_s[record.time_s >= _midnight_after(anchor)]
    return float(after[-1] - _midnight_after(anchor)) / 86400.0 if after.size else 0.0
