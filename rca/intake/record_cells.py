"""Number cells of records: decimal marks and thousands marks, settled once for a whole column.

A column is read one way from its first row to its last, so that "1,013" can't be a thousand in one
block and one in the next.
"""

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
import numpy.typing as npt

if TYPE_CHECKING:
    import polars as pl

FloatArray = npt.NDArray[np.float64]
SPACES = "[ '\u2019\u00a0\u202f]"  # marks between thousands that are never decimal marks
# numbers loggers write for "no value"; common practice, no source
ERROR_VALUES = (
    *(-99999.0, -9999.0, -9999.9, -9999.25, -999.25, -999.0, -32768.0),
    *(9999.0, 99999.0, 32767.0, 65535.0, 1e30, -1e30, 9.9e37, 9.91e37),
)
FAR = 10.0  # times the largest other size of the column; a value nearer is a value


@dataclass(frozen=True, slots=True)
class Marks:
    """How numbers of a column are written."""

    decimal: str = "."
    thousands: str = ""  # "." or ","; spaces and apostrophes between digits always go
    doubtful: bool = False  # "1,013" in every cell: a thousand, or one


@dataclass(frozen=True, slots=True)
class Cells:
    """Numbers of one column of a block; NaN where there is none."""

    values: FloatArray
    bad: int = 0  # cells that hold something, but no number
    example: str = ""  # the first of them


def marks_of(sample: "pl.Series") -> Marks:
    """The marks of a text column from some of its cells.

    Two kinds of marks: the last one is decimal. One kind, several times in a cell: thousands. A
    lone comma is decimal; where each cell has three digits behind it and none begins with a zero,
    that is said to be doubtful.
    """
    import polars as pl  # noqa: PLC0415  its thread pool must not exist before a fork

    if sample.dtype != pl.String:
        return Marks()
    text = _tight(sample).drop_nulls()

    def some(pattern: str) -> bool:
        return bool(text.str.contains(pattern).any())

    if some(r"^[+-]?[\d.]*\.\d{3},\d*$") or some(r"^[+-]?\d+(\.\d{3}){2,}$"):
        return Marks(",", ".")
    if some(r"^[+-]?[\d,]*,\d{3}\.\d*$") or some(r"^[+-]?\d+(,\d{3}){2,}$"):
        return Marks(".", ",")
    lone = text.filter(text.str.contains(r"^[+-]?\d*,\d*$"))
    if not len(lone):
        return Marks()
    doubtful = bool(lone.str.contains(r"^[+-]?[1-9]\d{0,2},\d{3}$").all())
    return Marks(",", "", doubtful)


def numbers(series: "pl.Series", marks: Marks) -> Cells:
    """The cells as floats; what is written but no finite number is counted."""
    import polars as pl  # noqa: PLC0415

    if series.dtype.is_numeric():
        return _finite(series)
    text = _tight(series.cast(pl.String))
    if marks.thousands:
        text = text.str.replace_all(marks.thousands, "", literal=True)
    if marks.decimal != ".":
        text = text.str.replace(marks.decimal, ".", literal=True)
    found = text.cast(pl.Float64, strict=False)
    values = np.array(found.fill_null(float("nan")).to_numpy(), dtype=float)
    written = (text.fill_null("") != "").to_numpy()
    bad = written & ~np.isfinite(values)
    values[bad] = np.nan
    first = str(series[int(np.argmax(bad))]) if bad.any() else ""
    return Cells(values, int(bad.sum()), first[:40])


def without_error_values(values: FloatArray) -> tuple[FloatArray, int]:
    """The values without a logger's numbers for "no value", and how many there were.

    Only what lies ``FAR`` beyond every other value of the block counts: a speed of 9999 rpm among
    others of its size stays.
    """
    low, high = (float(f(values)) for f in (np.fmin.reduce, np.fmax.reduce))
    suspects = [v for v in ERROR_VALUES if low <= v <= high]
    if not suspects:
        return values, 0
    mask = np.isin(values, suspects)
    if not mask.any():
        return values, 0
    rest = np.abs(values[~mask])
    largest = float(np.fmax.reduce(rest)) if np.isfinite(rest).any() else 0.0
    mask &= np.abs(values) > FAR * largest
    return np.where(mask, np.nan, values), int(mask.sum())


def _tight(series: "pl.Series") -> "pl.Series":
    """Without outer blanks, and without spaces and apostrophes between digits."""
    text = series.str.strip_chars()
    return text.str.replace_all(rf"(\d){SPACES}(\d\d\d)", "${1}${2}")


def _finite(series: "pl.Series") -> Cells:
    import polars as pl  # noqa: PLC0415

    nulls = series.null_count()
    if series.dtype != pl.Float64 or nulls:
        series = series.cast(pl.Float64).fill_null(float("nan"))
    values = np.asarray(series.to_numpy())
    if not values.size or np.isfinite(values.sum()):
        return Cells(values)
    lost = ~np.isfinite(values)
    return Cells(np.where(lost, np.nan, values), int(lost.sum()) - nulls, "NaN or infinite")
