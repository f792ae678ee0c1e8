"""``rca bundle REPORT``: one archive for somebody else to check and rerun."""

import json
import sys
from pathlib import Path

import click

from rca.base.errors import ArchiveError, RcaError


@click.command()
@click.argument("report", type=click.Path(path_type=Path))
@click.option("--case", type=click.Path(path_type=Path), help="Case folder [where REPORT lies].")
@click.option("--out", type=click.Path(path_type=Path), help="The archive [REPORT.zip].")
@click.option(
    "--sign", type=click.Path(path_type=Path), metavar="KEY", help="Ed25519 private key in PEM."
)
@click.option("--passphrase", is_flag=True, help="Ask for the passphrase of the key.")
@click.option(
    "--timestamp",
    type=click.Path(path_type=Path),
    metavar="TOKEN",
    help="A time stamp token (RFC 3161) made over the printed imprint.",
)
@click.option("--json", "as_json", is_flag=True, help="Print the outcome as JSON.")
def command(
    report: Path,
    case: Path | None,
    out: Path | None,
    sign: Path | None,
    passphrase: bool,
    timestamp: Path | None,
    as_json: bool,
) -> None:
    """Pack evidence, executed notebooks, results, report and lock of REPORT into one archive.

    The archive is a BagIt bag with an RO-Crate inside; the same report gives the same bytes.
    Exit status: 0 done; 1 something is not as it was issued, nothing written; 2 could not be done.
    """
    from rca.bundle.pack import ChangedError, pack
    from rca.bundle.signature import read_private_key

    try:
        key = None
        if sign is not None:
            words = click.prompt("Passphrase", hide_input=True).encode() if passphrase else None
            key = read_private_key(sign, words)
        token = timestamp.read_bytes() if timestamp is not None else None
        done = pack(
            report,
            case if case is not None else _case_of(report),
            out if out is not None else report.with_name(f"{report.resolve().name}.zip"),
            key=key,
            token=token,
        )
    except ChangedError as error:
        if as_json:
            rows = [{"kind": b.kind, "area": b.area, "name": b.name} for b in error.breaches]
            print(json.dumps({"bundle": None, "breaches": rows}, ensure_ascii=False))
        click.echo(str(error), err=True)
        sys.exit(1)
    except (RcaError, OSError) as error:
        click.echo(str(error), err=True)
        sys.exit(2)
    if as_json:
        plain = {
            "bundle": str(done.path),
            "sha256": done.sha256,
            "files": done.files,
            "bytes": done.size,
            "signed": done.signed,
            "imprint_sha512": done.imprint,
        }
        print(json.dumps(plain, ensure_ascii=False))
        return
    print(f"Bundle: {done.path}   ({done.files} files, {done.size / 1e6:.1f} MB)")
    print(f"SHA-256: {done.sha256}")
    print(f"{'Signed' if done.signed else 'Not signed'}; imprint for a time stamp, SHA-512:")
    print(done.imprint)


def _case_of(report: Path) -> Path:
    parent = report.resolve().parent
    if not (parent / "case.toml").is_file():
        raise ArchiveError(
            f"{report} does not lie in a case folder. Name the case with  --case CASE."
        )
    return parent
