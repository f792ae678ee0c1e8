"""Open a bundle safely: everything is checked before the first byte is written, nothing is run.

Refused: names that lead out or that some system can't hold, links and devices, a name told
twice, encrypted members, and archives that grow out of proportion.
"""

import shutil
import stat
import zipfile
import zlib
from dataclasses import dataclass
from pathlib import Path

from rca.base.errors import ArchiveError
from rca.bundle.bag import DECLARATION, PIECE
from rca.bundle.names import check_names

SPARE = 64 * 2**20  # [bytes] of the disk kept free
MOST_MEMBERS = 100_000
MOST_BYTES = 256 * 2**30  # [bytes] unpacked
LARGEST_RATIO = 100.0  # unpacked to packed; our own bundles have 1
SMALL = 1 << 20  # [bytes] below which a ratio says nothing
ENCRYPTED = 0x1


@dataclass(frozen=True, slots=True, kw_only=True)
class Limits:
    """How large a bundle may grow."""

    members: int = MOST_MEMBERS
    total: int = MOST_BYTES
    ratio: float = LARGEST_RATIO


def unpack(path: Path, into: Path, limits: Limits | None = None) -> Path:
    """Unpack a bundle into the empty folder ``into``; returns the bag's own folder.

    Raises ArchiveError for anything unsafe, unreadable or no bag; then ``into`` is empty again.
    """
    try:
        with zipfile.ZipFile(path) as archive:
            members = _checked(archive, limits or Limits(), into)
            try:
                for member in members:
                    _write(archive, member, into)
            except BaseException:
                _emptied(into)
                raise
    except (zipfile.BadZipFile, zlib.error, NotImplementedError, EOFError) as error:
        raise ArchiveError(f"{path.name} is no sound zip archive: {error}") from error
    except OSError as error:
        raise ArchiveError(f"{path} can't be read ({error.strerror or error})") from error
    roots = sorted({m.filename.split("/", 1)[0] for m in members})
    if len(roots) != 1 or not (into / roots[0] / DECLARATION).is_file():
        _emptied(into)
        raise ArchiveError(f"{path.name} holds no single folder with {DECLARATION}; it is no bag")
    return into / roots[0]


def _checked(archive: zipfile.ZipFile, limits: Limits, into: Path) -> list[zipfile.ZipInfo]:
    members = archive.infolist()
    if len(members) > limits.members:
        raise ArchiveError(f"the archive holds more than {limits.members} files; it is refused")
    for member in members:
        _check_kind(member)
    check_names(m.filename.rstrip("/") if m.is_dir() else m.filename for m in members)
    files = [m for m in members if not m.is_dir()]
    total = sum(m.file_size for m in files)
    packed = sum(m.compress_size for m in files)
    free = shutil.disk_usage(into).free
    if total > min(limits.total, free - SPARE):
        raise ArchiveError(
            f"the archive would grow to {total / 2**30:.1f} GiB; "
            f"at most {min(limits.total, free) / 2**30:.1f} GiB may be unpacked here"
        )
    grown = [(total, packed), *((m.file_size, m.compress_size) for m in files)]
    if any(size > SMALL and size > limits.ratio * max(small, 1) for size, small in grown):
        raise ArchiveError(
            f"the archive grows more than {limits.ratio:g} times when it is unpacked; "
            "it is refused"
        )
    return files


def _check_kind(member: zipfile.ZipInfo) -> None:
    mode = member.external_attr >> 16
    kind = stat.S_IFMT(mode)
    if kind not in (0, stat.S_IFREG, stat.S_IFDIR):
        raise ArchiveError(
            f"the archive holds {member.filename[:120]!r}, which is a link or a device; "
            "it is refused"
        )
    if member.flag_bits & ENCRYPTED:
        raise ArchiveError(f"the archive holds {member.filename[:120]!r} encrypted")


def _write(archive: zipfile.ZipFile, member: zipfile.ZipInfo, into: Path) -> None:
    target = into / member.filename
    if not target.resolve().is_relative_to(into.resolve()):
        raise ArchiveError(f"{member.filename!r} leads out of the archive; it is refused")
    target.parent.mkdir(parents=True, exist_ok=True)
    written = 0
    with archive.open(member) as source, target.open("xb") as sink:
        while piece := source.read(PIECE):
            written += len(piece)
            if written > member.file_size:
                raise ArchiveError(f"{member.filename!r} is longer than the archive says")
            sink.write(piece)
    if written != member.file_size:
        raise ArchiveError(f"{member.filename!r} is shorter than the archive says")


def _emptied(folder: Path) -> None:
    for entry in folder.iterdir():
        if entry.is_dir() and not entry.is_symlink():
            shutil.rmtree(entry)
        else:
            entry.unlink()
