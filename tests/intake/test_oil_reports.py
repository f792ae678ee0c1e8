"""Laboratory reports as they arrive: each mess is read right, or refused with the reason."""

import csv
import io
import math
import random
from datetime import date, timedelta
from pathlib import Path

import openpyxl
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from rca.base.source import Reading, Source
from rca.case.model import Case, EvidenceFile, Excluded, Fluid, Header, OilReportFile
from rca.evidence.from_oil import from_oil
from rca.figures.panels_oil import panels_oil
from rca.intake.oil_cells import (
    decimal_mark,
    is_not_tested,
    parse_code,
    parse_result,
    plain_text,
)
from rca.intake.oil_layout import is_no_sample, layout_of
from rca.intake.oil_reports import read_oil_reports
from rca.intake.tables import read_table
from rca.oil.check import check_oil

HERE = Path(__file__).parent
MESSES = HERE / "oil_messes"
SOURCE = Source(file="case.toml", locator="oil_reports")


def read(name, *, folder=HERE, fluid=None, excluded=(), **how):
    file = name if folder is not HERE else f"oil_messes/{name}"
    report = OilReportFile(file=file, source=SOURCE, **how)
    case = Case(
        header=Header(id="T", title="t"),
        oil_reports=(report,),
        fluid=fluid or Fluid(),
        files=(EvidenceFile(file=file, size=1, sha256="ab" * 32, role="oil report"),),
        excluded=tuple(Excluded(file=file, where=w, reason=r) for w, r in excluded),
    )
    return read_oil_reports(folder, case)


def by_id(reading):
    return {sample.id: sample for sample in reading.samples}


def reasons(reading):
    return {cell.text: cell.reason for cell in reading.unread}


def test_01_decimal_comma():
    found = by_id(read("01-decimal-comma.csv"))
    assert found["26-01"].get("viscosity_40") == 46.2
    assert found["26-02"].get("acid_number") == 0.33
    assert found["26-01"].machine_hours == 1200


def test_02_thousands_or_decimals_is_refused():
    reading = read("02-ambiguous-thousands.csv")
    assert "thousands or decimals" in reasons(reading)["1.234"]
    assert by_id(reading)["26-02"].get("Zn") == 1234.5


def test_02_the_case_may_settle_it():
    stated = read("02-ambiguous-thousands.csv", decimal=".")
    assert by_id(stated)["26-01"].get("ferrous_index") == 1.234


def test_03_thousands_marks():
    sample = by_id(read("03-thousands-marks.csv"))["26-01"]
    assert sample.get("particles_4") == 12500
    assert sample.get("particles_6") == 1250
    assert sample.get("Ca") == 1200


@pytest.mark.parametrize(
    ("name", "sample", "key", "value"),
    [
        ("04a-utf16.csv", "26-02", "viscosity_40", 46.3),
        ("04b-cp1252.csv", "Ö-01", "acid_number", 0.31),
        ("04b-cp1252.csv", "Ö-01", "particles_4", 1250),
        ("04c-bom-greek-mu.csv", "26-01", "particles_4", 1250),
    ],
)
def test_04_encodings(name, sample, key, value):
    assert by_id(read(name))[sample].get(key) == value


def test_05_a_code_turned_into_a_date_is_refused():
    reading = read("05-code-eaten-by-spreadsheet.csv")
    assert "spreadsheet" in reasons(reading)["2008-10-12"]
    assert "spreadsheet" in reasons(reading)["12.10.2008"]
    assert "must not rise" in reasons(reading)["08/10/12"]
    codes = [s.values["cleanliness_code"].text for s in reading.samples if len(s.values) > 1]
    assert codes == ["18/16/13"]


