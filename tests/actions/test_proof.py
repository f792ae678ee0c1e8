"""Actions on generated follow-up records: proved, refuted, not yet provable and why."""

from datetime import date
from math import exp

import numpy as np
import pytest

from rca.actions.proof import Failure, Failures, Proof
from rca.actions.review import review_actions
from rca.base.source import Source
from rca.base.units import QUANTITY_DIMENSIONS, parse_quantity
from rca.case.model import Action
from rca.case.series import AlignedRecord, Series
from rca.case.vocabulary import ActionKind

SRC = Source(file="pressure/slow.csv", locator="column P")
DONE = date(2026, 3, 11)
CAUSE = "suction strainer clogged"


def convert(text: str, quantity: str) -> float:
    return parse_quantity(text, QUANTITY_DIMENSIONS[quantity]).value


def follow_up(
    days: float,
    bar: float = 0.9,
    *,
    dips: dict[float, float] | None = None,
    gap: tuple[float, float] | None = None,
    duty: float = 1.0,
) -> AlignedRecord:
    """Ten-minute bins from the day after the work: dips at given days, a gap, hours run a day."""
    n = int(days * 144)
    day = np.arange(n) / 144.0
    first = np.datetime64("2026-03-12").astype("datetime64[s]").astype(float)
    mean, low = np.full(n, bar * 1e5), np.full(n, bar * 1e5)
    for at, value in (dips or {}).items():
        low[int(at * 144)] = value * 1e5
    if gap:
        hole = (day >= gap[0]) & (day < gap[1])
        mean[hole] = low[hole] = np.nan
    speed = np.where(day % 1.0 < duty, 24.7, 0.0)
    pressure = Series(
        quantity="inlet pressure", unit="Pa", mean=mean, low=low, high=mean, source=SRC
    )
    turning = Series(
        quantity="shaft speed", unit="1/s", mean=speed, low=speed, high=speed, source=SRC
    )
    return AlignedRecord(
        time_s=first + 600.0 * np.arange(n),
        bin_s=600.0,
        series={"inlet pressure": pressure, "shaft speed": turning},
    )


def review(verify: str, record: AlignedRecord | None = None, failures: Failures | None = None):
    action = Action(
        id="A1",
        kind=ActionKind.CORRECTIVE,
        text="t",
        source=SRC,
        cause=CAUSE,
        owner="one",
        due=DONE,
        done=DONE,
        status="implemented",
        verified_by="two",
        verify=verify,
    )
    check = review_actions(
        (action,), record, convert=convert, as_of=date(2026, 12, 1), failures=failures
    )
    return check.actions[0]


MIN = "min(inlet pressure) >= 0.85 bar(a) for 30 d"


@pytest.mark.parametrize(
    ("verify", "record", "proof"),
    [
        (MIN, follow_up(31), Proof.PROVED),
        (MIN, follow_up(20), Proof.NOT_YET),
        (MIN, follow_up(31, dips={12: 0.84}), Proof.REFUTED),
        (MIN, follow_up(3, dips={2: 0.84}), Proof.REFUTED),  # one moment is enough
        (MIN, follow_up(60, dips={40: 0.5}), Proof.PROVED),  # after the window
        (MIN, follow_up(31, gap=(5, 12)), Proof.NOT_YET),  # 23 of 30 days seen
        (MIN, follow_up(31, gap=(5, 7)), Proof.PROVED),
        (MIN, follow_up(31, duty=0.05), Proof.NOT_YET),  # recorded, but hardly ran
        ("min(inlet pressure) >= 0.85 bar(a)", follow_up(3), Proof.PROVED),
        ("p05(inlet pressure) >= 0.85 bar(a) for 30 d", follow_up(10, 0.8), Proof.NOT_YET),
        ("p05(inlet pressure) >= 0.85 bar(a) for 30 d", follow_up(31, 0.8), Proof.REFUTED),
        (
            "p05(inlet pressure) >= 0.85 bar(a) for 30 d",
            follow_up(31, dips={3: 0.1}),
            Proof.PROVED,
        ),
        ("mean(inlet pressure) >= -0.2 bar(g) for 10 d", follow_up(11), Proof.PROVED),
        (
            "min(inlet pressure) > 0.85 bar(a) for 200 h in service",
            follow_up(20, duty=0.5),
            Proof.PROVED,
        ),
        (
            "min(inlet pressure) > 0.85 bar(a) for 200 h in service",
            follow_up(20, duty=0.25),
            Proof.NOT_YET,
        ),
        (
            "min(inlet pressure) >= 0.85 bar(a) and max(oil temperature) < 60 degC",
            follow_up(3),
            Proof.NOT_YET,
        ),
        (
            "min(inlet pressure) >= 0.95 bar(a) and max(oil temperature) < 60 degC",
            follow_up(3),
            Proof.REFUTED,
        ),
    ],
)
def test_what_follow_up_records_prove(verify: str, record: AlignedRecord, proof: Proof) -> None:
    assert review(verify, record).proof is proof


