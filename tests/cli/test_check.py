"""``rca check`` on folders as they arrive: every problem at once, each with its mend."""

import json
from collections.abc import Callable
from pathlib import Path

import pytest
from click.testing import CliRunner, Result
from PIL import Image

from rca.cli.main import main

DESCRIPTOR = """format = 1
[case]
id = "T-7"
title = "Pump of an invented press"
occurred = 2026-03-06T04:12:00+01:00
[pump]
kind = "gear"
displacement = "40 cm3/rev"
speed = "1450 rpm"
discharge_pressure = "160 bar(g)"
[fluid]
class = "mineral"
iso_vg = 46
"""
RECORD = """[[records]]
file = "pressure/slow.csv"
time = { column = "Time", zone = "Europe/Vienna" }
channels = [{ column = "P", quantity = "inlet pressure", unit = "bar(a)" }]
"""
OIL = """[[oil_reports]]
file = "oil/lab.csv"
"""


def put(folder: Path, name: str, text: str) -> None:
    """A file of the case."""
    path = folder / name
    path.parent.mkdir(parents=True, exist_ok=True)
    path.write_text(text, encoding="utf-8")


def check(folder: Path, *more: str) -> Result:
    """``rca check`` on the folder."""
    return CliRunner().invoke(main, ["check", str(folder), *more])


def no_unit(folder: Path) -> None:
    """Two values without units, one pressure that is neither absolute nor gauge."""
    text = DESCRIPTOR.replace('"40 cm3/rev"', "40").replace("160 bar(g)", "160 bar")
    put(folder, "case.toml", text.replace("1450 rpm", "1450"))


def wrong_words(folder: Path) -> None:
    """Words outside the vocabulary, each close to a known one."""
    put(folder, "case.toml", DESCRIPTOR.replace('"gear"', '"gaer"').replace("mineral", "minral"))
    put(
        folder,
        "teardown/findings.csv",
        "id,component,zone,sign,extent,photo,note,by,date\n"
        "1,pump,inlet kidny,piting,severe,,,C. Example,2026-03-09\n",
    )


def syntax(folder: Path) -> None:
    """A bracket that is never closed."""
    put(folder, "case.toml", DESCRIPTOR.replace("[pump]", "[pump"))


def missing_files(folder: Path) -> None:
    """Files named and not there."""
    put(folder, "case.toml", DESCRIPTOR + RECORD + OIL)


def wrong_column(folder: Path) -> None:
    """A record without the column the descriptor names."""
    put(folder, "case.toml", DESCRIPTOR + RECORD)
    put(folder, "pressure/slow.csv", "Time,P_SUCT\n2026-03-01 10:00:00,0.9\n")


def gauge_for_absolute(folder: Path) -> None:
    """An inlet said to be absolute that lies below zero."""
    put(folder, "case.toml", DESCRIPTOR + RECORD)
    rows = "".join(f"2026-03-01 10:{m:02d}:00,-0.2{m % 7}\n" for m in range(60))
    put(folder, "pressure/slow.csv", "Time,P\n" + rows)


def odd_oil(folder: Path) -> None:
    """A laboratory with headers nobody knows, and cells that are no results."""
    put(folder, "case.toml", DESCRIPTOR + OIL)
    put(
        folder,
        "oil/lab.csv",
        "Sample;Sampled;Visc kin at 40 [mm2/s];TAN;Fe;Blackness\n"
        "A1;2026-01-05;45,9;0,41;12;3\nA2;2026-02-05;see note;<0,4;n/a;4\n",
    )


def two_photos(folder: Path) -> None:
    """Two rows for one photograph, a photograph that is a text, one that is not there."""
    put(folder, "case.toml", DESCRIPTOR)
    (folder / "photos").mkdir()
    Image.new("RGB", (40, 30), "grey").save(folder / "photos" / "a.jpg")
    put(folder, "photos/b.jpg", "not a picture")
    put(
        folder,
        "photos/photos.csv",
        "file,exhibit,taken,by,view,zone,scale,caption\n"
        "a.jpg,X1,2026-03-09T10:00:00+01:00,C. Example,close,inlet kidney,,one\n"
        "a.jpg,X2,2026-03-09T10:00:00+01:00,C. Example,close,housing,,two\n"
        "b.jpg,X3,,,,,,\nc.jpg,X4,,,,,,\n",
    )


