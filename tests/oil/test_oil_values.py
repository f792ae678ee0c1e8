"""Cleanliness codes, precision, limits, units and top-ups against published numbers."""

from dataclasses import replace
from datetime import date, timedelta

import pytest

from rca.base.errors import KnowledgeError, OutOfRangeError
from rca.base.source import Source
from rca.case.oil import OilSample, OilValue
from rca.oil.cleanliness import as4059, count_range, iso_4406, scale_number
from rca.oil.fills import OilEvent, Place
from rca.oil.limits import limits_for, merged, read_limits, shipped_limits
from rca.oil.precision import (
    critical_difference,
    glass_capillary_precision,
    noise_floor,
    precision,
    site_precision,
)
from rca.oil.trends import Row, trend_of

SOURCE = Source(file="oil/invented.csv", locator="line 2, column 1")
ISO_4406 = "ISO 4406 table of scale numbers (two agreeing secondary copies)"


def value(name, number, op="="):
    return OilValue(property=name, op=op, value=number, unit="", text=str(number), source=SOURCE)


def rows(name, numbers, *, hours=None, stretch=None, ops=None):
    out = []
    for k, number in enumerate(numbers):
        h = hours[k] if hours else 500.0 * k
        sample = OilSample(
            id=f"S{k}",
            sampled=date(2025, 1, 1) + timedelta(days=30 * k),
            point="tank",
            laboratory="lab",
            machine_hours=h,
            oil_hours=h,
            new_oil=False,
        )
        place = Place(fill=0, stretch=stretch[k] if stretch else 0, oil_hours=h)
        out.append(
            Row(sample=sample, value=value(name, number, ops[k] if ops else "="), place=place)
        )
    return out


@pytest.mark.outside_value(source=ISO_4406)
@pytest.mark.parametrize(
    ("per_ml", "code"),
    [
        ((2345, 567, 45), "18/16/13"),
        ((2500, 1300, 80), "18/17/13"),
        ((2500.1, 1300.1, 80.1), "19/18/14"),
        ((3e6, 3e6, 0.0), ">28/>28/0"),
    ],
)
def test_iso_4406_code(per_ml, code):
    assert iso_4406(per_ml) == code


@pytest.mark.outside_value(source=ISO_4406 + "; the table rounds where 0.01 x 2^n does not")
@pytest.mark.parametrize(
    ("per_ml", "number"),
    [(1305, 18), (1.29, 7), (2500, 18), (2500.1, 19), (5100, 20), (10100, 21), (0.01, 0)],
)
def test_scale_number_is_by_table(per_ml, number):
    assert scale_number(per_ml).number == number


@pytest.mark.outside_value(source="ISO 4406: fewer than 20 particles counted get the sign ≥")
def test_few_counts_are_marked():
    assert str(scale_number(1.0, raw_count=19)).startswith("≥")
    assert not str(scale_number(1.0, raw_count=20)).startswith("≥")


@pytest.mark.outside_value(source=ISO_4406)
def test_count_range():
    assert count_range(18) == (1300, 2500)
    assert count_range(0) == (0.0, 0.01)


@pytest.mark.outside_value(source="SAE AS4059 cumulative table (agreeing secondary copies)")
def test_as4059():
    assert as4059((234500, 56700, 4500, 300, 20, 1)) == ("9", "8", "7", "5", "4", "1")
    assert as4059((195, 76, 14, 3, 1, 0)) == ("000",) * 6
    assert as4059((3200001,)) == (">12",)


@pytest.mark.outside_value(source="ASTM D664 before 2017, used oils: r = 0.117 X, R = 0.44 X")
def test_acid_number_precision():
    found = precision("acid_number", 0.475)
    assert found.r == pytest.approx(0.0556, abs=5e-4)
    assert pytest.approx(0.209, abs=5e-4) == found.R


@pytest.mark.outside_value(source="ISO 3104:1994: r 0.26 % (formulated), R 0.65 % (base oils)")
def test_capillary_precision():
    found = glass_capillary_precision(46.0)
    assert found.r == pytest.approx(0.1196, abs=1e-3)
    assert pytest.approx(0.299, abs=1e-3) == found.R


@pytest.mark.outside_value(source="ASTM D3427: r = 0.5 sqrt(mean), R = 1.3 sqrt(mean)")
def test_air_release_precision():
    found = precision("air_release", 4.0)
    assert (found.r, found.R) == pytest.approx((1.0, 2.6))


@pytest.mark.outside_value(source="ASTM D2272, digest: r = 0.12 X, R = 0.22 X")
def test_pressure_vessel_precision():
    found = precision("oxidation_life", 300.0)
    assert (found.r, found.R) == pytest.approx((36.0, 66.0))


