"""``rca check CASE``: what is usable, what is wrong and how to mend it, what is missing."""

import json
import sys
from pathlib import Path
from typing import TYPE_CHECKING

import click
from rich.console import Console
from rich.padding import Padding
from rich.text import Text

from rca.base.errors import Problem, Severity

if TYPE_CHECKING:
    from rca.intake.survey import Survey

MARKS = {
    Severity.ERROR: ("wrong", "red"),
    Severity.WARNING: ("look", "yellow"),
    Severity.NOTE: ("note", "cyan"),
}
MOST_ALIKE = 3  # problems of one kind in one file that are shown; the rest are counted
WIDE = 4000  # where no terminal wraps, lines stay whole


@click.command()
@click.argument("case", type=click.Path(path_type=Path))
@click.option("--all", "everything", is_flag=True, help="Show every problem, however alike.")
@click.option("--json", "as_json", is_flag=True, help="Print everything as JSON.")
def command(case: Path, everything: bool, as_json: bool) -> None:
    """Say what of CASE is usable, what is wrong and how to mend it, and what each gap costs.

    Exit status: 0 no errors, 1 errors found, 2 could not be done.
    """
    from rca.intake.survey import survey

    found = survey(case)
    if as_json:
        print(json.dumps(found.plain(), indent=2, ensure_ascii=False))
    else:
        _screen(found, most=len(found.problems) if everything else MOST_ALIKE)
    if found.unusable:
        sys.exit(2)
    sys.exit(1 if found.errors else 0)


class _Screen:
    """Marked lines; wrapped and coloured on a terminal, whole and plain elsewhere."""

    def __init__(self) -> None:
        console = Console(highlight=False)
        self.console = console if console.is_terminal else Console(highlight=False, width=WIDE)

    def head(self, words: str, *, first: bool = False) -> None:
        self.console.print(Text(words if first else f"\n{words}", style="bold"))

    def line(self, mark: str, colour: str, words: str, *more: str, bold: bool = False) -> None:
        start = Text(f"{mark:<7}", style=colour)
        self.console.print(
            Padding(start + Text(words, style="bold" if bold else ""), (0, 0, 0, 2), expand=False)
        )
        for one in more:
            self.console.print(Padding(Text(one), (0, 0, 0, 9), expand=False))


def _screen(found: "Survey", *, most: int) -> None:
    from rca.intake.survey import counted

    screen = _Screen()
    if found.usable:
        screen.head("Usable", first=True)
    for part in found.usable:
        screen.line("ok", "green", f"{part.part}: {part.detail}")
    if found.problems:
        screen.head("To mend or look at", first=not found.usable)
    for problem, alike in _grouped(found.problems, most):
        word, colour = MARKS[problem.severity]
        where = f"{problem.file}: {problem.place}" if problem.place else problem.file
        detail = [f"found {problem.found}, expected {problem.expected}", problem.mend]
        if alike:
            detail.append(f"and {counted(alike, 'other')} like it (--all shows them)")
        screen.line(word, colour, where, *detail, bold=True)
    if found.contradictions:
        screen.head("What speaks against itself")
    for words in found.contradictions:
        screen.line("look", "yellow", words)
    if found.proposals:
        screen.head("Lines to confirm and paste into case.toml")
        for line in found.proposals:
            screen.console.print(Text(f"  {line}"), soft_wrap=True)
    if found.gaps:
        screen.head("Missing, and what it costs the verdict")
    for missing, cost in found.gaps:
        screen.line("gap", "cyan", missing, cost)
    errors = counted(found.errors, "error") if found.errors else "No errors"
    looks = len(found.problems) - found.errors + len(found.contradictions)
    screen.head(f"{errors}, {looks} to look at, {counted(len(found.gaps), 'gap')}.")
    if found.errors:
        screen.console.print("rca report can't run before the errors are mended.")


def _grouped(problems: tuple[Problem, ...], most: int) -> list[tuple[Problem, int]]:
    """Errors first; of problems alike in file and expectation, the first few and a count."""
    order = sorted(problems, key=lambda p: list(MARKS).index(p.severity))
    kinds: dict[tuple[Severity, str, str], list[Problem]] = {}
    for problem in order:
        kinds.setdefault((problem.severity, problem.file, problem.expected), []).append(problem)
    shown = []
    for alike in kinds.values():
        left = len(alike) - most
        shown += [(p, 0) for p in alike[: most - 1 if left > 0 else most]]
        if left > 0:
            shown.append((alike[most - 1], left))
    return shown
