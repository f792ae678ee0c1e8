"""``rca actions DIR…``: corrective actions across cases."""

import json
import sys
from datetime import UTC, date, datetime
from pathlib import Path
from typing import TYPE_CHECKING, Any

import click
from rich.console import Console
from rich.markup import escape
from rich.table import Table

from rca.base.errors import RcaError

if TYPE_CHECKING:
    from rca.compare.case_folders import ActionsFound
    from rca.compare.open_actions import Register

WIDE = 150
COLOURS = {"refuted": "red", "overdue": "red", "due soon": "yellow", "proved": "green"}


@click.command()
@click.argument("places", nargs=-1, required=True, type=click.Path(path_type=Path))
@click.option("--today", type=click.DateTime(["%Y-%m-%d"]), help="Judge as of this day [today].")
@click.option(
    "--soon", type=click.IntRange(0), default=14, show_default=True, help="Days counted as soon."
)
@click.option(
    "--calendar",
    type=click.Path(path_type=Path, dir_okay=False),
    help="Write the due dates of open actions as an iCalendar file.",
)
@click.option("--json", "as_json", is_flag=True, help="Print the register as JSON.")
def command(
    places: tuple[Path, ...],
    today: datetime | None,
    soon: int,
    calendar: Path | None,
    as_json: bool,
) -> None:
    """List the actions of case folders, report folders, bundles or results.json files.

    A case folder is reviewed on the records it holds now; a report gives what it stored.
    Exit status: 0 nothing overdue or refuted, 1 something is, 2 could not be done.
    """
    from rca.compare.case_folders import gather_actions
    from rca.compare.open_actions import register

    day = today.date() if today is not None else datetime.now(UTC).date()
    try:
        found = gather_actions(places, today=day)
        if not found.cases:
            _refused(found)
            click.echo("no usable case or report was found", err=True)
            sys.exit(2)
        made = register(found.cases, today=day, soon_days=soon)
        if calendar is not None:
            calendar.write_bytes(_calendar(made, day))
    except (RcaError, OSError) as error:
        click.echo(str(error), err=True)
        sys.exit(2)
    _refused(found)
    if as_json:
        print(json.dumps(_plain(made, found), indent=2, ensure_ascii=False))
    else:
        _screen(made)
    sys.exit(1 if made.bad else 0)


def _refused(found: "ActionsFound") -> None:
    for one in found.refused:
        click.echo(f"left out: {one.source}: {one.reason}", err=True)


def _screen(made: "Register") -> None:
    from rca.compare.panels_actions import CAUTIONS, register_words

    screen = Console(highlight=False)
    if not screen.is_terminal:
        screen = Console(highlight=False, width=WIDE)  # a log or a mail, not a screen
    if made.rows:
        table = Table(box=None, pad_edge=False, header_style="bold")
        for title in ("Standing", "Case", "Id", "Action", "Owner", "Due", "Why"):
            table.add_column(title, overflow="fold")
        for row in made.rows:
            a = row.action
            colour = COLOURS.get(row.standing.value, "")
            standing = f"[{colour}]{row.standing.value}[/{colour}]" if colour else row.standing
            late = f" ({row.late_days} d late)" if row.late_days and row.late_days > 0 else ""
            why = "; ".join(t for t in (a.reason, *row.warnings, *a.objections) if t)
            table.add_row(
                str(standing),
                *(escape(t) for t in (row.case, a.id, a.text, a.owner or "nobody")),
                escape(f"{a.due or 'none'}{late}"),
                escape(why),
            )
        screen.print(table)
    screen.print(register_words(made))
    for text in CAUTIONS:
        screen.print(f"[dim]{escape(text)}[/dim]")


def _calendar(made: "Register", day: date) -> bytes:
    from rca.actions.calendar import DueDate, calendar_bytes
    from rca.compare.open_actions import Standing
    from rca.compare.panels_actions import CAUTIONS

    waiting = (Standing.OVERDUE, Standing.DUE, Standing.OPEN)
    return calendar_bytes(
        (
            DueDate(
                case=r.case,
                id=r.action.id,
                text=r.action.text,
                owner=r.action.owner,
                asset=r.asset,
                due=r.action.due,
                caution=" ".join(CAUTIONS),
            )
            for r in made.rows
            if r.standing in waiting and r.action.due is not None
        ),
        stamp=day,
    )


def _plain(made: "Register", found: "ActionsFound") -> dict[str, Any]:
    from rca.archive.codec import to_plain
    from rca.compare.open_actions import Standing

    return {
        "today": made.today.isoformat(),
        "counts": {s.value: made.count(s) for s in Standing},
        "actions": to_plain(made.rows),
        "refused": to_plain(found.refused),
    }
