"""A notebook opened by hand: where its results go, and the earlier notebooks it builds on.

The store lies under the user's temporary folder and belongs to one state of the case and of this
package: after a change in either, nothing stale is found. What a notebook builds on is run first
where nobody ran it, or where what it builds on itself was run later; the shipped notebooks do that
with their own defaults. To try another parameter in an earlier stage, run that notebook by hand
before.
"""

import hashlib
import json
import os
import tempfile
from collections.abc import Iterator, Mapping, Sequence
from pathlib import Path
from typing import Any

from IPython.utils.capture import capture_output

import rca
from rca.archive.environment import hashed
from rca.archive.store import Store
from rca.base.errors import NotebookError
from rca.base.shipped import shipped_folder
from rca.case.model import Case


def store_by_hand(folder: Path, case: Case) -> Store:
    """The store of this case as it is now, for this user and this package."""
    state = {
        "user": os.getuid() if hasattr(os, "getuid") else None,
        "folder": str(folder),
        "evidence": {one.file: one.sha256 for one in case.files},
        "code": hashed(Path(rca.__file__).parent, (".py", ".toml", ".json")),
    }
    digest = hashlib.sha256(json.dumps(state, sort_keys=True).encode()).hexdigest()[:16]
    return Store(Path(tempfile.gettempdir()) / f"rca-by-hand-{digest}")


def run_missing(stages: Sequence[str], store: Store, folder: Path) -> None:
    """Run the shipped notebooks of stages the store lacks or holds stale, each after its needs.

    Raises NotebookError for a stage no shipped notebook stores.
    """
    shipped = _shipped()
    for stage in _in_order(stages, shipped):
        path, notebook = shipped[stage]
        written = store.written_ns(stage)
        needs = notebook["metadata"]["rca"]["needs"]
        if written is None or any((store.written_ns(need) or 0) > written for need in needs):
            print(f"Running {path.name} first: this notebook builds on it.")  # noqa: T201
            _run(path, notebook, store, folder)


def _shipped() -> dict[str, tuple[Path, Mapping[str, Any]]]:
    """The shipped notebooks by the stage they store."""
    found = {}
    for path in sorted(shipped_folder("notebooks").glob("*.ipynb")):
        notebook = json.loads(path.read_text(encoding="utf-8"))
        found[notebook["metadata"]["rca"]["stage"]] = (path, notebook)
    return found


def _in_order(
    stages: Sequence[str], shipped: Mapping[str, tuple[Path, Mapping[str, Any]]]
) -> Iterator[str]:
    for stage in stages:
        if stage not in shipped:
            raise NotebookError(
                f"this notebook builds on {stage!r}, which no shipped notebook stores; "
                f"known stages are {', '.join(sorted(shipped))}. Run the notebook that stores it "
                "first, with the same store_dir."
            )
        yield from _in_order(shipped[stage][1]["metadata"]["rca"]["needs"], shipped)
        yield stage


def _run(path: Path, notebook: Mapping[str, Any], store: Store, folder: Path) -> None:
    """Run the code cells of a shipped notebook here, silently."""
    names: dict[str, Any] = {}
    with capture_output():
        for number, cell in enumerate(notebook["cells"]):
            if cell["cell_type"] == "code":
                code = compile("".join(cell["source"]), f"{path.name}, cell {number}", "exec")
                exec(code, names)  # noqa: S102 - shipped code, never from a case
            if "parameters" in cell["metadata"].get("tags", ()):
                names |= {"case_dir": str(folder), "store_dir": str(store.folder)}
