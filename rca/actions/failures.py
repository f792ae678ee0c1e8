"""The failures of a case's machine: from its own history, and from other cases where known."""

from collections.abc import Iterable
from datetime import date, datetime

from rca.actions.proof import Failure, Failures
from rca.case.model import Case
from rca.case.vocabulary import CAUSES, MECHANISMS

KIND = "failure"  # of a history event; "failure: suction strainer clogged" names its cause
SAME_DAYS = 3  # entries so near the incident's own day speak of the incident itself; own choice


def failures_of(case: Case, *, until: date | None, others: Iterable[Failure] = ()) -> Failures:
    """All failures on record but the incident of the case itself, which set its actions off.

    The kind of a history entry may name a cause or mechanism; its free text never counts.
    """
    trigger = case.header.occurred.date() if case.header.occurred is not None else None
    found = [*others]
    for event in case.history:
        kind, _, word = event.kind.casefold().strip().partition(":")
        if kind.strip() != KIND:
            continue
        day = event.when.date() if isinstance(event.when, datetime) else event.when
        words = (word.strip(),) if word.strip() in (*CAUSES, *MECHANISMS) else ()
        found.append(Failure(day=day, words=words, source=event.source.locator))
    kept = [f for f in found if trigger is None or abs((f.day - trigger).days) > SAME_DAYS]
    return Failures(
        known=tuple(sorted(kept, key=lambda f: (f.day, f.source))), trigger=trigger, until=until
    )
