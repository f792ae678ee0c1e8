"""Pulsation of the pump's own flow, air along the path, cold limit."""

import numpy as np
import pytest

from rca.base.errors import OutOfRangeError
from rca.case.model import Case
from rca.physics.dissolved_air import released_ratio
from rca.physics.flow_pulsation import (
    MOST_LIQUIDS,
    acceleration_head,
    kinematic_unevenness,
    rigid_column_dip,
    steepest_flow_change,
)
from rca.physics.viscosity import kinematic_viscosity
from rca.suction.budget import pressure_budget
from rca.suction.path import air_along_path
from rca.suction.tornado import (
    coldest_as_found,
    coldest_within_limit,
    margin_swings,
)


@pytest.mark.outside_value(
    source="Hydraulic Institute form of the acceleration head, L 2 m, V 0.85 m/s, 1500 rpm, K 1.5, "
    "triplex: 11.44 m; nonuplex 3.81 m (coefficients from memory)"
)
@pytest.mark.parametrize(("plungers", "head"), [(3, 11.44), (9, 3.81)])
def test_acceleration_head(plungers: int, head: float) -> None:
    found = acceleration_head(2.0, 0.85, 25.0, plungers, MOST_LIQUIDS)
    assert found == pytest.approx(head, rel=2e-3)


@pytest.mark.outside_value(
    source="unevenness of axial piston pumps by number of pistons, fluid-power textbooks (from "
    "memory): 5 4.98 %, 6 14.0 %, 7 2.53 %, 8 7.8 %, 9 1.53 %"
)
@pytest.mark.parametrize(
    ("pistons", "percent"), [(5, 4.98), (6, 14.0), (7, 2.53), (8, 7.8), (9, 1.53)]
)
def test_unevenness_of_the_ideal_flow(pistons: int, percent: float) -> None:
    assert 100 * kinematic_unevenness(pistons) == pytest.approx(percent, rel=0.01)


@pytest.mark.outside_value(source="sum of half sines of the pistons, differentiated numerically")
@pytest.mark.parametrize("pistons", [5, 6, 7, 9, 10])
def test_steepest_change_is_that_of_the_sum_of_strokes(pistons: int) -> None:
    speed, flow = 25.0, 2.5e-3
    phase = np.linspace(0.0, 2 * np.pi, 400_001)
    offsets = 2 * np.pi * np.arange(pistons) / pistons
    total = np.maximum(np.sin(phase[:, None] + offsets), 0.0).sum(axis=1)
    total *= flow / total[:-1].mean()
    slope = np.abs(np.diff(total)) / (phase[1] / (2 * np.pi * speed))
    assert steepest_flow_change(flow, speed, pistons) == pytest.approx(slope.max(), rel=2e-3)


def test_pulsation_refuses_too_few_pistons() -> None:
    for call in (
        lambda: kinematic_unevenness(2),
        lambda: steepest_flow_change(1e-3, 25.0, 1),
        lambda: acceleration_head(1.0, 1.0, 25.0, 4),
    ):
        with pytest.raises(OutOfRangeError):
            call()


@pytest.mark.outside_value(source="Newton's second law, by hand: 870 kg/m3 x 1000 1/m x 0.1 m3/s2")
def test_rigid_column() -> None:
    flow = 0.1 * 9 / (np.pi**2 * 25.0)
    assert rigid_column_dip(870.0, 1000.0, flow, 25.0, 9) == pytest.approx(87_000.0)


def test_air_along_the_path_grows_towards_the_pump_and_stays_below_equilibrium(
    small_case: Case,
) -> None:
    path = air_along_path(small_case, seed=1, viscous_excess=0.25e5, state="as found")
    assert path is not None
    middle = [s.released.p50 for s in path.stations]
    assert middle == sorted(middle)
    for station in path.stations:
        assert station.released.p50 <= station.equilibrium
        assert station.released.p05 <= station.released.p95
    end = path.stations[-1]
    budget = pressure_budget(small_case, 100e-6 * 1480 / 60, 323.15)
    assert end.pressure == pytest.approx(float(budget.inlet) - 0.25e5, abs=50.0)
    equilibrium = released_ratio(
        end.pressure, bunsen=0.09, temperature=323.15, saturation=budget.atmosphere
    )
    assert end.equilibrium == pytest.approx(float(equilibrium), rel=0.1)


def test_the_cold_limit_is_where_the_line_just_holds(small_case: Case) -> None:
    t = coldest_within_limit(small_case)
    assert t is not None
    assert float(pressure_budget(small_case, 100e-6 * 1480 / 60, t).inlet) == pytest.approx(
        0.80e5, abs=60.0
    )
    found = coldest_as_found(small_case, inlet=0.9e5, viscous=0.04e5, temperature=323.15)
    assert found is not None
    ratio = float(
        kinematic_viscosity(found, 46.1e-6, 6.8e-6) / kinematic_viscosity(323.15, 46.1e-6, 6.8e-6)
    )
    assert 0.9e5 + 0.04e5 - 0.04e5 * ratio == pytest.approx(0.80e5, abs=60.0)


def test_swings_name_every_input_and_weather_moves_the_inlet_one_to_one(small_case: Case) -> None:
    swings = {s.name: s for s in margin_swings(small_case, 323.15, seed=1)}
    assert len(swings) == 5
    weather = swings["weather"]
    assert weather.high == pytest.approx(-weather.low, rel=0.02)
    assert weather.high == pytest.approx(1.645 * 0.01 * 97304.0, rel=0.03)
    assert swings["rated loss of the strainer"].high < 0
