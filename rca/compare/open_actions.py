"""Actions across cases: due, overdue, proved, refuted, not yet provable and why."""

from collections.abc import Sequence
from dataclasses import dataclass
from datetime import date
from enum import StrEnum

from rca.compare.incident import PastAction

ENDED = ("rejected", "superseded", "closed", "effective")


class Standing(StrEnum):
    """How an action stands on a day."""

    REFUTED = "refuted"
    OVERDUE = "overdue"
    DUE = "due soon"
    OPEN = "open"
    WAITING = "done, not yet provable"
    UNCHECKED = "done, cannot be checked"
    PROVED = "proved"
    ENDED = "ended without proof"


@dataclass(frozen=True, slots=True, kw_only=True)
class CaseActions:
    """The actions of one case, as its report or its records have them now."""

    case: str
    title: str
    asset: str
    site: str
    source: str
    actions: tuple[PastAction, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Row:
    """One action as it stands on the day asked for."""

    case: str
    asset: str
    site: str
    action: PastAction
    standing: Standing
    late_days: int | None  # days past due; negative: days left
    warnings: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class Register:
    """All actions on a day, the most urgent first."""

    today: date
    rows: tuple[Row, ...]

    def count(self, standing: Standing) -> int:
        """How many stand so."""
        return sum(r.standing is standing for r in self.rows)

    @property
    def bad(self) -> bool:
        """Whether any is overdue or refuted."""
        return any(r.standing in (Standing.OVERDUE, Standing.REFUTED) for r in self.rows)


def register(cases: Sequence[CaseActions], *, today: date, soon_days: int = 14) -> Register:
    """The standing of every action on a day."""
    rows = [
        _row(case, action, today, soon_days, _only_containment(case))
        for case in cases
        for action in case.actions
    ]
    urgency = list(Standing)
    rows.sort(
        key=lambda r: (
            urgency.index(r.standing),
            r.action.due or date.max,
            r.case,
            r.action.id,
        )
    )
    return Register(today=today, rows=tuple(rows))


def _row(
    case: CaseActions, action: PastAction, today: date, soon_days: int, only_containment: bool
) -> Row:
    late = (today - action.due).days if action.due else None
    told = " ".join(action.objections)
    warnings = []
    if only_containment and action.kind == "containment" and "only containment" not in told:
        warnings.append("the case has only containment; nothing yet removes the cause")
    if action.due is None and action.done is None and action.status not in ENDED:
        warnings.append("it has no due date")
    warnings = [w for w in warnings if w not in told]
    return Row(
        case=case.case,
        asset=case.asset,
        site=case.site,
        action=action,
        standing=_standing(action, late, soon_days),
        late_days=late if action.done is None else None,
        warnings=tuple(warnings),
    )


def _standing(action: PastAction, late: int | None, soon_days: int) -> Standing:
    if action.proof == "refuted" and action.status not in ("rejected", "superseded"):
        return Standing.REFUTED
    if action.proof == "proved":
        return Standing.PROVED
    if action.status in ENDED:
        return Standing.ENDED
    if action.done is None:
        if late is not None and late > 0:
            return Standing.OVERDUE
        return Standing.DUE if late is not None and late >= -soon_days else Standing.OPEN
    if action.proof == "not yet provable":
        return Standing.WAITING
    return Standing.UNCHECKED


def _only_containment(case: CaseActions) -> bool:
    tried = [a for a in case.actions if a.status not in ("rejected", "superseded")]
    return bool(tried) and all(a.kind == "containment" for a in tried)
