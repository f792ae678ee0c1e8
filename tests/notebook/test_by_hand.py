"""A notebook opened alone, without the runner, finds or makes what it builds on."""

import json
import re
import tempfile
from pathlib import Path

import pytest

from rca.archive.store import Store
from rca.base.errors import ArchiveError, NotebookError
from rca.base.shipped import shipped_folder
from rca.notebook import open_investigation
from tests.verdict.folders import folder

NOTEBOOKS = sorted(shipped_folder("notebooks").glob("*.ipynb"))


@pytest.fixture
def case(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    (tmp_path / "temporary").mkdir()
    monkeypatch.setattr(tempfile, "tempdir", str(tmp_path / "temporary"))
    return folder(tmp_path / "case")


@pytest.mark.parametrize("path", NOTEBOOKS, ids=lambda p: p.stem)
def test_a_notebook_opens_after_the_stages_its_metadata_names(path: Path) -> None:
    book = json.loads(path.read_text(encoding="utf-8"))
    code = "".join("".join(c["source"]) for c in book["cells"] if c["cell_type"] == "code")
    named = re.search(r"after=\(([^)]*)\)", code)
    after = re.findall(r'"(\w+)"', named[1]) if named else []
    assert after == book["metadata"]["rca"]["needs"]


def test_what_is_missing_runs_first_and_only_once(
    case: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    opened = open_investigation(str(case), after=("records", "suction"))
    assert opened.store.stages() == ("records", "suction")
    assert "Running 03_records.ipynb first" in capsys.readouterr().out
    open_investigation(str(case), after=("records", "suction"))
    assert capsys.readouterr().out == ""


def test_a_stage_older_than_what_it_builds_on_runs_again(
    case: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    opened = open_investigation(str(case), after=("suction",))
    opened.store.write(opened.store.read("records"))
    capsys.readouterr()
    open_investigation(str(case), after=("suction",))
    assert "Running 04_suction.ipynb first" in capsys.readouterr().out


def test_a_changed_case_finds_nothing_stale(case: Path) -> None:
    before = open_investigation(str(case), after=("records",))
    (case / "teardown/notes.md").write_text("Seen later.", encoding="utf-8")
    after = open_investigation(str(case))
    assert before.store.folder != after.store.folder
    assert after.store.stages() == ()


def test_with_a_store_nothing_runs_unasked(case: Path, tmp_path: Path) -> None:
    with pytest.raises(ArchiveError, match=r"records.*Run that notebook first"):
        open_investigation(str(case), str(tmp_path / "store"), after=("records",))
    assert Store(tmp_path / "store").stages() == ()


def test_a_stage_of_no_shipped_notebook_is_named(case: Path) -> None:
    with pytest.raises(NotebookError, match=r"'mine'.*known stages are actions, damage"):
        open_investigation(str(case), after=("mine",))
