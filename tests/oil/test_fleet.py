"""Warning levels from a fleet."""

import pytest

from rca.base.errors import OutOfRangeError
from rca.oil.fleet import fleet_levels, sorted_share


@pytest.mark.outside_value(source="Hazen place (k - 1/2)/n: 95 % of 20 results is place 19.5")
def test_hazen_place():
    assert sorted_share([float(k) for k in range(1, 21)], 95.0) == pytest.approx(19.5)


def test_levels_need_enough_results(make_sample):
    few = [make_sample(k, Fe=k) for k in range(29)]
    assert fleet_levels(few) == ()
    (iron,) = fleet_levels([*few, make_sample(30, Fe=29)])
    assert iron.results == 30
    assert dict(iron.levels)[95.0] == pytest.approx(28.0)


def test_results_over_a_limit_leave_the_top_unknown(make_sample, make_result):
    samples = [make_sample(k, Fe=k, Cu=make_result("Cu", 100, ">")) for k in range(40)]
    assert [one.property for one in fleet_levels(samples)] == ["Fe"]


def test_nothing_to_sort_is_refused():
    with pytest.raises(OutOfRangeError):
        sorted_share([], 95.0)
