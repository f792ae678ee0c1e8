"""Time stamps of records: one format for the whole file, naive stamps in their stated zone.

The format is chosen once, from stamps spread over the whole file, so that two blocks of one file
can't be read two ways. Day-first and month-first stamps are told apart by the stamps themselves:
the reading under which fewer fail, then the one that runs on more evenly.
"""

from collections.abc import Callable
from datetime import UTC, datetime
from typing import TYPE_CHECKING
from zoneinfo import ZoneInfo

import numpy as np
import numpy.typing as npt

if TYPE_CHECKING:
    import polars as pl

FloatArray = npt.NDArray[np.float64]
SPREADSHEET_EPOCH = 25569.0  # day number of 1970-01-01 where 1899-12-30 is day 0
NUMERIC, ZONED = "number", "with zone"
FORMATS = tuple(
    f"{day}{clock}"
    for day in ("%Y-%m-%d ", "%Y-%m-%dT", "%d.%m.%Y ", "%Y/%m/%d ", "%d/%m/%Y ", "%m/%d/%Y ")
    for clock in ("%H:%M:%S%.f", "%H:%M", "%I:%M:%S %p")
)


def choose_format(sample: "pl.Series") -> tuple[str, str]:
    """The format of a text column, from a sample in the file's order; and the rival that ties.

    The format is ``NUMERIC``, ``ZONED`` or one of ``FORMATS``; "" where nothing fits. The rival
    is "" unless another format reads every stamp as well and runs on as evenly.
    """
    import polars as pl  # noqa: PLC0415  its thread pool must not exist before a fork

    text = _plain(sample)
    if text.cast(pl.Float64, strict=False).null_count() < len(text) / 2:
        return NUMERIC, ""
    zoned = text.str.contains(r":.*(Z|[+-]\d\d:?\d\d)$").fill_null(value=False)
    if int(zoned.sum()) > len(text) / 2:
        return ZONED, ""
    ranked = []
    for form in FORMATS:
        epoch = _seconds(text.str.to_datetime(form, strict=False, time_unit="us"))
        seen = epoch[np.isfinite(epoch)]
        if seen.size:
            roughest = float(np.max(np.abs(np.diff(seen)))) if seen.size > 1 else 0.0
            ranked.append((epoch.size - seen.size, roughest, form, float(seen[0])))
    if not ranked:
        return "", ""
    best, *others = sorted(ranked, key=lambda r: r[:2])
    rival = others[0][2] if others and others[0][:2] == best[:2] else ""
    return best[2], rival if rival and others[0][3] != best[3] else ""


def read_stamps(
    column: "pl.Series", form: str, zone: str, *, complain: Callable[[], Exception]
) -> FloatArray:
    """Seconds since 1970 UTC, shape (n,); NaN where a stamp can't be read.

    Raises what ``complain`` gives where stamps carry no zone and none is stated.
    """
    import polars as pl  # noqa: PLC0415

    if column.dtype.is_temporal():
        epoch = _seconds(column)
        naive = getattr(column.dtype, "time_zone", None) is None
        return _in_zone(epoch, zone, complain) if naive else epoch
    if column.dtype.is_numeric():
        return from_epoch(np.asarray(column.cast(pl.Float64).to_numpy(), dtype=float))
    text = _plain(column)
    if form == NUMERIC:
        numbers = text.cast(pl.Float64, strict=False).fill_null(float("nan"))
        return from_epoch(np.asarray(numbers.to_numpy(), dtype=float))
    if form == ZONED:
        return _seconds(text.str.to_datetime(strict=False, time_unit="us", time_zone="UTC"))
    if not form:
        return np.full(len(column), np.nan)
    return _in_zone(
        _seconds(text.str.to_datetime(form, strict=False, time_unit="us")), zone, complain
    )


def from_epoch(values: FloatArray) -> FloatArray:
    """Seconds, milliseconds, microseconds since 1970, or spreadsheet day numbers, by size."""
    seen = values[np.isfinite(values)]
    middle = float(np.median(seen)) if seen.size else float("nan")
    if 20_000 < middle < 80_000:  # the years 1954 to 2119
        return np.asarray((values - SPREADSHEET_EPOCH) * 86400.0)
    factor = 1.0 if middle < 1e11 else 1e-3 if middle < 1e14 else 1e-6
    return np.asarray(values * factor)


def _plain(column: "pl.Series") -> "pl.Series":
    """Text with a decimal point, whatever the export's language."""
    import polars as pl  # noqa: PLC0415

    return column.cast(pl.String).str.strip_chars().str.replace(",", ".", literal=True)


def _seconds(column: "pl.Series") -> FloatArray:
    import polars as pl  # noqa: PLC0415

    stamps = column.cast(pl.Datetime("us")) if column.dtype == pl.Date else column
    micro = stamps.dt.epoch("us").cast(pl.Float64).fill_null(float("nan"))
    return np.asarray(micro.to_numpy() * 1e-6, dtype=float)


def _in_zone(epoch: FloatArray, zone: str, complain: Callable[[], Exception]) -> FloatArray:
    if not zone:
        raise complain()
    return epoch if zone == "UTC" else localised(epoch, zone)


def localised(epoch: FloatArray, zone: str) -> FloatArray:
    """Naive stamps [s, as if UTC] to UTC; a clock hour that occurs twice is told by its order.

    Within an hour that the time change repeats, stamps before the first step back by more than
    half an hour belong to the first pass, stamps after it to the second.
    """
    info = ZoneInfo(zone)
    quarters = np.floor(epoch / 900.0)
    known = np.isfinite(quarters)
    keys = np.unique(quarters[known])
    if not keys.size:
        return epoch
    first = np.array([_shift(key, info, 0) for key in keys])
    second = np.array([_shift(key, info, 1) for key in keys])
    places = np.searchsorted(keys, np.where(known, quarters, keys[0]))
    shift = first[places]
    twice = known & (first > second)[places]  # equal unless the clock goes back there
    if twice.any():
        inside = np.flatnonzero(twice)
        back = np.flatnonzero(np.diff(epoch[inside]) < -1800.0)
        for step in back[:1]:
            late = inside[step + 1 :]
            shift[late] = second[places[late]]
    return np.asarray(np.where(known, epoch - shift, np.nan))


def _shift(quarter: float, info: ZoneInfo, fold: int) -> float:
    naive = datetime.fromtimestamp(float(quarter) * 900.0, tz=UTC)
    offset = naive.replace(tzinfo=info, fold=fold).utcoffset()
    return offset.total_seconds() if offset is not None else 0.0
