"""The files of a case folder: hashed, measured, and proved to lie inside it."""

import hashlib
from pathlib import Path

from rca.base.errors import Problem, Severity
from rca.case.model import EvidenceFile

DESCRIPTOR = "case.toml"
_ROLES = {
    "case.toml": "descriptor",
    "photos/photos.csv": "photo list",
    "teardown/findings.csv": "findings",
    "teardown/notes.md": "notes",
    "custody.csv": "custody",
    "history.csv": "history",
    "actions.csv": "actions",
}
_FOLDER_ROLES = {"oil": "oil report", "pressure": "record", "photos": "photo"}
_NOT_EVIDENCE = {"report", "earlier"}  # reports of this or earlier incidents, not of this case


def list_files(folder: Path) -> tuple[list[EvidenceFile], list[Problem]]:
    """Every evidence file with size and SHA-256, sorted by path; links out of the case refused."""
    found: list[EvidenceFile] = []
    problems: list[Problem] = []
    root = folder.resolve()
    for path in sorted(folder.rglob("*")):
        relative = path.relative_to(folder)
        if relative.parts[0] in _NOT_EVIDENCE or any(p.startswith(".") for p in relative.parts):
            continue
        name = relative.as_posix()
        if relative.parts[0].startswith("report"):
            continue
        if path.is_symlink() and not path.resolve().is_relative_to(root):
            problems.append(_link(name))
        elif path.is_file():
            try:
                found.append(_hashed(path, name))
            except OSError as error:
                problems.append(_unreadable(name, error))
    return found, problems


def _hashed(path: Path, name: str) -> EvidenceFile:
    with path.open("rb") as stream:
        digest = hashlib.file_digest(stream, "sha256").hexdigest()
    role = _ROLES.get(name) or _FOLDER_ROLES.get(name.split("/", maxsplit=1)[0], "other")
    return EvidenceFile(file=name, size=path.stat().st_size, sha256=digest, role=role)


def _link(name: str) -> Problem:
    return Problem(
        severity=Severity.ERROR,
        file=name,
        place="",
        found="a link that leads out of the case folder",
        expected="a file inside it",
        mend="Copy the file into the case folder; evidence must travel with its case.",
    )


def _unreadable(name: str, error: OSError) -> Problem:
    return Problem(
        severity=Severity.ERROR,
        file=name,
        place="",
        found=f"a file that can't be read ({error.strerror})",
        expected="a readable file",
        mend="Check its permissions.",
    )
