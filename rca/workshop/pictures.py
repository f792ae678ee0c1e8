"""Generated photographs for the sample case: drawn, not taken; each carries a scale bar."""

from dataclasses import dataclass
from datetime import datetime
from pathlib import Path

import numpy as np
import numpy.typing as npt
from PIL import Image, ImageDraw, ImageFilter

SIZE = (1200, 900)
PX_PER_MM = 20.0
ImageArray = npt.NDArray[np.float64]


@dataclass(frozen=True, slots=True, kw_only=True)
class Picture:
    """One picture to draw."""

    file: str
    subject: str
    taken: datetime
    orientation: int = 1
    bar_mm: int = 10


def draw(picture: Picture, folder: Path, seed: int) -> None:
    """Draw a picture and write it with EXIF time, zone, orientation and device."""
    rng = np.random.default_rng(seed)
    image = _SUBJECTS[picture.subject](rng)
    _scale_bar(image, picture.bar_mm)
    exif = Image.Exif()
    exif[0x010F], exif[0x0110] = "Invented", "Sample camera"
    exif[0x0112] = picture.orientation
    stamp = picture.taken.strftime("%Y:%m:%d %H:%M:%S")
    zone = picture.taken.strftime("%z")
    exif.get_ifd(0x8769)[0x9003] = stamp
    exif.get_ifd(0x8769)[0x9011] = f"{zone[:3]}:{zone[3:]}"
    turned = {1: image, 6: image.rotate(90, expand=True), 3: image.rotate(180)}[
        picture.orientation
    ]
    turned.save(folder / picture.file, quality=82, exif=exif)


def _metal(rng: np.random.Generator, tone: float = 150.0) -> ImageArray:
    height, width = SIZE[1], SIZE[0]
    lines = rng.normal(0, 7, (height, 1)) + rng.normal(0, 2.5, (height, width))
    light = np.linspace(18, -18, width)[None, :]
    return np.clip(tone + lines + light, 0, 255)


def _picture(grey: ImageArray, tint: tuple[float, float, float] = (1, 1, 1)) -> Image.Image:
    rgb = np.stack([np.clip(grey * t, 0, 255) for t in tint], axis=2).astype(np.uint8)
    return Image.fromarray(rgb)


def _pits(
    image: Image.Image, rng: np.random.Generator, box: tuple[int, int, int, int], count: int
) -> None:
    pen = ImageDraw.Draw(image)
    for _ in range(count):
        x, y = rng.uniform(box[0], box[2]), rng.uniform(box[1], box[3])
        r = rng.lognormal(1.5, 0.5)
        shade = int(rng.uniform(25, 70))
        pen.ellipse((x - r, y - r, x + r, y + r), fill=(shade, shade, shade + 5))


def _kidney(image: Image.Image, shade: int = 40) -> None:
    pen = ImageDraw.Draw(image)
    pen.arc((180, 120, 1020, 960), 200, 340, fill=(shade, shade, shade), width=90)


def _pitted_kidney(rng: np.random.Generator) -> Image.Image:
    image = _picture(_metal(rng))
    _kidney(image)
    _pits(image, rng, (300, 240, 520, 420), 260)
    return image


def _pitted_bore(rng: np.random.Generator) -> Image.Image:
    image = _picture(_metal(rng, 165), (1.0, 0.93, 0.72))
    _pits(image, rng, (250, 200, 950, 600), 320)
    return image


def _burnt_land(rng: np.random.Generator) -> Image.Image:
    image = _picture(_metal(rng))
    _kidney(image)
    shadow = Image.new("L", SIZE, 0)
    pen = ImageDraw.Draw(shadow)
    for _ in range(60):
        x, y = rng.normal(800, 70), rng.normal(300, 45)
        r = rng.uniform(15, 55)
        pen.ellipse((x - r, y - r, x + r, y + r), fill=int(rng.uniform(120, 235)))
    shadow = shadow.filter(ImageFilter.GaussianBlur(14))
    return Image.composite(Image.new("RGB", SIZE, (22, 19, 17)), image, shadow)


def _charred_seal(rng: np.random.Generator) -> Image.Image:
    image = _picture(_metal(rng, 190))
    pen = ImageDraw.Draw(image)
    pen.ellipse((260, 110, 940, 790), outline=(62, 78, 96), width=58)
    for start in rng.uniform(300, 420, 26):
        width = rng.uniform(2, 9)
        pen.arc(
            (262, 112, 938, 788),
            start,
            start + width,
            fill=(12, 11, 10),
            width=int(rng.uniform(24, 62)),
        )
    return image