def test_06_code_variants():
    reading = read("06-code-variants.csv")
    shown = {
        s.id: s.values["cleanliness_code"].text
        for s in reading.samples
        if "cleanliness_code" in s.values
    }
    assert shown == {
        "a": "18/16/13",
        "b": "18/16/13",
        "c": "–/18/15",
        "d": "18/16/≥7",
        "e": "*/18/13",
        "f": ">28/24/20",
        "h": "–/18/15",
    }
    assert "another standard" in reasons(reading)["NAS 9"]
    three = by_id(read("06b-code-in-three-columns.csv"))["a"]
    assert three.values["cleanliness_code"].text == "18/16/13"


@pytest.mark.outside_value(source="1 per mL is 100 per 100 mL; factor 100 is 6.6 codes")
def test_07_counts_per_100_ml():
    reading = read("07-counts-per-100-mL.csv")
    sample = by_id(reading)["a"]
    assert sample.get("particles_4") == pytest.approx(2345)
    assert sample.get("particles_6") == 567
    assert "no unit" in reasons(reading)["45"]
    assert any("particles_14 [1/mL]" in line for line in reading.proposals)


def test_08_operators_stay():
    reading = read("08-operators.csv")
    values = by_id(reading)["a"].values
    assert {k: (v.op, v.value) for k, v in values.items()} == {
        "Fe": ("<", 1.0),
        "Cu": ("<", 1.0),
        "Pb": ("<", 0.1),
        "Cr": (">", 100.0),
        "Sn": ("~", 5.0),
        "Al": ("~", 5.0),
        "colour": (">", 8.0),
    }
    assert values["Fe"].text == "<1"
    assert "range" in reasons(reading)["1–2"]


def test_09_zero_dash_and_blank_differ():
    reading = read("09-zero-dash-blank.csv")
    values = by_id(reading)["a"].values
    assert values["Fe"].value == 0.0
    assert set(values) == {"Fe"}
    assert "not stated" in reasons(reading)["n.d."]


@pytest.mark.outside_value(source="1 % = 10000 mg/kg; 428 °F = 220 °C; 0.25 A/0.1 mm = 25 A/cm")
def test_10_units_in_cell_row_or_missing():
    sample = by_id(read("10a-unit-in-cell.csv"))["a"]
    assert sample.get("water") == pytest.approx(500)
    assert sample.get("flash_point") == pytest.approx(220)
    assert by_id(read("10b-unit-row.csv"))["a"].get("oxidation") == pytest.approx(25)
    missing = read("10c-unit-missing.csv")
    assert "oxidation" not in by_id(missing)["a"].values
    assert "no unit" in reasons(missing)["12"]
    settled = read("10c-unit-missing.csv", columns={"Oxidation": "oxidation [A/0.1mm]"})
    assert by_id(settled)["a"].get("oxidation") == pytest.approx(1200)


def test_11_water_in_two_units():
    reading = read("11-water-per-cent-and-ppm.csv")
    found = by_id(reading)
    assert found["a"].get("water") == 500
    assert found["b"].get("water") is None
    assert "unit?" in reasons(reading)["0.05"]
    assert found["c"].get("water") == pytest.approx(500)


@pytest.mark.outside_value(source="100 mg/L at 0.87 kg/L = 114.9 mg/kg; 0.25 A/0.1 mm = 25 A/cm")
def test_12_bases():
    refused = read("12-bases.csv")
    assert "density" in reasons(refused)["100"]
    assert "does not fit soot" in reasons(refused)["0.1"]
    density = Reading(value=870.0, unit="kg/m3")
    sample = by_id(read("12-bases.csv", fluid=Fluid(density_15=density)))["a"]
    assert sample.get("Zn") == pytest.approx(114.9, abs=0.05)
    assert sample.get("oxidation") == pytest.approx(25)


