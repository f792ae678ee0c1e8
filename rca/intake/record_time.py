"""Time stamps of records: one format for the whole file, naive stamps in their stated zone.

The format is chosen once, from stamps spread over the whole file, so that two blocks of one file
can't be read two ways. Day-first and month-first stamps are told apart by the stamps themselves:
the reading under which fewer fail, then the one that runs on more evenly.
"""

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
NUMERIC, ZONED, ELAPSED = "number", "with zone", "elapsed clock"
AMBIGUOUS = ("%d/", "%m/", "%d-%m", "%m-%d")  # day or month first
_DAYS = (
    *("%Y-%m-%d", "%d.%m.%Y", "%Y/%m/%d", "%d/%m/%Y", "%m/%d/%Y", "%d-%m-%Y", "%m-%d-%Y"),
    *("%d-%b-%Y", "%d %b %Y", "%d.%m.%y", "%d/%m/%y", "%m/%d/%y", "%Y%m%d"),
)
FORMATS = tuple(
    f"{day}{between}{clock}"
    for day in _DAYS
    for between in (" ", "T")
    for clock in ("%H:%M:%S%.f", "%H:%M", "%I:%M:%S %p")
    if between == " " or day in ("%Y-%m-%d", "%Y%m%d")
)
EARLIEST, LATEST = 0.0, 4.2e9  # [s], the years 1970 to 2103; a format that reads others is wrong
LEAST_EPOCH = 1e8  # [s]; smaller numbers are no date since 1973 but seconds since a start
REPEATED_S, HALF_HOUR = 4.0 * 3600.0, 1800.0
SKIPPED_QUARTERS = 3  # quarters of an hour that summer time skips; more of them: no such clock


class StampError(ValueError):
    """The stamps of a file can't be placed in time."""

    def __init__(self, found: str, expected: str, mend: str) -> None:
        self.found, self.expected, self.mend = found, expected, mend
        super().__init__(f"{found}; expected {expected}")


WHOLE_SECONDS = 19  # characters of a stamp of whole seconds
MOST_DIGITS = 9  # of parts of a second


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
    elapsed = text.str.contains(r"^\d+:\d\d:\d\d(\.\d*)?$").fill_null(value=False)
    if int(elapsed.sum()) > len(text) / 2:
        return ELAPSED, ""
    ranked = []
    for form in FORMATS:
        epoch = _seconds(text.str.to_datetime(form, strict=False, time_unit="us"))
        with np.errstate(invalid="ignore"):
            seen = epoch[(epoch > EARLIEST) & (epoch < LATEST)]
        if seen.size:
            roughest = float(np.max(np.abs(np.diff(seen)))) if seen.size > 1 else 0.0
            ranked.append((epoch.size - seen.size, roughest, form, float(seen[0])))
    if not ranked:
        return "", ""
    best, *others = sorted(ranked, key=lambda r: r[:2])
    rival = others[0][2] if others and others[0][:2] == best[:2] else ""
    return best[2], rival if rival and others[0][3] != best[3] else ""


def read_stamps(
    column: "pl.Series", form: str, clock: "Clock", *, start: float | None = None
) -> FloatArray:
    """Seconds since 1970 UTC, shape (n,); NaN where a stamp can't be read.

    ``start`` [s since 1970] is where seconds or clocks that count from zero begin. Raises
    StampError for stamps without a zone where none is stated, and for elapsed times without start.
    """
    import polars as pl  # noqa: PLC0415

    if column.dtype.is_temporal():
        epoch = _seconds(column)
        naive = getattr(column.dtype, "time_zone", None) is None
        return clock.true(epoch) if naive else epoch
    if column.dtype.is_numeric():
        return from_numbers(np.asarray(column.cast(pl.Float64).to_numpy(), dtype=float), start)
    if not form:
        return np.full(len(column), np.nan)
    quick = fixed_width(column, form)
    if quick is not None:
        return clock.true(quick)
    text = _plain(column)
    if form == NUMERIC:
        numbers = text.cast(pl.Float64, strict=False).fill_null(float("nan"))
        return from_numbers(np.asarray(numbers.to_numpy(), dtype=float), start)
    if form == ELAPSED:
        return _after_start(_elapsed(text), start)
    if form == ZONED:
        return _seconds(text.str.to_datetime(strict=False, time_unit="us", time_zone="UTC"))
    return clock.true(_seconds(text.str.to_datetime(form, strict=False, time_unit="us")))


