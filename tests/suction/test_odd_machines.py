"""Odd machines and odd records get through check, evidence, panels and figures without a crash."""

from collections.abc import Callable
from dataclasses import replace

import numpy as np
import pytest

from rca.base.source import Reading
from rca.case.model import Case
from rca.case.series import AlignedRecord
from rca.evidence.from_suction import from_suction
from rca.evidence.item import EvidenceItem, NotAssessed
from rca.figures.panels_suction import panels_suction
from rca.figures.suction import figures_suction
from rca.suction.check import SuctionCheck, check_suction
from tests.suction.synthetic import SCENARIOS, Truth, record, series

SHORT = replace(SCENARIOS[1], step_s=1200.0, days=8)
Machine = tuple[Case, AlignedRecord | None]


def value(number: float, unit: str) -> Reading:
    return Reading(value=number, unit=unit)


def without(aligned: AlignedRecord, *names: str) -> AlignedRecord:
    return replace(aligned, series={k: v for k, v in aligned.series.items() if k not in names})


def put(aligned: AlignedRecord, name: str, values: np.ndarray) -> AlignedRecord:
    return replace(aligned, series=aligned.series | {name: series(name, values)})


def cut(aligned: AlignedRecord, part: slice) -> AlignedRecord:
    return replace(
        aligned,
        time_s=aligned.time_s[part],
        series={
            k: replace(v, mean=v.mean[part], low=v.low[part], high=v.high[part])
            for k, v in aligned.series.items()
        },
    )


def whole(case: Case, aligned: AlignedRecord | None) -> SuctionCheck:
    """Everything the stage does with a case; every figure a panel names is drawn."""
    check = check_suction(case, aligned, seed=1, samples=64)
    items = from_suction(case, check, aligned)
    assert all(isinstance(i, EvidenceItem | NotAssessed) for i in items)
    assert len({i.key for i in items}) == len(items)
    section = panels_suction(case, check)
    figures = figures_suction(case, check, aligned)
    assert {f.name for p in section.panels for f in p.figures} == set(figures)
    words = " ".join(p.answer + " ".join(p.paragraphs) for p in section.panels)
    assert "nan" not in words.split()
    assert "None" not in words
    return check


MACHINES: dict[str, Callable[[Case, AlignedRecord], Machine]] = {
    "no line described": lambda c, a: (replace(c, suction_line=()), a),
    "no line, no record": lambda c, _: (replace(c, suction_line=()), None),
    "flow recorded, no speed": lambda c, a: (
        c,
        put(without(a, "shaft speed"), "flow", a.series["shaft speed"].mean * 100e-6),
    ),
    "pump two metres above the oil": lambda c, a: (
        replace(c, reservoir=replace(c.reservoir, level_above_inlet=value(-2.0, "m"))),
        a,
    ),
    "no displacement": lambda c, a: (replace(c, pump=replace(c.pump, displacement=None)), a),
    "displacement zero": lambda c, a: (
        replace(c, pump=replace(c.pump, displacement=value(0.0, "m3"))),
        a,
    ),
    "no kind of pump, no limit": lambda c, a: (
        replace(c, pump=replace(c.pump, kind=None, inlet_pressure_min=None)),
        a,
    ),
    "oil at 330 degC": lambda c, a: (
        replace(c, fluid=replace(c.fluid, temperature=value(603.0, "K"))),
        a,
    ),
    "a day and a half only": lambda c, a: (c, cut(a, slice(0, 100))),
    "pressure stuck": lambda c, a: (
        c,
        put(a, "inlet pressure", np.full(a.time_s.size, 0.9e5)),
    ),
    "speed backward": lambda c, a: (c, put(a, "shaft speed", -a.series["shaft speed"].mean)),
    "head space never recorded": lambda c, a: (
        c,
        put(a, "headspace pressure", np.full(a.time_s.size, np.nan)),
    ),
}


@pytest.mark.parametrize("name", MACHINES)
def test_an_odd_machine_gets_its_page(small_case: Case, name: str) -> None:
    case, aligned = MACHINES[name](small_case, record(small_case, SHORT, seed=3))
    whole(case, aligned)


def test_a_line_that_gives_pressure_instead_of_taking_it_is_refused(small_case: Case) -> None:
    """A record that asks for a negative loss says the model, not the line, is wrong."""
    aligned = record(small_case, Truth("x", viscous=(-0.06, -0.06), step_s=1200.0, days=8), seed=3)
    check = whole(small_case, aligned)
    assert check.inverse is not None
    assert "viscous" in check.inverse.contradicted
    items = {i.key: i for i in from_suction(small_case, check, aligned)}
    assert isinstance(items["inlet.viscous"], NotAssessed)
    assert items["inlet.viscous"].kind == "lost"
