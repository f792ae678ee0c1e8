"""Photographs: the list, and what each file itself says; pixels only prove the file whole."""

import warnings
from collections.abc import Mapping
from datetime import datetime
from pathlib import Path

from PIL import ExifTags, Image, UnidentifiedImageError

from rca.base.errors import Problem, Severity
from rca.base.source import Source
from rca.case.model import EvidenceFile, Photo
from rca.intake.rows import Row, read_rows

COLUMNS = ("file", "exhibit", "taken", "by", "view", "zone", "scale", "caption")
FORMATS = {".jpg": "JPEG", ".jpeg": "JPEG", ".png": "PNG", ".tif": "TIFF", ".tiff": "TIFF"}
MOST_PIXELS = 200_000_000
_TURNED = (5, 6, 7, 8)


def read_photos(
    folder: Path, files: Mapping[str, EvidenceFile], problems: list[Problem]
) -> tuple[Photo, ...]:
    """Every photograph, listed or not, with EXIF time, orientation, size and device."""
    listing = files.get("photos/photos.csv")
    rows: dict[str, Row] = {}
    for row in read_rows(
        folder,
        "photos/photos.csv",
        COLUMNS,
        ("file",),
        listing.sha256 if listing else "",
        problems,
    ):
        name = row.get("file")
        path = name if name.startswith("photos/") else f"photos/{name}"
        if path in rows:
            row.wrong("file", "each photograph in one row", f"First claimed in {rows[path].line}.")
        elif path not in files:
            row.wrong("file", "a file in the folder photos", "Add the file or take the row out.")
        else:
            rows[path] = row
    photos = []
    for path, file in sorted(files.items()):
        if not path.startswith("photos/") or path == "photos/photos.csv":
            continue
        photo = _photo(folder / path, file, rows.get(path), problems)
        if photo is not None:
            photos.append(photo)
    return tuple(photos)


def _photo(
    path: Path, file: EvidenceFile, row: Row | None, problems: list[Problem]
) -> Photo | None:
    def note(found: str, expected: str, mend: str, severity: Severity) -> None:
        problems.append(
            Problem(
                severity=severity,
                file=file.file,
                place="",
                found=found,
                expected=expected,
                mend=mend,
            )
        )

    if path.suffix.lower() not in FORMATS:
        note(
            f"a file of type {path.suffix!r}",
            "JPEG, PNG or TIFF",
            "Export it so.",
            Severity.WARNING,
        )
        return None
    try:
        with warnings.catch_warnings():
            warnings.simplefilter("error", Image.DecompressionBombWarning)
            with Image.open(path) as image:
                kind = image.format or ""
                if image.width * image.height > MOST_PIXELS:
                    raise Image.DecompressionBombError
                exif = image.getexif()
                width, height = image.size
                image.load()
    except (Image.DecompressionBombError, Image.DecompressionBombWarning):
        note(
            f"a picture of more than {MOST_PIXELS:,} pixels",
            "a photograph",
            "Add a smaller copy; keep the original elsewhere.",
            Severity.ERROR,
        )
        return None
    except (UnidentifiedImageError, OSError, SyntaxError, ValueError) as error:
        note(
            f"a picture that can't be read ({error})",
            "a whole JPEG, PNG or TIFF",
            "Copy it again from the camera.",
            Severity.ERROR,
        )
        return None
    if kind != FORMATS[path.suffix.lower()]:
        note(
            f"a {kind} file named {path.suffix}",
            f"a {FORMATS[path.suffix.lower()]} file",
            "Rename it by what it is.",
            Severity.WARNING,
        )
    if row is None:
        note(
            "a photograph that photos.csv does not list",
            "a row in photos/photos.csv",
            "Add exhibit, view, zone and scale; without them it is shown and carries no weight.",
            Severity.WARNING,
        )
    orientation = int(exif.get(ExifTags.Base.Orientation, 1) or 1)
    if orientation in _TURNED:
        width, height = height, width
    taken, taken_from = _taken(row, dict(exif.get_ifd(ExifTags.IFD.Exif)))
    source = row.source() if row else Source(file=file.file, locator="", sha256=file.sha256)
    cell = row.get if row else lambda _: ""
    return Photo(
        file=file.file,
        source=Source(file=file.file, locator=source.locator, sha256=file.sha256),
        exhibit=cell("exhibit"),
        taken=taken,
        taken_from=taken_from,
        by=cell("by"),
        view=cell("view"),
        zone=cell("zone"),
        scale=cell("scale"),
        caption=cell("caption"),
        width=width,
        height=height,
        orientation=orientation if 1 <= orientation <= 8 else 1,
        device=" ".join(
            str(exif.get(tag, "")).strip("\0 ")
            for tag in (ExifTags.Base.Make, ExifTags.Base.Model)
        ).strip(),
    )


def _taken(row: Row | None, exif: Mapping[int, object]) -> tuple[datetime | None, str]:
    listed = row.moment("taken") if row else None
    if listed is not None:
        return listed, "photos.csv"
    stamp = str(exif.get(ExifTags.Base.DateTimeOriginal, "")).strip("\0 ")
    zone = str(exif.get(ExifTags.Base.OffsetTimeOriginal, "")).strip("\0 ")
    if stamp and zone:
        try:
            return datetime.strptime(f"{stamp}{zone}", "%Y:%m:%d %H:%M:%S%z"), "EXIF"
        except ValueError:
            return None, ""
    return None, ""
