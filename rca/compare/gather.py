"""Find finished cases in folders, bundles and files; read each, name what can't be read.

Nothing is unpacked: one member of a bundle is read into memory, up to a size. A file that can't
be used is named with the reason and never stops the others.
"""

import hashlib
import os
import zipfile
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any, TypeVar

import msgspec

from rca.base.errors import ArchiveError
from rca.compare.incident import Incident, read_incident

LARGEST = 64 * 2**20  # [bytes] of one results.json; the sample's has a third of a million
MOST_MEMBERS = 100_000  # of a bundle
RESULTS = "results.json"
RECORD = "record.json"


@dataclass(frozen=True, slots=True, kw_only=True)
class Refused:
    """A file that looked like results and could not be used."""

    source: str
    reason: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Gathered:
    """Everything found: one incident a case, what was refused, what an other file replaces."""

    incidents: tuple[Incident, ...]
    refused: tuple[Refused, ...] = ()
    replaced: tuple[str, ...] = ()  # sources of copies and older revisions of a case
    not_reweighed: tuple[str, ...] = ()  # sources whose evidence can't be weighed again, and why


@dataclass(frozen=True, slots=True)
class Found:
    """A place that may hold results: a file, or a bundle."""

    path: Path
    bundle: bool = False


def gather(places: Sequence[Path]) -> Gathered:
    """Read every finished case under ``places``.

    Raises ArchiveError where a place does not exist.
    """
    incidents, refused = [], []
    for found in dict.fromkeys(f for place in places for f in find(place)):
        try:
            plain, digest, ended = load(found)
            incidents.append(
                read_incident(plain, source=str(found.path), sha256=digest, ended=ended)
            )
        except ArchiveError as error:
            refused.append(Refused(source=str(found.path), reason=str(error)))
    kept, replaced = _one_a_case(incidents)
    return Gathered(incidents=kept, refused=tuple(refused), replaced=replaced)


def find(place: Path) -> Iterator[Found]:
    """Results under one place, in a fixed order; links are not followed.

    A folder with a ``results.json`` is one report and is not searched further. In a folder
    without one, ``*.zip`` are taken for bundles, and ``*.json`` given directly for results.
    Raises ArchiveError where the place does not exist.
    """
    if place.is_file():
        yield Found(place, bundle=zipfile.is_zipfile(place))
        return
    if not place.is_dir():
        raise ArchiveError(
            f"{place} is neither a file nor a folder. Name report folders, bundles or "
            "results.json files."
        )
    for root, folders, names in os.walk(place):
        folder = Path(root)
        if RESULTS in names:
            folders.clear()
            yield Found(folder / RESULTS)
            continue
        folders[:] = sorted(f for f in folders if not f.startswith("."))
        for name in sorted(names):
            if name.endswith(".zip") or (name.endswith(".json") and folder == place):
                yield Found(folder / name, bundle=name.endswith(".zip"))


def load(found: Found) -> tuple[dict[str, Any], str, str]:
    """Plain JSON of one results file, its SHA-256, and when its run ended ("" where unknown).

    Raises ArchiveError for anything unreadable, too large or not JSON.
    """
    try:
        if found.bundle:
            content, record = _from_bundle(found.path)
        else:
            content = _read_up_to(found.path)
            beside = found.path.with_name(RECORD)
            record = _read_up_to(beside) if beside.is_file() else b"{}"
    except (OSError, zipfile.BadZipFile, RuntimeError, NotImplementedError) as error:
        raise ArchiveError(f"can't be read: {error}") from error
    run = _json(record, RECORD, _Run)
    parts = _json(content, RESULTS, _Results)
    plain = {name: getattr(parts, name) for name in parts.__struct_fields__}
    return plain, hashlib.sha256(content).hexdigest(), str(run.ended or "")


class _Results(msgspec.Struct):
    """The parts of ``results.json`` that are compared; the checks' own numbers are passed over."""

    format: Any = None
    case: Any = None
    verdict: Any = None
    causes: Any = None
    evidence: Any = None
    actions: Any = None
    record: Any = None
    invented: Any = None


class _Run(msgspec.Struct):
    """The part of ``record.json`` that is asked for."""

    ended: Any = None


T = TypeVar("T", _Results, _Run)


def _json(content: bytes, name: str, kind: type[T]) -> T:
    try:
        return msgspec.json.decode(content, type=kind)
    except (msgspec.MsgspecError, UnicodeDecodeError, RecursionError) as error:
        raise ArchiveError(f"{name} is not JSON of the expected shape: {error}") from error


def _read_up_to(path: Path) -> bytes:
    if path.stat().st_size > LARGEST:
        raise ArchiveError(f"{path.name} is larger than {LARGEST // 2**20} MiB")
    return path.read_bytes()


def _from_bundle(path: Path) -> tuple[bytes, bytes]:
    """The results and the run record of a bundle, read in memory, never unpacked."""
    with zipfile.ZipFile(path) as archive:
        members = archive.infolist()
        if len(members) > MOST_MEMBERS:
            raise ArchiveError(f"the bundle holds more than {MOST_MEMBERS} files")
        results = [m for m in members if m.filename.rsplit("/", 1)[-1] == RESULTS]
        shallow = min((m.filename.count("/") for m in results), default=0)
        results = [m for m in results if m.filename.count("/") == shallow]  # not earlier issues
        if len(results) != 1:
            raise ArchiveError(f"the bundle holds {len(results)} files {RESULTS}, expected one")
        beside = results[0].filename.removesuffix(RESULTS) + RECORD
        records = [m for m in members if m.filename == beside]
        record = _member(archive, records[0]) if len(records) == 1 else b"{}"
        return _member(archive, results[0]), record


def _member(archive: zipfile.ZipFile, member: zipfile.ZipInfo) -> bytes:
    with archive.open(member) as stream:
        content = stream.read(LARGEST + 1)
    if len(content) > LARGEST:
        raise ArchiveError(f"{member.filename} is larger than {LARGEST // 2**20} MiB")
    return content


def _one_a_case(incidents: Sequence[Incident]) -> tuple[tuple[Incident, ...], tuple[str, ...]]:
    """A case told twice counts once: the report made last, else the last by name, stands."""
    latest: dict[tuple[str, str, str], Incident] = {}
    replaced = []
    for one in sorted(incidents, key=lambda i: (i.ended, i.source)):
        key = (one.id, one.site, one.asset)
        if key in latest:
            replaced.append(latest[key].source)
        latest[key] = one
    ordered = sorted(
        latest.values(), key=lambda i: (i.occurred.isoformat() if i.occurred else "", i.id)
    )
    return tuple(ordered), tuple(sorted(replaced))
