"""A notebook calls and shows; it holds no logic, no outputs and no path of a machine."""

import ast
import json
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[2]
NOTEBOOKS = sorted((ROOT / "notebooks").glob("*.ipynb"))
BANNED = (
    ast.FunctionDef,
    ast.AsyncFunctionDef,
    ast.ClassDef,
    ast.Lambda,
    ast.For,
    ast.While,
    ast.If,
    ast.Try,
    ast.With,
    ast.ListComp,
    ast.DictComp,
)


def cells(path: Path) -> list[dict]:
    return [c for c in json.loads(path.read_text())["cells"] if c["cell_type"] == "code"]


def test_every_stage_has_its_notebook() -> None:
    stages = [json.loads(p.read_text())["metadata"]["rca"]["stage"] for p in NOTEBOOKS]
    assert stages == [
        "intake",
        "oil",
        "records",
        "suction",
        "discharge",
        "damage",
        "verdict",
        "actions",
        "overview",
    ]


@pytest.mark.parametrize("path", NOTEBOOKS, ids=lambda p: p.name)
def test_notebook_has_one_parameters_cell_and_no_output(path: Path) -> None:
    tagged = [c for c in cells(path) if "parameters" in c["metadata"].get("tags", [])]
    assert len(tagged) == 1
    assert all(c["outputs"] == [] and c["execution_count"] is None for c in cells(path))


@pytest.mark.parametrize("path", NOTEBOOKS, ids=lambda p: p.name)
def test_notebook_holds_no_logic(path: Path) -> None:
    for cell in cells(path):
        source = "".join(cell["source"])
        tree = ast.parse(source)
        imports = [n for n in ast.walk(tree) if isinstance(n, ast.Import | ast.ImportFrom)]
        assert all(getattr(n, "module", "") == "rca.notebook" for n in imports)
        # a generator that picks the parts of a pair is the one expression allowed
        assert not [n for n in ast.walk(tree) if isinstance(n, BANNED)]
        assert len(tree.body) <= 7
        assert "/home/" not in source
