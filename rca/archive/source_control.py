"""The commit the program runs from, where it runs from a checkout of its own repository."""

import shutil
import subprocess
from pathlib import Path

TIMEOUT_S = 10.0


def commit(root: Path) -> dict[str, str | bool | None]:
    """Commit and whether the working tree differs from it; None where installed from a wheel."""
    git = shutil.which("git")
    if git is None or not (root / ".git").exists():
        return {"commit": None, "dirty": None}
    head = _asked(git, root, "rev-parse", "HEAD")
    changed = _asked(git, root, "status", "--porcelain", "--", "rca", "notebooks", "templates")
    return {"commit": head or None, "dirty": bool(changed) if changed is not None else None}


def _asked(git: str, root: Path, *words: str) -> str | None:
    try:
        done = subprocess.run(  # noqa: S603  fixed words, no shell
            [git, "-C", str(root), *words],
            capture_output=True,
            text=True,
            timeout=TIMEOUT_S,
            check=False,
        )
    except (OSError, subprocess.TimeoutExpired):
        return None
    return done.stdout.strip() if done.returncode == 0 else None
