"""Control charts, outliers and censored summaries against published numbers."""

import numpy as np
import pytest

from rca.base.errors import OutOfRangeError
from rca.stats.censored import (
    exceedance,
    kaplan_meier,
    lognormal_likelihood,
    regression_on_order,
)
from rca.stats.change_point import pettitt
from rca.stats.control import cusum, ewma, individuals
from rca.stats.outliers import apart_from_median, dixon_q, generalised_esd, grubbs

EWMA_DATA = [
    52, 47, 53, 49.3, 50.1, 47, 51, 50.1, 51.2, 50.5,
    49.6, 47.6, 49.9, 51.3, 47.8, 51.2, 52.6, 52.4, 53.6, 52.1,
]  # fmt: skip
CUSUM_DATA = [
    324.925, 324.675, 324.725, 324.350, 325.350, 325.225, 324.125, 324.525, 325.225, 324.600,
    324.625, 325.150, 328.325, 327.250, 327.825, 328.500, 326.675, 327.775, 326.875, 328.350,
]  # fmt: skip
ROSNER = [
    -0.25, 0.68, 0.94, 1.15, 1.20, 1.26, 1.26, 1.34, 1.38, 1.43, 1.49, 1.49, 1.55, 1.56, 1.58,
    1.65, 1.69, 1.70, 1.76, 1.77, 1.81, 1.91, 1.94, 1.96, 1.99, 2.06, 2.09, 2.10, 2.14, 2.15,
    2.23, 2.24, 2.26, 2.35, 2.37, 2.40, 2.47, 2.54, 2.62, 2.64, 2.90, 2.92, 2.92, 2.93, 3.21,
    3.26, 3.30, 3.59, 3.68, 4.30, 4.64, 5.34, 5.42, 6.01,
]  # fmt: skip
OAHU = [
    "1<",
    "1<",
    "1.7",
    "1<",
    "1<",
    "2<",
    "3.2",
    "2<",
    "2<",
    "2.8",
    "2<",
    "2<",
    "2<",
    "2<",
    "2<",
    "0.7",
    "0.9",
    "0.5",
    "0.5",
    "0.9<",
    "0.5",
    "0.7",
    "0.6",
    "1.5",
]
OAHU_VALUES = [float(v.strip("<")) for v in OAHU]
OAHU_BELOW = ["<" in v for v in OAHU]


@pytest.mark.outside_value(source="NIST/SEMATECH e-Handbook 6.3.2.4")
def test_ewma():
    found = ewma(EWMA_DATA, target=50.0, sd=2.0539)
    assert found.high[-1] == pytest.approx(52.58843, abs=1e-3)
    assert found.low[-1] == pytest.approx(47.41157, abs=1e-3)
    assert found.values[0] == pytest.approx(50.60, abs=5e-3)
    assert found.values[-1] == pytest.approx(51.99, abs=5e-3)
    assert found.signals == ()


@pytest.mark.outside_value(source="NIST/SEMATECH e-Handbook 6.3.2.3 (data from memory)")
def test_cusum():
    found = cusum(CUSUM_DATA, target=325.0, slack=0.3175, limit=4.1959)
    assert found.up[12] == pytest.approx(3.0075, abs=5e-3)
    assert found.up[13] == pytest.approx(4.940, abs=5e-3)
    assert found.up[19] == pytest.approx(19.035, abs=5e-3)
    assert max(found.down) == pytest.approx(0.715, abs=5e-3)
    assert found.signals[0] == 13


@pytest.mark.outside_value(source="3/d2 = 2.659, d2 = 1.128 for pairs (ASTM E2587); ten results")
def test_individuals():
    found = individuals(EWMA_DATA[10:])
    assert found.mean == pytest.approx(50.81)
    assert found.moving_range == pytest.approx(1.8778, abs=1e-4)
    assert found.low == pytest.approx(45.815, abs=2e-3)
    assert found.high == pytest.approx(55.805, abs=2e-3)


@pytest.mark.outside_value(source="NIST/SEMATECH e-Handbook 1.3.5.17.1")
def test_grubbs():
    data = [199.31, 199.53, 200.19, 200.82, 201.92, 201.95, 202.18, 245.57]
    found = grubbs(data)
    assert found.g == pytest.approx(2.46876, abs=1e-4)
    assert found.place == 7
    assert found.critical_one_sided == pytest.approx(2.03165, abs=1e-4)
    assert found.critical_two_sided == pytest.approx(2.12665, abs=1e-4)


