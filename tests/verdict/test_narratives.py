"""Traps of the trade as whole case folders: what a seasoned engineer would say of each.

Every machine and number is invented; what each pattern means is common practice, no source,
unless a test names one.
"""

from pathlib import Path

import pytest

from tests.verdict.folders import folder, verdict_of

NO_BURNING = (
    ("plate", "transition land", "burn mark", "none"),
    ("cylinder 1", "piston seal", "charred seal", "none"),
)
NO_PITTING = (
    ("plate", "inlet kidney", "pitting", "none"),
    ("block", "cylinder bore", "pitting", "none"),
)
CHARRED = (
    ("cylinder 1", "piston seal", "charred seal", "severe"),
    ("cylinder 1", "cylinder", "carbon deposit", "moderate"),
)
CLEAN = ("2026-03-07", "strainer found clean")
TIGHT = ("2026-03-07", "no air leak found")
BURNT_OIL = {"Colour": 6.5, "Soot": 6, "Nitration": 5}
practice = pytest.mark.outside_value(source="common practice, no source")


def healthy(running: bool, oil: float) -> float:
    return (0.95 if oil > 30 else 0.90) if running else 1.04


@practice
def test_dark_oil_with_a_normal_acid_number_from_a_throttling_valve(tmp_path: Path) -> None:
    case = folder(
        tmp_path / "c",
        findings=(*NO_BURNING, *NO_PITTING, ("valve", "relief valve", "heat tint", "moderate")),
        history=(("2026-03-07", "throttle found hot"), CLEAN, TIGHT),
        oil={"Colour": 5.5},
        inlet=healthy,
    )
    found = verdict_of(case)
    assert found.verdict.side == "neither"
    assert found.verdict.mechanisms["hot spot"] > 0.7
    assert found.causes[0].cause == "throttling hot spot"


@pytest.mark.outside_value(source="Chin. J. Mech. Eng. 2020, 10.1186/s10033-020-00486-8")
def test_groove_jet_erosion_with_a_healthy_inlet(tmp_path: Path) -> None:
    case = folder(
        tmp_path / "c",
        pressure=280,
        findings=(
            *NO_BURNING,
            *NO_PITTING,
            ("plate", "transition land", "jet erosion", "severe"),
            ("plate", "discharge kidney", "pitting", "moderate"),
        ),
        history=(CLEAN, TIGHT),
        inlet=healthy,
    )
    found = verdict_of(case).verdict
    assert found.side == "neither"
    assert max(found.mechanisms, key=lambda n: found.mechanisms[n]) == "jet cavitation"


@practice
def test_varnish_with_very_clean_oil_decides_nothing(tmp_path: Path) -> None:
    case = folder(
        tmp_path / "c",
        findings=(("valve", "servo valve", "varnish", "severe"),),
        oil={"Colour": 4.0, "ISO 4406": "14/10/7"},
    )
    found = verdict_of(case).verdict
    assert found.side == "undetermined"
    assert found.mechanisms["micro-dieseling"] < 0.3


@practice
def test_water_glycol_with_scorched_words_in_the_notes(tmp_path: Path) -> None:
    case = folder(
        tmp_path / "c",
        fluid="water glycol",
        findings=(
            ("cylinder 1", "piston seal", "hardened seal", "moderate"),
            ("plate", "transition land", "burn mark", "slight"),
        ),
        notes="Scorched. Burnt. Dieseling all over, I am sure of it.",
        inlet=healthy,
    )
    found = verdict_of(case).verdict
    assert found.mechanisms["micro-dieseling"] < 0.1
    assert found.side in ("neither", "undetermined")


@practice
def test_a_leak_with_a_normal_vacuum(tmp_path: Path) -> None:
    case = folder(
        tmp_path / "c",
        findings=(
            *NO_BURNING,
            *NO_PITTING,
            ("tank", "reservoir", "foam", "severe"),
            ("tank", "reservoir", "milky oil", "moderate"),
        ),
        history=(("2026-03-07", "air leak found"), ("2026-02-20", "erratic noise"), CLEAN),
        inlet=healthy,
    )
    found = verdict_of(case)
    assert found.verdict.side == "suction"
    assert found.verdict.mechanisms["aeration"] > 0.8
    assert found.verdict.mechanisms["vapour cavitation"] < 0.15
    assert found.causes[0].cause == "air leak on the suction side"


@practice
def test_a_low_inlet_only_on_cold_starts(tmp_path: Path) -> None:
    def cold_low(running: bool, oil: float) -> float:
        return 1.04 if not running else 0.93 if oil > 40 else 0.93 - 0.016 * (40 - oil)

    case = folder(
        tmp_path / "c",
        cold=-10,
        findings=(
            *NO_BURNING,
            ("plate", "inlet kidney", "pitting", "moderate"),
            ("block", "cylinder bore", "pitting", "moderate"),
        ),
        history=(CLEAN, TIGHT, ("2026-01-15", "steady noise")),
        inlet=cold_low,
    )
    found = verdict_of(case)
    assert found.verdict.side == "suction"
    assert found.causes[0].cause == "cold or too viscous oil"


@practice
def test_cavitation_in_the_notes_of_a_scorched_cylinder(tmp_path: Path) -> None:
    case = folder(
        tmp_path / "c",
        findings=(*CHARRED, *NO_PITTING, ("tank", "reservoir", "foam", "moderate")),
        history=(("2026-03-07", "return found above level"), CLEAN),
        oil=BURNT_OIL,
        notes="cavitation cavitation cavitation of the cylinder",
    )
    with_word = verdict_of(case).verdict
    assert with_word.mechanisms["micro-dieseling"] > 0.75
    assert with_word.mechanisms["vapour cavitation"] < 0.3
    (case / "teardown/notes.md").write_text("", encoding="utf-8")
    assert verdict_of(case).verdict.sides == with_word.sides


@practice
def test_no_teardown_and_no_record(tmp_path: Path) -> None:
    case = folder(tmp_path / "c", history=(("2026-02-01", "steady noise"),), oil={"Colour": 3.0})
    found = verdict_of(case).verdict
    assert found.side == "undetermined"
    assert found.next_tests
    assert found.words.biggest_doubt.startswith("Too little speaks either way")


@practice
def test_burning_without_any_sign_of_air_at_the_inlet_is_the_discharge_side(
    tmp_path: Path,
) -> None:
    case = folder(
        tmp_path / "c",
        pressure=280,
        findings=(
            *CHARRED,
            *NO_PITTING,
            ("tank", "reservoir", "foam", "none"),
            ("tank", "reservoir", "milky oil", "none"),
            ("valve", "relief valve", "heat tint", "none"),
        ),
        history=(CLEAN, TIGHT, ("2026-03-07", "oil level checked")),
        oil=BURNT_OIL,
        inlet=healthy,
    )
    assert verdict_of(case).verdict.side == "discharge"


@practice
def test_thin_air_of_a_high_site(tmp_path: Path) -> None:
    case = folder(
        tmp_path / "c",
        kind="vane",
        pressure=140,
        altitude=3600,
        findings=(
            *NO_BURNING,
            ("ring", "cam ring", "pitting", "moderate"),
            ("port", "inlet port", "matte erosion", "moderate"),
        ),
        history=(CLEAN, TIGHT, ("2026-03-07", "breather found free")),
        inlet=lambda running, oil: 0.655 if not running else 0.58 if oil > 30 else 0.50,
    )
    found = verdict_of(case)
    assert found.verdict.side == "suction"
    assert found.causes[0].cause == "high altitude"
