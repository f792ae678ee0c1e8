"""The judgement of a whole oil history, and what it says as evidence and on the page."""

import json
from dataclasses import replace
from datetime import date

import pytest
from hypothesis import given
from hypothesis import strategies as st

from rca.archive.codec import dumps, from_plain, to_plain
from rca.base.source import Source
from rca.case.model import HistoryEvent
from rca.case.oil import UnreadCell
from rca.case.vocabulary import FluidClass
from rca.evidence.from_oil import change_likelihood, from_oil
from rca.evidence.item import EvidenceItem, Node, NotAssessed
from rca.figures.oil import figures_oil
from rca.figures.panels_oil import panels_oil
from rca.figures.style import svg_bytes
from rca.oil.check import OilCheck, check_oil

NODES = {
    Node.OIL_DARK_FAST,
    Node.OIL_DARK_SLOW,
    Node.SOOT,
    Node.NITRATION,
    Node.OXIDATION_PRODUCTS,
    Node.VISCOSITY_DOWN,
    Node.VISCOSITY_UP,
    Node.FLASH_DOWN,
    Node.ANTIOXIDANT_LOSS,
    Node.VARNISH_PATCH,
    Node.DIRT,
    Node.WEAR_METALS,
    Node.COARSE_IRON,
    Node.WATER,
    Node.AIR_RELEASE_SLOW,
    Node.WRONG_FLUID,
    Node.LOW_CONDUCTIVITY,
    Node.CHLORINE,
}


def ratio(item):
    return item.likelihood["yes"] / item.likelihood["no"]


def items(case, check):
    return {i.node: i for i in from_oil(case, check) if i.key != "oil.dirt.counts"}


def test_no_report_is_not_assessed_everywhere(small_case):
    assert check_oil(small_case, ()) is None
    found = from_oil(small_case, None)
    assert {i.node for i in found} == NODES
    assert all(isinstance(i, NotAssessed) for i in found)


def test_every_node_is_spoken_of(oil_case, steady):
    assert set(items(oil_case, check_oil(oil_case, steady))) == NODES


def test_a_flat_oil_does_not_clear_anything(oil_case, steady):
    found = items(oil_case, check_oil(oil_case, steady))
    for node in (Node.SOOT, Node.NITRATION, Node.OXIDATION_PRODUCTS, Node.WEAR_METALS):
        assert found[node].absent
        assert 0.15 < ratio(found[node]) < 1.0
    assert ratio(found[Node.SOOT]) > 0.35  # infrared misses fine carbon
    assert isinstance(found[Node.FLASH_DOWN], NotAssessed)


def test_dark_oil_with_soot_and_flat_routine_values(
    oil_case, steady, make_sample, make_result, fresh
):
    last = make_sample(
        9,
        **fresh | {"soot": 4.0, "nitration": 7.0, "colour": make_result("colour", 8.0, ">", "D8")},
    )
    check = check_oil(oil_case, (*steady, last))
    found = items(oil_case, check)
    assert ratio(found[Node.SOOT]) > 5
    assert ratio(found[Node.NITRATION]) > 4
    assert ratio(found[Node.OIL_DARK_FAST]) > 8
    assert ratio(found[Node.OIL_DARK_SLOW]) < 1
    assert ratio(found[Node.OXIDATION_PRODUCTS]) < 1
    assert check.darkening.step_days == 60
    assert {i.common_cause for i in found.values() if isinstance(i, EvidenceItem)} == {
        "bottle 26-09"
    }


def test_gradual_darkening(oil_case, make_sample, fresh):
    samples = [make_sample(0, new=True, **fresh)]
    samples += [make_sample(k, **fresh | {"colour": 1.0 + 0.5 * k}) for k in range(1, 9)]
    found = items(oil_case, check_oil(oil_case, samples))
    assert ratio(found[Node.OIL_DARK_SLOW]) > 3
    assert ratio(found[Node.OIL_DARK_FAST]) < 1


def test_no_single_result_is_decisive(oil_case, make_sample, fresh):
    wild = {name: 50 * (number + 1) for name, number in fresh.items() if name != "colour"}
    samples = (make_sample(0, new=True, **fresh), make_sample(1, **wild))
    for item in from_oil(oil_case, check_oil(oil_case, samples)):
        if isinstance(item, EvidenceItem):
            assert 1 / 60 < ratio(item) < 60


@pytest.mark.outside_value(source="limits of the mixture: (1 - miss)/other and miss/(1 - other)")
def test_likelihood_is_bounded_by_its_shares():
    far = change_likelihood(30.0, "=", miss=0.4, other=0.05)
    assert far["yes"] / far["no"] == pytest.approx(0.6 / 0.05, rel=1e-6)
    low = change_likelihood(-3.0, "=", miss=0.4, other=0.05)
    assert 0.4 / 0.95 < low["yes"] / low["no"] < 0.45


