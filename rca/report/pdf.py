"""HTML to a tagged, archivable PDF: PDF/A-3a with attachments, and PDF/UA-1 markers beside it.

Any warning of the renderer is an error; nothing outside is fetched. The markers say what the file
is made to meet, not that a full validator has found it so.
"""

import logging
import os
import warnings
from collections.abc import Sequence
from dataclasses import dataclass
from datetime import UTC, datetime
from pathlib import Path
from typing import Any
from urllib.parse import unquote, urlsplit

from rca.base.errors import RenderError
from rca.report.pdf_marks import mark_conformance

BASE = (
    "https://report.invalid/"  # reserved by RFC 2606: names no place; relative links need a host
)
SERVED = ("figures", "photos", "fonts")
TYPES = {
    ".svg": "image/svg+xml",
    ".jpg": "image/jpeg",
    ".png": "image/png",
    ".ttf": "font/ttf",
}
EPOCH = "1767225600"  # 2026-01-01, so that the same report has the same bytes
ADVICE = (
    "The PDF needs the Pango library, which is not installed; report.html was written.\n"
    "  Debian, Ubuntu:  apt install libpango-1.0-0 libpangoft2-1.0-0 libharfbuzz-subset0\n"
    "  Fedora:          dnf install pango\n"
    "  macOS:           brew install pango\n"
    "  Windows:         install MSYS2, then  pacman -S mingw-w64-x86_64-pango  and put its bin "
    "folder on PATH"
)
# Said by the renderer about the machine, not about the page.
HARMLESS = ("harfbuzz-subset",)
LONGEST_LINE = 300


@dataclass(frozen=True, slots=True, kw_only=True)
class Attached:
    """A file inside the PDF; ``relation`` is Source, Data, Supplement or Alternative."""

    name: str
    content: bytes
    description: str
    relation: str
    dated: datetime | None = None  # the epoch of the report where none is known


def write_pdf(
    html: str, folder: Path, target: Path, attached: Sequence[Attached] = ()
) -> tuple[Path | None, str]:
    """Write the PDF; (None, advice) where Pango is missing.

    Raises RenderError with every warning the renderer gave.
    """
    os.environ.setdefault("SOURCE_DATE_EPOCH", EPOCH)
    try:
        import weasyprint  # noqa: PLC0415  slow, and only the report needs it
    except OSError:
        return None, ADVICE
    heard = _Heard()
    logger = logging.getLogger("weasyprint")
    logger.addHandler(heard)
    try:
        document = weasyprint.HTML(string=html, base_url=BASE, url_fetcher=_served(folder))
        epoch = datetime.fromtimestamp(int(EPOCH), tz=UTC)
        with warnings.catch_warnings():
            # the renderer leaves its colour profile open until it is collected
            warnings.simplefilter("ignore", ResourceWarning)
            document.write_pdf(
                target,
                finisher=mark_conformance,
                pdf_variant="pdf/a-3a",
                attachments=[
                    weasyprint.Attachment(
                        string=one.content,
                        name=one.name,
                        description=one.description,
                        created=one.dated or epoch,
                        modified=one.dated or epoch,
                        relationship=one.relation,
                    )
                    for one in attached
                ],
            )
    finally:
        logger.removeHandler(heard)
    if heard.lines:
        target.unlink(missing_ok=True)
        raise RenderError("the renderer warned:\n" + "\n".join(dict.fromkeys(heard.lines)))
    return target, ""


class _Heard(logging.Handler):
    """Keeps every warning."""

    def __init__(self) -> None:
        super().__init__(level=logging.WARNING)
        self.lines: list[str] = []

    def emit(self, record: logging.LogRecord) -> None:
        """Keep one record."""
        text = record.getMessage()
        if not any(word in text for word in HARMLESS):
            self.lines.append(text[:LONGEST_LINE])


def _served(folder: Path) -> Any:
    """A fetcher that serves the report's own figures, photographs and fonts and nothing else."""
    from weasyprint.urls import URLFetcher, URLFetcherResponse  # noqa: PLC0415

    table = {
        f"{name}/{path.name}": path
        for name in SERVED
        if (folder / name).is_dir()
        for path in sorted((folder / name).iterdir())
        if path.suffix in TYPES
    }

    class Fetcher(URLFetcher):  # type: ignore[misc]  # weasyprint ships no types
        def fetch(self, url: str, headers: Any = None) -> Any:
            del headers
            if url.startswith("data:image/png;base64,"):  # dense marks inside our own figures
                return super().fetch(url)
            name = unquote(urlsplit(url).path).lstrip("/")
            if not url.startswith(BASE) or name not in table:
                raise ValueError(f"{url[:80]} is not part of this report")
            path = table[name]
            return URLFetcherResponse(url, path.read_bytes(), {"Content-Type": TYPES[path.suffix]})

    return Fetcher()
