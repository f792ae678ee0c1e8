"""Trend tests and slopes against published series."""

import numpy as np
import pytest
from scipy.stats import kendalltau, theilslopes

from rca.base.errors import OutOfRangeError
from rca.stats.change_point import pettitt
from rca.stats.mann_kendall import mann_kendall, upper_tail
from rca.stats.theil_sen import censored_slope, theil_sen

NILE = (
    "1120 1160 963 1210 1160 1160 813 1230 1370 1140 995 935 1110 994 1020 960 1180 799 958 1140 "
    "1100 1210 1150 1250 1260 1220 1030 1100 774 840 874 694 940 833 701 916 692 1020 1050 969 "
    "831 726 456 824 702 1120 1100 832 764 821 768 845 864 862 698 845 744 796 1040 759 781 865 "
    "845 944 984 897 822 1010 771 676 649 846 812 742 801 1040 860 874 848 890 744 749 838 1050 "
    "918 986 797 923 975 815 1020 906 901 1170 912 746 919 718 714 740"
)
NILE_FLOW = [float(v) for v in NILE.split()]


@pytest.mark.outside_value(source="EPA QA/G-9S, sec. 4.3.4 example with ties, 11 points")
def test_epa_series_with_ties():
    found = mann_kendall([10, 10, 10, 5, 10, 20, 18, 17, 15, 24, 15])
    assert found.s == 22
    assert found.variance == pytest.approx(155.3333, abs=1e-4)
    assert found.z == pytest.approx(1.68495, abs=1e-4)


@pytest.mark.outside_value(source="EPA QA/G-9S five-point example (from memory); 14/120 exactly")
def test_epa_five_points_exact():
    found = mann_kendall([5, 6, 11, 8, 10])
    assert found.s == 6
    assert found.exact
    assert found.p_two_sided / 2 == pytest.approx(14 / 120, abs=1e-9)


@pytest.mark.outside_value(source="R. O. Gilbert 1987, table A18, probabilities of S")
@pytest.mark.parametrize(
    ("n", "s", "p"),
    [
        (4, 6, 0.042),
        (5, 8, 0.042),
        (6, 11, 0.028),
        (7, 13, 0.035),
        (8, 16, 0.031),
        (9, 18, 0.038),
        (10, 21, 0.036),
    ],
)
def test_exact_tail_table(n, s, p):
    assert upper_tail(n, s) == pytest.approx(p, abs=5.1e-4)


@pytest.mark.outside_value(source="exact enumeration of all orders")
def test_exact_tail_counts():
    assert upper_tail(4, 6) == pytest.approx(1 / 24)
    assert upper_tail(8, 16) == pytest.approx(0.03051, abs=1e-5)
    assert upper_tail(10, 21) == pytest.approx(0.03628, abs=1e-5)


def test_four_points_can_never_show_a_trend_at_five_percent():
    assert mann_kendall([1, 2, 3, 4]).p_two_sided == pytest.approx(2 / 24)


@pytest.mark.outside_value(source="P. K. Sen 1968, worked example; also in scipy's own tests")
def test_sen_1968():
    t, x = [1, 2, 3, 4, 10, 12, 18], [9, 15, 19, 20, 45, 55, 78]
    found = theil_sen(t, x, level=0.93)
    assert found.slope == pytest.approx(4.0, abs=1e-9)
    assert found.low == pytest.approx(26 / 7, abs=1e-4)
    assert found.high == pytest.approx(35 / 8, abs=1e-4)
    on_rows = theil_sen(range(7), x)
    assert on_rows.slope == pytest.approx(10.0)  # a slope per row is another thing


@pytest.mark.outside_value(source="scipy.stats.theilslopes")
@pytest.mark.parametrize("seed", range(5))
def test_slope_as_scipy(seed):
    rng = np.random.default_rng(seed)
    t, x = np.sort(rng.choice(500, 15, replace=False)).astype(float), rng.normal(size=15)
    slope, _, low, high = theilslopes(x, t, alpha=0.95)
    found = theil_sen(t, x)
    assert (found.slope, found.low, found.high) == pytest.approx((slope, low, high))


@pytest.mark.outside_value(source="Cobb 1978, annual Nile flow 1871-1970 (public domain)")
def test_nile_mann_kendall():
    found = mann_kendall(NILE_FLOW)
    assert found.s == -1387
    assert found.z == pytest.approx(-4.12807, abs=1e-4)
    assert theil_sen(range(100), NILE_FLOW).slope == pytest.approx(-2.6, abs=1e-9)


@pytest.mark.outside_value(
    source="Cobb 1978 dates the change near 1898; Pettitt 1979, eq. for K and p"
)
def test_nile_change_point():
    found = pettitt(NILE_FLOW)
    assert found.k == 1617
    assert 1871 + found.last_before == 1898
    assert found.p == pytest.approx(3.59e-7, abs=1e-9)
    assert found.mean_before == pytest.approx(1097.75)
    assert found.mean_after == pytest.approx(849.97, abs=5e-3)


