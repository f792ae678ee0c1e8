"""Actions: thirty ways to write a condition wrongly, and what records prove."""

from datetime import date

import numpy as np
import pytest

from rca.actions.condition import ConditionError, parse_condition
from rca.actions.review import Proof, review_actions
from rca.base.source import Source
from rca.base.units import QUANTITY_DIMENSIONS, parse_quantity
from rca.case.model import Action
from rca.case.series import AlignedRecord, Series
from rca.case.vocabulary import ActionKind

SRC = Source(file="actions.csv", locator="line 2")
GOOD = "min(inlet pressure) >= 0.85 bar(a) for 30 d after done"


def convert(text: str, quantity: str) -> float:
    return parse_quantity(text, QUANTITY_DIMENSIONS[quantity]).value


def record(days: float, pressure: float, start: str = "2026-03-12") -> AlignedRecord:
    n = int(days * 144)
    first = np.datetime64(start).astype("datetime64[s]").astype(float)
    values = np.full(n, pressure)
    series = Series(
        quantity="inlet pressure", unit="Pa", mean=values, low=values, high=values, source=SRC
    )
    return AlignedRecord(
        time_s=first + 600.0 * np.arange(n), bin_s=600.0, series={"inlet pressure": series}
    )


def action(**changes: object) -> Action:
    given = {
        "id": "A1",
        "kind": ActionKind.CORRECTIVE,
        "text": "t",
        "source": SRC,
        "cause": "suction strainer clogged",
        "owner": "one",
        "due": date(2026, 3, 20),
        "done": date(2026, 3, 11),
        "status": "implemented",
        "verified_by": "two",
        "verify": GOOD,
    }
    return Action(**(given | changes))


def review(one: Action, aligned: AlignedRecord | None):
    return review_actions((one,), aligned, convert=convert, as_of=date(2026, 6, 1)).actions[0]


def test_the_example_is_read() -> None:
    (clause,) = parse_condition(GOOD)
    assert (clause.function, clause.quantity, clause.comparison) == ("min", "inlet pressure", ">=")
    assert (clause.value, clause.hours) == ("0.85 bar(a)", 720.0)


@pytest.mark.parametrize(
    "text",
    [
        "",
        "   ",
        "min",
        "min(inlet pressure)",
        "min(inlet pressure) >=",
        "inlet pressure >= 1 bar(a)",
        "min inlet pressure >= 0.85 bar(a)",
        "min(inlet pressure >= 0.85 bar(a)",
        "min(inlet presure) >= 0.85 bar(a)",
        "min(pressure) >= 0.85 bar(a)",
        "minimum(inlet pressure) >= 0.85 bar(a)",
        "min(inlet pressure) = 0.85 bar(a)",
        "min(inlet pressure) == 0.85 bar(a)",
        "min(inlet pressure) => 0.85 bar(a)",
        "min(inlet pressure) >= for 30 d",
        "min(inlet pressure) >= 0.85 bar(a) for 30 moons",
        "min(inlet pressure) >= 0.85 bar(a) for d",
        "min(inlet pressure) >= 0.85 bar(a) for 0 d",
        "min(inlet pressure) >= 0.85 bar(a) after Easter",
        "min(inlet pressure) >= 0.85 bar(a) after 11.3.2026",
        "max()",
        "max() < 1 bar(a)",
        "min(inlet pressure) >= 0.85 bar(a) and",
        "and min(inlet pressure) >= 0.85 bar(a)",
        "min(inlet pressure) is fine",
        "no recurrence for ever",
        "no recurrence of gremlins",
        "no recurrence for 3 old moons",
        "no recurrences please",
        "max(oil temperature) < 60 bar",
        "min(inlet pressure) >= 0,85 bar(a)",
        "min(inlet pressure) >= 0.85 bar for 30 d",
        "min(inlet pressure) >= 0.85 bar(a) for 30 d after done please",
        ">= 0.85 bar(a)",
        "min(max(inlet pressure)) > 1",
        "__import__('os').system('x')",
        "min(inlet pressure); drop",
        "min[inlet pressure] >= 1 bar(a)",
    ],
)
def test_a_malformed_condition_is_answered(text: str) -> None:
    with pytest.raises(ConditionError, match=r"expected|for example|longer|known"):
        parse_condition(text)


@pytest.mark.parametrize(
    ("text", "pointed"),
    [
        ("min(inlet presure) >= 0.85 bar(a)", "inlet presure"),
        ("minimum(inlet pressure) >= 0.85 bar(a)", "minimum"),
        ("min(inlet pressure) => 0.85 bar(a)", "=>"),
        ("min(inlet pressure) >= 0.85 bar for 3 d", "0.85 bar"),
        ("min(inlet pressure) >= 0.85 bar(a) for 30 moons", "moons"),
        ("min(inlet pressure) >= 0.85 bar(a) after Easter", "Easter"),
        ("max(oil temperature) < 60 degC and min(flow) >= 3 kg", "3 kg"),
        ("no recurrence of gremlins for 3 old intervals", "gremlins"),
        ("max(oil temperature) < 60 degC for 3 d soon", "soon"),
    ],
)
def test_the_carets_stand_under_the_wrong_words(text: str, pointed: str) -> None:
    with pytest.raises(ConditionError) as caught:
        parse_condition(text)
    error = caught.value
    assert error.line[error.start : error.end] == pointed
    _, line, carets = str(error).rsplit("\n", 2)
    assert line[carets.index("^") : carets.rindex("^") + 1] == pointed


def test_a_pressure_that_says_neither_is_answered_in_the_review() -> None:
    found = review(action(verify="min(inlet pressure) >= 0.85 bar for 30 d"), record(40, 0.9e5))
    assert found.proof is Proof.UNCHECKABLE
    assert "bar(a)" in found.reason


def test_proved_refuted_and_not_yet() -> None:
    assert review(action(), record(40, 0.9e5)).proof is Proof.PROVED
    assert review(action(), record(40, 0.8e5)).proof is Proof.REFUTED
    short = review(action(), record(10, 0.9e5))
    assert short.proof is Proof.NOT_YET
    assert "of 30 days" in short.reason
    assert review(action(), None).proof is Proof.NOT_YET
    assert review(action(done=None), record(40, 0.9e5)).proof is Proof.NOT_YET


def test_records_before_the_work_prove_nothing() -> None:
    before = record(40, 0.9e5, start="2026-01-01")
    assert review(action(), before).proof is Proof.NOT_YET


@pytest.mark.parametrize(
    ("changes", "words"),
    [
        ({"verified_by": "one"}, "also the one who verifies"),
        ({"owner": ""}, "no owner"),
        ({"status": "closed", "done": None}, "no done date"),
        ({"status": "closed"}, "is not yet provable"),
        ({"cause": ""}, "must name the cause"),
        ({"status": "finished"}, "not one of the known states"),
    ],
)
def test_guards(changes: dict, words: str) -> None:
    assert any(words in o for o in review(action(**changes), None).objections)


def test_overdue_is_judged_by_the_evidence_not_the_clock() -> None:
    late = action(done=None, status="planned")
    assert review(late, None).overdue
    early = review_actions((late,), None, convert=convert, as_of=date(2026, 3, 1)).actions[0]
    assert not early.overdue


def test_an_action_nobody_can_check_is_shown_as_such() -> None:
    assert review(action(verify=""), None).proof is Proof.UNCHECKABLE