def _clogged_mesh(rng: np.random.Generator) -> Image.Image:
    image = _picture(np.full((SIZE[1], SIZE[0]), 205.0))
    pen = ImageDraw.Draw(image)
    for x in range(0, SIZE[0], 14):
        pen.line((x, 0, x, SIZE[1]), fill=(120, 122, 125), width=5)
    for y in range(0, SIZE[1], 14):
        pen.line((0, y, SIZE[0], y), fill=(120, 122, 125), width=5)
    for _ in range(2600):
        at, up = rng.uniform(0, SIZE[0]), rng.uniform(0, SIZE[1])
        a, b = rng.uniform(4, 26, 2)
        tone = int(rng.uniform(40, 95))
        pen.ellipse((at - a, up - b / 3, at + a, up + b / 3), fill=(tone, tone - 8, tone - 20))
    return image.filter(ImageFilter.GaussianBlur(0.8))


def _patch(rng: np.random.Generator) -> Image.Image:
    image = Image.new("RGB", SIZE, (232, 232, 228))
    pen = ImageDraw.Draw(image)
    pen.ellipse((330, 180, 870, 720), fill=(68, 66, 64))
    grain = _picture(np.clip(rng.normal(128, 22, (SIZE[1], SIZE[0])), 0, 255))
    return Image.blend(image, grain, 0.12)


def _oil_glass(rng: np.random.Generator) -> Image.Image:
    image = Image.new("RGB", SIZE, (214, 218, 220))
    pen = ImageDraw.Draw(image)
    pen.rectangle((420, 120, 780, 800), fill=(92, 58, 26), outline=(130, 140, 145), width=6)
    for _ in range(900):
        x, y = rng.uniform(430, 770), 130 + abs(rng.normal(0, 90))
        r = rng.uniform(1.5, 7)
        pen.ellipse((x - r, y - r, x + r, y + r), fill=(176, 150, 110))
    return image.filter(ImageFilter.GaussianBlur(0.6))


def _filter_medium(rng: np.random.Generator) -> Image.Image:
    image = _picture(np.clip(rng.normal(205, 10, (SIZE[1], SIZE[0])), 0, 255), (1, 0.97, 0.88))
    pen = ImageDraw.Draw(image)
    for x in range(0, SIZE[0], 60):
        pen.line((x, 0, x, SIZE[1]), fill=(150, 142, 120), width=3)
    return image


def _overall(rng: np.random.Generator) -> Image.Image:
    image = _picture(np.clip(rng.normal(120, 12, (SIZE[1], SIZE[0])), 0, 255))
    pen = ImageDraw.Draw(image)
    pen.ellipse((250, 100, 950, 800), fill=(160, 162, 165), outline=(90, 92, 95), width=8)
    pen.arc((360, 210, 840, 690), 200, 340, fill=(45, 45, 48), width=60)
    pen.arc((360, 210, 840, 690), 20, 160, fill=(45, 45, 48), width=60)
    pen.ellipse((560, 410, 640, 490), fill=(60, 60, 62))
    return image


def _scale_bar(image: Image.Image, bar_mm: int) -> None:
    pen = ImageDraw.Draw(image)
    length = bar_mm * PX_PER_MM
    left, top = 60, SIZE[1] - 70
    pen.rectangle((left - 20, top - 50, left + length + 20, top + 40), fill=(255, 255, 255))
    for k in range(bar_mm):
        shade = (0, 0, 0) if k % 2 == 0 else (255, 255, 255)
        pen.rectangle(
            (left + k * PX_PER_MM, top, left + (k + 1) * PX_PER_MM, top + 20),
            fill=shade,
            outline=(0, 0, 0),
        )
    pen.text((left, top - 42), f"{bar_mm} mm", fill=(0, 0, 0), font_size=30)


_SUBJECTS = {
    "overall": _overall,
    "pitted kidney": _pitted_kidney,
    "pitted bore": _pitted_bore,
    "burnt land": _burnt_land,
    "charred seal": _charred_seal,
    "clogged mesh": _clogged_mesh,
    "patch": _patch,
    "oil glass": _oil_glass,
    "filter medium": _filter_medium,
}
