"""Which notebooks run, and in what order.

The shipped notebooks are named ``NN_stage.ipynb``. A notebook says in its metadata, under
``rca``, which stage it stores and which stages it needs:

    "rca": {"stage": "suction", "needs": ["records"]}

A site's own folder given with ``--notebooks`` replaces a shipped notebook of the same stage and
adds the others. A notebook lying in a case is never run.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from graphlib import CycleError, TopologicalSorter
from pathlib import Path

from rca.base.errors import NotebookError
from rca.runner.execute import read_notebook


@dataclass(frozen=True, slots=True, kw_only=True)
class Step:
    """One notebook to run."""

    stage: str
    path: Path
    needs: tuple[str, ...]
    own: bool = False  # a site's own notebook


def plan(shipped: Path, own: Path | None) -> tuple[Step, ...]:
    """All notebooks in an order in which each follows what it needs.

    Raises NotebookError for two notebooks of one stage, an unknown need or a cycle.
    """
    steps = {step.stage: step for step in _steps(shipped, own=False)}
    if own is not None:
        if not own.is_dir():
            raise NotebookError(f"--notebooks {own} is not a folder")
        mine = _steps(own, own=True)
        if not mine:
            raise NotebookError(f"--notebooks {own} holds no notebook (*.ipynb)")
        steps |= {step.stage: step for step in mine}
    for step in steps.values():
        unknown = [need for need in step.needs if need not in steps]
        if unknown:
            raise NotebookError(
                f"{step.path.name} needs {', '.join(unknown)}, which no notebook stores; "
                f"known stages are {', '.join(sorted(steps))}"
            )
    return _ordered(list(steps.values()))


def _ordered(steps: Sequence[Step]) -> tuple[Step, ...]:
    by_stage = {step.stage: step for step in sorted(steps, key=lambda s: s.path.name)}
    sorter = TopologicalSorter({stage: step.needs for stage, step in by_stage.items()})
    try:
        return tuple(by_stage[stage] for stage in sorter.static_order())
    except CycleError as error:
        raise NotebookError(
            f"the notebooks need each other in a circle: {' -> '.join(error.args[1])}"
        ) from error


def _steps(folder: Path, *, own: bool) -> list[Step]:
    steps: dict[str, Step] = {}
    for path in sorted(folder.glob("*.ipynb")):
        meta = read_notebook(path).metadata.get("rca", {})
        stage = meta.get("stage")
        needs = meta.get("needs", [])
        if not isinstance(stage, str) or not isinstance(needs, list):
            raise NotebookError(
                f"{path.name}: its metadata has no 'rca' entry that names its stage; expected "
                '"rca": {"stage": "my-stage", "needs": ["records"]} in the notebook metadata'
            )
        if stage in steps:
            raise NotebookError(
                f"{path.name} and {steps[stage].path.name} both store the stage {stage!r}"
            )
        steps[stage] = Step(stage=stage, path=path, needs=tuple(map(str, needs)), own=own)
    return list(steps.values())
