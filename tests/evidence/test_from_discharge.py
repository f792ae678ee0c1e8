"""Items of the discharge side: bears, does not bear, not assessed."""

from dataclasses import replace

import pytest

from rca.base.source import Reading
from rca.case.model import Fluid
from rca.case.vocabulary import FluidClass
from rca.discharge.check import check_discharge
from rca.discharge.model import DischargeCheck, Status
from rca.evidence.from_discharge import MOST_AGAINST, MOST_FOR, from_discharge
from rca.evidence.item import EvidenceItem, Node, NotAssessed


def ratio(item):
    return item.likelihood["yes"] / item.likelihood["no"]


def by_node(case, check):
    return {item.node: item for item in from_discharge(case, check)}


@pytest.fixture
def check(small_case):
    return check_discharge(small_case, (0.85e5, 0.03e5), 0.01, None, seed=1, samples=64)


def test_one_item_for_each_node(small_case, check):
    items = by_node(small_case, check)
    assert set(items) == {
        Node.HOT_BUBBLES,
        Node.FUEL_PATH,
        Node.FAST_PRESSURE_RISE,
        Node.OVERPRESSURE,
    }
    assert len({i.key for i in items.values()}) == 4
    for item in items.values():
        if isinstance(item, EvidenceItem):
            assert all(0 < v < 1 for v in item.likelihood.values())
            assert item.sources


@pytest.mark.parametrize(("possible", "between", "low", "high"), [
    (0.0, 0.0, MOST_AGAINST, MOST_AGAINST), (0.95, 0.05, MOST_FOR, MOST_FOR), (0.3, 0.4, 2.9, 3.0),
    (0.05, 0.1, 1.9, 2.1),
])  # fmt: skip
def test_hot_bubbles_follow_the_shares_and_argue_harder_against_than_for(
    small_case, check, possible, between, low, high
):
    changed = replace(check, possible=possible, indeterminate=between)
    assert low * 0.999 <= ratio(by_node(small_case, changed)[Node.HOT_BUBBLES]) <= high * 1.001
    assert MOST_FOR < 1 / MOST_AGAINST


def test_fuel(small_case, check):
    assert 0.5 < ratio(by_node(small_case, check)[Node.FUEL_PATH]) <= 1.0
    vapour = replace(check, fuel=replace(check.fuel, vapour=1.0, status=Status.SUPPORTED))
    assert ratio(by_node(small_case, vapour)[Node.FUEL_PATH]) == pytest.approx(MOST_FOR)
    case = replace(small_case, fluid=Fluid(fluid_class=FluidClass.WATER_GLYCOL))
    wet = check_discharge(case, (0.85e5, 0.03e5), 0.01, None, seed=1, samples=64)
    item = by_node(case, wet)[Node.FUEL_PATH]
    assert item.absent
    assert ratio(item) < 0.05


@pytest.mark.parametrize(("bar", "milliseconds", "low", "high"), [(250, 0.8, 3, 25), (20, 0.8, 0, 0.1), (250, 60, 0, 0.1)])  # fmt: skip
def test_fast_rise(small_case, check, bar, milliseconds, low, high):
    import math

    changed = replace(
        check,
        discharge_pressure=replace(check.discharge_pressure, value=bar * 1e5),
        rise_time=replace(check.rise_time, log_mean=math.log(milliseconds * 1e-3)),
    )
    assert low <= ratio(by_node(small_case, changed)[Node.FAST_PRESSURE_RISE]) <= high


@pytest.mark.parametrize(("bar", "favours"), [(290, True), (215, False)])
def test_overpressure(small_case, bar, favours):
    peak = Reading(value=bar * 1e5, unit="Pa")
    check = check_discharge(
        small_case, (0.85e5, 0.03e5), 0.01, None, seed=1, samples=64, discharge_peak=peak
    )
    item = by_node(small_case, check)[Node.OVERPRESSURE]
    assert (ratio(item) > 1) is favours
    assert item.absent is not favours


def test_nothing_computed_nothing_weighed(small_case):
    items = from_discharge(small_case, DischargeCheck(missing=("discharge pressure",)))
    assert all(isinstance(i, NotAssessed) for i in items)
    assert "discharge pressure" in items[0].missing
