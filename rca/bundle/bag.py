"""A BagIt bag: its tag files as text, and the check of one that was unpacked.

Specification: RFC 8493, BagIt File Packaging Format 1.0 (2018).
"""

import hashlib
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from pathlib import Path

from rca.archive.integrity import Breach
from rca.base.errors import ArchiveError

KINDS = ("sha256", "sha512")
DECLARATION = "bagit.txt"
DECLARED = "BagIt-Version: 1.0\nTag-File-Character-Encoding: UTF-8\n"
INFO = "bag-info.txt"
PAYLOAD = "data/"
PIECE = 1 << 20  # [bytes]
LARGEST_TAG = 64 * 2**20  # [bytes] of one manifest
SIGNED = "tagmanifest-sha512.txt"  # it lists the manifests, which list everything else


@dataclass(frozen=True, slots=True, kw_only=True)
class Digests:
    """Size and digests of one file."""

    size: int
    sha256: str
    sha512: str

    def of(self, kind: str) -> str:
        """The digest by its name."""
        return self.sha256 if kind == "sha256" else self.sha512


def digests_of(path: Path) -> Digests:
    """Size and both digests of a file, read once, in pieces."""
    made = {kind: hashlib.new(kind) for kind in KINDS}
    size = 0
    with path.open("rb") as stream:
        while piece := stream.read(PIECE):
            size += len(piece)
            for digest in made.values():
                digest.update(piece)
    return Digests(size=size, sha256=made["sha256"].hexdigest(), sha512=made["sha512"].hexdigest())


def digests_of_bytes(content: bytes) -> Digests:
    """Size and both digests of bytes."""
    return Digests(
        size=len(content),
        sha256=hashlib.sha256(content).hexdigest(),
        sha512=hashlib.sha512(content).hexdigest(),
    )


def manifest(files: Mapping[str, Digests], kind: str) -> str:
    """A manifest's lines, sorted by name; CR, LF and % of a name are encoded (section 2.1.3)."""
    return "".join(f"{one.of(kind)}  {_encoded(name)}\n" for name, one in sorted(files.items()))


def info(*, date: str, files: Mapping[str, Digests], words: Mapping[str, str]) -> str:
    """``bag-info.txt``: reserved labels first, then ours; no line holds a line end of its own."""
    total = sum(one.size for one in files.values())
    rows = {
        "Bagging-Date": date,
        "Payload-Oxum": f"{total}.{len(files)}",
        **{key: " ".join(text.split()) for key, text in words.items() if text.strip()},
    }
    return "".join(f"{key}: {text}\n" for key, text in rows.items())


def check_bag(root: Path) -> tuple[Breach, ...]:
    """Every file of an unpacked bag against every manifest, in full; nothing by size alone.

    Raises ArchiveError where it is no bag or has no manifest.
    """
    if (root / DECLARATION).read_text(encoding="utf-8", errors="replace") != DECLARED:
        raise ArchiveError(f"{DECLARATION} does not declare a BagIt 1.0 bag in UTF-8")
    found: list[Breach] = []
    there = {
        p.relative_to(root).as_posix(): digests_of(p)
        for p in sorted(root.rglob("*"))
        if p.is_file()
    }
    payload = {name for name in there if name.startswith(PAYLOAD)}
    for kind in KINDS:
        found += _held(there, root / f"manifest-{kind}.txt", kind, payload)
        found += _held(there, root / f"tagmanifest-{kind}.txt", kind, None)
    return tuple(dict.fromkeys(found))


def _held(
    there: Mapping[str, Digests], path: Path, kind: str, expected: set[str] | None
) -> Iterator[Breach]:
    """Hold files against one manifest; with ``expected`` it must list exactly these."""
    listed = _read(path)
    for name, digest in sorted(listed.items()):
        if name not in there:
            yield Breach(
                kind="missing", area="bag", name=name, expected=digest, found="no such file"
            )
        elif there[name].of(kind) != digest:
            yield Breach(
                kind="changed",
                area="bag",
                name=name,
                expected=f"{kind} {digest}",
                found=f"{kind} {there[name].of(kind)}",
            )
    for name in sorted((expected or set()) - set(listed)):
        yield Breach(
            kind="unexpected",
            area="bag",
            name=name,
            expected=f"a line in {path.name}",
            found="a file no manifest lists",
        )


def _read(path: Path) -> dict[str, str]:
    if not path.is_file():
        raise ArchiveError(f"the bag has no {path.name}")
    if path.stat().st_size > LARGEST_TAG:
        raise ArchiveError(f"{path.name} is larger than {LARGEST_TAG // 2**20} MiB")
    listed: dict[str, str] = {}
    text = path.read_text(encoding="utf-8", errors="replace")
    for number, line in enumerate(text.split("\n"), start=1):
        digest, _, name = line.partition(" ")
        if not line:
            continue
        plain = _decoded(name.lstrip(" *"))
        if not plain or plain in listed:
            raise ArchiveError(
                f"{path.name}, line {number} is no line of a manifest: {line[:80]!r}"
            )
        listed[plain] = digest.lower()
    return listed


def _encoded(name: str) -> str:
    return name.replace("%", "%25").replace("\r", "%0D").replace("\n", "%0A")


def _decoded(name: str) -> str:
    return name.replace("%0A", "\n").replace("%0D", "\r").replace("%25", "%")
