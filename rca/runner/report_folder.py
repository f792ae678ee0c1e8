"""The report folder appears whole or not at all.

A run builds in a sibling folder ``.NAME.PID.partial`` and swaps it in at the end. On Linux the
swap is one atomic exchange; elsewhere two renames, and the next run mends what a crash between
them left. Folders of runs that died are removed by the next run; those of live runs are left.
"""

import contextlib
import ctypes
import os
import re
import shutil
import sys
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

from rca.base.errors import ArchiveError

_AT_FDCWD = -100
_RENAME_EXCHANGE = 2
MARK = "results.json"  # a folder without it was not written by this program


@contextmanager
def whole_folder(out: Path, *, mark: str = MARK) -> Iterator[Path]:
    """A folder to build in; becomes ``out`` only if the block ends without an exception.

    ``mark`` is the file by which a folder of the same kind is known.
    Raises ArchiveError where ``out`` exists and is not a report folder, or can't be written.
    """
    out = Path(os.path.abspath(out))  # noqa: PTH100  resolve() would follow a link away
    _refuse_foreign(out, mark)
    sweep(out)
    partial = out.with_name(f".{out.name}.{os.getpid()}.partial")
    try:
        out.parent.mkdir(parents=True, exist_ok=True)
        partial.mkdir()
    except OSError as error:
        raise ArchiveError(
            f"{out.parent} can't be written ({error.strerror}). Give another place with --out."
        ) from error
    try:
        yield partial
        _swap_in(partial, out)
    finally:
        shutil.rmtree(partial, ignore_errors=True)


def sweep(out: Path) -> None:
    """Remove what dead runs left beside ``out`` and restore a report a crash left renamed."""
    pattern = re.compile(rf"\.{re.escape(out.name)}\.(\d+)\.(partial|old)")
    if not out.parent.is_dir():
        return
    for entry in sorted(out.parent.iterdir()):
        match = pattern.fullmatch(entry.name)
        if match is None or _alive(int(match[1])):
            continue
        if match[2] == "old" and not out.exists():
            entry.rename(out)
        else:
            shutil.rmtree(entry, ignore_errors=True)


def _refuse_foreign(out: Path, mark: str) -> None:
    if out.is_symlink() or (out.exists() and not out.is_dir()):
        raise ArchiveError(f"{out} exists and is not a folder. Give another place with --out.")
    if out.is_dir() and any(out.iterdir()) and not (out / mark).is_file():
        raise ArchiveError(
            f"{out} exists, is not empty and holds no report ({mark} is missing), so it is not "
            "replaced. Give an empty or new folder with --out."
        )


def _swap_in(partial: Path, out: Path) -> None:
    if not out.exists():
        partial.rename(out)
        return
    if _exchange(partial, out):
        return  # the old report now bears the partial's name and is removed by the caller
    old = out.with_name(f".{out.name}.{os.getpid()}.old")
    out.rename(old)
    partial.rename(out)
    shutil.rmtree(old, ignore_errors=True)


def _exchange(one: Path, other: Path) -> bool:
    """Exchange two folders atomically where the system can."""
    if sys.platform != "linux":
        return False
    rename = getattr(ctypes.CDLL(None, use_errno=True), "renameat2", None)
    if rename is None:
        return False
    done: int = rename(
        _AT_FDCWD, os.fsencode(one), _AT_FDCWD, os.fsencode(other), _RENAME_EXCHANGE
    )
    return done == 0


def _alive(pid: int) -> bool:
    if pid == os.getpid():
        return False
    with contextlib.suppress(ProcessLookupError):
        try:
            os.kill(pid, 0)
        except PermissionError:
            return True
        return True
    return False
