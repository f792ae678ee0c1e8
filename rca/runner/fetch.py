"""Evidence on object storage: copied once into a local cache, each copy with its digest."""

import hashlib
import json
import os
from collections.abc import Mapping
from pathlib import Path
from typing import Any

import fsspec

from rca.archive.environment import file_digest
from rca.base.errors import ArchiveError
from rca.bundle.names import check_names

LISTING = ".fetched.json"  # a name with a dot is no evidence
CACHE = "RCA_CACHE"


def is_remote(case: str) -> bool:
    """Whether a case is named by a URL; a drive letter is none."""
    return "://" in case


def fetched(url: str, cache: Path | None = None) -> Path:
    """The local copy of a case folder behind a URL, up to date.

    A file is copied again where the storage's own tag or the local digest differs.
    Raises ArchiveError where it can't be read, or holds a name that leads out.
    """
    root = cache if cache is not None else _cache()
    folder = root / hashlib.sha256(url.encode()).hexdigest()[:16]
    try:
        storage, base = fsspec.core.url_to_fs(url)
        found = {_below(name, base): name for name in storage.find(base)}
        if not found:
            raise ArchiveError(f"{url} holds no file")
        check_names(found)
        known = _known(folder / LISTING)
        told = {
            name: _copied(storage, remote, folder / name, known.get(name, {}))
            for name, remote in sorted(found.items())
        }
    except (OSError, ValueError, ImportError) as error:
        raise ArchiveError(f"{url} can't be read: {error}") from error
    for path in [p for p in folder.rglob("*") if p.is_file()]:
        if path.relative_to(folder).as_posix() not in {*told, LISTING}:
            path.unlink()  # gone from the storage
    (folder / LISTING).write_text(json.dumps(told, indent=1, sort_keys=True), encoding="utf-8")
    return folder


def _copied(storage: Any, remote: str, target: Path, known: Mapping[str, str]) -> dict[str, str]:
    tag = str(storage.ukey(remote))
    if known.get("tag") == tag and target.is_file() and file_digest(target) == known["sha256"]:
        return dict(known)
    target.parent.mkdir(parents=True, exist_ok=True)
    partial = target.with_name(f".{target.name}.partial")
    storage.get_file(remote, str(partial))
    partial.replace(target)
    return {"tag": tag, "sha256": file_digest(target)}


def _known(path: Path) -> dict[str, dict[str, str]]:
    try:
        plain: dict[str, dict[str, str]] = json.loads(path.read_text(encoding="utf-8"))
    except (OSError, ValueError):
        return {}
    return plain


def _below(name: str, base: str) -> str:
    return name.removeprefix(base).lstrip("/")


def _cache() -> Path:
    given = os.environ.get(CACHE)
    return Path(given) if given else Path.home() / ".cache" / "rca"
