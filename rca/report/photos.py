"""Photographs for the page: turned upright, shrunk, written anew; the originals stay untouched."""

from collections.abc import Sequence
from pathlib import Path

from PIL import Image, ImageOps

from rca.case.model import Photo

LONGEST_PX = 1100


def shrink_photos(case_dir: Path, photos: Sequence[Photo], out: Path) -> dict[str, str]:
    """Write small upright copies; returns the copy's name for each evidence file."""
    names: dict[str, str] = {}
    if photos:
        out.mkdir(parents=True, exist_ok=True)
    for number, photo in enumerate(photos, start=1):
        name = f"plate-{number:02d}.jpg"
        with Image.open(case_dir / photo.file) as image:
            upright = ImageOps.exif_transpose(image).convert("RGB")
            upright.thumbnail((LONGEST_PX, LONGEST_PX), Image.Resampling.LANCZOS)
            upright.save(out / name, quality=80, optimize=True)
        names[photo.file] = name
    return names
