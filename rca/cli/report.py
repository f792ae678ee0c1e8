"""``rca report CASE…``: run the notebooks, render the report; many cases at once too."""

import json
import sys
import time
from contextlib import ExitStack
from pathlib import Path
from typing import Any

import click
from rich.console import Console
from rich.progress import BarColumn, Progress, SpinnerColumn, TextColumn, TimeElapsedColumn

from rca.base.counted import counted
from rca.base.errors import CaseError, ParameterError, RcaError


@click.command()
@click.argument("cases", metavar="CASE...", nargs=-1, required=True)
@click.option(
    "--out",
    type=click.Path(path_type=Path),
    help="Report folder [CASE/report]; for several cases the folder their reports go to.",
)
@click.option(
    "--notebooks",
    type=click.Path(path_type=Path),
    help="A folder of a site's own notebooks, edited or added.",
)
@click.option("--fresh-kernels", is_flag=True, help="A fresh Jupyter kernel for each notebook.")
@click.option(
    "--jobs",
    type=click.IntRange(1, 256),
    default=2,
    show_default=True,
    help="Notebooks at a time; of several cases, cases at a time.",
)
@click.option(
    "--parameters",
    default="{}",
    metavar="JSON",
    help="Notebook parameters, e.g. '{\"samples\": 8192}'.",
)
@click.option("--paper", type=click.Choice(["A4", "Letter"]), help="Paper [as case.toml says].")
@click.option("--language", type=click.Choice(["en", "de"]), help="Language [as case.toml says].")
@click.option("--reason", default="", help="Why the report is issued again; printed in it.")
@click.option("--scheduler", default="", metavar="ADDRESS", help="Run on this Dask cluster.")
@click.option("--again", is_flag=True, help="Of several cases, also run those already done.")
@click.option("--json", "as_json", is_flag=True, help="Print the outcome as JSON.")
def command(
    cases: tuple[str, ...],
    out: Path | None,
    notebooks: Path | None,
    fresh_kernels: bool,
    jobs: int,
    parameters: str,
    paper: str | None,
    language: str | None,
    reason: str,
    scheduler: str,
    again: bool,
    as_json: bool,
) -> None:
    """Run the notebooks on each CASE and write its report folder.

    CASE is a folder, or a URL such as s3://bucket/case (then with --out). A folder appears whole
    or not at all. Several cases run side by side; those already done are not run again, and a
    broken one does not stop the others. Exit status: 0 done, 2 one or more could not be done.
    """
    fresh = fresh_kernels or sys.platform == "win32"
    screen = Console(stderr=True)
    given: dict[str, Any] = {
        "notebooks": notebooks,
        "fresh_kernels": fresh,
        "jobs": jobs,
        "paper": paper or "",
        "language": language or "",
        "reason": reason,
    }
    try:
        if len(cases) == 1 and not scheduler and "://" not in cases[0]:
            _one(Path(cases[0]), out, given, parameters, screen, as_json=as_json)
        else:
            _many(cases, out, given, parameters, scheduler, screen, again=again, as_json=as_json)
    except CaseError as error:
        found = counted(len(error.problems), "problem")
        screen.print(f"The case can't be used; {found}:", style="bold")
        for problem in error.problems:
            screen.print(f"  {problem}", markup=False, highlight=False)
        screen.print("Look at all of it with:  rca check CASE")
        sys.exit(2)
    except RcaError as error:
        screen.print(str(error), markup=False, highlight=False)
        sys.exit(2)


def _one(
    case: Path,
    out: Path | None,
    given: dict[str, Any],
    parameters: str,
    screen: Console,
    *,
    as_json: bool,
) -> None:
    from rca.runner.warm_process import WarmProcess

    started = time.monotonic()
    with ExitStack() as stack, _progress(screen) as bar:
        task = bar.add_task("reading the case", total=None)
        # started before the libraries are imported here, so that both import at once
        warm = None if given["fresh_kernels"] else stack.enter_context(WarmProcess())
        from rca.runner.execute import parameters_from_json
        from rca.runner.run import Options, report_case

        def tell(stage: str, what: str) -> None:
            words = {"start": "running", "done": "done", "failed": "failed"}[what]
            bar.update(task, description=f"{stage}: {words}")

        options = Options(**given, parameters=parameters_from_json(parameters))
        target = out if out is not None else case / "report"
        outcome = report_case(case, target, options, tell, warm=warm)
    _tell(outcome, as_json=as_json, seconds=time.monotonic() - started)
    if outcome.rendered.pdf is None:
        screen.print(outcome.rendered.advice, markup=False, highlight=False)
        sys.exit(2)


def _many(
    cases: tuple[str, ...],
    out: Path | None,
    given: dict[str, Any],
    parameters: str,
    scheduler: str,
    screen: Console,
    *,
    again: bool,
    as_json: bool,
) -> None:
    from rca.runner.batch import FAILED, Finished, Job, run_batch
    from rca.runner.execute import parameters_from_json
    from rca.runner.run import Options

    started = time.monotonic()
    jobs = [Job(case=case, out=place) for case, place in _places(cases, out)]
    options = Options(**given, parameters=parameters_from_json(parameters))
    count = 0

    def tell(one: Finished) -> None:
        nonlocal count
        count += 1
        words = one.message.splitlines()[0] if one.message else one.side
        screen.print(
            f"{count}/{len(jobs)}  {one.case}: {one.state}: {words} ({one.seconds:.0f} s)",
            markup=False,
            highlight=False,
        )

    ended = run_batch(
        jobs,
        options,
        workers=int(given["jobs"]),
        tell=tell,
        scheduler=scheduler,
        again=again,
    )
    failed = [one for one in ended if one.state == FAILED]
    if as_json:
        names = ("case", "out", "state", "side", "seconds", "message")
        rows = [{name: getattr(one, name) for name in names} for one in ended]
        print(json.dumps({"cases": rows, "failed": len(failed)}, ensure_ascii=False))
    else:
        wall = time.monotonic() - started
        states = [one.state for one in ended]
        told = ", ".join(f"{states.count(state)} {state}" for state in dict.fromkeys(states))
        print(f"{counted(len(ended), 'case')} in {wall:.0f} s: {told}.")
        for one in failed:
            print(f"  {one.case}: {one.message}")
    sys.exit(2 if failed else 0)


def _places(cases: tuple[str, ...], out: Path | None) -> list[tuple[str, Path]]:
    """Each case with the folder its report goes to; no two may share one."""
    places: dict[Path, str] = {}
    for case in cases:
        remote = "://" in case
        if remote and out is None:
            raise ParameterError(f"{case} is a URL; say with --out where its report goes")
        name = case.rstrip("/").rsplit("/", 1)[-1] if remote else Path(case).resolve().name
        whole = case if remote else str(Path(case).resolve())
        place = (out.resolve() / name) if out is not None else Path(whole) / "report"
        if place in places:
            raise ParameterError(
                f"the reports of {places[place]} and {case} would both go to {place}"
            )
        places[place] = whole
    return [(case, place) for place, case in places.items()]


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


def _tell(outcome: object, *, as_json: bool, seconds: float) -> None:
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
