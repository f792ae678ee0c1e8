"""The discharge check on cases whose answer follows from physics."""

import json
from dataclasses import replace

import numpy as np
import pytest

from rca.base.errors import OutOfRangeError
from rca.base.source import Origin, Reading, Source
from rca.case.model import Case, Pump
from rca.case.vocabulary import FluidClass, PumpKind
from rca.discharge.chart import trace
from rca.discharge.check import check_discharge, high_pressure, hot_status, ignition_status
from rca.discharge.fuel import lean_limit_temperature
from rca.discharge.inputs import TRANSITION_DEGREES, gather, oil_side, rise_time
from rca.discharge.model import Status
from rca.discharge.sampling import draw, unit_points
from rca.physics.delay_grid import delay_grid
from rca.physics.thermal_regime import radius_at_peclet
from rca.records.bursts import BurstFinding


def reading(value, unit="Pa", u=None):
    return Reading(value=value, unit=unit, u=u, source=Source(file="case.toml", locator="test"))


def burst(**more):
    base = {
        "quantity": "discharge pressure", "source": Source(file="pressure/fast.csv", locator="burst 1"),
        "rate_hz": 50_000.0, "duration_s": 1.0, "mean": 200e5, "ripple": 20e5, "crest": 3.0,
        "kurtosis": 3.0, "element_frequency": None, "element_share": None, "rise_time": None,
        "rise_size": None, "rise_resolved": True,
    }  # fmt: skip
    return BurstFinding(**{**base, **more})


def with_pump(case: Case, **more) -> Case:
    return replace(case, pump=replace(case.pump, **more))


def check(case, *, inlet=(0.85e5, 0.03e5), released=0.01, bursts=None, samples=128, **more):
    return check_discharge(case, inlet, released, bursts, seed=1, samples=samples, **more)


def test_the_design_s_machine_is_not_decided_by_physics_alone(small_case):
    found = check(small_case)
    assert found.hot is Status.NOT_EXCLUDED
    assert found.ignition is Status.NOT_EXCLUDED
    released, carried = found.populations
    assert released.possible < carried.possible
    assert released.core.p50 < carried.core.p50 < found.adiabatic.p95
    for p in found.populations:
        assert p.possible + p.indeterminate + p.excluded == pytest.approx(1.0)
        assert p.core.p50 > p.mean.p50 > p.wall.p50
    assert found.possible + found.indeterminate + found.excluded == pytest.approx(1.0)
    assert found.influences[0].name == "bubble radius"


def test_a_slow_low_pressure_machine_is_excluded(small_case):
    case = with_pump(
        small_case, kind=PumpKind.GEAR, discharge_pressure=reading(25e5), transition_angle=None,
        speed=reading(16.0, "1/s"), elements=10,
    )  # fmt: skip
    found = check(case, released=0.02, carried_air=0.0)
    assert found.hot is Status.EXCLUDED
    assert found.ignition is Status.EXCLUDED


def test_coarse_air_and_a_fast_rise_support_heat_but_not_ignition_alone(small_case):
    case = with_pump(
        small_case, discharge_pressure=reading(350e5), transition_angle=reading(0.05, "rad")
    )
    found = check(case, inlet=(0.95e5, 0.02e5), released=0.0, carried_air=0.05)
    assert found.hot is Status.SUPPORTED
    assert found.fuel.status is Status.NOT_EXCLUDED
    assert found.ignition is Status.NOT_EXCLUDED


def test_water_glycol_has_no_fuel(small_case):
    case = replace(
        small_case, fluid=replace(small_case.fluid, fluid_class=FluidClass.WATER_GLYCOL)
    )
    found = check(case)
    assert found.fuel.status is Status.EXCLUDED
    assert found.ignition is Status.EXCLUDED


