"""Where the files that ship with the package lie: in the wheel, or in the checkout."""

from importlib.resources import files
from pathlib import Path

from rca.base.errors import ArchiveError


def shipped_folder(name: str) -> Path:
    """The folder ``notebooks`` or ``templates`` as installed, else the checkout's.

    Raises ArchiveError where neither is there.
    """
    package = Path(str(files("rca")))
    for candidate in (package / "_shipped" / name, package.parent / name):
        if candidate.is_dir():
            return candidate
    raise ArchiveError(f"the folder {name!r} that ships with rca is missing; install rca again")