@pytest.mark.outside_value(source="ASTM D5185 constants (from memory), worked by hand")
@pytest.mark.parametrize(
    ("element", "level", "r", "R"),
    [
        ("Fe", 20, 1.43, 5.71),
        ("Fe", 50, 2.97, 11.9),
        ("Cu", 10, 0.98, 2.40),
        ("Si", 20, 2.83, 9.33),
    ],
)
def test_element_precision(element, level, r, R):
    found = precision(element, level)
    assert (found.r, found.R) == pytest.approx((r, R), rel=5e-3)


@pytest.mark.outside_value(source="ISO 5725-6 (from memory), acid numbers 0.40 and 0.55")
def test_critical_difference():
    found = precision("acid_number", 0.475)
    assert critical_difference(found.r, found.R, (1, 1)) == pytest.approx(0.209, abs=5e-4)
    assert critical_difference(found.r, found.R, (2, 2)) == pytest.approx(0.205, abs=5e-4)


def test_outside_a_methods_range():
    with pytest.raises(OutOfRangeError, match="60 to 1600"):
        precision("Zn", 20.0)
    widened = noise_floor("Zn", 20.0)
    assert pytest.approx(noise_floor("Zn", 60.0).R) == widened.R
    assert "below the method's range" in widened.note


@pytest.mark.outside_value(source="ASTM D6299: R' = 2.77 s; five pairs worked by hand")
def test_site_precision():
    pairs = [(1.0, 1.1)] * 5  # s = 0.1/sqrt 2 each
    assert site_precision(pairs) == pytest.approx(2.7718 * 0.1 / 2**0.5)
    assert site_precision(pairs[:4]) is None


def crossed(name, new, number, op="="):
    limits = limits_for(shipped_limits(), name, "mineral")
    return any(limit.crossed(value(name, number, op), new) for limit in limits)


@pytest.mark.outside_value(source="SH/T 0599-1994, limits for change of HM oil")
def test_drain_rule_flags_all_four():
    assert crossed("viscosity_40", 46.0, 46.0 * 1.151)
    assert crossed("acid_number", 1.0, 0.64)
    assert crossed("water", 50.0, 1100.0)
    assert crossed("colour", 1.0, 3.0)


@pytest.mark.outside_value(source="SH/T 0599-1994, limits for change of HM oil")
def test_drain_rule_flags_none():
    assert not crossed("viscosity_40", 46.0, 46.0 * 1.149)
    assert not crossed("acid_number", 1.0, 0.66)
    assert not crossed("water", 50.0, 1000.0)
    assert not crossed("colour", 1.0, 2.5)


def test_a_limit_of_detection_decides_only_where_it_can():
    (water,) = limits_for(shipped_limits(), "water", "mineral")
    assert water.crossed(value("water", 100, "<"), None) is False
    assert water.crossed(value("water", 2000, "<"), None) is None
    assert water.crossed(value("water", 1000, ">"), None) is True
    assert water.crossed(value("water", 900, ">"), None) is None
    rise = next(one for one in shipped_limits() if one.property == "colour")
    assert rise.crossed(value("colour", 5.0), None) is None  # no new oil to compare with


def test_mineral_limits_are_not_used_for_water_glycol():
    assert limits_for(shipped_limits(), "water", "water glycol") == ()


def test_every_shipped_limit_names_source_and_flag():
    flags = {"published", "published, single source", "secondary source", "from memory"}
    flags.add("common practice, no source")
    assert all(one.source and one.flag in flags for one in shipped_limits())


def test_a_site_overrules():
    text = (
        '[[limit]]\nproperty = "Fe"\ndirection = "above"\nvalue = 35\n'
        'source = "site standard"\nflag = "site"\n'
    )
    both = merged(shipped_limits(), read_limits(text, "oil/limits.toml"))
    (iron,) = limits_for(both, "Fe", "mineral")
    assert iron.value == 35.0
    assert iron.source == "site standard"


@pytest.mark.parametrize(
    ("line", "word"),
    [
        ('direction = "over"', "direction"),
        ('value = "3"', "number"),
        ("value = true", "number"),
        ('source = ""', "source"),
        ("colour = 3", "unknown keys"),
    ],
)
def test_broken_limits_are_refused(line, word):
    base = {
        "property": '"Fe"',
        "direction": '"above"',
        "value": "3",
        "source": '"s"',
        "flag": '"f"',
    }
    key, text = line.split(" = ")
    body = "\n".join(f"{k} = {v}" for k, v in (base | {key: text}).items())
    with pytest.raises(KnowledgeError, match=word):
        read_limits("[[limit]]\n" + body, "limits.toml")