def test_a_low_flash_point_opens_the_vapour_path(small_case):
    normal = check(small_case).fuel
    low = check(small_case, flash_point=reading(330.0, "K", 5.0)).fuel
    assert low.vapour > 0.5
    assert normal.vapour < 0.05
    assert low.status is Status.SUPPORTED
    assert low.margin.p50 < normal.margin.p50


def test_same_seed_same_answer_and_other_seed_near(small_case):
    one, two = check(small_case), check(small_case)
    assert one == two
    other = check_discharge(small_case, (0.85e5, 0.03e5), 0.01, None, seed=2, samples=128)
    assert other.possible == pytest.approx(one.possible, abs=0.06)


def test_more_samples_converge(small_case):
    few, many = check(small_case, samples=256), check(small_case, samples=2048)
    assert few.possible == pytest.approx(many.possible, abs=0.03)
    assert few.populations[1].core.p50 == pytest.approx(many.populations[1].core.p50, rel=0.03)


def test_without_a_discharge_pressure_it_says_so(small_case):
    found = check(with_pump(small_case, discharge_pressure=None))
    assert found.missing == ("discharge pressure",)
    assert found.hot is None


def test_an_undescribed_pump_still_gets_an_honest_answer(small_case):
    case = Case(header=small_case.header, pump=Pump(discharge_pressure=reading(200e5)))
    found = check(case, inlet=None, released=None)
    assert found.hot is Status.NOT_EXCLUDED
    assert len(found.assumed) >= 3


def test_the_check_holds_plain_values_only(small_case):
    import cattrs

    text = json.dumps(cattrs.Converter().unstructure(check(small_case)), default=str)
    assert "array(" not in text
    assert "np.float64" not in text
    assert len(text) < 100_000


@pytest.mark.parametrize("bad", [
    {"inlet": (float("nan"), 1.0)}, {"inlet": (-1e4, 1.0)}, {"released": float("nan")},
    {"released": -0.1}, {"carried_air": float("inf")}, {"inlet": (150e5, 1e3)},
], ids=str)  # fmt: skip
def test_refusals(small_case, bad):
    with pytest.raises(OutOfRangeError):
        check(small_case, **bad)


@pytest.mark.outside_value(source="geometry: 12 degrees at 1480 rpm last 12/(6 1480) s = 1.351 ms")
def test_rise_from_the_stated_angle(small_case):
    rise = rise_time(small_case, small_case.pump.discharge_pressure)
    assert rise.spread.p50 == pytest.approx(1.3514e-3, rel=1e-3)
    assert not rise.measured


@pytest.mark.parametrize("kind", list(PumpKind))
def test_rise_from_the_kind_of_pump(small_case, kind):
    case = with_pump(small_case, kind=kind, transition_angle=None)
    rise = rise_time(case, case.pump.discharge_pressure)
    low, high = TRANSITION_DEGREES[kind]
    assert rise.spread.p05 == pytest.approx(low / 360 / (1480 / 60), rel=1e-6)
    assert rise.spread.p95 == pytest.approx(high / 360 / (1480 / 60), rel=1e-6)


def test_a_resolved_burst_wins_over_geometry(small_case):
    pressure = small_case.pump.discharge_pressure
    rise = rise_time(small_case, pressure, (burst(rise_time=0.8e-3, rise_size=180e5),))
    assert rise.measured
    assert rise.spread.p50 == pytest.approx(1.0e-3)
    for useless in (
        burst(rise_time=0.8e-3, rise_size=20e5),  # ripple, not the compression
        burst(rise_time=0.8e-3, rise_size=180e5, rise_resolved=False),
        burst(rise_time=0.8e-3, rise_size=180e5, quantity="inlet pressure"),
    ):
        assert not rise_time(small_case, pressure, (useless,)).measured


def test_a_slower_recorded_rise_is_the_line_s_and_says_so(small_case):
    pressure = small_case.pump.discharge_pressure
    rise = rise_time(small_case, pressure, (burst(rise_time=40e-3, rise_size=180e5),))
    assert not rise.measured
    assert "not its chamber" in rise.basis


