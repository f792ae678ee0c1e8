"""``rca compare DIR…``: past incidents side by side."""

import json
import sys
from datetime import UTC, date, datetime
from pathlib import Path

import click

from rca.base.errors import RcaError

DAY = click.DateTime(["%Y-%m-%d"])


@click.command()
@click.argument("places", nargs=-1, required=True, type=click.Path(path_type=Path))
@click.option(
    "--out",
    type=click.Path(path_type=Path),
    default=Path("comparison"),
    show_default=True,
    help="Folder of the comparison.",
)
@click.option("--like", default="", metavar="CASE", help="Find cases like this one [the latest].")
@click.option("--until", type=DAY, help="Last day of observation [today].")
@click.option("--since", type=DAY, help="First day of observation [each machine's first case].")
@click.option(
    "--exposure",
    type=click.Path(path_type=Path),
    help="CSV of how long machines were watched: asset, from, to, running_hours.",
)
@click.option("--reweigh", is_flag=True, help="Weigh old evidence with today's knowledge.")
@click.option("--paper", type=click.Choice(["A4", "Letter"]), default="A4", show_default=True)
@click.option("--json", "as_json", is_flag=True, help="Print the comparison as JSON.")
def command(
    places: tuple[Path, ...],
    out: Path,
    like: str,
    until: datetime | None,
    since: datetime | None,
    exposure: Path | None,
    reweigh: bool,
    paper: str,
    as_json: bool,
) -> None:
    """Compare finished cases: report folders, bundles or results.json files, or folders of them.

    Writes compare.html, compare.pdf, explore.html (to filter, offline), comparison.json,
    incidents.duckdb and tables. Files that can't be used are named and left out.
    Exit status: 0 done, 2 could not be done, not one usable file among them.
    """
    from rca.base.counted import counted
    from rca.runner.compare import Asked, NothingUsableError, compare

    asked = Asked(
        places=places,
        until=until.date() if until is not None else _today(),
        since=since.date() if since is not None else None,
        exposure=exposure,
        like=like,
        reweigh=reweigh,
        paper=paper,
    )
    try:
        done = compare(asked, out)
    except NothingUsableError as error:
        if as_json:
            refused = [{"source": r.source, "reason": r.reason} for r in error.gathered.refused]
            print(json.dumps({"cases": 0, "refused": refused}, indent=2, ensure_ascii=False))
        click.echo(str(error), err=True)
        sys.exit(2)
    except RcaError as error:
        click.echo(str(error), err=True)
        sys.exit(2)
    for one in done.gathered.refused:
        click.echo(f"left out: {one.source}: {one.reason}", err=True)
    for text in done.gathered.not_reweighed:
        click.echo(f"not weighed again: {text}", err=True)
    if as_json:
        print(json.dumps(done.result, indent=2, ensure_ascii=False))
    else:
        print(
            f"{counted(len(done.gathered.incidents), 'case')} compared, "
            f"observed until {asked.until}."
        )
        print(
            f"{counted(len(done.gathered.refused), 'file')} left out, "
            f"{len(done.gathered.replaced)} copies or older revisions not counted."
        )
        print(f"Read: {done.folder / 'compare.html'}   Filter: {done.folder / 'explore.html'}")
    if done.pages.pdf is None:
        click.echo(done.pages.advice, err=True)
        sys.exit(2)


def _today() -> date:
    return datetime.now(UTC).date()
