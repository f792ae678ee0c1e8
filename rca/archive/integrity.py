"""Is everything still as it was issued? Missing, unexpected and changed files, each by name."""

import hashlib
import json
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from rca.archive.codec import dumps
from rca.archive.environment import file_digest
from rca.archive.run_record import NOT_LISTED, RECORD, SELF, self_digest
from rca.base.errors import ArchiveError

RESULTS = "results.json"
LARGEST_JSON = 256 * 2**20  # [bytes]


@dataclass(frozen=True, slots=True, kw_only=True)
class Breach:
    """One thing that is not as it was issued."""

    kind: str  # "missing", "unexpected" or "changed"
    area: str  # "input", "notebook", "results", "record", "report", "bag" or "signature"
    name: str
    expected: str
    found: str

    def __str__(self) -> str:
        """One line for people."""
        return (
            f"{self.kind} {self.area}: {self.name}: expected {self.expected}, found {self.found}"
        )


def read_json(path: Path) -> dict[str, Any]:
    """One JSON object from a file.

    Raises ArchiveError where it is missing, too large or no JSON object.
    """
    try:
        if path.stat().st_size > LARGEST_JSON:
            raise ArchiveError(f"{path.name} is larger than {LARGEST_JSON // 2**20} MiB")
        plain = json.loads(path.read_text(encoding="utf-8"))
    except FileNotFoundError as error:
        raise ArchiveError(f"{path} is missing; this is no report folder of rca") from error
    except (OSError, ValueError, RecursionError) as error:
        raise ArchiveError(f"{path} can't be read as JSON: {error}") from error
    if not isinstance(plain, dict):
        raise ArchiveError(f"{path} holds no JSON object")
    return plain


def check_report(folder: Path, record: Mapping[str, Any]) -> tuple[Breach, ...]:
    """Hold a report folder against the listing in its record."""
    found = list(_check_record(record))
    listed: Mapping[str, Any] = record.get("files", {})
    there = {
        path.relative_to(folder).as_posix(): path
        for path in sorted(folder.rglob("*"))
        if path.is_file() or path.is_symlink()
    }
    for name, one in sorted(listed.items()):
        if name not in there:
            found.append(_missing(_area(name), name, one["sha256"]))
        elif there[name].is_symlink():
            found.append(_changed(_area(name), name, "a file", "a link"))
        else:
            found += _compared(_area(name), name, there[name], one["sha256"])
    for name in sorted(set(there) - set(listed) - set(NOT_LISTED)):
        found.append(_unexpected(_area(name), name))
    return tuple(found)


def check_results(results: Mapping[str, Any], record: Mapping[str, Any]) -> tuple[Breach, ...]:
    """Hold results against the digest in the record."""
    digest = _text_digest(dumps(results))
    expected = str(record.get("results_sha256", ""))
    if not expected or digest == expected:
        return ()
    return (_changed("results", RESULTS, expected, digest),)


def check_inputs(inputs: Mapping[str, str], there: Mapping[str, str]) -> tuple[Breach, ...]:
    """Hold the digests of the evidence found now, ``there``, against the recorded ``inputs``."""
    found = []
    for name, digest in sorted(inputs.items()):
        if name not in there:
            found.append(_missing("input", name, digest))
        elif there[name] != digest:
            found.append(_changed("input", name, digest, there[name]))
    found += [_unexpected("input", name) for name in sorted(set(there) - set(inputs))]
    return tuple(found)


def _check_record(record: Mapping[str, Any]) -> Iterator[Breach]:
    expected = record.get(SELF)
    if expected is None:
        yield _missing("record", SELF, "a digest of the record")
    elif (digest := self_digest(record)) != expected:
        yield _changed("record", RECORD, str(expected), digest)


def _compared(area: str, name: str, path: Path, expected: str) -> list[Breach]:
    digest = file_digest(path)
    return [] if digest == expected else [_changed(area, name, expected, digest)]


def _area(name: str) -> str:
    if name == RESULTS:
        return "results"
    return "notebook" if name.startswith("notebooks/") else "report"


def _text_digest(text: str) -> str:
    return hashlib.sha256(text.encode()).hexdigest()


def _missing(area: str, name: str, digest: str) -> Breach:
    return Breach(kind="missing", area=area, name=name, expected=digest, found="no such file")


def _unexpected(area: str, name: str) -> Breach:
    return Breach(kind="unexpected", area=area, name=name, expected="no such file", found="a file")


def _changed(area: str, name: str, expected: str, found: str) -> Breach:
    return Breach(kind="changed", area=area, name=name, expected=expected, found=found)
