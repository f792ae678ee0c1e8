"""``record.json``: everything an auditor needs to know about a run, and its check on itself."""

import hashlib
from collections.abc import Mapping, Sequence
from datetime import datetime
from pathlib import Path
from typing import Any

from rca.archive.codec import dumps, to_plain
from rca.archive.environment import control, environment, file_digest, hashed
from rca.archive.quantities import headline, tolerances
from rca.archive.record import code_files
from rca.archive.source_control import commit
from rca.base.errors import ArchiveError
from rca.base.shipped import shipped_folder
from rca.case.model import Case

RECORD = "record.json"
CRATE = "ro-crate-metadata.json"
SELF = "record_sha256"
# Written after the record, or able to change without harm.
NOT_LISTED = (RECORD, CRATE)


def run_record(
    case: Case,
    case_dir: Path,
    results: Mapping[str, Any],
    *,
    readings: Mapping[str, Mapping[str, Any]],
    options: Mapping[str, Any],
    streams: Mapping[str, Any],
    notebook_environment: Mapping[str, str],
    fonts: Path,
    started: datetime,
    ended: datetime,
    warnings: Sequence[str],
) -> dict[str, Any]:
    """The record of a finished run; the listing of its files is added by ``sealed``.

    ``readings`` says for an input file how it was read; ``streams`` the seed of each stage.
    """
    from rca.archive.edges import edges  # noqa: PLC0415  slow, and wanted at the end only

    stable = dict(results["record"])
    return {
        "format": 1,
        **stable,
        "input_files": [
            _input(case_dir, file.file, file.role, readings.get(file.file, {}))
            for file in case.files
        ],
        "parameters_sha256": hashlib.sha256(dumps(stable["parameters"]).encode()).hexdigest(),
        "code_files": code_files(),
        "commit": commit(Path(__file__).resolve().parents[2]),
        "templates": hashed(shipped_folder("templates")),
        "environment": environment(fonts),
        "control": control()
        | {"streams": dict(streams), "notebook_environment": dict(notebook_environment)},
        "options": to_plain(dict(options)),
        "started": started.isoformat(timespec="seconds"),
        "ended": ended.isoformat(timespec="seconds"),
        "agent": {
            "investigator": case.header.investigator,
            "reviewer": case.header.reviewer,
            "program": f"rca {stable['versions']['rca']}",
        },
        "exit_status": 0,
        "warnings": list(warnings),
        "warnings_sha256": hashlib.sha256("\n".join(warnings).encode()).hexdigest(),
        "tolerances": [to_plain(rule) for rule in tolerances()],
        "quantities": headline(results),
        "edges": edges(results),
        "results_sha256": hashlib.sha256(dumps(results).encode()).hexdigest(),
        "reviews": [],  # an auditor's rerun writes its own report and never into this one
    }


def sealed(record: Mapping[str, Any], folder: Path) -> dict[str, Any]:
    """The record with size and digests of every file of the report, and a digest of itself."""
    listed = {
        path.relative_to(folder).as_posix(): _listed(path)
        for path in sorted(folder.rglob("*"))
        if path.is_file() and path.relative_to(folder).as_posix() not in NOT_LISTED
    }
    full = {**record, "files": listed}
    return {**full, SELF: self_digest(full)}


def self_digest(record: Mapping[str, Any]) -> str:
    """SHA-256 of a record's canonical JSON without this digest."""
    plain = {key: value for key, value in record.items() if key != SELF}
    return hashlib.sha256(dumps(plain).encode()).hexdigest()


def _listed(path: Path) -> dict[str, Any]:
    return {"bytes": path.stat().st_size, "sha256": file_digest(path)}


def _input(case_dir: Path, name: str, role: str, reading: Mapping[str, Any]) -> dict[str, Any]:
    path = case_dir / name
    try:
        status = path.stat()
        digests = {kind: file_digest(path, kind) for kind in ("sha256", "sha512")}
    except OSError as error:
        raise ArchiveError(f"{name} went away during the run ({error.strerror})") from error
    return {
        "file": name,
        "role": role,
        "bytes": status.st_size,
        "modified_ns": status.st_mtime_ns,
        **digests,
        "read_as": dict(reading),
    }
