"""``rca rerun REPORT_OR_BUNDLE_OR_PDF``: does the report still follow from its evidence?"""

import json
import sys
from pathlib import Path

import click
from rich.console import Console

from rca.base.errors import RcaError

SHOWN = 8


@click.command()
@click.argument("source", type=click.Path(path_type=Path))
@click.option(
    "--case",
    type=click.Path(path_type=Path),
    help="Case folder [in the bundle, round the report].",
)
@click.option(
    "--out", type=click.Path(path_type=Path), help="Folder of the rerun report [SOURCE-rerun]."
)
@click.option("--notebooks", type=click.Path(path_type=Path), help="The site's own notebooks.")
@click.option("--trust", type=click.Path(path_type=Path), metavar="KEY", help="Public key, PEM.")
@click.option("--fresh-kernels", is_flag=True, help="A fresh Jupyter kernel for each notebook.")
@click.option(
    "--jobs", type=click.IntRange(1, 64), default=2, show_default=True, help="Notebooks at a time."
)
@click.option("--paper", type=click.Choice(["A4", "Letter"]), default="A4", show_default=True)
@click.option("--json", "as_json", is_flag=True, help="Print the outcome as JSON.")
def command(
    source: Path,
    case: Path | None,
    out: Path | None,
    notebooks: Path | None,
    trust: Path | None,
    fresh_kernels: bool,
    jobs: int,
    paper: str,
    as_json: bool,
) -> None:
    """Check SOURCE, run its notebooks again, compare every number.

    SOURCE is a report folder, a bundle, or a report's PDF or results.json (these need --case).
    Exit status: 0 it agrees; 1 it differs or is not as issued; 2 it could not be rerun.
    """
    from rca.rerun.page import rerun_json
    from rca.runner.rerun import RerunOptions, rerun

    screen = Console(stderr=True)
    try:
        with screen.status("reading") as status:
            done = rerun(
                source,
                case,
                out if out is not None else _beside(source),
                RerunOptions(
                    notebooks=notebooks,
                    fresh_kernels=fresh_kernels or sys.platform == "win32",
                    jobs=jobs,
                    trust=trust,
                    paper=paper,
                ),
                lambda stage, what: status.update(f"{stage}: {what}"),
            )
    except RcaError as error:
        click.echo(str(error), err=True)
        sys.exit(2)
    check = done.check
    if as_json:
        print(json.dumps(rerun_json(check, done.run), ensure_ascii=False))
    else:
        print(check.answer)
        for breach in check.breaches[:SHOWN]:
            print(f"  {breach}")
        for one in check.differences[:SHOWN]:
            print(
                f"  class {one.run_class.value}: {one.quantity}: {one.issued} -> {one.recomputed}"
            )
        for why in check.reasons:
            print(f"  {why.kind}: {'; '.join(why.details)}")
        if check.signature:
            print(check.signature)
        name = done.pages.pdf.name if done.pages.pdf is not None else done.pages.html.name
        print(f"Rerun report: {done.folder / name}")
    if done.pages.pdf is None:
        click.echo(done.pages.advice, err=True)
    if not check.runnable or done.pages.pdf is None:
        sys.exit(2)
    sys.exit(0 if check.agrees else 1)


def _beside(source: Path) -> Path:
    whole = source.resolve()
    return whole.with_name(f"{whole.stem if whole.is_file() else whole.name}-rerun")
