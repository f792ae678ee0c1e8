"""``rca check CASE``: what is usable, what is wrong and how to mend it, what is missing."""

import json
import sys
from pathlib import Path

import click
from rich.console import Console
from rich.markup import escape

from rca.base.errors import Problem, Severity

MARKS = {
    Severity.ERROR: ("wrong", "red"),
    Severity.WARNING: ("look", "yellow"),
    Severity.NOTE: ("note", "cyan"),
}


@click.command()
@click.argument("case", type=click.Path(path_type=Path))
@click.option("--json", "as_json", is_flag=True, help="Print everything as JSON.")
def command(case: Path, as_json: bool) -> None:
    """Say what of CASE is usable, what is wrong and how to mend it, and what each gap costs.

    Exit status: 0 no errors, 1 errors found, 2 could not be done.
    """
    from rca.intake.survey import survey

    found = survey(case)
    errors = [p for p in found.problems if p.severity is Severity.ERROR]
    if as_json:
        print(json.dumps(found.plain(), indent=2, ensure_ascii=False))
    else:
        _screen(found.usable, found.problems, found.gaps, found.proposals)
    if found.unusable:
        sys.exit(2)
    sys.exit(1 if errors else 0)


def _screen(
    usable: tuple[str, ...],
    problems: tuple[Problem, ...],
    gaps: tuple[tuple[str, str], ...],
    proposals: tuple[str, ...],
) -> None:
    screen = Console(highlight=False)
    if usable:
        screen.print("[bold]Usable[/bold]")
    for line in usable:
        screen.print(f"  [green]ok[/green]     {escape(line)}")
    if problems:
        screen.print("\n[bold]To mend or look at[/bold]")
    for problem in sorted(problems, key=lambda p: list(MARKS).index(p.severity)):
        word, colour = MARKS[problem.severity]
        where = f"{problem.file}: {problem.place}" if problem.place else problem.file
        screen.print(f"  [{colour}]{word:<6}[/{colour}] [bold]{escape(where)}[/bold]")
        screen.print(f"         found {escape(problem.found)}")
        screen.print(f"         expected {escape(problem.expected)}")
        screen.print(f"         mend: {escape(problem.mend)}")
    if proposals:
        screen.print("\n[bold]Lines to confirm and paste into case.toml[/bold]")
        for line in proposals:
            screen.print(f"  {escape(line)}")
    if gaps:
        screen.print("\n[bold]Missing, and what it costs the verdict[/bold]")
    for missing, cost in gaps:
        screen.print(f"  [cyan]gap[/cyan]    {escape(missing)}: {escape(cost)}")
    errors = sum(p.severity is Severity.ERROR for p in problems)
    words = "no errors" if not errors else f"{errors} error{'s' if errors > 1 else ''}"
    screen.print(f"\n{words}, {len(problems) - errors} to look at, {len(gaps)} gaps.")
