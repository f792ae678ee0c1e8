"""What a run stood on: interpreter, system, processor, libraries, fonts; for ``record.json``."""

import ctypes
import ctypes.util
import hashlib
import locale
import os
import platform
import sys
import warnings
from importlib.metadata import distributions
from pathlib import Path
from typing import Any

CONTROL = (
    "PYTHONHASHSEED",
    "LC_ALL",
    "LANG",
    "TZ",
    "SOURCE_DATE_EPOCH",
    "OMP_NUM_THREADS",
    "OPENBLAS_NUM_THREADS",
    "MKL_NUM_THREADS",
    "NPY_DISABLE_CPU_FEATURES",
    "NUMBA_CPU_NAME",
)


def environment(fonts: Path) -> dict[str, Any]:
    """Facts that can move a bit of a number or a page; none names a person or a path.

    ``fonts`` is the folder of the fonts the pages and figures are set in.
    """
    return {
        "python": platform.python_version(),
        "implementation": sys.implementation.name,
        "system": platform.system(),
        "release": platform.release(),
        "libc": " ".join(platform.libc_ver()).strip(),
        "processor": platform.machine(),
        "processor_features": _processor_features(),
        "float": {"mantissa_bits": sys.float_info.mant_dig, "byte_order": sys.byteorder},
        "packages": packages(),
        "blas": _blas(),
        "text_shaping": _text_shaping(),
        "fonts": hashed(fonts, (".ttf", ".otf")),
        "machine": _machine(),
    }


def control() -> dict[str, Any]:
    """Settings of the process that reach into numbers or bytes, as they were."""
    return {
        "environment": {name: os.environ.get(name) for name in CONTROL},
        "encoding": locale.getpreferredencoding(False),
        "hash_randomised": bool(sys.flags.hash_randomization),
    }


def packages() -> dict[str, dict[str, str]]:
    """Every installed package: version, and SHA-256 of the list of its files with their hashes."""
    found: dict[str, dict[str, str]] = {}
    for one in distributions():
        name = (one.metadata["Name"] or "").lower()
        if not name or name in found:
            continue
        listing = one.read_text("RECORD")
        digest = hashlib.sha256(listing.encode()).hexdigest() if listing else ""
        found[name] = {"version": one.version, "files_sha256": digest}
    return dict(sorted(found.items()))


def hashed(folder: Path, endings: tuple[str, ...] = ()) -> dict[str, str]:
    """SHA-256 of each file under a folder, by its relative name, sorted."""
    return {
        path.relative_to(folder).as_posix(): file_digest(path)
        for path in sorted(folder.rglob("*"))
        if path.is_file() and (not endings or path.suffix in endings)
    }


def file_digest(path: Path, kind: str = "sha256") -> str:
    """Hexadecimal digest of a file, read in pieces."""
    with path.open("rb") as stream:
        return hashlib.file_digest(stream, kind).hexdigest()


def _processor_features() -> list[str]:
    """Instruction sets NumPy found and may use; kernels differ by them in the last bits."""
    import numpy as np  # noqa: PLC0415  only a record asks

    simd = np.show_config(mode="dicts").get("SIMD Extensions", {})
    return sorted({*simd.get("baseline", ()), *simd.get("found", ())})


def _blas() -> list[dict[str, str]]:
    """The linear algebra libraries in the process: name, version, kernel, threads."""
    from threadpoolctl import threadpool_info  # noqa: PLC0415  asks the loaded libraries

    keys = ("internal_api", "version", "architecture", "num_threads", "threading_layer")
    rows = [{k: str(one[k]) for k in keys if one.get(k) is not None} for one in threadpool_info()]
    return sorted(rows, key=lambda row: sorted(row.items()))


def _text_shaping() -> dict[str, str]:
    """Versions of the libraries that set the text of the PDF; "" where not there."""
    try:
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")
            from weasyprint.text import ffi  # noqa: PLC0415
    except (ImportError, OSError):
        return {"pango": ""}
    return {
        "pango": _dotted(int(ffi.pango.pango_version())),
        "harfbuzz": _harfbuzz(),
        "fontconfig": _fontconfig(),
        "subsetter": "harfbuzz-subset" if ffi.harfbuzz_subset is not None else "fonttools",
    }


def _harfbuzz() -> str:
    name = ctypes.util.find_library("harfbuzz")
    if name is None:
        return ""
    version = ctypes.CDLL(name).hb_version_string
    version.restype = ctypes.c_char_p
    return bytes(version()).decode()


def _fontconfig() -> str:
    name = ctypes.util.find_library("fontconfig")
    return _dotted(int(ctypes.CDLL(name).FcGetVersion())) if name is not None else ""


def _dotted(number: int) -> str:
    return f"{number // 10000}.{number // 100 % 100}.{number % 100}"


def _machine() -> str:
    """A name for the machine that tells it from others and tells nothing about it."""
    return hashlib.sha256(f"rca {platform.node()}".encode()).hexdigest()[:16]
