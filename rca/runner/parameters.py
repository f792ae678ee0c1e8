"""The parameters cell of a notebook: read without running it, and held against what is given.

papermill only logs an unknown parameter and runs on, and it checks no types; here both are
refused before anything runs. Only text, whole numbers, numbers and yes/no may be given: papermill
writes other values into the cell as source.
"""

import ast
import difflib
from collections.abc import Mapping
from dataclasses import dataclass

from nbformat import NotebookNode

from rca.base.errors import ParameterError

Value = str | int | float | bool
_KINDS: dict[str, type] = {"str": str, "int": int, "float": float, "bool": bool}


@dataclass(frozen=True, slots=True, kw_only=True)
class Parameter:
    """One annotated assignment of the parameters cell."""

    name: str
    kind: str  # "str", "int", "float" or "bool"
    default: Value


def declared_parameters(notebook: NotebookNode, name: str) -> tuple[Parameter, ...]:
    """The parameters a notebook declares.

    Raises ParameterError unless there is exactly one cell tagged ``parameters`` that holds only
    annotated literals such as ``case_dir: str = "../sample_case"``.
    """
    cells = [
        cell
        for cell in notebook.cells
        if cell.cell_type == "code" and "parameters" in cell.metadata.get("tags", ())
    ]
    if len(cells) != 1:
        raise ParameterError(
            f"{name}: found {len(cells)} cells tagged 'parameters', expected exactly one. "
            "Tag the first code cell in JupyterLab's property inspector."
        )
    try:
        tree = ast.parse(cells[0].source)
    except SyntaxError as error:
        raise ParameterError(
            f"{name}: the parameters cell is not Python: {error.msg} in line {error.lineno}"
        ) from error
    return tuple(_parameter(node, name) for node in tree.body)


def checked_parameters(
    declared: tuple[Parameter, ...], given: Mapping[str, object], name: str
) -> dict[str, Value]:
    """The given values, proved to fit what the notebook declares.

    Raises ParameterError naming every unknown name and every value of another type.
    """
    known = {parameter.name: parameter for parameter in declared}
    complaints: list[str] = []
    fitting: dict[str, Value] = {}
    for key, value in given.items():
        if key not in known:
            near = difflib.get_close_matches(key, known, n=3)
            hint = f"did you mean {', '.join(near)}?" if near else f"it has {', '.join(known)}."
            complaints.append(f"{name} has no parameter {key!r}; {hint}")
            continue
        kind = known[key].kind
        if kind == "float" and type(value) is int:
            value = float(value)  # noqa: PLW2901  a whole number is a number
        if not isinstance(value, str | int | float | bool) or type(value) is not _KINDS[kind]:
            complaints.append(
                f"{name}: parameter {key!r} expects {kind}, found {type(value).__name__} {value!r}"
            )
            continue
        fitting[key] = value
    if complaints:
        raise ParameterError("\n".join(complaints))
    return fitting


def _parameter(node: ast.stmt, name: str) -> Parameter:
    if not (
        isinstance(node, ast.AnnAssign)
        and isinstance(node.target, ast.Name)
        and isinstance(node.annotation, ast.Name)
        and node.annotation.id in _KINDS
        and node.value is not None
    ):
        raise ParameterError(
            f"{name}: line {node.lineno} of the parameters cell is {ast.unparse(node)!r}; "
            "expected an annotated literal such as  samples: int = 4096  "
            f"with one of the types {', '.join(_KINDS)}"
        )
    kind = node.annotation.id
    try:
        default = ast.literal_eval(node.value)
    except ValueError as error:
        raise ParameterError(
            f"{name}: the default of {node.target.id!r} is not a literal"
        ) from error
    if kind == "float" and type(default) is int:
        default = float(default)
    if not isinstance(default, str | int | float | bool) or type(default) is not _KINDS[kind]:
        raise ParameterError(
            f"{name}: {node.target.id!r} is declared {kind} but its default is {default!r}"
        )
    return Parameter(name=node.target.id, kind=kind, default=default)
