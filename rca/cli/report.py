"""``rca report CASE``: run the notebooks, render the report."""

import json
import sys
import time
from pathlib import Path

import click
from rich.console import Console
from rich.progress import BarColumn, Progress, SpinnerColumn, TextColumn, TimeElapsedColumn

from rca.base.errors import CaseError, RcaError


@click.command()
@click.argument("case", type=click.Path(path_type=Path))
@click.option("--out", type=click.Path(path_type=Path), help="Report folder [CASE/report].")
@click.option(
    "--notebooks",
    type=click.Path(path_type=Path),
    help="A folder of a site's own notebooks, edited or added.",
)
@click.option("--fresh-kernels", is_flag=True, help="A fresh Jupyter kernel for each notebook.")
@click.option(
    "--jobs", type=click.IntRange(1, 64), default=2, show_default=True, help="Notebooks at a time."
)
@click.option(
    "--parameters",
    default="{}",
    metavar="JSON",
    help="Notebook parameters, e.g. '{\"samples\": 8192}'.",
)
@click.option("--paper", type=click.Choice(["A4", "Letter"]), default="A4", show_default=True)
@click.option("--json", "as_json", is_flag=True, help="Print the outcome as JSON.")
def command(
    case: Path,
    out: Path | None,
    notebooks: Path | None,
    fresh_kernels: bool,
    jobs: int,
    parameters: str,
    paper: str,
    as_json: bool,
) -> None:
    """Run the notebooks on CASE and write its report folder.

    The folder appears whole or not at all. Exit status: 0 done, 2 could not be done.
    """
    started = time.monotonic()
    screen = Console(stderr=True)
    try:
        from rca.runner.execute import parameters_from_json
        from rca.runner.run import Options, report_case

        options = Options(
            notebooks=notebooks,
            fresh_kernels=fresh_kernels or sys.platform == "win32",
            jobs=jobs,
            parameters=parameters_from_json(parameters),
            paper=paper,
        )
        target = out if out is not None else case / "report"
        with _progress(screen) as bar:
            task = bar.add_task("reading the case", total=None)

            def tell(stage: str, what: str) -> None:
                words = {"start": "running", "done": "done", "failed": "failed"}[what]
                bar.update(task, description=f"{stage}: {words}")

            outcome = report_case(case, target, options, tell)
    except CaseError as error:
        screen.print(f"The case can't be used; {len(error.problems)} problems:", style="bold")
        for problem in error.problems:
            screen.print(f"  {problem}", markup=False, highlight=False)
        screen.print("Look at all of it with:  rca check CASE")
        sys.exit(2)
    except RcaError as error:
        screen.print(str(error), markup=False, highlight=False)
        sys.exit(2)
    _tell(screen, outcome, as_json=as_json, seconds=time.monotonic() - started)
    if outcome.rendered.pdf is None:
        screen.print(outcome.rendered.advice, markup=False, highlight=False)
        sys.exit(2)


def _progress(screen: Console) -> Progress:
    return Progress(
        SpinnerColumn(),
        TextColumn("{task.description}"),
        BarColumn(bar_width=20),
        TimeElapsedColumn(),
        console=screen,
        transient=True,
        disable=not screen.is_terminal,
    )


def _tell(screen: Console, outcome: object, *, as_json: bool, seconds: float) -> None:
    from rca.report.view import side_words
    from rca.runner.run import Outcome

    assert isinstance(outcome, Outcome)
    verdict = outcome.results["verdict"]
    if as_json:
        print(
            json.dumps(
                {
                    "report": str(outcome.folder),
                    "side": verdict["side"],
                    "sides": verdict["sides"],
                    "pdf": outcome.rendered.pdf is not None,
                }
            )
        )
        return
    name = "report.pdf" if outcome.rendered.pdf is not None else "report.html"
    print(f"Finding: {side_words(outcome.results)}")
    print(verdict["words"]["finding"])
    print(f"Could be wrong: {verdict['words']['biggest_doubt']}")
    print(f"Report: {outcome.folder / name}   ({seconds:.0f} s)")
    del screen