def against_itself(folder: Path) -> None:
    """Damage and no damage at one place."""
    put(folder, "case.toml", DESCRIPTOR)
    put(
        folder,
        "teardown/findings.csv",
        "id,component,zone,sign,extent,photo,note,by,date\n"
        "1,pump,tooth flank,pitting,severe,,,C. Example,2026-03-09\n"
        "2,pump,tooth flank,no damage,severe,,,D. Example,2026-03-09\n",
    )


def bad_actions(folder: Path) -> None:
    """An owner who verifies himself, a condition that is none, a status nobody knows."""
    put(folder, "case.toml", DESCRIPTOR)
    put(
        folder,
        "actions.csv",
        "id,kind,text,cause,owner,due,done,status,verified_by,verify\n"
        "A1,corrective,Clean,,C. Example,2026-04-01,2026-04-02,closed,C. Example,"
        "min(inlet pressure) >> 0.85\n"
        "A2,correctiv,Replace,,C. Example,first of May,,done-ish,,\n",
    )


FOLDERS: dict[Callable[[Path], None], tuple[int, tuple[str, ...]]] = {
    no_unit: (1, ("100 cm3/rev", "bar(a)", "bar(g)", "rpm")),
    wrong_words: (1, ("gear", "mineral")),
    syntax: (1, ("line 6",)),
    missing_files: (1, ("pressure/slow.csv", "oil/lab.csv")),
    wrong_column: (1, ("P_SUCT", "no column 'P'")),
    gauge_for_absolute: (0, ("gauge", "set aside")),
    odd_oil: (0, ("3 results", '"Visc kin at 40 [mm2/s]" = "viscosity_40 [mm2/s]", "Blackness"')),
    two_photos: (1, ("a.jpg", "b.jpg", "c.jpg")),
    against_itself: (0, ("damage and no damage at tooth flank",)),
    bad_actions: (1, ("correctiv", "first of May", "owner is also the one who verifies", ">>")),
}


@pytest.mark.parametrize("build", FOLDERS, ids=lambda f: f.__name__)
def test_a_broken_folder_gets_a_screen_that_teaches(
    build: Callable[[Path], None], tmp_path: Path
) -> None:
    build(tmp_path)
    status, words = FOLDERS[build]
    result = check(tmp_path)
    assert result.exit_code == status, result.output
    for word in words:
        assert word in result.output
    assert "Traceback" not in result.output
    assert "\x1b[" not in result.output  # no colour where no terminal shows it


@pytest.mark.parametrize("build", FOLDERS, ids=lambda f: f.__name__)
def test_json_says_the_same(build: Callable[[Path], None], tmp_path: Path) -> None:
    build(tmp_path)
    result = check(tmp_path, "--json")
    told = json.loads(result.output)
    assert result.exit_code == FOLDERS[build][0]
    assert told["errors"] == sum(p["severity"] == "error" for p in told["problems"])
    for problem in told["problems"]:
        assert problem["file"]
        assert problem["found"]
        assert problem["mend"]


def test_a_folder_that_is_none_could_not_be_done(tmp_path: Path) -> None:
    assert check(tmp_path / "nowhere").exit_code == 2


def test_many_alike_are_shown_once_and_counted(tmp_path: Path) -> None:
    put(tmp_path, "case.toml", DESCRIPTOR)
    rows = "".join(f"{n},pump,nose,pitting,severe,,,C. Example,2026-03-09\n" for n in range(30))
    put(
        tmp_path,
        "teardown/findings.csv",
        "id,component,zone,sign,extent,photo,note,by,date\n" + rows,
    )
    short, whole = check(tmp_path), check(tmp_path, "--all")
    assert "and 27 others like it" in short.output
    assert whole.output.count("'nose'") >= 30 > short.output.count("'nose'")
