"""What the auditor was given: a report folder, a bundle, a PDF or results, opened and checked."""

import hashlib
import json
from collections.abc import Iterator, Mapping
from contextlib import contextmanager
from dataclasses import dataclass, field
from pathlib import Path
from tempfile import TemporaryDirectory
from typing import Any

import pypdf
from pypdf.errors import PyPdfError

from rca.archive.integrity import Breach, check_report, check_results, read_json
from rca.archive.results import validate
from rca.archive.run_record import RECORD
from rca.base.errors import ArchiveError
from rca.bundle.bag import PAYLOAD, check_bag
from rca.bundle.pack import CASE, REPORT
from rca.bundle.signature import Signature, check_signature, read_public_key
from rca.bundle.unpack import unpack

RESULTS = "results.json"
LARGEST_PDF = 512 * 2**20  # [bytes]
LARGEST_RESULTS = 256 * 2**20  # [bytes]


@dataclass(frozen=True, slots=True, kw_only=True)
class Issued:
    """A report as it was issued, with what is not as it was."""

    results: dict[str, Any]
    record: Mapping[str, Any]  # the whole record, or the stable part where only results came
    report: Path | None  # the folder, where there is one
    case: Path | None
    breaches: tuple[Breach, ...] = ()
    signature: str = ""
    whole_record: bool = field(default=True)


@contextmanager
def opened(source: Path, case: Path | None, trust: Path | None = None) -> Iterator[Issued]:
    """Open what was issued and hold it against its own digests; a bundle lives while open.

    ``trust`` is the public key the auditor expects a bundle to be signed with.
    Raises ArchiveError where it is nothing of this program, or unsafe.
    """
    if source.is_dir():
        yield _folder(source, case)
    elif not source.is_file():
        raise ArchiveError(f"{source} is neither a report folder nor a file")
    elif source.suffix.lower() == ".pdf":
        yield _alone(_from_pdf(source), case)
    elif source.suffix.lower() == ".json":
        yield _alone(read_json(source), case)
    else:
        with TemporaryDirectory(prefix="rca-bundle-") as name:
            yield _bundle(unpack(source, Path(name)), case, trust)


def _folder(report: Path, case: Path | None) -> Issued:
    record = read_json(report / RECORD)
    broken = check_report(report, record)
    results = _readable(report, broken)
    beside = report.resolve().parent
    if case is None and (beside / "case.toml").is_file():
        case = beside
    return Issued(
        results=results,
        record=record,
        report=report,
        case=case,
        breaches=(*broken, *_results(results, report, record)),
    )


def _readable(report: Path, broken: tuple[Breach, ...]) -> dict[str, Any]:
    """The results; where they can't be read, the error says what else is not as issued."""
    try:
        results = read_json(report / RESULTS)
        validate(results)
    except ArchiveError as error:
        told = "\n".join(f"  {one}" for one in broken)
        raise ArchiveError(f"{error}\n{told}" if told else str(error)) from error
    return results


def _bundle(root: Path, case: Path | None, trust: Path | None) -> Issued:
    payload = root / PAYLOAD
    broken = check_bag(root)
    inside = _folder(payload / REPORT, case if case is not None else payload / CASE)
    told = check_signature(root, read_public_key(trust) if trust is not None else None)
    bad = () if told.state != "invalid" else (_unsigned(told),)
    return Issued(
        results=inside.results,
        record=inside.record,
        report=inside.report,
        case=inside.case,
        breaches=(*broken, *bad, *inside.breaches),
        signature=_signed(told, trust),
    )


def _alone(results: dict[str, Any], case: Path | None) -> Issued:
    validate(results)
    return Issued(
        results=results, record=results["record"], report=None, case=case, whole_record=False
    )


def _results(
    results: Mapping[str, Any], report: Path, record: Mapping[str, Any]
) -> tuple[Breach, ...]:
    """A change of the content; one of the bytes alone is told by the listing of files."""
    listed = record.get("files", {}).get(RESULTS, {}).get("sha256")
    digest = hashlib.sha256((report / RESULTS).read_bytes()).hexdigest()
    return () if listed is not None and listed != digest else check_results(results, record)


def _from_pdf(path: Path) -> dict[str, Any]:
    """The results embedded in a report's PDF."""
    if path.stat().st_size > LARGEST_PDF:
        raise ArchiveError(f"{path.name} is larger than {LARGEST_PDF // 2**20} MiB")
    try:
        reader = pypdf.PdfReader(path)
        contents = reader.attachments.get(RESULTS, [])
    except (PyPdfError, OSError, ValueError, KeyError, TypeError, RecursionError) as error:
        raise ArchiveError(f"{path.name} can't be read as a PDF: {error}") from error
    if len(contents) != 1:
        raise ArchiveError(
            f"{path.name} holds {len(contents)} attached {RESULTS}, expected one. "
            "Rerun from the report folder or the bundle."
        )
    if len(contents[0]) > LARGEST_RESULTS:
        raise ArchiveError(f"{RESULTS} in {path.name} is too large")
    try:
        plain = json.loads(contents[0].decode())
    except (ValueError, RecursionError) as error:
        raise ArchiveError(f"{RESULTS} in {path.name} is not JSON: {error}") from error
    if not isinstance(plain, dict):
        raise ArchiveError(f"{RESULTS} in {path.name} holds no JSON object")
    return plain


def _unsigned(told: Signature) -> Breach:
    return Breach(
        kind="changed",
        area="signature",
        name="signatures",
        expected="a signature that fits the manifests",
        found=told.state,
    )


def _signed(told: Signature, trust: Path | None) -> str:
    stamp = "" if told.stamp == "none" else f" Time stamp token: {told.stamp}."
    if told.state == "none":
        return f"The bundle is not signed.{stamp}"
    if told.state == "invalid":
        return f"The signature does not fit the manifests.{stamp}"
    if told.trusted:
        who = "by the key you named"
    elif trust is not None:
        who = "by another key than the one you named"
    else:
        who = "by a key nobody vouched for here; name the key you trust with --trust"
    return f"The signature fits, made {who} (key SHA-256 {told.key}).{stamp}"