@pytest.mark.outside_value(
    source="independent computation of the conduction model under a cosine ramp, 1 -> 172.25 bar, "
    "40 degC, Pe 1: core 603 K (659 K under an even ramp)"
)
def test_a_recorded_course_drives_the_bubble(small_case):
    x = np.linspace(0, 1, 41)
    course = tuple(zip((1e-3 * x).tolist(), (0.5 - 0.5 * np.cos(np.pi * x)).tolist(), strict=True))
    seen = burst(rise_time=0.8e-3, rise_size=180e5, rise_course=course)
    case = replace(small_case, fluid=replace(small_case.fluid, temperature=reading(313.15, "K")))
    inputs = gather(case, (1e5, 0.0), reading(172.25e5), (seen,))
    assert inputs.rise.course == course
    one = trace(inputs, radius_at_peclet(1.0, 1e-3, 313.15, 1e5))
    assert max(one.core) == pytest.approx(603, abs=0.03 * 932)
    assert one.linear_core == pytest.approx(659, abs=0.03 * 932)
    # too few samples on the way up: an even rise
    few = replace(seen, rise_course=course[::10])
    assert gather(case, (1e5, 0.0), reading(172.25e5), (few,)).rise.course == ()


def test_high_pressure(small_case):
    assert high_pressure(small_case, (), None) is None
    seen = high_pressure(small_case, (burst(mean=260e5, ripple=40e5),), None)
    assert seen.peak.value == 280e5
    assert seen.limit.value == pytest.approx(1.25 * 211e5)
    case = with_pump(small_case, relief_pressure=reading(230e5))
    assert high_pressure(case, (), reading(240e5)).limit.value == pytest.approx(253e5)


@pytest.mark.parametrize(("possible", "between", "status"), [
    (0.0, 0.05, Status.EXCLUDED), (0.0, 0.2, Status.NOT_EXCLUDED), (0.4, 0.6, Status.NOT_EXCLUDED),
    (0.6, 0.1, Status.SUPPORTED),
])  # fmt: skip
def test_three_way_answer(possible, between, status):
    assert hot_status(possible, between) is status


def test_ignition_needs_both(small_case):
    fuel = check(small_case).fuel
    assert ignition_status(Status.SUPPORTED, fuel) is Status.NOT_EXCLUDED
    assert ignition_status(Status.EXCLUDED, fuel) is Status.EXCLUDED
    vapour = replace(fuel, status=Status.SUPPORTED)
    assert ignition_status(Status.SUPPORTED, vapour) is Status.SUPPORTED
    assert ignition_status(Status.NOT_EXCLUDED, vapour) is Status.NOT_EXCLUDED


def test_delay_grid_refuses():
    with pytest.raises(OutOfRangeError):
        delay_grid(lambda t, p: t * 0, t_range=(600.0, 900.0), p_range=(1e5, 1e6))
    with pytest.raises(OutOfRangeError):
        delay_grid(lambda t, p: t, t_range=(900.0, 600.0), p_range=(1e5, 1e6))


@pytest.mark.outside_value(
    source="definition of the flash point: at 1 atm and no enhancement the lean limit is the flash point"
)
def test_lean_limit_is_the_flash_point_at_one_atmosphere():
    assert lean_limit_temperature(488.0, 101325.0, enhancement=1.0) == pytest.approx(488.0)


@pytest.mark.outside_value(
    source="n-eicosane and n-octacosane vapour pressures (Perry's 8th ed., chemicals library): lean limit at 172 bar 323 and 393 degC, without enhancement; flash 113-170 degC and above"
)
def test_lean_limit_rises_by_some_hundred_and_fifty_kelvin_at_172_bar():
    # C20: 169 -> 323 degC, C28: 234 -> 393 degC between 1 atm and 172 bar, so +154 and +159 K
    found = lean_limit_temperature(273.15 + 234, 172e5, vaporisation=9.2e4, enhancement=1.0)
    assert found - 273.15 == pytest.approx(393, abs=25)


