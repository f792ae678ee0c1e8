"""A thermometer behind the oil: found where the oil warms up, and not invented where it does not."""

from dataclasses import replace

import numpy as np
import pytest

from rca.case.model import Case
from rca.case.series import AlignedRecord
from rca.suction.inverse import estimate_resistances
from rca.suction.thermal_lag import with_lag
from tests.suction.synthetic import SCENARIOS, record, series

WARMING = replace(SCENARIOS[1], step_s=600.0, cold=15.0)


def behind(aligned: AlignedRecord, bins: int) -> AlignedRecord:
    t = aligned.series["oil temperature"].mean
    late = np.concatenate([np.full(bins, t[0]), t[:-bins]])
    return replace(
        aligned, series=aligned.series | {"oil temperature": series("oil temperature", late)}
    )


def test_a_lag_of_half_an_hour_is_found_and_mended(small_case: Case) -> None:
    found = estimate_resistances(
        small_case, behind(record(small_case, WARMING, seed=5), 3), seed=1
    )
    assert not isinstance(found, str)
    inverse = found[0]
    assert inverse.thermometer_lag == pytest.approx(1800.0)
    assert inverse.viscous.p50[-1] / 1e5 == pytest.approx(0.26, abs=0.015)
    assert any("30 min later" in remark for remark in inverse.remarks)


@pytest.mark.parametrize("constant", [False, True])
def test_no_lag_is_invented(small_case: Case, constant: bool) -> None:
    truth = replace(WARMING, one_temperature=constant)
    found = estimate_resistances(small_case, record(small_case, truth, seed=6), seed=1)
    assert not isinstance(found, str)
    assert found[0].thermometer_lag == 0.0


def test_the_shift_leaves_its_edge_open(small_case: Case) -> None:
    aligned = record(small_case, WARMING, seed=5)
    t = aligned.series["oil temperature"].mean
    later = with_lag(aligned, 1200.0).series["oil temperature"].mean
    assert np.array_equal(later[:-2], t[2:])
    assert np.isnan(later[-2:]).all()
    assert with_lag(aligned, 10.0) is aligned
