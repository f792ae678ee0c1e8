"""One small report, made and rerun for real: same bytes, and every kind of tampering named."""

import json
import os
import shutil
import signal
import subprocess
import sys
import time
from pathlib import Path

import pytest

from rca.base.errors import ArchiveError
from rca.intake.scaffold import make_case
from rca.rerun.model import RunClass
from rca.runner.batch import ALREADY, FAILED, Finished, Job, run_one, standing_side
from rca.runner.fetch import fetched
from rca.runner.issued import opened
from rca.runner.rerun import RerunOptions, rerun
from rca.runner.run import Options

pytestmark = [pytest.mark.notebook, pytest.mark.pdf]
FEW = '{"samples": 64, "draws": 64}'
OPTIONS = Options(parameters=json.loads(FEW))


def command(case: Path, *more: str) -> list[str]:
    return [sys.executable, "-m", "rca", "report", str(case), "--parameters", FEW, *more]


@pytest.fixture(scope="module")
def case(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A case with its report, made in a process of its own with another hash seed."""
    folder = tmp_path_factory.mktemp("whole") / "case"
    make_case(folder)
    root = Path(__file__).resolve().parents[2]
    subprocess.run(
        command(folder), check=True, cwd=root, env=os.environ | {"PYTHONHASHSEED": "7"},
        stdout=subprocess.DEVNULL,
    )  # fmt: skip
    return folder


def test_a_rerun_gives_the_same_bytes(case: Path, tmp_path: Path) -> None:
    done = rerun(case / "report", None, tmp_path / "rerun", RerunOptions(), lambda *_: None)
    assert done.check.run_class is RunClass.IDENTICAL, done.check.answer
    assert done.check.agrees
    assert [f.name for f in done.check.files if not f.same] == []
    assert {"report.pdf", "report.html", "results.json"} <= {f.name for f in done.check.files}
    assert (tmp_path / "rerun" / "rerun.pdf").stat().st_size > 0
    plain = json.loads((tmp_path / "rerun" / "rerun.json").read_text(encoding="utf-8"))
    assert plain["words"] == "identical"


@pytest.mark.parametrize(
    ("name", "area"),
    [
        ("results.json", "results"),
        ("notebooks/07_verdict.ipynb", "notebook"),
        ("report.pdf", "report"),
        ("tables/causes.csv", "report"),
    ],
)
def test_one_changed_byte_is_named_before_anything_runs(
    case: Path, tmp_path: Path, name: str, area: str
) -> None:
    copy = shutil.copytree(case / "report", tmp_path / "report")
    content = (copy / name).read_bytes()
    place = len(content) // 2
    while not chr(content[place]).isalpha():  # stay JSON, PDF or text
        place += 1
    (copy / name).write_bytes(content[:place] + bytes([content[place] ^ 2]) + content[place + 1 :])
    try:
        with opened(copy, case) as issued:
            told = [(b.kind, b.area, b.name) for b in issued.breaches]
    except ArchiveError as error:  # results that no longer fit their schema are told all the same
        told = [("changed", area, name)] if name in str(error) else []
    assert ("changed", area, name) in told


def test_a_standing_report_is_not_run_again(case: Path, tmp_path: Path) -> None:
    job = Job(case=str(case), out=case / "report")
    assert run_one(job, OPTIONS, again=False).state == ALREADY
    assert standing_side(case, case / "report", Options()) is None  # other parameters
    copy = shutil.copytree(case, tmp_path / "case")
    (copy / "history.csv").write_text((copy / "history.csv").read_text() + "\n")
    assert standing_side(copy, copy / "report", OPTIONS) is None


def test_a_broken_case_is_a_result_and_no_exception(tmp_path: Path) -> None:
    ended = run_one(Job(case=str(tmp_path), out=tmp_path / "report"), OPTIONS, again=False)
    assert isinstance(ended, Finished)
    assert ended.state == FAILED
    assert "case.toml" in ended.message


def test_evidence_by_url_is_copied_once_and_mended(case: Path, tmp_path: Path) -> None:
    import fsspec

    storage = fsspec.filesystem("memory")
    storage.store.clear()
    storage.pipe_file("/bucket/case/case.toml", (case / "case.toml").read_bytes())
    storage.pipe_file("/bucket/case/oil/lab.csv", b"a,b\n")
    folder = fetched("memory://bucket/case", tmp_path)
    assert (folder / "oil" / "lab.csv").read_bytes() == b"a,b\n"
    (folder / "oil" / "lab.csv").write_bytes(b"x,y\n")  # same length
    assert (fetched("memory://bucket/case", tmp_path) / "oil" / "lab.csv").read_bytes() == b"a,b\n"
    storage.rm_file("/bucket/case/oil/lab.csv")
    assert not (fetched("memory://bucket/case", tmp_path) / "oil" / "lab.csv").exists()


def test_a_killed_run_leaves_the_old_report_and_the_next_sweeps(
    case: Path, tmp_path: Path
) -> None:
    from rca.runner.report_folder import sweep

    copy = shutil.copytree(case, tmp_path / "case")
    before = (copy / "report" / "record.json").read_bytes()
    root = Path(__file__).resolve().parents[2]
    process = subprocess.Popen(command(copy), cwd=root, start_new_session=True)
    deadline = time.monotonic() + 60
    while not list(copy.glob(".report.*.partial")) and time.monotonic() < deadline:
        time.sleep(0.02)
    os.kill(process.pid, signal.SIGKILL)
    process.wait()
    assert list(copy.glob(".report.*.partial"))
    assert (copy / "report" / "record.json").read_bytes() == before
    sweep(copy / "report")
    assert not list(copy.glob(".report.*"))