def test_13_days():
    ambiguous = read("13a-dates-ambiguous.csv")
    assert all(s.sampled is None for s in ambiguous.samples)
    assert "day_first" in reasons(ambiguous)["03/04/2025"]
    stated = read("13a-dates-ambiguous.csv", day_first=True)
    assert by_id(stated)["a"].sampled == date(2025, 4, 3)
    shown = by_id(read("13b-dates-shown.csv"))
    assert shown["a"].sampled == date(2025, 4, 3)  # another cell of the column shows the order
    many = read("13c-dates-many-forms.csv")
    found = by_id(many)
    assert found["b"].sampled == date(2025, 4, 18)
    assert found["c"].sampled == date(2026, 3, 14)
    assert found["d"].sampled == date(2025, 12, 12)
    assert found["e"].sampled == date(2026, 2, 3)
    assert "week" in reasons(many)["2025-W14"]
    assert "no such day" in reasons(many)["2026-02-30"]
    assert "order" in reasons(many)["10/10/31"]
    received = read("13d-received-only.csv")
    assert any("receipt" in p.found for p in received.problems)


@pytest.mark.outside_value(source="worked by hand: serial 45765 is 2025-04-18 on the 1900 system")
def test_13_serial():
    assert by_id(read("13c-dates-many-forms.csv"))["b"].sampled == date(2025, 4, 18)


def test_14_hours():
    reading = read("14-hours.csv")
    assert by_id(reading)["a"].oil_hours == 240  # ten days
    assert sum("above machine hours" in p.found for p in reading.problems) == 2


def test_15_duplicates_retests_and_corrected_reports():
    reading = read("15-retest-duplicate-revision.csv")
    ids = [(s.id, s.retest, s.revision, s.get("Fe")) for s in reading.samples]
    assert ids == [
        ("26-01", 0, 0, 4.0),
        ("26-02", 0, 0, 9.0),
        ("26-02", 1, 0, 5.0),
        ("26-03", 0, 1, 4.0),
    ]
    assert "revision 1" in reasons(reading)["sample 26-03"]
    assert any("different results" in p.found for p in reading.problems)


def test_16_new_oil_rows():
    found = by_id(read("16-new-oil-row.csv"))
    assert found["Neuöl"].new_oil
    assert found["26-02"].new_oil
    assert not found["26-01"].new_oil  # "new pump fitted" is no new oil


def test_17_pumps_and_points_stay_apart():
    found = by_id(read("17-several-pumps.csv"))
    assert (found["007"].asset, found["007"].point) == ("HPU-3", "case drain")
    assert (found["1E5"].asset, found["1E5"].point) == ("HPU-4", "tank")


def test_18_marks():
    reading = read("18-marks-in-cells.csv")
    sample = by_id(reading)["a"]
    assert sample.get("viscosity_40") == 46.2
    assert sample.get("Fe") == 25
    assert "left out" in sample.values["Fe"].note
    assert "OK*" in reasons(reading)


def test_19_layouts():
    logo = read("19-logo-repeat-totals.csv")
    assert list(by_id(logo)) == ["a", "b"]
    assert "Mean" in reasons(logo)
    two = by_id(read("19b-two-line-heading.csv"))["a"]
    assert (two.get("viscosity_40"), two.get("viscosity_100")) == (46.1, 6.8)
    assert (two.get("Fe"), two.get("Cu")) == (4.0, 2.0)
    assert two.sampled == date(2026, 1, 10)
    turned = by_id(read("19c-transposed.csv"))
    assert turned["26-03"].get("viscosity_40") == 46.4
    assert turned["26-01"].values["Fe"].op == "<"
    assert turned["26-02"].machine_hours == 1700
    assert turned["26-02"].values["Fe"].source.locator == "line 6, column 4"


def test_19_transposed_with_method_and_limit_columns():
    found = by_id(read("19d-transposed-with-method-and-limit.csv"))
    assert set(found) == {"26-01", "26-02"}
    assert found["26-02"].get("viscosity_40") == 46.3
    assert found["26-02"].get("oxidation") == pytest.approx(5.0)  # A/0.1 mm to A/cm
    assert found["26-01"].values["Fe"].op == "<"
    assert found["26-01"].values["acid_number"].method == "ASTM D664"


