"""A report and its evidence become one archive: a BagIt bag with an RO-Crate, zipped.

The same report and evidence give the same bytes: names are sorted, times fixed, nothing is
compressed (two versions of a compressor need not agree), and the bagging date is the run's.
"""

import hashlib
import re
import stat
import zipfile
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from cryptography.hazmat.primitives.asymmetric.ed25519 import Ed25519PrivateKey

from rca.archive.codec import dumps
from rca.archive.crate import crate
from rca.archive.integrity import Breach, check_inputs, check_report, check_results, read_json
from rca.archive.run_record import CRATE, RECORD
from rca.base.errors import ArchiveError
from rca.base.shipped import shipped_folder
from rca.bundle.bag import (
    DECLARATION,
    DECLARED,
    INFO,
    KINDS,
    PAYLOAD,
    PIECE,
    SIGNED,
    Digests,
    digests_of,
    digests_of_bytes,
    info,
    manifest,
)
from rca.bundle.names import check_names
from rca.bundle.signature import SIGNATURE, TOKEN, signature_file
from rca.intake.files import list_files

CASE = "case/"
REPORT = "report/"
LOCK = "lock/"
EPOCH = (1980, 1, 1, 0, 0, 0)  # the earliest time a zip can hold
MODE = stat.S_IFREG | 0o644
UNIX = 3
LOCK_FILE = "requirements.lock"

Content = Path | bytes


class ChangedError(ArchiveError):
    """The report or its evidence is not as it was issued; ``breaches`` names everything."""

    def __init__(self, breaches: tuple[Breach, ...]) -> None:
        self.breaches = breaches
        super().__init__(
            "not bundled, because it is not as it was issued:\n"
            + "\n".join(f"  {b}" for b in breaches)
            + "\nRun the report again, or restore the files."
        )


@dataclass(frozen=True, slots=True, kw_only=True)
class Packed:
    """What was written."""

    path: Path
    sha256: str
    files: int
    size: int  # [bytes]
    signed: bool
    imprint: str  # SHA-512 of the signed manifest, for a time stamp authority


def pack(
    report: Path,
    case: Path,
    out: Path,
    *,
    key: Ed25519PrivateKey | None = None,
    token: bytes | None = None,
) -> Packed:
    """Write the bundle of a report and its evidence; whole or not at all.

    Raises ChangedError where anything differs from the record, ArchiveError for a name that not
    every system can hold or a file that changes meanwhile.
    """
    record = read_json(report / RECORD)
    results = read_json(report / "results.json")
    found, _ = list_files(case)
    evidence = {file.file: file.sha256 for file in found}
    breaches = (
        *check_report(report, record),
        *check_results(results, record),
        *check_inputs(record.get("inputs", {}), evidence),
    )
    if breaches:
        raise ChangedError(breaches)
    files = _payload(report, case, record, results, evidence)
    content, imprint = _bag(files, record, results, key, token)
    root = f"{_slug(results['case']['id'])}-bundle/"
    check_names(root + name for name in content)
    digest, size = _write(out, root, content)
    return Packed(
        path=out,
        sha256=digest,
        files=len(content),
        size=size,
        signed=key is not None,
        imprint=imprint,
    )


def _payload(
    report: Path,
    case: Path,
    record: Mapping[str, Any],
    results: Mapping[str, Any],
    evidence: Mapping[str, str],
) -> dict[str, Content]:
    """The files of the crate by their path in it, the crate's own description among them."""
    files: dict[str, Content] = {CASE + name: case / name for name in evidence}
    files |= {REPORT + name: report / name for name in (*record["files"], RECORD)}
    others: dict[str, Content] = {LOCK + "environment.txt": _environment(record)}
    lock = _lock()
    if lock is not None:
        others[LOCK + LOCK_FILE] = lock
    described = {
        name: {"bytes": d.size, "sha256": d.sha256}
        for name, d in ((n, _digests(c)) for n, c in others.items())
    }
    told = crate(
        record, title=results["case"]["title"], report=REPORT, case=CASE, others=described
    )
    return files | others | {CRATE: dumps(told).encode()}


def _bag(
    files: Mapping[str, Content],
    record: Mapping[str, Any],
    results: Mapping[str, Any],
    key: Ed25519PrivateKey | None,
    token: bytes | None,
) -> tuple[dict[str, Content], str]:
    payload = {PAYLOAD + name: content for name, content in files.items()}
    digests = {name: _digests(content) for name, content in payload.items()}
    words = {
        "External-Identifier": str(results["case"]["id"]),
        "External-Description": str(results["case"]["title"]),
        "Source-Organization": str(results["case"].get("site") or ""),
        "Bag-Software-Agent": record["agent"]["program"],
    }
    tags: dict[str, bytes] = {
        DECLARATION: DECLARED.encode(),
        INFO: info(date=record["ended"][:10], files=digests, words=words).encode(),
    }
    for kind in KINDS:
        tags[f"manifest-{kind}.txt"] = manifest(digests, kind).encode()
    listed = {name: digests_of_bytes(content) for name, content in tags.items()}
    for kind in KINDS:
        tags[f"tagmanifest-{kind}.txt"] = manifest(listed, kind).encode()
    if key is not None:
        tags[SIGNATURE] = signature_file(key, tags[SIGNED])
    if token is not None:
        tags[TOKEN] = token
    return {**payload, **tags}, hashlib.sha512(tags[SIGNED]).hexdigest()


def _write(out: Path, root: str, content: Mapping[str, Content]) -> tuple[str, int]:
    partial = out.with_name(f".{out.name}.partial")
    try:
        out.parent.mkdir(parents=True, exist_ok=True)
        with zipfile.ZipFile(partial, "w", zipfile.ZIP_STORED) as archive:
            for name in sorted(content):
                _add(archive, root + name, content[name])
        digest = digests_of(partial)
        partial.replace(out)
    except OSError as error:
        raise ArchiveError(f"{out} can't be written ({error.strerror or error})") from error
    finally:
        partial.unlink(missing_ok=True)
    return digest.sha256, digest.size


def _add(archive: zipfile.ZipFile, name: str, content: Content) -> None:
    member = zipfile.ZipInfo(name, EPOCH)
    member.external_attr = MODE << 16
    member.create_system = UNIX
    if isinstance(content, bytes):
        archive.writestr(member, content)
        return
    member.file_size = content.stat().st_size
    with content.open("rb") as source, archive.open(member, "w") as target:
        written = 0
        while piece := source.read(PIECE):
            written += len(piece)
            target.write(piece)
    if written != member.file_size:
        raise ArchiveError(f"{content.name} changed while it was bundled; try again")


def _digests(content: Content) -> Digests:
    return digests_of_bytes(content) if isinstance(content, bytes) else digests_of(content)


def _environment(record: Mapping[str, Any]) -> bytes:
    """Every package of the run with its exact version, as pip reads it."""
    packages = record["environment"]["packages"]
    lines = [f"{name}=={one['version']}\n" for name, one in packages.items()]
    return f"# Python {record['environment']['python']}\n{''.join(lines)}".encode()


def _lock() -> Path | None:
    """The hash-pinned lock of the program, where it lies beside the shipped folders."""
    path = shipped_folder("notebooks").parent / LOCK_FILE
    return path if path.is_file() else None


def _slug(text: str) -> str:
    return re.sub(r"[^A-Za-z0-9._-]+", "-", text).strip("-. ")[:60] or "case"