def _after_start(elapsed: FloatArray, start: float | None) -> FloatArray:
    if start is None:
        raise StampError(
            "times that count from zero, without a date",
            "the moment of the first sample",
            'Add it:  time = { column = "...", start = 2026-03-02T06:00:00+01:00 }',
        )
    return start + elapsed


def _elapsed(text: "pl.Series") -> FloatArray:
    """Seconds of clocks like 0:03:12.5; hours may pass 24."""
    import polars as pl  # noqa: PLC0415

    parts = text.str.extract_groups(r"^(\d+):(\d\d):(\d\d(?:\.\d*)?)$").struct.unnest()
    hour, minute, second = (
        parts.to_series(k).cast(pl.Float64, strict=False).fill_null(float("nan")).to_numpy()
        for k in range(3)
    )
    return np.asarray(hour * 3600.0 + minute * 60.0 + second)


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
    if hour.max() >= 24 or minute.max() >= 60 or second.max() >= 60:
        return None
    days = _days(rows, places)
    if days is None:
        return None
    seconds = days * 86400.0 + (hour * 3600 + minute * 60 + second)
    part = range(WHOLE_SECONDS + 1, length)
    if len(part) > MOST_DIGITS:
        return None
    return np.asarray(seconds + _number(rows, part) * 10.0 ** -len(part))


def _as_the_form_says(rows: ByteArray, places: _Places) -> bool:
    """Digits where the form has digits, its marks between them; point or comma before parts."""
    for place, row in enumerate(rows):
        if place == WHOLE_SECONDS:
            good = bool(((row == ord(".")) | (row == ord(","))).all())
        elif place > WHOLE_SECONDS or place in places.digits:
            good = bool((row - np.uint8(ord("0"))).max() <= 9)
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
    if month.min() < 1 or month.max() > 12 or day.min() < 1:
        return None
    months = ((year - 1970) * 12 + month - 1).astype("datetime64[M]")
    start = months.astype("datetime64[D]").astype(np.int64)
    if (day > (months + 1).astype("datetime64[D]").astype(np.int64) - start).any():
        return None
    return np.repeat(start + day - 1, np.diff(np.append(firsts, rows.shape[1])))


def from_numbers(values: FloatArray, start: float | None = None) -> FloatArray:
    """Seconds since 1970 of epoch times or spreadsheet day numbers, told by their size.

    Epoch times in s, ms, us or ns. With ``start`` numbers too small for a date are seconds after
    it; without it they raise StampError.
    """
    seen = values[np.isfinite(values)]
    middle = float(np.median(seen)) if seen.size else float("nan")
    if start is not None and middle < LEAST_EPOCH:
        return start + values
    if 20_000 < middle < 80_000:  # the years 1954 to 2119
        return np.asarray((values - SPREADSHEET_EPOCH) * 86400.0)
    if middle < LEAST_EPOCH:
        return _after_start(values, start)
    factor = next(
        (f for top, f in ((1e11, 1.0), (1e14, 1e-3), (1e17, 1e-6)) if middle < top), 1e-9
    )
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


