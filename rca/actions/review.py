"""Corrective actions reviewed: states, guards, and whether later records prove them.

States and guards are common practice in corrective-action systems (ISO 9001:2015 10.2 asks for
evidence of the nature, the actions and their results; nothing closes without proof; the owner
does not verify his own action).
"""

from dataclasses import dataclass
from datetime import date

from rca.actions.condition import Clause, parse_condition
from rca.actions.effect import Effect
from rca.actions.proof import (
    ClauseOutcome,
    Convert,
    Failures,
    Proof,
    joined,
    measured_outcome,
    silence_outcome,
)
from rca.actions.words import ConditionError
from rca.case.model import Action
from rca.case.series import AlignedRecord
from rca.case.vocabulary import CAUSES, ActionKind

__all__ = [
    "STATES",
    "ActionReview",
    "ActionsCheck",
    "ClauseOutcome",
    "Convert",
    "Failures",
    "Proof",
    "review_actions",
]

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
_ENDED = ("rejected", "superseded")
_BEFORE_WORK = ("proposed", "rejected")


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
    effects: tuple[Effect, ...] = ()  # predicted beside measured


def review_actions(
    actions: tuple[Action, ...],
    record: AlignedRecord | None,
    *,
    convert: Convert,
    as_of: date | None,
    failures: Failures | None = None,
) -> ActionsCheck:
    """Review every action against its guards, the records and the failures that came after.

    ``as_of`` is the day the review stands on: the last day of the evidence, never the clock, so
    that a rerun says the same.
    """
    known = failures or Failures(until=as_of)
    only = _only_containment(actions)
    return ActionsCheck(
        as_of=as_of,
        actions=tuple(_review(a, record, convert, as_of, known, only) for a in actions),
    )


def _review(
    action: Action,
    record: AlignedRecord | None,
    convert: Convert,
    as_of: date | None,
    failures: Failures,
    only_containment: bool,
) -> ActionReview:
    outcomes, proof, reason = _proof(action, record, convert, failures)
    overdue = (
        action.due is not None
        and as_of is not None
        and action.done is None
        and action.due < as_of
        and action.status not in _ENDED
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
        objections=_objections(action, proof, only_containment),
        overdue=overdue,
    )


def _proof(
    action: Action, record: AlignedRecord | None, convert: Convert, failures: Failures
) -> tuple[tuple[ClauseOutcome, ...], Proof, str]:
    if not action.verify.strip():
        return (), Proof.UNCHECKABLE, "no verify condition is given; nobody can check it"
    try:
        outcomes = tuple(
            measured_outcome(c, action.done, record, _limit(c, convert))
            if isinstance(c, Clause)
            else silence_outcome(c, action.cause, action.done, failures, record)
            for c in parse_condition(action.verify)
        )
    except ConditionError as error:
        place = f" (at {error.line[error.start : error.end]!r})" if error.line else ""
        return (), Proof.UNCHECKABLE, f"{error.reason}{place}"
    return outcomes, *joined(outcomes)


def _limit(clause: Clause, convert: Convert) -> float:
    try:
        return convert(clause.value, clause.quantity)
    except ValueError as error:
        raise ConditionError(str(error), clause.text, 0, len(clause.text)) from error


def _only_containment(actions: tuple[Action, ...]) -> bool:
    tried = [a for a in actions if a.status not in _ENDED]
    return bool(tried) and all(a.kind is ActionKind.CONTAINMENT for a in tried)


def _objections(action: Action, proof: Proof, only_containment: bool) -> tuple[str, ...]:
    owner, verifier = action.owner.strip().casefold(), action.verified_by.strip().casefold()
    tests = (
        (action.status not in STATES, f"status {action.status!r} is not one of the known states"),
        (action.kind is None, "its kind is not one of the known kinds"),
        (not owner, "it has no owner"),
        (action.due is None and action.done is None, "it has no due date"),
        (bool(owner) and owner == verifier, "its owner is also the one who verifies it"),
        (
            action.kind is ActionKind.CORRECTIVE
            and action.cause not in CAUSES
            and action.status not in _BEFORE_WORK,
            "a corrective action must name the cause it removes before it is accepted",
        ),
        (
            action.status in _IMPLEMENTED and action.done is None,
            f"status is {action.status!r} but no done date is given",
        ),
        (
            action.done is not None and action.status in ("proposed", "accepted", "planned"),
            f"it has a done date but its status is {action.status!r}",
        ),
        (
            action.status in ("verified in place", "effective", "closed") and not verifier,
            f"status is {action.status!r} but nobody is named who verified it",
        ),
        (
            action.status in ("effective", "closed") and proof is not Proof.PROVED,
            f"status is {action.status!r} but its condition is {proof.value}",
        ),
        (
            proof is Proof.REFUTED and action.status not in ("ineffective", "reopened", *_ENDED),
            "its condition is refuted: reopen it, or link the action that replaces it",
        ),
        (
            only_containment and action.kind is ActionKind.CONTAINMENT,
            "the case has only containment; nothing yet removes the cause",
        ),
    )
    return tuple(words for broken, words in tests if broken)