@pytest.mark.outside_value(source="B. Rosner 1983; NIST/SEMATECH e-Handbook 1.3.5.17.3")
def test_generalised_esd_takes_the_largest_i():
    found = generalised_esd(ROSNER, 10)
    assert found.r[:4] == pytest.approx([3.1189, 2.9430, 3.1794, 2.810], abs=1e-3)
    assert found.critical[:4] == pytest.approx([3.1588, 3.1514, 3.1439, 3.136], abs=1e-3)
    assert sorted(ROSNER[k] for k in found.places) == [5.34, 5.42, 6.01]


@pytest.mark.outside_value(source="r10 by its definition, ASTM E178")
def test_dixon():
    data = [0.189, 0.167, 0.187, 0.183, 0.186, 0.182, 0.181, 0.184, 0.181, 0.177]
    assert dixon_q(data) == pytest.approx(0.45455, abs=1e-4)
    assert 0.412 < dixon_q(data) < 0.466  # Q90(10), Q95(10), from memory


@pytest.mark.outside_value(source="Oahu arsenic, Helsel 2005; published summaries")
def test_oahu_summaries():
    assert kaplan_meier(OAHU_VALUES, OAHU_BELOW).mean == pytest.approx(0.949, abs=1e-3)
    assert kaplan_meier(OAHU_VALUES, OAHU_BELOW).median == pytest.approx(0.70)
    ros = regression_on_order(OAHU_VALUES, OAHU_BELOW)
    assert (ros.mean, ros.sd, ros.median) == pytest.approx((0.972, 0.718, 0.70), abs=1e-3)
    fit = lognormal_likelihood(OAHU_VALUES, OAHU_BELOW)
    assert (fit.mean, fit.sd, fit.median) == pytest.approx((0.945, 0.656, 0.777), abs=1e-3)


@pytest.mark.outside_value(source="arithmetic of substitution on the Oahu data")
@pytest.mark.parametrize(("share", "mean"), [(0.0, 0.567), (0.5, 1.002), (1.0, 1.438)])
def test_substitution_would_decide_the_mean(share, mean):
    filled = [v * share if below else v for v, below in zip(OAHU_VALUES, OAHU_BELOW, strict=True)]
    assert float(np.mean(filled)) == pytest.approx(mean, abs=1e-3)


@pytest.mark.outside_value(source="Kaplan-Meier with no limits is the plain mean (identity)")
def test_no_limits_is_the_plain_mean():
    data = [3.0, 1.0, 2.0, 2.0, 7.0]
    assert kaplan_meier(data, [False] * 5).mean == pytest.approx(3.0)
    assert regression_on_order(data, [False] * 5).mean == pytest.approx(3.0)


@pytest.mark.outside_value(source="worked by hand after Helsel and Cohn 1988")
def test_exceedance_by_hand():
    # limit 5: numbers above 5: 2 of 4 results that can be placed -> 0.5
    assert exceedance([8, 9, 5, 3], [False, False, True, False]) == {5.0: pytest.approx(0.5)}


def test_apart_from_median():
    assert apart_from_median([1.0, 1.1, 0.9, 1.05, 0.95, 9.0]) == (5,)
    assert apart_from_median([2.0, 2.0, 2.0, 2.0, 5.0]) == ()


@pytest.mark.parametrize(
    "call",
    [
        lambda: grubbs([1, 1, 1]),
        lambda: generalised_esd([1, 2, 3, 4], 2),
        lambda: dixon_q([1, float("nan"), 2]),
        lambda: apart_from_median([1, 2]),
        lambda: individuals([1, 2]),
        lambda: ewma([1], target=0, sd=0),
        lambda: cusum([1], target=0, slack=-1, limit=1),
        lambda: pettitt([1, 2, 3]),
        lambda: kaplan_meier([1, 2], [True, True]),
        lambda: regression_on_order([0, 1, 2], [False] * 3),
        lambda: lognormal_likelihood([-1, 1], [False, False]),
    ],
    ids=lambda call: f"line {call.__code__.co_firstlineno}",
)
def test_refusals(call):
    with pytest.raises(OutOfRangeError):
        call()