class Clock:
    """A logger's clock in its stated zone, read block after block."""

    def __init__(self, zone: str) -> None:
        """``zone`` is an IANA name; "" where none is stated."""
        self.zone = zone
        self._kept = np.empty(0)  # naive stamps before this block, within a few hours
        self._skipped: set[float] = set()

    def true(self, naive: FloatArray) -> FloatArray:
        """Naive stamps [s, as if UTC] to UTC, shape (n,).

        Raises StampError where no zone is stated, and where the stamps run through an hour that
        summer time skips: that clock is not of this zone.
        """
        if not self.zone:
            raise StampError(
                "stamps without a zone",
                "a zone",
                'Add it:  time = { column = "...", zone = "Europe/Vienna" }',
            )
        if self.zone == "UTC":
            return naive
        chain = np.concatenate([self._kept, naive])
        true, skipped = localised(chain, self.zone)
        self._skipped |= skipped
        if len(self._skipped) >= SKIPPED_QUARTERS:
            raise StampError(
                f"stamps in an hour that summer time skips in {self.zone}",
                "a clock that changes to summer time there",
                'If it keeps one time all year, state that: zone = "Etc/GMT-1" is UTC+1.',
            )
        before, self._kept = self._kept.size, _lately(chain)
        return true[before:]


def _lately(chain: FloatArray) -> FloatArray:
    """The last few hours of the stamps: what tells the two passes of a repeated hour apart."""
    seen = chain[np.isfinite(chain)]
    if not seen.size:
        return chain[:0]
    return chain[np.flatnonzero(np.abs(chain - seen[-1]) > REPEATED_S)[-1:].max(initial=-1) + 1 :]


def localised(epoch: FloatArray, zone: str) -> tuple[FloatArray, set[float]]:
    """Naive stamps [s, as if UTC] to UTC; and the quarters of skipped hours among them.

    Within an hour that the time change repeats, stamps before the first step back by more than
    half an hour belong to the first pass, stamps after it to the second; the other way round in a
    file with the newest row first. An hourly stamp written twice is a step back as well.
    """
    info = ZoneInfo(zone)
    quarters = np.floor(epoch / 900.0)
    known = np.isfinite(quarters)
    keys = np.unique(quarters[known])
    if not keys.size:
        return epoch, set()
    first = np.array([_shift(key, info, 0) for key in keys])
    second = np.array([_shift(key, info, 1) for key in keys])
    places = np.searchsorted(keys, np.where(known, quarters, keys[0]))
    shift = first[places]
    twice = np.flatnonzero(known & (first > second)[places])  # equal unless the clock goes back
    for inside in np.split(twice, np.flatnonzero(np.diff(epoch[twice] // 86400.0)) + 1):
        late = _second_pass(epoch, inside)
        shift[late] = second[places[late]]
    skipped = {float(key) for key in keys[first < second]}
    return np.asarray(np.where(known, epoch - shift, np.nan)), skipped


def _second_pass(epoch: FloatArray, inside: npt.NDArray[np.intp]) -> npt.NDArray[np.intp]:
    """Of stamps within one repeated hour those of its second pass."""
    if not inside.size or epoch.size < 2:
        return inside[:0]
    backward = epoch[-1] < epoch[0]
    steps = np.diff(epoch[inside]) * (-1.0 if backward else 1.0)
    turn = np.flatnonzero(steps < -HALF_HOUR)
    if not turn.size and float(np.median(np.abs(np.diff(epoch)))) >= HALF_HOUR:
        turn = np.flatnonzero(steps == 0.0)
    if backward:
        entered = inside[0] > 0 and epoch[inside[0] - 1] - epoch[inside[0]] <= HALF_HOUR
        # from the hour after it one comes into the second pass
        return inside[: turn[0] + 1] if turn.size else inside if entered else inside[:0]
    return inside[turn[0] + 1 :] if turn.size else inside[:0]


def _shift(quarter: float, info: ZoneInfo, fold: int) -> float:
    naive = datetime.fromtimestamp(float(quarter) * 900.0, tz=UTC)
    offset = naive.replace(tzinfo=info, fold=fold).utcoffset()
    return offset.total_seconds() if offset is not None else 0.0
