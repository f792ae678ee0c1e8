"""The runner: parameters, isolation, failures, folders that appear whole or not at all."""

import os
from pathlib import Path

import nbformat
import pytest
from nbformat.v4 import new_code_cell, new_notebook

from rca.base.errors import ArchiveError, NotebookError, ParameterError
from rca.runner.execute import check_notebook, run_notebook
from rca.runner.plan import plan
from rca.runner.report_folder import sweep, whole_folder
from rca.runner.warm_process import WarmProcess

pytestmark = pytest.mark.notebook


def notebook(
    folder: Path,
    *cells: str,
    parameters: str = 'a: int = 1\nb: str = "x"',
    name: str = "n.ipynb",
    stage: str = "s",
    needs: tuple[str, ...] = (),
) -> Path:
    book = new_notebook(
        cells=[
            new_code_cell(parameters, metadata={"tags": ["parameters"]}),
            *map(new_code_cell, cells),
        ],
        metadata={"rca": {"stage": stage, "needs": list(needs)}},
    )
    path = folder / name
    nbformat.write(book, path)
    return path


@pytest.fixture(scope="module")
def warm():
    with WarmProcess() as process:
        yield process


def run(path: Path, warm: WarmProcess | None, timeout: float = 60.0, **parameters: object):
    out = path.with_name("{out}") / path.name
    run_notebook(
        path, parameters, output=out, folder=path.parent, warm=warm, seed=1, cell_timeout_s=timeout
    )
    return nbformat.read(out, as_version=4)


def outputs(book) -> list[str]:
    return [
        "".join(o.get("text", "") or o.get("data", {}).get("text/plain", "") for o in c.outputs)
        for c in book.cells
        if c.cell_type == "code"
    ]


def test_a_forked_notebook_gives_what_a_kernel_gives(tmp_path: Path, warm: WarmProcess) -> None:
    path = notebook(tmp_path, "print(a, b)", "a + 1", "import os; os.path.basename(os.getcwd())")
    assert outputs(run(path, warm, a=5)) == outputs(run(path, None, a=5))


def test_nothing_leaks_from_one_notebook_to_the_next(tmp_path: Path, warm: WarmProcess) -> None:
    first = notebook(tmp_path, "import os; os.environ['LEFT'] = 'over'; left = 1", name="1.ipynb")
    second = notebook(
        tmp_path, "import os; ('left' in globals(), 'LEFT' in os.environ)", name="2.ipynb"
    )
    run(first, warm)
    assert outputs(run(second, warm))[-1] == "(False, False)"


@pytest.mark.parametrize(
    ("cell", "words"),
    [
        ("1/0", "which begins '1/0'.*ZeroDivisionError"),
        ("exit()", "failed with"),
        ("import sys; sys.exit(0)", "SystemExit"),
        ("import os; os._exit(0)", "process ended"),
        ("import os, signal; os.kill(os.getpid(), signal.SIGKILL)", "process ended"),
        ("import time; time.sleep(30)", "longer than 2 s"),
    ],
)
def test_a_failing_cell_is_named_and_the_notebook_kept(
    tmp_path: Path, warm: WarmProcess, cell: str, words: str
) -> None:
    path = notebook(tmp_path, cell, "print('after')")
    with pytest.raises(NotebookError, match=words):
        run(path, warm, timeout=2.0)
    kept = nbformat.read(tmp_path / "{out}" / "n.ipynb", as_version=4)
    assert "after\n" not in outputs(kept)


@pytest.mark.parametrize(
    ("given", "words"),
    [
        ({"aa": 1}, "no parameter 'aa'; did you mean a"),
        ({"a": "1"}, "expects int, found str"),
        ({"a": True}, "expects int, found bool"),
        ({"b": 3}, "expects str, found int"),
        ({"a": Path("x")}, "expects int"),
    ],
)
def test_parameters_that_do_not_fit_are_refused(tmp_path: Path, given: dict, words: str) -> None:
    with pytest.raises(ParameterError, match=words):
        check_notebook(notebook(tmp_path, "a"), given)


