"""A zip container with the same bytes for the same content."""

import io
import re
import zipfile
from datetime import datetime

EPOCH = datetime(2026, 1, 1)  # noqa: DTZ001  office formats keep times without a zone
_MODIFIED = re.compile(
    rb"(<dcterms:(?:created|modified)[^>]*>)[^<]*(</dcterms:(?:created|modified)>)"
)


def fixed_zip(content: bytes) -> bytes:
    """The archive with fixed times, order and property dates; nothing else of it changes."""
    out = io.BytesIO()
    with (
        zipfile.ZipFile(io.BytesIO(content)) as source,
        zipfile.ZipFile(out, "w", zipfile.ZIP_DEFLATED) as target,
    ):
        for name in sorted(source.namelist(), key=lambda n: (n != "[Content_Types].xml", n)):
            data = source.read(name)
            if name == "docProps/core.xml":
                stamp = EPOCH.strftime("%Y-%m-%dT%H:%M:%SZ").encode()
                data = _MODIFIED.sub(rb"\g<1>" + stamp + rb"\g<2>", data)
            entry = zipfile.ZipInfo(name, EPOCH.timetuple()[:6])
            entry.compress_type = zipfile.ZIP_DEFLATED
            entry.external_attr = 0o644 << 16
            target.writestr(entry, data)
    return out.getvalue()
