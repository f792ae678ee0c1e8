"""Predicted effect beside the measured one, on invented records whose truth is known."""

from dataclasses import replace
from datetime import UTC, date, datetime

import numpy as np
import pytest

from rca.actions.effect import Effect, Match, effects, part
from rca.base.source import Source
from rca.case.model import Action, Case
from rca.case.series import AlignedRecord
from rca.case.vocabulary import ActionKind
from tests.suction.synthetic import Truth, record

SRC = Source(file="actions.csv", locator="line 2")
FAILING = Truth("clogging strainer", viscous=(0.036, 0.26))


def after(one: AlignedRecord, other: AlignedRecord, pause_s: float = 2 * 86400.0) -> AlignedRecord:
    """Two records in a row with a pause for the work."""
    shift = one.time_s[-1] + pause_s - other.time_s[0]
    return AlignedRecord(
        time_s=np.concatenate([one.time_s, other.time_s + shift]),
        bin_s=one.bin_s,
        series={
            name: replace(
                s,
                **{
                    p: np.concatenate([getattr(s, p), getattr(other.series[name], p)])
                    for p in ("mean", "low", "high")
                },
            )
            for name, s in one.series.items()
        },
    )


def run(case: Case, truth: Truth, **changes: object) -> Effect:
    before = record(case, FAILING, seed=5)
    whole = after(before, record(case, truth, seed=6))
    done = datetime.fromtimestamp(before.time_s[-1] + 86400.0, tz=UTC).date()
    given = {
        "id": "A2",
        "kind": ActionKind.CORRECTION,
        "text": "new strainer",
        "source": SRC,
        "cause": "suction strainer clogged",
        "done": done,
    }
    (found,) = effects(case, (Action(**(given | changes)),), whole, seed=1)
    return found


@pytest.mark.outside_value(source="the invented truth: 0.26 - 0.036 bar lost in the strainer")
def test_a_new_strainer_gives_what_was_lost_in_the_old(small_case: Case) -> None:
    found = run(small_case, Truth("clean line"))
    assert found.match is Match.AS_PREDICTED, found
    assert found.gain == pytest.approx(0.22e5, abs=0.03e5)
    assert found.predicted_gain is not None
    assert found.predicted_gain.p05 < 0.224e5 < found.predicted_gain.p95


def test_a_strainer_that_was_not_changed_gives_less(small_case: Case) -> None:
    found = run(small_case, Truth("still clogged", viscous=(0.25, 0.26)))
    assert found.match is Match.LESS
    assert "not removed" in found.reason


def test_the_wrong_cause_promises_nothing(small_case: Case) -> None:
    found = run(small_case, Truth("clean line"), cause="low oil level")
    assert found.match in (Match.TOO_SMALL, Match.MORE), found


def test_too_little_after_the_work_is_not_measured(small_case: Case) -> None:
    before = record(small_case, FAILING, seed=5)
    last = datetime.fromtimestamp(before.time_s[-1], tz=UTC).date()
    action = Action(
        id="A2",
        kind=ActionKind.CORRECTION,
        text="t",
        source=SRC,
        cause="suction strainer clogged",
        done=last,
    )
    (found,) = effects(small_case, (action,), before, seed=1)
    assert found.match is Match.NOT_MEASURED
    assert effects(small_case, (replace(action, done=None),), before, seed=1) == ()
    (without,) = effects(small_case, (action,), None, seed=1)
    assert without.match is Match.NOT_MEASURED


def test_containment_and_other_causes_promise_no_pressure(small_case: Case) -> None:
    before = record(small_case, FAILING, seed=5)
    done = date(2027, 1, 1)
    for kind, cause in (
        (ActionKind.CONTAINMENT, "suction strainer clogged"),
        (ActionKind.CORRECTIVE, "dirt ingress"),
    ):
        action = Action(id="A", kind=kind, text="t", source=SRC, cause=cause, done=done)
        assert effects(small_case, (action,), before, seed=1) == ()


def test_a_part_of_a_record_keeps_its_series_together(small_case: Case) -> None:
    whole = record(small_case, FAILING, seed=5)
    some = part(whole, whole.time_s < whole.time_s[100])
    assert all(s.mean.size == s.low.size == s.high.size == 100 for s in some.series.values())