@pytest.mark.outside_value(
    source="balance of a mixed tank, worked by hand: 400 L, 60 L at 1 mg/kg"
)
def test_top_up_is_added_back():
    iron = rows("Fe", [8.0, 10.0], hours=[500.0, 1000.0])
    event = OilEvent(
        when=iron[0].sample.sampled, kind="top-up", known_from="history", volume=0.060
    )
    five = [*iron, *rows("Fe", [10.0] * 5)[2:]]
    trend = trend_of("Fe", five, top_ups=[event], volume=0.400, new=1.0)
    assert trend.corrected
    # 8 -> 6.95 after the top-up, 10 at the end: true gain 3.05 in 500 h, 0.61 per 100 h
    from rca.oil.trends import _corrected

    corrected = _corrected("Fe", iron, [event], 0.400, 1.0)
    assert corrected[1] - corrected[0] == pytest.approx(3.05, abs=1e-9)
    assert (corrected[1] - corrected[0]) / 5.0 == pytest.approx(0.61, abs=1e-9)


def test_a_trend_inside_r_is_no_change():
    trend = trend_of("Zn", rows("Zn", [400, 401, 402, 403, 404, 405, 406]))
    assert trend.p < 0.01
    assert trend.verdict == "no change shown"


def test_a_trend_beyond_r_is_shown():
    trend = trend_of("Fe", rows("Fe", [2, 4, 6, 9, 11, 14]))
    assert trend.verdict == "rises"
    assert trend.exact
    assert trend.axis == "oil hours"


def test_a_laboratory_step_is_no_trend():
    numbers = [0.42, 0.44, 0.43, 0.45, 1.04, 1.06, 1.05, 1.07]
    one_line = trend_of("acid_number", rows("acid_number", numbers))
    split = trend_of("acid_number", rows("acid_number", numbers, stretch=[0] * 4 + [1] * 4))
    assert one_line.verdict == "rises"
    assert split.verdict == "no change shown"
    assert split.laboratory_step == pytest.approx(1.04 - 0.45 - split.change / 7, abs=1e-9)


def test_a_wild_value_is_flagged_and_kept():
    hours = [0, 250, 480, 1010, 1490, 2020, 2500, 3550]
    numbers = [0.20, 0.21, 0.21, 0.24, 0.26, 0.28, 0.90, 0.34]
    trend = trend_of("acid_number", rows("acid_number", numbers, hours=hours))
    assert trend.outliers == ("S6",)
    assert trend.points == 8
    assert trend.per_1000h == pytest.approx(0.0398, abs=1e-4)
    assert trend.per_1000h_without < trend.per_1000h


def test_four_results_are_too_few():
    assert trend_of("Fe", rows("Fe", [1, 10, 20, 30])).verdict == "too few results"


def test_all_results_under_the_limit():
    trend = trend_of("Al", rows("Al", [1, 1, 1, 5, 1], ops=["<"] * 5))
    assert trend.verdict == "not testable"


def test_hours_missing_in_one_sample_fall_back_to_days():
    series = rows("Fe", [2, 4, 6, 9, 11, 14])
    bare = replace(
        series[2],
        sample=replace(series[2].sample, machine_hours=None),
        place=replace(series[2].place, oil_hours=None),
    )
    assert trend_of("Fe", [*series[:2], bare, *series[3:]]).axis == "days"


@pytest.mark.outside_value(source="ASTM D4378 annex (from memory); solves dX/dt of a made-up tank")
def test_severity_of_turbine_practice():
    from rca.oil.severity import severity

    assert severity(make_up=10.0, years=5.0, left=75.0) == pytest.approx(6.354, abs=1e-3)


@pytest.mark.outside_value(source="mixed tank: C0 + gV/m = 21.33, 6.27 at 1000 h, worked by hand")
def test_mixed_tank():
    from rca.oil.severity import mixed_tank

    at = mixed_tank(1000.0, volume=400.0, make_up=0.12, generation=0.0061, new=1.0)
    assert at == pytest.approx(6.27, abs=5e-3)
    far = mixed_tank(1e6, volume=400.0, make_up=0.12, generation=0.0061, new=1.0)
    assert far == pytest.approx(21.33, abs=5e-3)


@pytest.mark.outside_value(source="ASTM D341, worked by hand from 46.0 at 40 and 6.8 at 100 °C")
@pytest.mark.parametrize(
    ("celsius", "expected"), [(20, 133.8), (50, 29.97), (60, 20.62), (80, 11.10)]
)
def test_viscosity_between_the_laboratorys_two(celsius, expected):
    from rca.physics.viscosity import kinematic_viscosity

    found = kinematic_viscosity(celsius + 273.15, 46.0e-6, 6.8e-6)
    assert float(found) * 1e6 == pytest.approx(expected, abs=0.1)


@pytest.mark.outside_value(source="1.96 sqrt 2, the 95 % limit of a difference over one sd")
def test_sd_of_one_result():
    assert precision("colour", 3.0).R / precision("colour", 3.0).sd == pytest.approx(
        2.7718, abs=1e-4
    )
