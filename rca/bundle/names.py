"""Names an archive may hold: they stay inside the folder they are unpacked to, on any system."""

import re
import unicodedata
from collections.abc import Iterable

from rca.base.errors import ArchiveError

# Device names that Windows keeps for itself, whatever the extension (Microsoft, Naming Files).
_RESERVED = re.compile(
    r"(con|prn|aux|nul|conin\$|conout\$|com[0-9¹²³]|lpt[0-9¹²³])(\..*)?", re.IGNORECASE
)
_FORBIDDEN = re.compile(r'[\x00-\x1f\x7f<>:"|?*\\]')
LONGEST_PART = 255  # [bytes]
LONGEST = 1024  # [bytes]


def check_name(name: str) -> None:
    """Refuse a member's name that could lead out, or that some system can't hold.

    Raises ArchiveError naming it and the reason.
    """
    reason = _reason(name)
    if reason:
        raise ArchiveError(f"the archive holds the name {name[:120]!r}, {reason}; it is refused")


def check_names(names: Iterable[str]) -> None:
    """Refuse names that are unsafe, told twice, or the same on a system that ignores case.

    Raises ArchiveError for the first such name.
    """
    seen: dict[str, str] = {}
    folders: dict[str, str] = {}
    for name in names:
        check_name(name)
        folded = _folded(name)
        if folded in seen:
            other = seen[folded]
            how = "twice" if other == name else f"beside {other!r}, which some systems confuse"
            raise ArchiveError(f"the archive holds {name!r} {how}; it is refused")
        seen[folded] = name
        parts = folded.split("/")
        spelled = name.split("/")
        for depth in range(1, len(parts)):
            folder, written = "/".join(parts[:depth]), "/".join(spelled[:depth])
            if folders.setdefault(folder, written) != written:
                raise ArchiveError(
                    f"the archive holds the folders {folders[folder]!r} and {written!r}, which "
                    "some systems confuse; it is refused"
                )
    for folder, written in folders.items():
        if folder in seen:
            raise ArchiveError(
                f"the archive holds {written!r} as a file and as a folder; it is refused"
            )


def _reason(name: str) -> str:
    if not name or len(name.encode("utf-8", "surrogatepass")) > LONGEST:
        return "which is empty or too long"
    if name.startswith(("/", "\\")) or re.match(r"[A-Za-z]:", name):
        return "which is absolute"
    if any("\ud800" <= letter <= "\udfff" for letter in name):
        return "which is no Unicode text"
    parts = name.split("/")
    if ".." in parts:
        return "which leads out of its folder"
    if _FORBIDDEN.search(name):
        return "which holds a sign that some systems forbid"
    for part in parts:
        if part in ("", ".") or len(part.encode()) > LONGEST_PART:
            return "which has an empty or too long part"
        if part.endswith((" ", ".")) or _RESERVED.fullmatch(part):
            return "which some systems keep for themselves"
    return ""


def _folded(name: str) -> str:
    return unicodedata.normalize("NFKC", unicodedata.normalize("NFC", name).casefold())