@pytest.mark.parametrize("bad", [{"flash_point": 100.0}, {"pressure": float("nan")}, {"pressure": 1e12, "flash_point": 900.0}], ids=str)  # fmt: skip
def test_lean_limit_refuses(bad):
    with pytest.raises(OutOfRangeError):
        lean_limit_temperature(**{"flash_point": 488.0, "pressure": 1e7, **bad})


def test_draws_cover_their_stated_ranges(small_case):
    inputs = gather(small_case, (0.85e5, 0.03e5), small_case.pump.discharge_pressure, ())
    drawn = draw(inputs, "carried-in air", unit_points(4096, 9, 3))
    low, high = np.quantile(drawn.radius, [0.025, 0.975])
    assert low == pytest.approx(0.06e-3, rel=0.05)
    assert high == pytest.approx(2.0e-3, rel=0.05)
    assert np.mean(drawn.inlet) == pytest.approx(0.85e5, rel=0.01)
    assert np.std(drawn.temperature) == pytest.approx(5.0, rel=0.05)


@pytest.mark.outside_value(
    source="Cragoe, NBS Misc. Publ. 97 (1929) at 50 degC, d 0.87: cp 1.989 kJ/(kg K), k 0.131 W/(m K) (from memory)"
)
def test_oil_side(small_case):
    oil = oil_side(small_case, 323.15)
    assert oil.heat_capacity == pytest.approx(1989, rel=0.01)
    assert oil.conductivity == pytest.approx(0.131, rel=0.01)
    assert 1200 < oil.sound_speed < 1600
    assert oil.viscosity == pytest.approx(30e-6 * oil.density, rel=0.05)


def test_defaults_are_marked_as_defaults(small_case):
    assert check(small_case).fuel.flash_point.origin is Origin.DEFAULT


@pytest.mark.parametrize(("inlet", "more"), [
    ((0.3e5, 0.1e5), {"discharge_pressure": reading(700e5), "transition_angle": reading(0.01, "rad"), "speed": reading(60.0, "1/s")}),
    ((0.05e5, 0.04e5), {"discharge_pressure": reading(350e5)}),
    ((5e5, 0.5e5), {"discharge_pressure": reading(350e5)}),
    ((0.9e5, 0.05e5), {"discharge_pressure": reading(5e5)}),
], ids=["700 bar in microseconds", "near vapour", "boosted inlet", "5 bar"])  # fmt: skip
def test_extreme_machines_get_an_answer(small_case, inlet, more):
    found = check(with_pump(small_case, **more), inlet=inlet)
    assert found.hot is not None
    violent = sum(p.beyond for p in found.populations)
    if inlet[0] < 0.1e5:  # the spike of a spherical collapse, an upper bound, adds no vapour
        assert found.fuel.vapour < 0.05
    assert (violent > 0) is (inlet[0] < 0.5e5)
    if found.discharge_pressure.value > 450e5:
        assert any("450 bar" in words for words in found.assumed)


def test_an_oil_full_of_petrol_still_gets_an_answer(small_case):
    found = check(small_case, flash_point=reading(278.0, "K", 6.0))
    assert found.fuel.status is Status.SUPPORTED
    assert found.fuel.inlet_phi[1] > 0.55


@pytest.mark.outside_value(
    source="n-eicosane to n-octacosane at 50 degC and 1 bar: vapour four to seven decades too "
    "lean; drop of 0.044 of the bubble's diameter stoichiometric at 1 bar"
)
def test_vapour_of_a_clean_oil_is_far_too_lean(small_case):
    found = check(small_case, inlet=(1e5, 0.03e5)).fuel
    assert 1e-7 < found.inlet_phi[1] / 0.55 < 1e-4
    assert found.drop == pytest.approx(0.0438, rel=0.02)
