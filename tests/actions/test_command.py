"""``rca actions`` over case folders and reports: standing, calendar, exit status."""

import json
import shutil
from datetime import date
from pathlib import Path

import icalendar
import pytest
from click.testing import CliRunner, Result

from rca.actions.calendar import DueDate, calendar_bytes
from rca.cli.main import main
from tests.compare.made import action, results


def run(*words: object) -> Result:
    return CliRunner().invoke(main, ["actions", *map(str, words)])


def report(folder: Path, case: str, *actions: dict, **more: object) -> Path:
    folder.mkdir(parents=True)
    (folder / "results.json").write_text(json.dumps(results(case, actions=actions, **more)))
    return folder


def test_nothing_overdue_is_zero(tmp_path: Path) -> None:
    report(tmp_path / "r", "C-1", action(1, due=date(2027, 1, 1)))
    done = run(tmp_path, "--today", "2026-12-01")
    assert done.exit_code == 0, done.output
    assert "1 open" in done.output
    assert "authorises nothing" in done.output


@pytest.mark.parametrize(
    "bad",
    [
        action(1, due=date(2026, 11, 30)),
        action(1, due=None, done=date(2026, 1, 1), proof="refuted"),
    ],
)
def test_overdue_or_refuted_is_one(tmp_path: Path, bad: dict) -> None:
    report(tmp_path / "r", "C-1", bad)
    assert run(tmp_path, "--today", "2026-12-01").exit_code == 1


def test_nothing_usable_is_two(tmp_path: Path) -> None:
    (tmp_path / "x.json").write_text("{")
    done = run(tmp_path)
    assert done.exit_code == 2
    assert "x.json" in done.output
    assert run(tmp_path / "nowhere").exit_code == 2


def test_a_case_folder_is_reviewed_now_and_stands_before_its_report(tmp_path: Path) -> None:
    case = tmp_path / "case"
    case.mkdir()
    (case / "case.toml").write_text(
        'format = 1\n[case]\nid = "C-1"\ntitle = "t"\nsite = "invented works"\nasset = "P-1"\noccurred = 2024-05-01T06:00:00+01:00\n'
    )
    (case / "actions.csv").write_text(
        "id,kind,text,cause,owner,due,done,status,verified_by,verify\n"
        "A1,corrective,=1+1,suction strainer clogged,one,2024-06-01,2024-06-01,implemented,two,no recurrence for 90 d against one in 30 d\n"
        "A2,corrective,t,suction strainer clogged,one,2024-06-01,2024-06-01,implemented,two,no recurence for 90 d\n"
    )
    report(case / "report", "C-1", action(9, due=date(2020, 1, 1)))
    made = json.loads(run(tmp_path, "--today", "2026-12-01", "--json").stdout)
    assert {a["action"]["id"]: a["standing"] for a in made["actions"]} == {
        "A1": "proved",
        "A2": "done, cannot be checked",
    }
    # the same cause again on the same machine, in another report
    report(tmp_path / "later", "C-2", day=date(2024, 9, 1))
    done = run(tmp_path, "--today", "2026-12-01", "--json")
    assert done.exit_code == 1
    first = json.loads(done.stdout)["actions"][0]
    assert (first["action"]["id"], first["standing"]) == ("A1", "refuted")
    assert "came back on 2024-09-01, 92 d after" in first["action"]["reason"]


@pytest.mark.outside_value(source="RFC 5545, read back by the icalendar library")
def test_the_calendar_holds_the_open_dates(tmp_path: Path) -> None:
    report(
        tmp_path / "r",
        "C-1",
        action(1, due=date(2027, 1, 4)),
        action(2, due=date(2026, 1, 1), done=date(2026, 1, 1)),
    )
    run(tmp_path, "--today", "2026-12-01", "--calendar", tmp_path / "due.ics")
    (event,) = icalendar.Calendar.from_ical((tmp_path / "due.ics").read_bytes()).walk("VEVENT")
    assert event.decoded("dtstart") == date(2027, 1, 4)
    assert event.decoded("dtend") == date(2027, 1, 5)


@pytest.mark.outside_value(
    source="RFC 5545 3.1 and 3.3.11: lines of at most 75 octets, text escaped"
)
def test_calendar_text_is_escaped_and_folded() -> None:
    hostile = "one; two, three\\ four\nEND:VCALENDAR" + "x" * 200
    one = DueDate(case="C/1", id="A 1", text=hostile, owner="", asset="", due=date(2027, 1, 4))
    raw = calendar_bytes([one], stamp=date(2026, 12, 1))
    assert all(len(line) <= 75 for line in raw.split(b"\r\n"))
    assert raw.count(b"\r\nEND:VCALENDAR") == 1
    (event,) = icalendar.Calendar.from_ical(raw).walk("VEVENT")
    assert str(event["summary"]) == f"C/1 A 1: {hostile}"
    assert raw == calendar_bytes([one], stamp=date(2026, 12, 1))


def test_the_sample_says_what_is_overdue(sample_dir: Path, tmp_path: Path) -> None:
    shutil.copytree(
        sample_dir,
        tmp_path / "case",
        ignore=shutil.ignore_patterns("pressure", "photos", "report"),
    )
    text = (tmp_path / "case" / "case.toml").read_text()
    (tmp_path / "case" / "case.toml").write_text(text.split("[[records]]")[0])
    done = run(tmp_path, "--today", "2026-05-01", "--json")
    made = json.loads(done.stdout)
    assert done.exit_code == 1, done.output
    assert made["counts"]["overdue"] == 3