@pytest.mark.outside_value(source="Helsel's summer dissolved iron 1977-85; exact permutation")
def test_censored_iron():
    values, ops = [20, 10, 10, 10, 10, 7, 3, 3, 3], ["=", "<", "<", "<", "<", "=", "=", "<", "<"]
    found = mann_kendall(values, ops=ops)
    assert found.s == -13
    assert found.p_two_sided == pytest.approx(0.0185, abs=1e-3)
    assert found.variance == pytest.approx(34.33, abs=0.01)
    assert found.z == pytest.approx(-2.048, abs=1e-3)


def test_a_changed_reporting_limit_is_no_fall():
    found = mann_kendall([5, 5, 5, 1, 1, 1], ops=["<"] * 6)
    assert found.s == 0
    assert found.p_two_sided == 1.0


def test_limits_are_ordered_only_where_they_must_be():
    assert mann_kendall([1, 10, 10], ops=["<", "=", "="]).s == 2  # <1 -> 10 rises
    assert mann_kendall([1, 0.5, 0.5], ops=["<", "=", "="]).s == 0  # <1 -> 0.5 is a tie
    assert mann_kendall([7.5, 8, 8], ops=["=", ">", ">"]).s == 2  # over 8, twice: a tie


@pytest.mark.outside_value(source="Akritas et al. 1995: without limits it is the plain slope")
def test_censored_slope_without_limits():
    t, x = [1, 2, 3, 4, 10, 12, 18], [9, 15, 19, 20, 45, 55, 78]
    found = censored_slope(t, x, ["="] * 7, level=0.93)
    assert found.slope == pytest.approx(4.0, abs=1e-6)


@pytest.mark.outside_value(source="worked by hand: a line y = t/100 with low points cut at 2")
def test_censored_slope_on_a_known_line():
    t = [0, 100, 200, 300, 400, 500, 600, 700]
    x = [max(v / 100, 2.0) for v in t]
    ops = ["<" if v / 100 < 2 else "=" for v in t]
    assert censored_slope(t, x, ops).slope == pytest.approx(0.01, rel=0.12)


@pytest.mark.outside_value(source="scipy.stats.kendalltau: S = tau_b times its denominator")
def test_large_series_by_sorting_equals_pair_count():
    rng = np.random.default_rng(3)
    x = np.round(rng.normal(size=700), 1)
    tau = kendalltau(np.arange(700), x).statistic
    _, counts = np.unique(x, return_counts=True)
    pairs = 700 * 699 / 2
    ties = (counts * (counts - 1) / 2).sum()
    assert mann_kendall(x).s == round(tau * np.sqrt(pairs * (pairs - ties)))


def test_groups_compare_only_inside():
    # the second laboratory reads 10 higher: one line through both would rise steeply
    x = [1.0, 1.1, 0.9, 1.0, 11.0, 11.1, 10.9, 11.0]
    groups = ["a"] * 4 + ["b"] * 4
    assert mann_kendall(x).s > 10
    split = mann_kendall(x, groups=groups)
    assert abs(split.s) <= 2
    slope = theil_sen(range(8), x, groups=groups).slope
    assert abs(slope) < 0.11


@pytest.mark.outside_value(source="exact identity: independent sums convolve")
def test_groups_of_three_rising_exactly():
    found = mann_kendall([1, 2, 3, 1, 2, 3], groups=[0, 0, 0, 1, 1, 1])
    assert found.p_two_sided == pytest.approx(2 / 36)


@pytest.mark.outside_value(
    source="one wild value among eight; ordinary least squares 10.25e-5 per h"
)
def test_one_wild_value():
    hours = [0, 250, 480, 1010, 1490, 2020, 2500, 3550]
    acid = [0.20, 0.21, 0.21, 0.24, 0.26, 0.28, 0.90, 0.34]
    assert theil_sen(hours, acid).slope == pytest.approx(3.98e-5, abs=1e-7)
    assert mann_kendall(acid).s == 25
    assert np.polyfit(hours, acid, 1)[0] == pytest.approx(10.25e-5, abs=1e-7)


@pytest.mark.parametrize(
    "call",
    [
        lambda: mann_kendall([1, 2]),
        lambda: mann_kendall([1, 2, float("nan")]),
        lambda: mann_kendall([1, 2, 3], ops=["=", "=", "?"]),
        lambda: mann_kendall([1, 2, 3], groups=[1]),
        lambda: theil_sen([1, 1], [2, 3]),
        lambda: theil_sen([1, 2], [2, float("inf")]),
        lambda: censored_slope([1, 2, 3], [1, 1, 1], ["<", "<", "<"]),
        lambda: upper_tail(1, 0),
    ],
    ids=lambda call: f"line {call.__code__.co_firstlineno}",
)
def test_refusals(call):
    with pytest.raises(OutOfRangeError):
        call()
