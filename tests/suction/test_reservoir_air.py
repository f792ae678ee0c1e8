"""Dwell of the oil in the reservoir against what its air needs."""

from dataclasses import replace

import pytest

from rca.base.source import Reading
from rca.case.model import Case
from rca.evidence.from_suction import from_suction
from rca.evidence.item import EvidenceItem, NotAssessed
from rca.figures.panels_suction import panels_suction
from rca.physics.dissolved_air import stokes_rise
from rca.physics.viscosity import kinematic_viscosity
from rca.suction.check import check_suction
from rca.suction.reservoir_air import ReservoirAir, reservoir_air

FLOW = 100e-6 * 1480 / 60


def value(number: float, unit: str) -> Reading:
    return Reading(value=number, unit=unit)


def told(case: Case, inlet: float | None = 0.8e5, **reservoir: object) -> ReservoirAir:
    found = reservoir_air(replace(case, reservoir=replace(case.reservoir, **reservoir)), inlet)
    assert found is not None
    return found


def test_dwell_is_volume_over_flow(small_case: Case) -> None:
    found = told(small_case)
    assert found.ideal_dwell == pytest.approx(0.630 / FLOW)
    assert found.dwell < found.ideal_dwell
    assert told(small_case, baffle=True).dwell > found.dwell


def test_the_kept_bubble_rises_just_the_depth_in_the_dwell(small_case: Case) -> None:
    found = told(small_case, oil_depth=value(0.55, "m"))
    nu = float(kinematic_viscosity(323.15, 46.1e-6, 6.8e-6))
    assert stokes_rise(found.kept_diameter, nu) * found.dwell == pytest.approx(0.55, rel=1e-9)
    assert found.clean_diameter is not None
    assert found.clean_diameter / found.kept_diameter == pytest.approx((12 / 18) ** 0.5)


@pytest.mark.outside_value(
    source="nucleus 2 sigma/deficit by hand: 0.03 N/m and 0.2 bar give 3.0 um"
)
def test_nucleus(small_case: Case) -> None:
    found = told(small_case, inlet=97304.0 - 0.2e5)
    assert found.nucleus == pytest.approx(3.0e-6, rel=0.01)
    assert told(small_case, inlet=1.2e5).nucleus is None
    assert told(small_case, inlet=None).nucleus is None


@pytest.mark.outside_value(
    source="end of the air release test, 0.2 % of the air blown in: ASTM D3427, ISO 9120"
)
def test_a_dwell_of_one_release_time_leaves_the_test_s_end(small_case: Case) -> None:
    slow = told(small_case)
    volume = 0.630 * slow.release_time / slow.dwell
    found = told(small_case, oil_volume=value(volume, "m3"))
    assert found.dwell == pytest.approx(found.release_time)
    assert found.remaining == pytest.approx(0.002 / 0.10, rel=1e-6)


def test_a_small_reservoir_speaks_for_carried_air_a_large_one_against(small_case: Case) -> None:
    def item(litres: float) -> EvidenceItem:
        case = replace(
            small_case,
            reservoir=replace(small_case.reservoir, oil_volume=value(litres / 1e3, "m3")),
        )
        check = check_suction(case, None, seed=1, samples=64)
        assert any(p.key == "suction.reservoir" for p in panels_suction(case, check).panels)
        found = next(i for i in from_suction(case, check, None) if i.key == "air.reservoir")
        assert isinstance(found, EvidenceItem)
        return found

    small, large = item(80.0), item(4000.0)
    assert small.likelihood["yes"] > small.likelihood["no"]
    assert large.likelihood["yes"] < large.likelihood["no"]
    assert small.likelihood["yes"] / small.likelihood["no"] < 3.0  # a computed aside, no more


def test_without_a_volume_nothing_is_said(small_case: Case) -> None:
    case = replace(small_case, reservoir=replace(small_case.reservoir, oil_volume=None))
    check = check_suction(case, None, seed=1, samples=64)
    assert check.reservoir is None
    found = next(i for i in from_suction(case, check, None) if i.key == "air.reservoir")
    assert isinstance(found, NotAssessed)


def test_oil_far_from_the_test_s_viscosity_is_not_judged(small_case: Case) -> None:
    cold = replace(small_case, fluid=replace(small_case.fluid, temperature=value(263.15, "K")))
    assert reservoir_air(cold, 0.8e5) is None