def test_20_the_method_is_kept():
    found = by_id(read("20-method-changed.csv"))
    assert found["a"].values["acid_number"].method == "D974"
    assert found["c"].values["acid_number"].method == "D664"


def test_long_table_with_merged_cells():
    reading = read("long.csv")
    found = by_id(reading)
    assert found["26-01"].values["Fe"].op == "<"
    assert found["26-01"].get("acid_number") == 0.31
    assert found["26-01"].values["viscosity_40"].method == "ASTM D445"
    assert "unknown test" in reasons(reading)["3"]
    assert "does not fit" in reasons(reading)["0,35"]


def test_french_headings():
    sample = by_id(read("french.csv"))["F-1"]
    assert sample.sampled == date(2026, 2, 3)
    assert sample.get("soot") == 0.3
    assert sample.get("Fe") == 4


def test_formulas_are_text():
    reading = read("formula.csv")
    assert by_id(reading)["a"].values == {}
    assert "never evaluated" in reasons(reading)["=1+45"]


def test_every_number_keeps_text_cell_and_hash():
    for sample in read("08-operators.csv").samples:
        for value in sample.values.values():
            assert value.text
            assert value.source.locator.startswith("line ")
            assert value.source.sha256 == "ab" * 32


@pytest.mark.parametrize(
    ("where", "gone"),
    [("sample 26-01", "sample"), ("line 2", "sample"), ("sample 26-01, column NZ", "acid_number")],
)
def test_set_aside(where, gone):
    reading = read("01-decimal-comma.csv", excluded=[(where, "taken from the drain")])
    sample = by_id(reading)["26-01"]
    if gone == "sample":
        assert sample.excluded == "taken from the drain"
    else:
        assert gone not in sample.values
        assert not sample.excluded
        assert "taken from the drain" in reasons(reading)["0,31"]
    assert not by_id(reading)["26-02"].excluded


def test_set_aside_does_not_catch_a_longer_number(tmp_path):
    text = "Sample No,Sampled,KV40,Fe\n26-01,2026-01-10,46,4\n26-011,2026-01-11,46,4\n"
    (tmp_path / "a.csv").write_text(text, encoding="utf-8")
    reading = read("a.csv", folder=tmp_path, excluded=[("sample 26-01", "spilled")])
    assert [s.id for s in reading.samples if s.excluded] == ["26-01"]


def test_workbook_with_dates_numbers_and_a_code_eaten(tmp_path):
    book = openpyxl.Workbook()
    page = book.active
    page.title = "Öl"
    page.append(["Laboratory of an invented town"])
    page.append(["Probe-Nr.", "Entnahmedatum", "KV 40 [mm2/s]", "Fe [ppm]", "ISO 4406"])
    page.append([117, date(2026, 1, 10), 46.25, 4, "18/16/13"])
    page.append(["26-02", date(2026, 2, 10), "46,3", "<1", date(2008, 10, 12)])
    book.save(tmp_path / "a.xlsx")
    reading = read("a.xlsx", folder=tmp_path)
    found = by_id(reading)
    assert found["117"].sampled == date(2026, 1, 10)
    assert found["117"].get("viscosity_40") == 46.25
    assert found["117"].values["viscosity_40"].source.locator == "Öl!C3"
    assert found["26-02"].get("viscosity_40") == 46.3
    assert "spreadsheet" in reasons(reading)["2008-10-12"]


def test_nothing_like_a_report(tmp_path):
    (tmp_path / "a.csv").write_text("hello\nworld\n", encoding="utf-8")
    reading = read("a.csv", folder=tmp_path)
    assert reading.samples == ()
    assert "no heading" in reading.problems[0].found


