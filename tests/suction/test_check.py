"""The suction check: its budget, its counterfactuals, its reading of a record."""

from dataclasses import replace

import numpy as np
import pytest

from rca.base.source import Source
from rca.case.model import Case
from rca.case.series import AlignedRecord, Series
from rca.evidence.from_suction import from_suction
from rca.evidence.item import EvidenceItem, Node, NotAssessed
from rca.suction.budget import Condition, pressure_budget
from rca.suction.check import check_suction, inlet_state


def record(pressure_bar: float, *, temperature: float = 50.0, n: int = 2000) -> AlignedRecord:
    rng = np.random.default_rng(1)
    source = Source(file="pressure/slow.csv", locator="column P")

    def series(quantity: str, values: np.ndarray) -> Series:
        return Series(
            quantity=quantity, unit="SI", mean=values, low=values, high=values, source=source
        )

    inlet = pressure_bar * 1e5 + rng.normal(0, 300, n)
    return AlignedRecord(
        time_s=1.77e9 + 10.0 * np.arange(n),
        bin_s=10.0,
        series={
            "inlet pressure": series("inlet pressure", inlet),
            "oil temperature": series("oil temperature", np.full(n, temperature + 273.15)),
            "shaft speed": series("shaft speed", np.full(n, 1480 / 60)),
        },
    )


def item(case: Case, aligned: AlignedRecord | None, key: str) -> EvidenceItem | NotAssessed:
    check = check_suction(case, aligned, seed=1, samples=256)
    return next(i for i in from_suction(case, check, aligned) if i.key == key)


def test_the_budget_adds_up(small_case: Case) -> None:
    b = pressure_budget(small_case, 2.4667e-3, 323.15)
    lost = sum(float(loss) for _, loss in b.parts)
    assert float(b.inlet) == pytest.approx(
        b.atmosphere + float(b.head) - float(b.breather) - lost - float(b.kinetic)
    )


def test_cold_oil_and_a_clogged_strainer_lower_the_inlet(small_case: Case) -> None:
    clean = float(pressure_budget(small_case, 2.4667e-3, 323.15).inlet)
    cold = float(pressure_budget(small_case, 2.4667e-3, 278.15).inlet)
    clogged = float(
        pressure_budget(small_case, 2.4667e-3, 323.15, Condition(strainer_open=0.3)).inlet
    )
    assert cold < clean - 5e3
    assert clogged < clean - 5e3


def test_the_counterfactual_mends_the_inlet(small_case: Case) -> None:
    clogged = inlet_state(
        small_case, condition=Condition(strainer_open=0.25), temperature=323.15, seed=1
    )
    clean = inlet_state(small_case, condition=Condition(), temperature=323.15, seed=1)
    assert clogged is not None
    assert clean is not None
    assert clean.pressure.mean > clogged.pressure.mean
    assert clean.released.p50 < clogged.released.p50


def test_the_same_seed_gives_the_same_answer(small_case: Case) -> None:
    assert check_suction(small_case, None, seed=3) == check_suction(small_case, None, seed=3)


def test_a_case_without_a_line_says_what_is_missing(small_case: Case) -> None:
    check = check_suction(replace(small_case, suction_line=()), None, seed=1)
    assert check.normal is None
    assert "suction_line" in check.missing


def test_a_low_record_bears_on_low(small_case: Case) -> None:
    found = item(small_case, record(0.70), "inlet.measured")
    assert isinstance(found, EvidenceItem)
    assert found.likelihood["low"] > 10 * found.likelihood["healthy"]


def test_a_healthy_record_bears_against_low(small_case: Case) -> None:
    found = item(small_case, record(0.95), "inlet.measured")
    assert isinstance(found, EvidenceItem)
    assert found.absent
    assert found.likelihood["healthy"] > 10 * found.likelihood["low"]


def test_a_record_near_the_limit_hardly_bears(small_case: Case) -> None:
    found = item(small_case, record(0.80), "inlet.measured")
    assert isinstance(found, EvidenceItem)
    assert 0.3 < found.likelihood["low"] / found.likelihood["healthy"] < 3.0


def test_without_a_record_the_measured_inlet_is_not_assessed(small_case: Case) -> None:
    found = item(small_case, None, "inlet.measured")
    assert isinstance(found, NotAssessed)
    assert found.node is Node.INLET_PRESSURE


def test_a_shortfall_speaks_of_a_restriction(small_case: Case) -> None:
    low = item(small_case, record(0.70), "inlet.shortfall")
    fine = item(small_case, record(0.95), "inlet.shortfall")
    assert isinstance(low, EvidenceItem)
    assert isinstance(fine, EvidenceItem)
    assert low.likelihood["yes"] > low.likelihood["no"]
    assert fine.likelihood["yes"] < fine.likelihood["no"]