@pytest.mark.property
@given(
    one=st.floats(-5, 60),
    more=st.floats(0, 20),
    miss=st.floats(0.05, 0.6),
    other=st.floats(0.01, 0.3),
)
def test_a_larger_change_never_weighs_less(one, more, miss, other):
    low = change_likelihood(one, "=", miss=miss, other=other)
    high = change_likelihood(one + more, "=", miss=miss, other=other)
    assert high["yes"] / high["no"] >= low["yes"] / low["no"] * (1 - 1e-9)
    assert all(0 < p < 1 for p in (*low.values(), *high.values()))


def test_statements_are_facts(oil_case, steady):
    for item in from_oil(oil_case, check_oil(oil_case, steady)):
        if isinstance(item, EvidenceItem):
            words = item.statement.casefold()
            assert not any(w in words for w in ("cavitation", "diesel", "likely", "because"))
            assert item.sources
            assert all(source.sha256 for source in item.sources)


def test_water_glycol_water_is_not_assessed(oil_case, steady):
    fluid = replace(oil_case.fluid, fluid_class=FluidClass.WATER_GLYCOL)
    case = replace(oil_case, fluid=fluid)
    assert isinstance(items(case, check_oil(case, steady))[Node.WATER], NotAssessed)


def test_wet_oil(oil_case, steady, make_sample, fresh):
    check = check_oil(oil_case, (*steady, make_sample(9, **fresh | {"water": 1500})))
    assert ratio(items(oil_case, check)[Node.WATER]) > 10
    assert check.judged["water"].beyond()


def test_dirt_needs_silicon_and_aluminium(oil_case, steady, make_sample, fresh):
    antifoam = check_oil(oil_case, (*steady, make_sample(9, **fresh | {"Si": 40})))
    dirt = check_oil(oil_case, (*steady, make_sample(9, **fresh | {"Si": 40, "Al": 20})))
    assert ratio(items(oil_case, antifoam)[Node.DIRT]) < 1
    assert ratio(items(oil_case, dirt)[Node.DIRT]) > 4


def test_an_old_sample_clears_less(oil_case, steady):
    early = replace(oil_case.header, occurred=oil_case.header.occurred.replace(year=2029))
    old = replace(oil_case, header=early)
    near = items(oil_case, check_oil(oil_case, steady))[Node.SOOT]
    far = items(old, check_oil(old, steady))[Node.SOOT]
    assert ratio(near) < ratio(far) < 1


def test_set_aside_samples_are_shown_and_not_judged(oil_case, steady, make_sample, fresh):
    wild = replace(make_sample(9, **fresh | {"Fe": 300}), excluded="taken from the drain")
    check = check_oil(oil_case, (*steady, wild))
    assert check.latest == "26-08"
    assert check.excluded == (("26-09", "taken from the drain"),)
    assert any(p.excluded and p.value == 300 for p in check.points)
    section = panels_oil(oil_case, check)
    shown = [row for p in section.panels for t in p.tables for row in t.rows]
    assert any("taken from the drain" in cell for row in shown for cell in row)


def test_fills_are_split_at_the_oil_change(oil_case, make_sample, fresh):
    change = HistoryEvent(
        when=date(2024, 8, 10),
        kind="work order",
        text="Oil changed, 630 L",
        source=Source(file="history.csv", locator="line 3"),
    )
    case = replace(oil_case, history=(*oil_case.history, change))
    iron = [2, 4, 6, 2, 4, 6, 8, 10]
    samples = [make_sample(k, **fresh | {"Fe": f}) for k, f in enumerate(iron, start=1)]
    check = check_oil(case, samples)
    assert check.fills == (date(2023, 12, 1), date(2024, 8, 10))
    assert check.judged["Fe"].points == 5
    assert check.judged["Fe"].trend.verdict == "rises"


def test_an_oil_change_only_talked_of_is_none(oil_case, steady):
    talk = HistoryEvent(
        when=date(2024, 8, 10),
        kind="note",
        text="Oil change postponed to next shutdown",
        source=Source(file="history.csv", locator="line 3"),
    )
    case = replace(oil_case, history=(*oil_case.history, talk))
    assert check_oil(case, steady).fills == (date(2023, 12, 1),)


def test_oil_hours_that_fall_back_show_a_change(oil_case, make_sample, fresh):
    hours = [500, 1000, 1500, 100, 600, 1100, 1600, 2100]
    samples = [
        replace(make_sample(k, **fresh), oil_hours=float(h)) for k, h in enumerate(hours, start=1)
    ]
    check = check_oil(oil_case, samples)
    assert samples[2].sampled < check.fills[-1] < samples[3].sampled
    assert check.judged["Fe"].points == 5
    assert any("oil hours fall" in e.known_from for e in check.events)


