"""The run record: inputs, versions, knowledge, seed; and, apart, what differs from run to run."""

import hashlib
import platform
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


DATA = (".toml", ".json")


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
    case: Case,
    *,
    knowledge: str,
    seed: int,
    notebooks: dict[str, str],
    parameters: dict[str, dict[str, object]],
) -> dict[str, Any]:
    """The part of the record that is the same for the same case under the same versions.

    ``notebooks`` holds digests of sources; ``parameters`` what each stage ran with, defaults
    included, paths left out.
    """
    return {
        "inputs": {file.file: file.sha256 for file in case.files},
        "notebooks": notebooks,
        "parameters": parameters,
        "versions": versions(),
        "knowledge": knowledge,
        "knowledge_files": knowledge_files(),
        "seed": seed,
        "code": code_digest(),
    }


def code_files() -> dict[str, str]:
    """SHA-256 of each Python and data file of the package, by name."""
    package = Path(__file__).resolve().parent.parent
    return {
        path.relative_to(package).as_posix(): hashlib.sha256(path.read_bytes()).hexdigest()
        for path in sorted(package.rglob("*"))
        if path.suffix in {".py", *DATA} and "_shipped" not in path.parts
    }


def knowledge_files() -> dict[str, str]:
    """SHA-256 of each table of knowledge, limits, names and tolerances the package ships."""
    return {
        name: digest
        for name, digest in code_files().items()
        if name.endswith(DATA) and not name.startswith("report/")  # words of the pages
    }


def code_digest() -> str:
    """SHA-256 over the package's Python files: names and digests, sorted."""
    python = (f"{n} {d}\n" for n, d in code_files().items() if n.endswith(".py"))
    return hashlib.sha256("".join(python).encode()).hexdigest()
