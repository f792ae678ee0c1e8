"""The command and its pages: whole, offline, escaped; exit status as promised."""

import json
import re
from pathlib import Path

import pytest
from click.testing import CliRunner

from rca.cli.main import main
from tests.compare.made import many

HOSTILE = "</script><script>alert(1)</script>"


@pytest.fixture(scope="module")
def compared(tmp_path_factory) -> tuple[Path, object]:
    folder = tmp_path_factory.mktemp("compare")
    for one in many(24, machines=4):
        one["case"]["title"] = HOSTILE
        (folder / f"{one['case']['id']}.json").write_text(json.dumps(one))
    (folder / "broken.json").write_text("{")
    out = folder / "out"
    done = CliRunner().invoke(
        main, ["compare", str(folder), "--out", str(out), "--until", "2026-12-01"]
    )
    return out, done


@pytest.mark.notebook
@pytest.mark.pdf
def test_everything_is_there_and_a_broken_file_is_named(compared) -> None:
    out, done = compared
    assert done.exit_code == 0, done.output
    assert "broken.json" in done.output
    for name in (
        "compare.html",
        "compare.pdf",
        "explore.html",
        "comparison.json",
        "incidents.duckdb",
    ):
        assert (out / name).is_file(), name
    told = json.loads((out / "comparison.json").read_text())
    assert told["comparison"]["n"] == 24
    assert len(told["gathered"]["refused"]) == 1


@pytest.mark.notebook
@pytest.mark.pdf
def test_nothing_is_fetched_and_text_stays_text(compared) -> None:
    out, _ = compared
    for name in ("compare.html", "explore.html"):
        page = (out / name).read_text()
        assert not re.search(r"""(src|href)=["']?(https?:)?//""", page)
        assert "fetch(" not in page
        assert HOSTILE not in page
    assert "authorises nothing" in (out / "compare.html").read_text()


def test_nothing_usable_is_two_and_says_why(tmp_path: Path) -> None:
    (tmp_path / "broken.json").write_text("{")
    done = CliRunner().invoke(main, ["compare", str(tmp_path), "--out", str(tmp_path / "out")])
    assert done.exit_code == 2
    assert "broken.json" in done.output
    assert not (tmp_path / "out").exists()
