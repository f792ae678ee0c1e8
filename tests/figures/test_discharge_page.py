"""Figures and panels of the discharge side."""

from dataclasses import fields, replace

import numpy as np
import pytest

from rca.base.panel import Panel
from rca.base.source import Reading
from rca.discharge.check import check_discharge
from rca.discharge.model import DischargeCheck
from rca.figures.discharge import figures_discharge
from rca.figures.panels_discharge import panels_discharge
from rca.figures.style import svg_bytes


@pytest.fixture
def check(small_case):
    return check_discharge(
        small_case, (0.85e5, 0.03e5), 0.01, None, seed=1, samples=64,
        discharge_peak=Reading(value=300e5, unit="Pa"),
    )  # fmt: skip


def test_every_figure_named_in_a_panel_is_drawn(small_case, check):
    figures = figures_discharge(small_case, check)
    named = {f.name for p in panels_discharge(small_case, check).panels for f in p.figures}
    assert named == set(figures)
    for figure in figures.values():
        assert len(svg_bytes(figure)) > 5000


def test_figures_repeat_byte_for_byte(small_case, check):
    one, two = (
        {k: svg_bytes(f) for k, f in figures_discharge(small_case, check).items()}
        for _ in range(2)
    )
    assert one == two


def test_a_map_without_ignition_is_drawn_too(small_case, check):
    never = replace(check.map, critical=(np.inf,) * len(check.map.critical))
    assert figures_discharge(small_case, replace(check, map=never))


def test_panels_say_the_status_and_hold_final_words(small_case, check):
    panels = {p.key: p for p in panels_discharge(small_case, check).panels}
    assert panels["discharge.heat"].status == check.hot.value
    assert panels["discharge.ignition"].status == check.ignition.value
    assert panels["discharge.pressure"].status == "beyond"
    assert panels["discharge.heat"].card is not None
    for panel in panels.values():
        assert panel.question.endswith("?")
        assert "nan" not in panel.answer
        for table in panel.tables:
            assert all(len(row) == len(table.columns) for row in table.rows)


def test_the_page_says_what_was_not_looked_at(small_case):
    (panel,) = panels_discharge(small_case, DischargeCheck(missing=("discharge pressure",))).panels
    assert "discharge pressure" in panel.answer
    assert {f.name for f in fields(Panel)} >= {"answer", "status"}
    assert figures_discharge(small_case, DischargeCheck()) == {}
