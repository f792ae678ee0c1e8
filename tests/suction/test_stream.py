"""A long record block by block gives what it gives whole."""

import numpy as np
import pytest

from rca.base.source import Source
from rca.case.model import Case
from rca.suction.budget import pressure_budget
from rca.suction.inverse import estimate_resistances
from rca.suction.stream import Block, LineTable, evaluate_blocks
from tests.suction.synthetic import SCENARIOS, record

SOURCE = Source(file="made", locator="test")


def test_the_table_stays_close_to_the_budget(small_case: Case) -> None:
    rng = np.random.default_rng(1)
    q = rng.uniform(0.05, 1.0, 4000) * 2.4667e-3
    t = rng.uniform(253.0, 373.0, 4000)
    table = LineTable(small_case, 1.5 * 2.4667e-3, 243.15, 383.15)
    error = np.abs(table(q, t) - pressure_budget(small_case, q, t).inlet)
    assert np.quantile(error, 0.99) < 100.0
    assert error.max() < 250.0  # where the flow turns from laminar to turbulent


def test_outside_the_table_there_is_no_number(small_case: Case) -> None:
    table = LineTable(small_case, 3e-3, 273.15, 373.15)
    out = table(np.array([1e-3, 9e-3, -1e-3, np.nan]), np.array([300.0, 300.0, 300.0, 300.0]))
    assert np.isfinite(out).tolist() == [True, False, False, False]


@pytest.mark.parametrize("size", [997, 5000])
def test_blocks_of_any_size_give_the_same(small_case: Case, size: int) -> None:
    aligned = record(small_case, SCENARIOS[1], seed=3)
    columns = [
        aligned.series[q].mean for q in ("inlet pressure", "shaft speed", "oil temperature")
    ]
    columns[0][100:110] = np.nan

    def blocks(length: int):
        for k in range(0, aligned.time_s.size, length):
            part = slice(k, k + length)
            p, n, t = (c[part] for c in columns)
            yield Block(time=aligned.time_s[part], pressure=p, speed=n, temperature=t)

    span = {"start": float(aligned.time_s[0]), "end": float(aligned.time_s[-1]), "source": SOURCE}
    stats, pooled = evaluate_blocks(small_case, blocks(size), **span)
    whole, _ = evaluate_blocks(small_case, blocks(10**9), **span)
    assert stats.running == whole.running
    assert stats.outside == whole.outside
    assert stats.below_limit == whole.below_limit
    assert stats.rms == pytest.approx(whole.rms, rel=1e-12)
    run = aligned.series["shaft speed"].mean > 5.0
    clean = pressure_budget(small_case, columns[1][run] * 100e-6, columns[2][run]).inlet
    direct = columns[0][run] - clean
    direct = direct[np.isfinite(direct)]
    assert stats.p50 == pytest.approx(np.median(direct), abs=150.0)
    assert stats.mean == pytest.approx(direct.mean(), abs=20.0)
    found = estimate_resistances(small_case, pooled, seed=1)
    assert not isinstance(found, str)
    assert found[0].viscous.p50[-1] / 1e5 == pytest.approx(0.26, abs=0.02)


def test_times_that_run_backward_are_refused(small_case: Case) -> None:
    one = np.ones(3)
    block = Block(time=np.array([0.0, 50.0, 2.0]), pressure=one, speed=one, temperature=300 * one)
    with pytest.raises(ValueError, match="rising"):
        evaluate_blocks(small_case, [block], start=0.0, end=100.0, source=SOURCE)
