"""The verdict on simulated cases: loose bounds, since sixty cases tell little more."""

import numpy as np
import pytest

from rca.case.vocabulary import MECHANISMS
from rca.workshop.calibration import (
    Outcome,
    abstained,
    false_alarms,
    reliability,
    report,
    right_when_said,
    score,
    simulate,
)


@pytest.fixture(scope="module")
def outcomes() -> tuple[Outcome, ...]:
    return simulate(60, seed=5)


def test_probabilities_beat_the_base_rates_of_the_cases(outcomes: tuple[Outcome, ...]) -> None:
    for side in ("suction", "discharge"):
        told = score(outcomes, side)
        assert told.brier < told.brier_base
        assert told.log_loss < told.log_loss_base


def test_micro_dieseling_is_seldom_found_where_there_was_none(
    outcomes: tuple[Outcome, ...],
) -> None:
    wrong, without = false_alarms(outcomes)
    assert without > 25
    assert wrong <= 0.05 * without


def test_poor_cases_are_left_open_more_often_than_rich_ones(
    outcomes: tuple[Outcome, ...],
) -> None:
    assert abstained(outcomes, "poor") > 0.5
    assert abstained(outcomes, "rich") < 0.5


def test_a_side_that_is_named_is_mostly_right(outcomes: tuple[Outcome, ...]) -> None:
    right, said = right_when_said(outcomes)
    assert right >= 0.65 * said


def test_high_probabilities_come_true_more_often_than_low_ones(
    outcomes: tuple[Outcome, ...],
) -> None:
    bins = reliability(outcomes, MECHANISMS)
    low = [b for b in bins if b.high <= 0.2]
    high = [b for b in bins if b.low >= 0.65]
    assert max(b.observed for b in low) < 0.2
    assert np.average([b.observed for b in high], weights=[b.count for b in high]) > 0.5


def test_the_report_states_its_limits(outcomes: tuple[Outcome, ...]) -> None:
    text = report(outcomes)
    assert "Limits" in text
    assert "60 simulated cases" in text


def test_the_same_seed_gives_the_same_cases() -> None:
    assert simulate(3, seed=2) == simulate(3, seed=2)


@pytest.mark.outside_value(source="Brier score and log loss of two statements by hand")
def test_scores_by_hand() -> None:
    def one(p: float, y: bool) -> Outcome:
        return Outcome(
            richness="rich", truth="", said="", p={"x": p}, y={"x": y}, causes=(), ranked=()
        )

    told = score([one(0.8, True), one(0.4, False)], "x")
    assert told.brier == pytest.approx((0.04 + 0.16) / 2)
    assert told.log_loss == pytest.approx(-(np.log(0.8) + np.log(0.6)) / 2)
    assert told.brier_base == pytest.approx(0.25)
