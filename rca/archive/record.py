"""The run record: inputs, versions, knowledge, seed; and, apart, what differs from run to run."""

import hashlib
import platform
import sys
from importlib.metadata import PackageNotFoundError, version
from pathlib import Path
from typing import Any

from rca import __version__
from rca.case.model import Case

LIBRARIES = (
    "numpy",
    "scipy",
    "pandas",
    "polars",
    "numba",
    "matplotlib",
    "papermill",
    "nbconvert",
    "jinja2",
    "weasyprint",
    "pillow",
    "pint",
    "scikit-image",
)


def versions() -> dict[str, str]:
    """Versions of this program, of Python and of every library that touches a number or a page."""
    found = {"rca": __version__, "python": platform.python_version()}
    for name in LIBRARIES:
        try:
            found[name] = version(name)
        except PackageNotFoundError:
            found[name] = "not installed"
    return found


def stable_record(
    case: Case, *, knowledge: str, seed: int, notebooks: dict[str, str]
) -> dict[str, Any]:
    """The part of the record that is the same for the same case under the same versions."""
    return {
        "inputs": {file.file: file.sha256 for file in case.files},
        "notebooks": notebooks,
        "versions": versions(),
        "knowledge": knowledge,
        "seed": seed,
        "code": code_digest(),
    }


def code_digest() -> str:
    """SHA-256 over the package's Python and data files: names and contents, sorted."""
    package = Path(__file__).resolve().parent.parent
    digest = hashlib.sha256()
    for path in sorted(package.rglob("*")):
        if path.suffix in {".py", ".toml", ".json"} and "_shipped" not in path.parts:
            digest.update(path.relative_to(package).as_posix().encode() + b"\0")
            digest.update(path.read_bytes() + b"\0")
    return digest.hexdigest()


def machine() -> dict[str, str]:
    """What the run stood on; differs between machines, so it stays out of ``results.json``."""
    return {
        "system": platform.system(),
        "release": platform.release(),
        "processor": platform.machine(),
        "implementation": sys.implementation.name,
    }