def test_site_limits_that_are_broken_are_a_problem(tmp_path):
    (tmp_path / "oil").mkdir()
    (tmp_path / "oil" / "limits.toml").write_text("[[limit]]\nvalue = 3\n", encoding="utf-8")
    (tmp_path / "a.csv").write_text("Sample No,Sampled,Fe\na,2026-01-10,4\n", encoding="utf-8")
    reading = read("a.csv", folder=tmp_path)
    assert len(reading.samples) == 1
    assert reading.limits == ()
    assert any(p.file == "oil/limits.toml" for p in reading.problems)


@pytest.mark.parametrize(
    ("text", "decimal", "expected"),
    [
        ("1.234", ",", "thousands or decimals"),
        ("1,234", ".", "thousands or decimals"),
        ("1.234", "", "thousands or decimals"),
        ("0.234", "", 0.234),
        ("1.234", ".", 1.234),
        ("12,5", ".", 12.5),
        ("1.234.567", ",", 1234567.0),
        ("1,234.5", ".", 1234.5),
        ("\u22120,5", ",", -0.5),
        ("1.2e3", ".", 1200.0),
        ("12 34", ".", "no thousands"),
        ("l0", ".", "not a number"),
        ("1O", ".", None),
    ],
)
def test_numbers(text, decimal, expected):
    found = parse_result(text, decimal)
    if isinstance(expected, float):
        assert found.number == expected
    elif expected is None:  # an O for a zero becomes a unit that fits nothing
        assert isinstance(found, str) or found.unit == "O"
    else:
        assert expected in found


def test_decimal_mark_needs_unmistakable_cells():
    assert decimal_mark(["1.234", "2.345"]) == ""
    assert decimal_mark(["1.234", "46,2"]) == ","
    assert decimal_mark(["0.123"]) == "."


def test_a_code_above_the_table():
    assert "28" in parse_code("45/16/13")


CELLS = st.lists(
    st.tuples(
        st.sampled_from(["=", "=", "=", "<", ">"]),
        st.integers(min_value=0, max_value=99999).map(lambda n: n / 100),
    ),
    min_size=4,
    max_size=4,
)
SPELLINGS = {
    "Fe": ["Fe [mg/kg]", "Eisen (ppm)", "Iron ppm", "Fer [mg/kg]"],
    "Cu": ["Cu [ppm]", "Kupfer [mg/kg]", "Copper (mg/kg)"],
    "acid_number": ["TAN [mgKOH/g]", "NZ (mgKOH/g)", "Acid number mgKOH/g"],
    "soot": ["Soot [A/cm]", "Ruß [A/cm]", "Suie (A/cm)"],
}
LIMITS = {"acid_number": 50.0, "soot": 900.0}


@pytest.mark.property
@settings(
    max_examples=60, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture]
)
@given(
    table=st.lists(CELLS, min_size=2, max_size=6),
    delimiter=st.sampled_from([",", ";", "\t"]),
    decimal=st.sampled_from([".", ","]),
    encoding=st.sampled_from(["utf-8", "utf-8-sig", "utf-16", "cp1252"]),
    layout=st.sampled_from(["wide", "transposed", "long"]),
    seed=st.integers(0, 1000),
)
def test_a_table_in_any_dialect_reads_back_equal(
    tmp_path, table, delimiter, decimal, encoding, layout, seed
):
    chance = random.Random(seed)
    names = list(SPELLINGS)
    titles = {name: chance.choice(SPELLINGS[name]) for name in names}

    def shown(op, number):
        text = f"{number:.2f}".replace(".", decimal)
        return text if op == "=" else f"{op}{chance.choice(['', ' '])}{text}"

    known = {
        f"S-{k}": {
            name: (op, round(min(number, LIMITS.get(name, 1e9)), 2))
            for name, (op, number) in zip(names, cells, strict=True)
        }
        for k, cells in enumerate(table)
    }
    days = {s: date(2025, 1, 1) + timedelta(days=30 * k) for k, s in enumerate(known)}
    out = io.StringIO()
    writer = csv.writer(out, delimiter=delimiter)
    if layout == "wide":
        writer.writerow(["Sample No", "Sampled on", *titles.values()])
        for s, row in known.items():
            writer.writerow([s, days[s], *(shown(*row[n]) for n in names)])
    elif layout == "transposed":
        writer.writerow(["Test", *known])
        writer.writerow(["Sampled on", *days.values()])
        for name in names:
            writer.writerow([titles[name], *(shown(*row[name]) for row in known.values())])
    else:
        writer.writerow(["Sample No", "Sampled on", "Test", "Result"])
        for s, row in known.items():
            for name in names:
                writer.writerow([s, days[s], titles[name], shown(*row[name])])
    (tmp_path / "t.csv").write_bytes(out.getvalue().encode(encoding))
    reading = read("t.csv", folder=tmp_path)
    assert reading.unread == ()
    back = {
        s.id: {name: (v.op, round(v.value, 9)) for name, v in s.values.items()}
        for s in reading.samples
    }
    assert back == known
    assert {s.id: s.sampled for s in reading.samples} == days


