"""Broken case folders: every message names the file, the place, what was found and the mend."""

import shutil
from collections.abc import Callable
from pathlib import Path

import pytest
from click.testing import CliRunner

from rca.cli.main import main
from rca.intake.read import read_case


@pytest.fixture
def case(tmp_path: Path, sample_dir: Path) -> Path:
    target = tmp_path / "case"
    shutil.copytree(sample_dir, target, ignore=shutil.ignore_patterns("report*", "earlier"))
    return target


def toml(old: str, new: str) -> Callable[[Path], None]:
    def change(case: Path) -> None:
        path = case / "case.toml"
        text = path.read_text()
        assert old in text
        path.write_text(text.replace(old, new, 1))

    return change


def table(name: str, old: str, new: str) -> Callable[[Path], None]:
    def change(case: Path) -> None:
        path = case / name
        text = path.read_text()
        assert old in text
        path.write_text(text.replace(old, new, 1))

    return change


def replace_with(name: str, content: bytes) -> Callable[[Path], None]:
    return lambda case: (case / name).write_bytes(content) and None


def folder_for(name: str) -> Callable[[Path], None]:
    def change(case: Path) -> None:
        (case / name).unlink()
        (case / name).mkdir()

    return change


def link_out(case: Path) -> None:
    outside = case.parent / "outside.csv"
    outside.write_text("a,b\n")
    (case / "oil" / "linked.csv").symlink_to(outside)


def drop(name: str) -> Callable[[Path], None]:
    return lambda case: (case / name).unlink()


BROKEN = [
    ("missing unit", toml('length = "1.8 m"', 'length = "1.8"'), "case.toml", "without a unit"),
    ("bare number", toml('length = "1.8 m"', "length = 1.8"), "case.toml", "in quotes"),
    ("pressure says neither", toml("210 bar(g)", "210 bar"), "case.toml", "bar(a)"),
    ("unit of another kind", toml('bore = "50 mm"', 'bore = "50 kg"'), "case.toml", "length"),
    ("unknown unit", toml('bore = "50 mm"', 'bore = "50 mmm"'), "case.toml", "unknown unit"),
    ("negative bore", toml('bore = "50 mm"', 'bore = "-50 mm"'), "case.toml", "above zero"),
    ("unknown zone", toml("Europe/Vienna", "Europe/Wien"), "case.toml", "Europe/Vienna"),
    ("date without zone", toml("T04:12:00+01:00", "T04:12:00"), "case.toml", "zone"),
    ("date as text", toml("2026-03-06T04:12:00+01:00", '"6 March"'), "case.toml", "TOML date"),
    ("no id", toml('id = "HC-2026-014"', ""), "case.toml", "case.id"),
    ("empty id", toml('"HC-2026-014"', '""'), "case.toml", "not empty"),
    ("id a number", toml('"HC-2026-014"', "14"), "case.toml", "text in quotes"),
    ("unknown kind", toml('"axial piston"', '"axial pistn"'), "case.toml", "axial piston"),
    ("unknown fluid", toml('"mineral"', '"mineral oil"'), "case.toml", "mineral"),
    ("unknown form", toml('"long-radius bend"', '"long bend"'), "case.toml", "long-radius bend"),
    ("elements of text", toml("elements = 9", 'elements = "nine"'), "case.toml", "whole number"),
    ("elements too many", toml("elements = 9", "elements = 900"), "case.toml", "1 to 60"),
    ("viscosities exchanged", toml('"6.8 mm2/s"', '"68 mm2/s"'), "case.toml", "exchanged"),
    ("format of tomorrow", toml("format = 1", "format = 7"), "case.toml", "from 1 to 1"),
    ("no format", toml("format = 1", ""), "case.toml", "format = 1"),
    ("toml syntax", toml("[pump]", "[pump"), "case.toml", "TOML syntax"),
    ("not utf-8", replace_with("case.toml", b"\xff\xfe\xff"), "case.toml", "UTF-8"),
    ("altitude in space", toml('"340 m"', '"34000 m"'), "case.toml", "6000 m"),
    (
        "unknown quantity",
        toml('"inlet pressure"', '"suction pressure"'),
        "case.toml",
        "inlet pressure",
    ),
    ("channel unit", toml('unit = "rpm"', 'unit = "bar(a)"'), "case.toml", "shaft speed"),
    (
        "file not there",
        toml("oil/lab-export.csv", "oil/lab.csv"),
        "case.toml",
        "not in the case folder",
    ),
    (
        "strainer without rating",
        toml('rated_loss = "0.03 bar"\nrated_viscosity', "rated_viscosity"),
        "case.toml",
        "rated loss",
    ),
    ("tables as one", toml("[[excluded]]", "[excluded]"), "case.toml", "[[excluded]]"),
    (
        "findings without a column",
        table("teardown/findings.csv", "zone,sign", "zonne,sign"),
        "teardown/findings.csv",
        "'zone'",
    ),
    (
        "findings twice one id",
        table("teardown/findings.csv", "F02,", "F01,"),
        "teardown/findings.csv",
        "second time",
    ),
    (
        "findings extent",
        table("teardown/findings.csv", "pitting,severe", "pitting,huge"),
        "teardown/findings.csv",
        "severe",
    ),
    (
        "findings a cell too many",
        table("teardown/findings.csv", "inside all nine bores", "inside, all nine"),
        "teardown/findings.csv",
        "cells",
    ),
    (
        "custody date without zone",
        table("custody.csv", "2026-03-06T15:20+01:00", "2026-03-06T15:20"),
        "custody.csv",
        "zone",
    ),
    (
        "history date",
        table("history.csv", "2025-01-14,oil", "14.1.2025,oil"),
        "history.csv",
        "year-month-day",
    ),
    ("actions due", table("actions.csv", "2026-03-13", "soon"), "actions.csv", "2026-03-09"),
    (
        "two rows one photo",
        table("photos/photos.csv", "p02-inlet", "p01-valve-plate.jpg,,,,,,,\np02-inlet"),
        "photos/photos.csv",
        "one row",
    ),
    (
        "photo not there",
        drop("photos/p03-transition-land.jpg"),
        "photos/photos.csv",
        "in the folder photos",
    ),
    (
        "photo broken",
        replace_with("photos/p04-cylinder-bore.jpg", b"\xff\xd8\xff\xe0junk"),
        "photos/p04-cylinder-bore.jpg",
        "can't be read",
    ),
    (
        "photo empty",
        replace_with("photos/p04-cylinder-bore.jpg", b""),
        "photos/p04-cylinder-bore.jpg",
        "can't be read",
    ),
    ("empty table", replace_with("actions.csv", b""), "actions.csv", "empty file"),
    (
        "binary table",
        replace_with("actions.csv", b"\x00\x01\x02\x03id,text"),
        "actions.csv",
        "binary",
    ),
    ("folder for a table", folder_for("actions.csv"), "actions.csv", "a folder"),
    ("link out of the case", link_out, "oil/linked.csv", "leads out"),
]


