"""Trend tests, growth and rates against published data sets and exact identities."""

from math import exp

import numpy as np
import pytest

from rca.base.errors import OutOfRangeError
from rca.stats.event_rate import (
    base_rate,
    fewer_after,
    mean_cumulative,
    mean_time_lower,
    rate,
    share,
)
from rca.stats.event_trend import (
    exposure_for,
    growth,
    holm,
    laplace,
    military_handbook,
    none_expected,
    reverse_arrangements,
)

HANDBOOK = "2.6 16.5 16.5 17.0 21.4 29.1 33.3 56.5 63.1 70.6 73.0 77.7 93.9 95.5 98.1 101.1 132.0 142.2 147.7 149.0 167.2 190.7 193.0 198.7 251.9 282.5 286.1"
NIST = "5 40 43 175 389 712 747 795 1299 1478"
CROW = ".2 4.2 4.5 5.0 5.4 6.1 7.9 14.8 19.2 48.6 85.8 108.9 127.2 129.8 150.1 159.7 227.4 244.7 262.7 315.3 329.6 404.3 486.2"
SETS = {"handbook": (HANDBOOK, 300.0), "nist": (NIST, 1500.0), "crow": (CROW, 500.0)}


def ages(name: str) -> tuple[list[float], float]:
    text, end = SETS[name]
    return [float(x) for x in text.split()], end


@pytest.mark.outside_value(
    source="MIL-HDBK-189 (1981) App. C, data read in a public package's benchmark; printed "
    "estimates 0.716, 0.454, C2 0.091"
)
def test_the_handbooks_own_example() -> None:
    found = growth(*ages("handbook"))
    assert found.exponent == pytest.approx(0.716, abs=5e-4)
    assert found.exponent_unbiased == pytest.approx(0.690, abs=5e-4)
    assert found.scale == pytest.approx(0.454, abs=5e-4)
    assert found.interval == pytest.approx(15.5, abs=0.05)
    assert found.misfit == pytest.approx(0.091, abs=5e-4)
    assert found.misfit < found.misfit_critical


@pytest.mark.outside_value(
    source="NIST/SEMATECH e-Handbook 8.2.3.4, worked example of ten repair times"
)
def test_the_statistics_handbooks_example() -> None:
    found = growth(*ages("nist"))
    assert found.exponent_unbiased == pytest.approx(0.4835, abs=5e-5)
    t, end = ages("nist")
    x = military_handbook(t, end)
    assert x.statistic == pytest.approx(37.23, abs=5e-3)
    assert x.improving
    assert x.p / 2 == pytest.approx(1 - 0.989, abs=5e-4)
    r = reverse_arrangements(t)
    assert r.statistic == 33
    assert r.improving


@pytest.mark.outside_value(source="Crow's example in NASA TM-103511: interval 52.7 at 500")
def test_crows_example() -> None:
    found = growth(*ages("crow"))
    assert found.interval == pytest.approx(52.7, abs=0.05)
    assert found.exponent == pytest.approx(0.413, abs=5e-4)


@pytest.mark.outside_value(source="the formulas of both tests worked apart, to five digits")
@pytest.mark.parametrize(
    ("name", "u", "x"),
    [("handbook", -2.3180, 75.383), ("nist", -1.3269, 37.228), ("crow", -3.7595, 111.451)],
)
def test_statistics_of_three_data_sets(name: str, u: float, x: float) -> None:
    assert laplace(*ages(name)).statistic == pytest.approx(u, abs=5e-5)
    assert military_handbook(*ages(name)).statistic == pytest.approx(x, abs=5e-4)


@pytest.mark.outside_value(source="identity: equally spaced mid-interval events show no trend")
def test_even_events_show_no_trend() -> None:
    even = [k - 0.5 for k in range(1, 11)]
    assert laplace(even, 10.0).statistic == pytest.approx(0.0, abs=1e-12)
    assert laplace(even, 10.0).p == pytest.approx(1.0)


@pytest.mark.outside_value(source="simulation of a homogeneous Poisson process")
def test_p_values_are_uniform_without_a_trend() -> None:
    rng = np.random.default_rng(7)
    p = [military_handbook(rng.uniform(0, 1, 12), 1.0).p for _ in range(1500)]
    q = [military_handbook(np.cumsum(rng.exponential(1, 12))).p for _ in range(1500)]
    for found in (p, q):
        assert np.mean(np.array(found) < 0.1) == pytest.approx(0.1, abs=0.025)


