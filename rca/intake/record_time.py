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
IntArray = npt.NDArray[np.integer]
ByteArray = npt.NDArray[np.uint8]
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
    quick = fixed_width(column, form)
    if quick is not None:
        return _in_zone(quick, zone, complain)
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


def fixed_width(text: "pl.Series", form: str) -> FloatArray | None:
    """Seconds since 1970 of stamps all of one length, digit by digit; some twenty times faster.

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
    rows = np.ascontiguousarray(raw.reshape(-1, length).T)  # one row a character place
    if not _as_the_form_says(rows, places):
        return None
    hour, minute, second = (_number(rows, part) for part in places.parts[3:])
    if hour.max() >= 24 or minute.max() >= 60 or second.max() >= 60:  # noqa: PLR2004  a clock
        return None
    days = _days(rows, places)
    if days is None:
        return None
    seconds = days * 86400.0 + (hour * 3600 + minute * 60 + second)
    for k, place in enumerate(range(WHOLE_SECONDS + 1, length), start=1):
        seconds += (rows[place] - np.uint8(ord("0"))) * 10.0**-k
    return np.asarray(seconds)


def _as_the_form_says(rows: ByteArray, places: _Places) -> bool:
    """Digits where the form has digits, its marks between them; point or comma before parts."""
    for place, row in enumerate(rows):
        if place == WHOLE_SECONDS:
            good = bool(((row == ord(".")) | (row == ord(","))).all())
        elif place > WHOLE_SECONDS or place in places.digits:
            good = bool((row - np.uint8(ord("0"))).max() <= 9)  # noqa: PLR2004  smaller ones wrap
        else:
            good = bool((row == ord(places.pattern[place])).all())
        if not good:
            return False
    return True


def _number(rows: ByteArray, part: range) -> IntArray:
    value = np.zeros(rows.shape[1], dtype=np.int32)
    for place in part:
        value = value * 10 + (rows[place] - np.uint8(ord("0")))
    return value


def _days(rows: ByteArray, places: _Places) -> IntArray | None:
    """Days since 1970, shape (n,); worked out once for each run of equal dates."""
    at = [k for part in places.parts[:3] for k in part]
    changed = np.zeros(rows.shape[1], dtype=bool)
    changed[0] = True
    for place in at:
        changed[1:] |= rows[place, 1:] != rows[place, :-1]
    firsts = np.flatnonzero(changed)
    year, month, day = (_number(rows[:, firsts], part) for part in places.parts[:3])
    if month.min() < 1 or month.max() > 12 or day.min() < 1:  # noqa: PLR2004  a calendar
        return None
    months = ((year - 1970) * 12 + month - 1).astype("datetime64[M]")
    start = months.astype("datetime64[D]").astype(np.int64)
    if (day > (months + 1).astype("datetime64[D]").astype(np.int64) - start).any():
        return None
    return np.repeat(start + day - 1, np.diff(np.append(firsts, rows.shape[1])))


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
    if stamps.dtype == pl.Datetime("us") and not stamps.null_count():
        return np.asarray(stamps.to_physical().to_numpy() * 1e-6)
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
