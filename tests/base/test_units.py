"""Quantities as people write them."""

import pytest
from hypothesis import given
from hypothesis import strategies as st

from rca.base.units import UnitError, parse_quantity, unit_scale

SP811 = "NIST Special Publication 811 (2008), appendix B.8"


@pytest.mark.outside_value(source=SP811)
@pytest.mark.parametrize(
    ("text", "dimension", "value"),
    [
        ("1 psi(a)", "pressure", 6894.757),
        ("1 inHg(a)", "pressure", 3386.389),
        ("1 bar(a)", "pressure", 1e5),
        ("1 gal/min", "flow", 6.309020e-5),
        ("1 cSt", "kinematic viscosity", 1e-6),
        ("1 in", "length", 0.0254),
        ("1 ft3", "volume", 2.831685e-2),
        ("212 degF", "temperature", 373.15),
    ],
)
def test_units_convert_as_the_guide_says(text: str, dimension: str, value: float) -> None:
    assert parse_quantity(text, dimension).value == pytest.approx(value, rel=2e-6)


def test_a_turn_is_a_plain_count() -> None:
    assert parse_quantity("1500 rpm", "speed").value == pytest.approx(25.0)
    assert parse_quantity("100 cm3/rev", "displacement").value == pytest.approx(100e-6)


def test_gauge_becomes_absolute_with_the_local_air() -> None:
    high = parse_quantity("0 bar(g)", "pressure", atmosphere=79495.0)
    assert high.value == pytest.approx(79495.0)
    assert high.gauge


def test_an_uncertainty_of_a_temperature_is_a_difference() -> None:
    assert parse_quantity("50 degC +/- 2 degC", "temperature").u == pytest.approx(2.0)


@pytest.mark.parametrize(
    ("text", "dimension", "words"),
    [
        ("210 bar", "pressure", "absolute.*gauge|(a).*(g)"),
        ("1.8", "length", "without a unit"),
        ("0.03 bar(g)", "pressure difference", r"without \(a\) or \(g\)"),
        ("5 kg", "length", "unit of length"),
        ("5 furlongz", "length", "unknown unit"),
        ("-300 degC", "temperature", "absolute zero"),
        ("-2 bar(g)", "pressure", "absolute pressure above zero"),
        ("nan m", "length", "a number with a unit"),
        ("1e999999 m; rm", "length", "number"),
        ("", "length", "number"),
    ],
)
def test_what_can_not_be_meant_is_refused(text: str, dimension: str, words: str) -> None:
    with pytest.raises(UnitError, match=words):
        parse_quantity(text, dimension)


@pytest.mark.property
@given(
    value=st.floats(0.01, 1e4),
    unit=st.sampled_from(["bar(a)", "psi(a)", "kPa(a)", "MPa(a)", "inHg(a)", "mbar(a)"]),
)
def test_reading_back_a_written_pressure_gives_it_again(value: float, unit: str) -> None:
    si = parse_quantity(f"{value!r} {unit}", "pressure").value
    scale = unit_scale(unit, "pressure")
    assert (si - scale.offset) / scale.factor == pytest.approx(value, rel=1e-12)