@pytest.mark.parametrize(
    "cell",
    ["a = 1", "a: int = open('x')", "a: list = []", "import os", "a: int = 'x'", "a: int ="],
)
def test_a_parameters_cell_of_another_shape_is_refused(tmp_path: Path, cell: str) -> None:
    with pytest.raises(ParameterError, match=r"parameters cell|declared|literal"):
        check_notebook(notebook(tmp_path, "1", parameters=cell), {})


def test_code_in_a_parameter_stays_text(tmp_path: Path, warm: WarmProcess) -> None:
    evil = '"; import os; os._exit(1) #\\ {x}\n'
    assert outputs(run(notebook(tmp_path, "b"), warm, b=evil))[-1] == repr(evil)


def test_the_plan_follows_needs_and_refuses_circles(tmp_path: Path) -> None:
    notebook(tmp_path, "1", name="1.ipynb", stage="late", needs=("early",))
    notebook(tmp_path, "1", name="2.ipynb", stage="early")
    assert [s.stage for s in plan(tmp_path, None)] == ["early", "late"]
    notebook(tmp_path, "1", name="2.ipynb", stage="early", needs=("late",))
    with pytest.raises(NotebookError, match="circle"):
        plan(tmp_path, None)
    notebook(tmp_path, "1", name="2.ipynb", stage="early", needs=("never",))
    with pytest.raises(NotebookError, match="no notebook stores"):
        plan(tmp_path, None)


def test_a_sites_own_notebook_takes_the_place_of_the_shipped_one(tmp_path: Path) -> None:
    shipped, own = tmp_path / "shipped", tmp_path / "own"
    shipped.mkdir()
    own.mkdir()
    notebook(shipped, "1", name="1.ipynb", stage="oil")
    mine = notebook(own, "1", name="x.ipynb", stage="oil")
    notebook(own, "1", name="y.ipynb", stage="extra", needs=("oil",))
    steps = plan(shipped, own)
    assert [(s.stage, s.own) for s in steps] == [("oil", True), ("extra", True)]
    assert steps[0].path == mine


# --- the report folder


def test_the_folder_appears_whole(tmp_path: Path) -> None:
    out = tmp_path / "report"
    with whole_folder(out) as building:
        (building / "results.json").write_text("{}")
        assert not out.exists()
    assert (out / "results.json").read_text() == "{}"
    assert [p.name for p in tmp_path.iterdir()] == ["report"]


def test_a_failed_run_leaves_the_old_report(tmp_path: Path) -> None:
    out = tmp_path / "report"
    out.mkdir()
    (out / "results.json").write_text("old")
    with pytest.raises(ZeroDivisionError), whole_folder(out) as building:
        (building / "results.json").write_text("new")
        raise ZeroDivisionError
    assert (out / "results.json").read_text() == "old"
    assert [p.name for p in tmp_path.iterdir()] == ["report"]


def test_what_a_dead_run_left_is_swept_and_restored(tmp_path: Path) -> None:
    out = tmp_path / "report"
    dead = 2**22 + 12345
    (tmp_path / f".report.{dead}.partial").mkdir()
    (tmp_path / f".report.{dead}.old").mkdir()
    (tmp_path / f".report.{dead}.old" / "results.json").write_text("old")
    (tmp_path / f".report.{os.getppid()}.partial").mkdir()
    sweep(out)
    assert (out / "results.json").read_text() == "old"
    assert sorted(p.name for p in tmp_path.iterdir()) == [
        f".report.{os.getppid()}.partial",
        "report",
    ]


def test_a_folder_that_is_no_report_is_not_replaced(tmp_path: Path) -> None:
    out = tmp_path / "holiday"
    out.mkdir()
    (out / "photo.jpg").write_text("mine")
    with pytest.raises(ArchiveError, match="not replaced"), whole_folder(out):
        pass
    assert (out / "photo.jpg").exists()
