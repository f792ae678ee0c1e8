"""``rca new CASE``."""

import sys
from pathlib import Path

import click

from rca.base.errors import ArchiveError


@click.command()
@click.argument("case", type=click.Path(path_type=Path))
def command(case: Path) -> None:
    """Make the case folder CASE, which already passes  rca check."""
    from rca.intake.scaffold import make_case

    try:
        make_case(case)
    except ArchiveError as error:
        click.echo(str(error), err=True)
        sys.exit(2)
    click.echo(f"Made {case}. Fill in {case / 'case.toml'}, add the evidence as received, then:")
    click.echo(f"  rca check {case}\n  rca report {case}")