def test_running_time_only_counts_for_in_service() -> None:
    (clause,) = review(
        "min(inlet pressure) > 0.85 bar(a) for 200 h in service", follow_up(20, duty=0.25)
    ).clauses
    assert clause.running_hours == pytest.approx(120.0)
    assert "120 of 200 h" in clause.reason


def failures(*days: str, until: str = "2027-12-31", cause: str = CAUSE) -> Failures:
    known = tuple(
        Failure(day=date.fromisoformat(d), words=(cause,) if cause else ()) for d in days
    )
    return Failures(known=known, trigger=date(2026, 3, 6), until=date.fromisoformat(until))


BEFORE = ("2025-03-06", "2025-09-06")  # two before the trigger: one counted in 365 days


@pytest.mark.outside_value(source="silence of t over an interval T has probability exp(-t/T)")
@pytest.mark.parametrize(
    ("verify", "known", "proof", "words"),
    [
        ("no recurrence", failures(*BEFORE, until="2027-01-01"), Proof.NOT_YET, "of 1095 d"),
        (
            "no recurrence",
            failures(*BEFORE, until="2029-03-10"),
            Proof.PROVED,
            "by chance only 0.05",
        ),
        ("no recurrence", failures(*BEFORE, "2026-08-01"), Proof.REFUTED, "143 d after"),
        ("no recurrence", failures(), Proof.NOT_YET, "no earlier interval"),
        ("no recurrence for 400 d", failures(), Proof.NOT_YET, "no earlier interval"),
        (
            "no recurrence for 400 d",
            failures(*BEFORE),
            Proof.NOT_YET,
            f"probability {exp(-660 / 365):.2f}",
        ),
        ("no recurrence for 400 d against one in 90 d", failures(), Proof.PROVED, "silent"),
        (
            "no recurrence of dirt ingress for 400 d against one in 90 d",
            failures("2026-08-01"),
            Proof.PROVED,
            "silent",
        ),
        (
            "no recurrence for 9 d against one in 3 d",
            failures("2026-08-01", cause=""),
            Proof.NOT_YET,
            "no cause on record",
        ),
        (
            "no recurrence for 300 h in service against one in 100 h",
            failures(),
            Proof.NOT_YET,
            "of 12 d",
        ),
    ],
)
def test_silence(verify: str, known: Failures, proof: Proof, words: str) -> None:
    found = review(verify, None, known)
    assert found.proof is proof, found.reason
    assert words in found.reason


def test_silence_in_service_counts_running_hours() -> None:
    verify = "no recurrence for 300 h in service against one in 100 h"
    assert review(verify, follow_up(26, duty=0.5), failures()).proof is Proof.PROVED
    assert review(verify, follow_up(20, duty=0.5), failures()).proof is Proof.NOT_YET


def test_a_refuted_action_can_not_stay_as_it_is() -> None:
    found = review(MIN, follow_up(31, 0.8))
    assert any("refuted: reopen it" in o for o in found.objections)