def test_an_hour_meter_set_back_is_said(oil_case, make_sample, fresh):
    hours = [9000, 9500, 9900, 120, 600, 1100]
    samples = [make_sample(k, hours=float(h), **fresh) for k, h in enumerate(hours, start=1)]
    check = check_oil(oil_case, samples)
    assert any(e.kind == "hour meter set back" for e in check.events)
    assert check.judged["Fe"].trend.axis == "days"


def test_sample_points_are_not_mixed(oil_case, steady, make_sample, fresh):
    drain = make_sample(9, point="case drain", **fresh | {"Fe": 90})
    check = check_oil(oil_case, (*steady, drain))
    assert check.point == "return line"
    assert check.other_points == ("case drain",)
    assert check.judged["Fe"].value == 1
    assert check.judged["Fe"].sample == "26-08"
    assert check.judged["soot"].sample == "26-09"  # the same in the whole oil


def test_machines_are_not_mixed(oil_case, steady, make_sample, fresh):
    ours = [replace(s, asset="" if s.new_oil else "HPU-3") for s in steady]
    other = [replace(make_sample(k, **fresh | {"Fe": 90}), asset="HPU-4") for k in range(9, 30)]
    case = replace(oil_case, header=replace(oil_case.header, asset="HPU-3 pump A"))
    check = check_oil(case, (*ours, *other))
    assert check.judged["Fe"].value == 1
    assert check.other_assets == ("HPU-4",)


def test_the_fill_that_failed_is_judged(oil_case, steady, make_sample, fresh):
    refill = HistoryEvent(
        when=date(2025, 5, 12),
        kind="oil change",
        text="after the failure",
        source=Source(file="history.csv", locator="line 9"),
    )
    case = replace(oil_case, history=(*oil_case.history, refill))
    bad = make_sample(8, **fresh | {"soot": 6.0})
    clean = make_sample(9, **fresh)
    check = check_oil(case, (*steady[:-1], bad, clean))
    assert clean.sampled > date(2025, 5, 12)
    assert check.latest == "26-08"
    assert check.judged["soot"].value == 6.0
    assert check.later == ("26-09",)


def test_without_new_oil_the_noise_floor_is_wider(oil_case, steady):
    check = check_oil(oil_case, steady[1:])
    assert check.reference == ""
    assert check.judged["colour"].new_from == "usual in new oil (no source)"
    assert check.judged["colour"].noise > 1.0
    assert check.judged["viscosity_40"].new_from == "case.toml, [fluid]"


def test_page_and_archive(oil_case, steady, make_sample, fresh):
    cell = UnreadCell(source=Source(file="oil/a.csv", locator="line 3"), text="<b>", reason="why")
    check = check_oil(oil_case, (*steady, make_sample(9, **fresh | {"Fe": 30})), unread=(cell,))
    section = panels_oil(oil_case, check)
    figures = figures_oil(oil_case, check)
    named = {f.name for p in section.panels for f in p.figures}
    assert named == set(figures)
    assert all(f.alt and f.caption for p in section.panels for f in p.figures)
    assert any("Iron" in p.answer for p in section.panels)
    for panel in section.panels:
        for table in panel.tables:
            assert all(len(row) == len(table.columns) for row in table.rows)
            assert not table.marks or len(table.marks) == len(table.rows)
    for figure in figures.values():
        assert svg_bytes(figure).startswith(b"<?xml")
    back = from_plain(OilCheck, json.loads(dumps(to_plain(check))))
    assert back == check


def test_one_sample_alone(oil_case, make_sample, fresh):
    check = check_oil(oil_case, (make_sample(1, **fresh),))
    assert check.judged["Fe"].trend.verdict == "too few results"
    assert panels_oil(oil_case, check).panels
    figures_oil(oil_case, check)
    assert isinstance(items(oil_case, check)[Node.NITRATION], NotAssessed)


def test_no_sample_says_so(small_case):
    (panel,) = panels_oil(small_case, None).panels
    assert panel.status == "not assessed"
    assert figures_oil(small_case, None) == {}


def test_new_oil_of_the_same_laboratory_is_compared_with(oil_case, steady, make_sample, fresh):
    other = replace(
        make_sample(0, new=True, **fresh | {"Zn": 700}), id="OTHER", laboratory="lab B"
    )
    dated = replace(other, sampled=date(2025, 4, 1))
    check = check_oil(oil_case, (*steady, dated))
    assert check.reference == "NEW"
    assert check.judged["Zn"].new == 400
