"""Whether a reservoir breathes, from the swing of its level."""

from dataclasses import replace

import numpy as np
import pytest

from rca.case.model import Case
from rca.suction.breathing import Breathing, breathing
from rca.suction.inverse import regressors
from rca.suction.rows import Rows, suction_rows
from tests.suction.synthetic import SCENARIOS, Truth, record

BASE = replace(SCENARIOS[0], swing_m=0.03, step_s=120.0, days=6, two_speeds=True)


def found(case: Case, truth: Truth) -> Breathing | None:
    rows = suction_rows(case, record(case, truth, seed=2))
    assert isinstance(rows, Rows)
    return breathing(case, rows, regressors(rows, 2.4667e-3, 30e-6, 850.0))


def test_a_tank_that_follows_its_level_does_not_breathe(small_case: Case) -> None:
    told = found(small_case, replace(BASE, tank_bar_per_m=4.0))
    assert told is not None
    assert told.verdict == "shut"
    assert told.level_swing == pytest.approx(0.03, rel=0.25)
    assert told.tank_swing.p50 / 1e5 == pytest.approx(4.0 * told.level_swing, rel=0.03)


def test_a_tank_that_does_not_breathes(small_case: Case) -> None:
    told = found(small_case, BASE)
    assert told is not None
    assert told.verdict == "free"
    assert told.tank_swing.p05 < 0.0 < told.tank_swing.p95 + 200.0


@pytest.mark.outside_value(
    source="Boyle's law by hand: 0.03 m of 0.5 m of oil under air of a quarter of the oil's volume "
    "is 24 % of the air, 0.23 bar at 0.973 bar"
)
def test_a_shut_tank_follows_boyle(small_case: Case) -> None:
    told = found(small_case, BASE)
    assert told is not None
    per_metre = told.shut_swing / told.level_swing
    assert per_metre * 0.03 / 1e5 == pytest.approx(0.2335, rel=0.01)


def test_sensor_noise_is_no_swing(small_case: Case) -> None:
    assert found(small_case, replace(BASE, swing_m=0.0)) is None
    assert found(small_case, replace(BASE, swing_m=0.0, rest=False)) is None


def test_without_a_level_nothing_is_said(small_case: Case) -> None:
    assert found(small_case, replace(BASE, level_recorded=False)) is None


def test_half_hour_bins_are_too_coarse(small_case: Case) -> None:
    assert found(small_case, replace(BASE, step_s=900.0, days=20)) is None


def test_a_speed_that_moves_with_the_level_is_not_taken_for_the_tank(small_case: Case) -> None:
    """Level and speed go together here; the loss of the speed is fitted beside the tank."""
    rows = suction_rows(small_case, record(small_case, BASE, seed=3))
    assert isinstance(rows, Rows)
    assert rows.level is not None
    x = regressors(rows, 2.4667e-3, 30e-6, 850.0)
    slow = rows.flow < 0.8 * rows.flow.max()
    level = rows.level + np.where(rows.running & slow, 0.03, 0.0)
    told = breathing(small_case, replace(rows, level=level), x)
    assert told is not None
    assert told.verdict != "shut"