@pytest.mark.outside_value(source="simulation of the power law, interval at 80 %")
@pytest.mark.parametrize("timed", [True, False])
def test_the_exponents_interval_covers(timed: bool) -> None:
    rng = np.random.default_rng(11)
    hit = 0
    for _ in range(600):
        if timed:
            t = rng.uniform(0, 1, 12) ** (1 / 0.6)
            found = growth(t, 1.0)
        else:
            t = np.cumsum(rng.exponential(1, 12)) ** (1 / 0.6)
            found = growth(t)
        hit += found.exponent_low <= 0.6 <= found.exponent_high
    assert hit / 600 == pytest.approx(0.8, abs=0.05)


@pytest.mark.outside_value(source="Poisson: exp(-m); three expected and none seen has 0.05")
def test_silence() -> None:
    assert none_expected(3.0) == pytest.approx(exp(-3))
    assert none_expected(3.0) == pytest.approx(0.05, abs=5e-4)
    assert exposure_for(0.05) == pytest.approx(3.0, abs=5e-3)
    assert exposure_for(0.01) == pytest.approx(4.605, abs=5e-4)


@pytest.mark.outside_value(source="chi-squared tables: 0.434, 0.257, 0.188 of T at 90 %")
@pytest.mark.parametrize(("r", "factor"), [(0, 0.434), (1, 0.257), (2, 0.188)])
def test_lower_bound_of_the_interval(r: int, factor: float) -> None:
    assert mean_time_lower(r, 1.0) == pytest.approx(factor, abs=5e-4)


@pytest.mark.outside_value(source="binomial: 0.5^6, 0.8^6, 6/32")
def test_two_rates() -> None:
    assert fewer_after(6, 12, 0, 12) == pytest.approx(0.5**6)
    assert fewer_after(6, 24, 0, 6) == pytest.approx(0.8**6)
    assert fewer_after(4, 1, 1, 1) == pytest.approx(6 / 32)


@pytest.mark.outside_value(source="exact Poisson table: 3 events, 90 %: 0.818 to 7.754; 0: 2.996")
def test_exact_rate() -> None:
    found = rate(3, 1.0)
    assert (found.low, found.high) == (
        pytest.approx(0.818, abs=5e-4),
        pytest.approx(7.754, abs=5e-4),
    )
    assert rate(0, 1.0).high == pytest.approx(2.996, abs=5e-4)


@pytest.mark.outside_value(source="identity: certain findings give Jeffreys' Beta posterior")
def test_a_base_rate_of_certain_findings_is_a_beta() -> None:
    found = base_rate([1, 1, 1, 0, 0, 0, 0, 0, 0, 0], [0.3] * 10)
    assert found.value == pytest.approx(3.5 / 11, abs=2e-3)
    jeffreys = share(3, 10)
    assert (found.low, found.high) == (
        pytest.approx(jeffreys.low, abs=2e-3),
        pytest.approx(jeffreys.high, abs=2e-3),
    )


@pytest.mark.outside_value(source="identity: a finding equal to its prior says nothing")
def test_findings_that_repeat_the_prior_teach_nothing() -> None:
    found = base_rate([0.3] * 40, [0.3] * 40)
    assert found.value == pytest.approx(0.5, abs=1e-3)
    assert found.high - found.low > 0.9


@pytest.mark.outside_value(source="worked by hand: 2 units, then 1 at risk")
def test_mean_cumulative_function() -> None:
    at, found = mean_cumulative([[1.0, 4.0], [2.0]], [5.0, 3.0])
    assert at.tolist() == [1.0, 2.0, 4.0]
    assert found.tolist() == pytest.approx([0.5, 1.0, 2.0])


@pytest.mark.outside_value(source="Holm 1979: 0.01, 0.04, 0.03 of three give 0.03, 0.06, 0.06")
def test_holm() -> None:
    assert holm([0.01, 0.04, 0.03]) == pytest.approx((0.03, 0.06, 0.06))


@pytest.mark.parametrize(
    ("t", "end"),
    [([], 1.0), ([0.0, 1.0], 2.0), ([1.0, 3.0], 2.0), ([float("nan"), 1.0], 2.0), ([1.0], 2.0)],
)
def test_what_gives_no_trend_is_named(t: list[float], end: float) -> None:
    with pytest.raises(OutOfRangeError):
        laplace(t, end)


def test_a_curve_through_four_points_is_refused() -> None:
    with pytest.raises(OutOfRangeError, match="at least 5"):
        growth([1.0, 2.0, 3.0, 4.0], 5.0)
