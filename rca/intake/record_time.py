"""Time stamps of records: one format for the whole file, naive stamps in their stated zone.

The format is chosen once, from stamps spread over the whole file, so that two blocks of one file
can't be read two ways. Day-first and month-first stamps are told apart by the stamps themselves:
the reading under which fewer fail, then the one that runs on more evenly.
"""

from collections.abc import Callable
from dataclasses import dataclass
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


WHOLE_SECONDS = 19  # characters of a stamp of whole seconds


@dataclass(frozen=True, slots=True)
class _Places:
    """Where year, month, day, hour, minute and second stand in a stamp of fixed width."""

    pattern: str
    parts: tuple[range, ...]

    @property
    def digits(self) -> tuple[int, ...]:
        """All places of digits, in the order of the parts."""
        return tuple(k for part in self.parts for k in part)


def _places(pattern: str) -> _Places:
    spans = {letter: [k for k, c in enumerate(pattern) if c == letter] for letter in "YmdHMS"}
    return _Places(pattern, tuple(range(s[0], s[-1] + 1) for s in spans.values()))


_PLACES = {
    "%Y-%m-%d %H:%M:%S": _places("YYYY-mm-dd HH:MM:SS"),
    "%Y-%m-%dT%H:%M:%S": _places("YYYY-mm-ddTHH:MM:SS"),
    "%Y/%m/%d %H:%M:%S": _places("YYYY/mm/dd HH:MM:SS"),
    "%d.%m.%Y %H:%M:%S": _places("dd.mm.YYYY HH:MM:SS"),
    "%d/%m/%Y %H:%M:%S": _places("dd/mm/YYYY HH:MM:SS"),
    "%m/%d/%Y %H:%M:%S": _places("mm/dd/YYYY HH:MM:SS"),
}


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
    quick = fixed_width(text, form)
    if quick is not None:
        return _in_zone(quick, zone, complain)
    return _in_zone(
        _seconds(text.str.to_datetime(form, strict=False, time_unit="us")), zone, complain
    )


def fixed_width(text: "pl.Series", form: str) -> FloatArray | None:
    """Seconds since 1970 of stamps all of one length, digit by digit; some ten times faster.

    None where the form is not one of whole seconds with zero-filled numbers, or where any stamp
    is not what the form says: the general reading then looks at every one.
    """
    places = _PLACES.get(form.removesuffix("%.f"))
    if places is None or not len(text) or text.null_count():
        return None
    length = int(text.str.len_bytes().max() or 0)  # type: ignore[arg-type]
    if length < WHOLE_SECONDS or length != text.str.len_bytes().min():
        return None
    raw = np.frombuffer(str(text.str.join("").item()).encode(), dtype=np.uint8)
    digits = raw.reshape(-1, length).astype(np.int32) - ord("0")
    marks = [k for k in range(length) if k not in places.digits and k < WHOLE_SECONDS]
    fraction = list(range(WHOLE_SECONDS + 1, length))
    told = digits[:, [*places.digits, *fraction]]
    if (told < 0).any() or (told > 9).any():
        return None
    if any((digits[:, k] + ord("0") != ord(places.pattern[k])).any() for k in marks):
        return None
    if length > WHOLE_SECONDS and (digits[:, WHOLE_SECONDS] + ord("0") != ord(".")).any():
        return None
    year, month, day, hour, minute, second = (
        digits[:, list(part)] @ np.array([10 ** (len(part) - 1 - k) for k in range(len(part))])
        for part in places.parts
    )
    within = (month >= 1) & (month <= 12) & (day >= 1) & (hour < 24) & (minute < 60)
    if not (within & (second < 60)).all():
        return None
    months = ((year - 1970) * 12 + month - 1).astype("datetime64[M]")
    first = months.astype("datetime64[D]").astype(np.int64)
    after = (months + 1).astype("datetime64[D]").astype(np.int64)
    if (day > after - first).any():
        return None
    days = first + day - 1
    seconds = (days * 86400 + hour * 3600 + minute * 60 + second).astype(float)
    for k, place in enumerate(fraction, start=1):
        seconds += digits[:, place] * 10.0**-k
    return np.asarray(seconds)


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
