"""Cleanliness codes from particle counts, by the printed tables (no logarithm: they round)."""

from dataclasses import dataclass
from math import isfinite

from rca.base.errors import OutOfRangeError

# ISO 4406: upper limits per mL of scale numbers 0 to 28, "more than ... up to and including"
ISO_4406_UPPER = (
    0.01, 0.02, 0.04, 0.08, 0.16, 0.32, 0.64, 1.3, 2.5, 5, 10, 20, 40, 80, 160, 320, 640, 1300,
    2500, 5000, 10e3, 20e3, 40e3, 80e3, 160e3, 320e3, 640e3, 1.3e6, 2.5e6,
)  # fmt: skip
FEW_COUNTS = 20  # raw counts under this are too few for a firm number (ISO 4406)
# SAE AS4059 cumulative classes 000, 00, 0..12: most particles per 100 mL at sizes A..F
AS4059_SIZES = (">4", ">6", ">14", ">21", ">38", ">70")  # µm(c)
AS4059_CLASSES = ("000", "00", *(str(k) for k in range(13)))
_AS4059 = (
    (195, 76, 14, 3, 1, 0),
    (390, 152, 27, 5, 1, 0),
    (780, 304, 54, 10, 2, 0),
    (1560, 609, 109, 20, 4, 1),
    (3120, 1217, 217, 39, 7, 1),
    (6250, 2432, 432, 76, 13, 2),
    (12500, 4864, 864, 152, 26, 4),
    (25000, 9731, 1731, 306, 53, 8),
    (50000, 19462, 3462, 612, 106, 16),
    (100000, 38924, 6924, 1224, 212, 32),
    (200000, 77849, 13849, 2449, 424, 64),
    (400000, 155698, 27698, 4898, 848, 128),
    (800000, 311396, 55396, 9796, 1696, 256),
    (1600000, 622792, 110792, 19592, 3392, 512),
    (3200000, 1245584, 221584, 39184, 6784, 1024),
)


@dataclass(frozen=True, slots=True, kw_only=True)
class ScaleNumber:
    """One number of an ISO 4406 code; ``mark`` is "", "≥" (few counts) or ">" (off the table)."""

    number: int
    mark: str = ""

    def __str__(self) -> str:
        """As it is written in a code."""
        return f"{self.mark}{self.number}"


def scale_number(per_ml: float, *, raw_count: float | None = None) -> ScaleNumber:
    """ISO 4406 scale number of a concentration [1/mL] by the table.

    ``raw_count`` is what the counter saw; below 20 the number is prefixed. Raises OutOfRangeError
    for a negative or NaN concentration.
    """
    if not isfinite(per_ml) or per_ml < 0.0:
        raise OutOfRangeError(f"a concentration is 0 or more particles per mL; got {per_ml}")
    mark = "≥" if raw_count is not None and raw_count < FEW_COUNTS else ""
    for number, upper in enumerate(ISO_4406_UPPER):
        if per_ml <= upper:
            return ScaleNumber(number=number, mark=mark)
    return ScaleNumber(number=28, mark=">")


def iso_4406(per_ml: tuple[float, float, float]) -> str:
    """Code of the concentrations at ≥4, ≥6 and ≥14 µm(c) [1/mL], e.g. "18/16/13".

    Raises OutOfRangeError where a larger size holds more particles than a smaller one.
    """
    if not per_ml[0] >= per_ml[1] >= per_ml[2]:
        raise OutOfRangeError(f"cumulative counts must not rise with size; got {per_ml}")
    return "/".join(str(scale_number(one)) for one in per_ml)


def count_range(number: int) -> tuple[float, float]:
    """Concentrations [1/mL] of a scale number: more than the first, up to the second.

    Raises OutOfRangeError outside 0 to 28.
    """
    if not 0 <= number <= 28:
        raise OutOfRangeError(f"scale numbers run from 0 to 28; got {number}")
    return (ISO_4406_UPPER[number - 1] if number else 0.0, ISO_4406_UPPER[number])


def as4059(per_100_ml: tuple[float, ...]) -> tuple[str, ...]:
    """SAE AS4059 cumulative class for each size A to F given, ">12" beyond the table.

    Table read in two agreeing secondary copies. Raises OutOfRangeError for a negative count or
    more than six sizes.
    """
    if not 1 <= len(per_100_ml) <= 6 or any(not isfinite(c) or c < 0 for c in per_100_ml):
        raise OutOfRangeError(f"one to six counts of 0 or more are needed; got {per_100_ml}")
    return tuple(_as4059_class(size, count) for size, count in enumerate(per_100_ml))


def _as4059_class(size: int, count: float) -> str:
    for name, row in zip(AS4059_CLASSES, _AS4059, strict=True):
        if count <= row[size]:
            return name
    return ">12"
