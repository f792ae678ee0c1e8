"""One notebook, run through papermill with checked parameters and a success check of our own."""

import json
from collections.abc import Mapping
from pathlib import Path
from typing import Any

import nbformat
from nbformat import NotebookNode
from nbformat.reader import NotJSONError
from papermill.engines import papermill_engines
from papermill.exceptions import PapermillException, PapermillExecutionError
from papermill.execute import execute_notebook

from rca.base.errors import NotebookError, ParameterError
from rca.runner.fork_engine import ForkEngine
from rca.runner.parameters import checked_parameters, declared_parameters
from rca.runner.warm_process import WarmProcess

ENGINE = "rca-fork"
papermill_engines.register(ENGINE, ForkEngine)


def read_notebook(path: Path) -> NotebookNode:
    """A notebook file.

    Raises NotebookError where it is no notebook.
    """
    try:
        book: NotebookNode = nbformat.read(path, as_version=4)
    except (OSError, NotJSONError, nbformat.ValidationError, AttributeError, KeyError) as error:
        raise NotebookError(
            f"{path.name} is not a notebook of format 4: {error}. Open and save it in JupyterLab."
        ) from error
    return book


def check_notebook(path: Path, parameters: Mapping[str, object]) -> None:
    """Refuse a notebook whose parameters don't take the given values, before anything runs."""
    name = path.name
    checked_parameters(declared_parameters(read_notebook(path), name), parameters, name)


def run_notebook(
    path: Path,
    parameters: Mapping[str, object],
    *,
    output: Path,
    folder: Path,
    warm: WarmProcess | None,
    seed: int,
    cell_timeout_s: float,
) -> None:
    """Run a notebook and keep it, executed, at ``output``; kept also where a cell fails.

    With ``warm`` None a fresh kernel runs it. ``folder`` is the empty folder it runs in.
    Raises NotebookError naming notebook and cell, ParameterError for parameters that don't fit.
    """
    source = read_notebook(path)
    fitting = checked_parameters(declared_parameters(source, path.name), parameters, path.name)
    options: dict[str, Any] = {
        "request_save_on_cell_execute": False,
        "progress_bar": False,
        "kernel_name": "python3",
        "language": "python",
    }
    if warm is None:
        options |= {
            "execution_timeout": int(cell_timeout_s),
            "resources": {"metadata": {"path": str(folder)}},
            # a kernel's remark on its own sockets is no message of the notebook
            "extra_arguments": ["--IPKernelApp.log_level=40"],
        }
    else:
        options |= {
            "engine_name": ENGINE,
            "warm": warm,
            "folder": str(folder),
            "seed": seed,
            "cell_timeout_s": cell_timeout_s,
        }
    output.parent.mkdir(parents=True, exist_ok=True)
    # papermill fills a path as a format string; doubled braces stay as they are
    escaped = str(output).replace("{", "{{").replace("}", "}}")
    try:
        execute_notebook(source, escaped, parameters=fitting, **options)
    except PapermillException as error:
        raise NotebookError(f"{path.name}: {_words(error)}") from error
    except (RuntimeError, TimeoutError) as error:  # a kernel that died or never started
        raise NotebookError(f"{path.name}: {error}") from error
    failure = _unfinished(read_notebook(output))
    if failure is not None:
        raise NotebookError(f"{path.name}: {failure}")


def _words(error: PapermillException) -> str:
    if not isinstance(error, PapermillExecutionError):
        return str(error)
    first = next((line for line in error.source.splitlines() if line.strip()), "")
    place = f"cell In [{error.exec_count}], which begins {first.strip()!r},"
    return f"{place} failed with {error.ename}: {error.evalue}"


def _unfinished(notebook: NotebookNode) -> str | None:
    """A run is called complete whose kernel died or left; every code cell must have run."""
    for index, cell in enumerate(notebook.cells):
        if cell.cell_type != "code" or not cell.source.strip():
            continue
        errors = [o for o in cell.outputs if o.output_type == "error"]
        if errors:
            return f"cell {index} failed with {errors[0].ename}: {errors[0].evalue}"
        if cell.execution_count is None:
            return f"cell {index} was not run; the notebook's process ended before it"
    return None


def parameters_from_json(text: str) -> dict[str, object]:
    """Parameters given as one JSON object on the command line.

    Raises ParameterError where the text is no JSON object.
    """
    try:
        plain = json.loads(text)
    except ValueError as error:
        raise ParameterError(f"--parameters is not JSON: {error}") from error
    if not isinstance(plain, dict):
        raise ParameterError("--parameters expects one JSON object of names and values")
    return plain