@pytest.mark.parametrize(
    ("change", "file", "words"), [b[1:] for b in BROKEN], ids=[b[0] for b in BROKEN]
)
def test_broken_input_is_answered(
    case: Path, change: Callable[[Path], None], file: str, words: str
) -> None:
    change(case)
    reading = read_case(case)
    fitting = [p for p in reading.errors if p.file == file and words in str(p)]
    assert fitting, [str(p) for p in reading.problems]
    assert all(p.found and p.expected and p.mend for p in reading.problems)


def test_check_ends_with_one_where_there_are_errors(case: Path) -> None:
    toml("210 bar(g)", "210 bar")(case)
    done = CliRunner().invoke(main, ["check", str(case)])
    assert done.exit_code == 1
    assert "pump.discharge_pressure (line" in done.output


def test_check_ends_with_two_where_there_is_no_folder(tmp_path: Path) -> None:
    assert CliRunner().invoke(main, ["check", str(tmp_path / "none")]).exit_code == 2


def test_all_problems_come_at_once(case: Path) -> None:
    toml("210 bar(g)", "210 bar")(case)
    toml('"axial piston"', '"axial pistn"')(case)
    table("actions.csv", "2026-03-13", "soon")(case)
    assert len(read_case(case).errors) == 3


def test_unknown_words_are_kept_and_answered(case: Path) -> None:
    table("teardown/findings.csv", "inlet kidney,pitting", "inlet kidny,piting")(case)
    reading = read_case(case)
    assert reading.case is not None
    assert reading.case.findings[0].sign is None
    assert reading.case.findings[0].sign_text == "piting"
    assert any("'pitting'" in p.mend for p in reading.problems)


def test_a_new_case_passes_the_check(tmp_path: Path) -> None:
    target = tmp_path / "fresh"
    assert CliRunner().invoke(main, ["new", str(target)]).exit_code == 0
    done = CliRunner().invoke(main, ["check", str(target)])
    assert done.exit_code == 0, done.output
    again = CliRunner().invoke(main, ["new", str(target)])
    assert again.exit_code == 2