TITLES = [
    "Sample No", "Sampled", "Date", "Type", "Machine hours [h]", "Oil hours [d]", "KV40 [cSt]",
    "TAN", "Water [ppm]", "ISO 4406", "Soot [A/cm]", "Fe", "Cu ppm", "Colour", "Banana", "",
    "Top-up [L]", "Revision", "Machine", "ISO >4", "ISO >6", "ISO >14", "Flash point [°F]",
]  # fmt: skip
ODD = st.one_of(
    st.sampled_from(
        ["", "-", "<1", ">100", "1.234", "46,2", "18/16/13", "//", "D8", "=A1", "n.d.", "2026-01-10",
         "31.02.2026", "99/99/99", "1e400", "-5", "▲", "0.05 %", "NaN", "inf", "1" * 400, "new oil"]
    ),
    st.text(max_size=12),
)  # fmt: skip


@pytest.mark.property
@settings(
    max_examples=100, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture]
)
@given(
    titles=st.lists(st.sampled_from(TITLES), min_size=3, max_size=10),
    body=st.lists(st.lists(ODD, min_size=3, max_size=10), min_size=0, max_size=6),
)
def test_no_table_makes_the_reader_fall_over(tmp_path, small_case, titles, body):
    out = io.StringIO()
    csv.writer(out).writerows([titles, *body])
    (tmp_path / "t.csv").write_bytes(out.getvalue().encode("utf-8", "replace"))
    reading = read("t.csv", folder=tmp_path)
    for sample in reading.samples:
        for value in sample.values.values():
            assert math.isfinite(value.value)
            assert value.op in ("=", "<", ">", "~")
    check = check_oil(small_case, reading.samples, unread=reading.unread)
    assert from_oil(small_case, check)
    assert panels_oil(small_case, check).panels


@pytest.mark.parametrize(
    "name", sorted(p.name for p in MESSES.iterdir() if not p.name.startswith("15"))
)
def test_every_result_cell_is_a_value_or_kept_with_its_reason(name):
    table = read_table(MESSES / name, f"oil_messes/{name}")
    layout = layout_of(table.rows, {})
    reading = read(name)
    used = {v.source.locator: v.text for s in reading.samples for v in s.values.values()}
    kept = {cell.source.locator for cell in reading.unread}
    for row in layout.body:
        if is_no_sample(row, layout):
            continue
        places = (
            [layout.meta["value"]] if layout.kind == "long" else [c.index for c in layout.columns]
        )
        for index in places:
            cell = row[index]
            three = name.startswith("06b")  # three columns make one code
            if not is_not_tested(cell.text) and not three:
                assert cell.address in used or cell.address in kept
            if cell.address in used and "ISO" not in layout.titles[index]:
                assert used[cell.address].strip("<> ") in plain_text(cell.text)
