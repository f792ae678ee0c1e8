"""Everything in a case that carries a time, in one order, with how well that time is known."""

from collections.abc import Sequence
from dataclasses import dataclass
from datetime import UTC, date, datetime, time, timedelta, tzinfo
from enum import StrEnum

from rca.base.counted import counted
from rca.base.source import Source
from rca.case.model import Case
from rca.case.oil import OilSample

DAY_S = 86400.0
# A state somebody met with, against something that happened: by the first words of the kind.
_CONDITION = (
    "found",
    "checked",
    "noise",
    "seen",
    "heard",
    "smell",
    "leak",
    "level",
    "foam",
    "hot",
)


class EntryType(StrEnum):
    """Something that happened, or a state met with."""

    EVENT = "event"
    CONDITION = "condition"


class Lane(StrEnum):
    """Where an entry comes from."""

    HISTORY = "work orders and log"
    FAILURE = "failure"
    OIL = "oil samples"
    BENCH = "hand-overs and bench"


@dataclass(frozen=True, slots=True, kw_only=True)
class Entry:
    """One entry of the sequence; ``start_s`` is seconds of true time since 1970."""

    start_s: float
    within_s: float  # how well the time is known: a day where only a day is stated
    written: str  # the time as the report prints it
    lane: Lane
    type: EntryType
    kind: str
    text: str
    source: Source


def case_zone(case: Case) -> tzinfo:
    """The zone of the failure, in which days without a zone are placed; UTC where none is."""
    occurred = case.header.occurred
    zone = occurred.tzinfo if occurred is not None else None
    return zone if zone is not None else UTC


def sequence(case: Case, samples: Sequence[OilSample] = ()) -> tuple[Entry, ...]:
    """All dated entries in order of time; entries of one day keep the order of their files."""
    zone = case_zone(case)
    entries = [
        _history(event.when, event.kind, event.text, event.source, zone) for event in case.history
    ]
    occurred = case.header.occurred
    if occurred is not None:
        entries.append(
            Entry(
                start_s=occurred.timestamp(),
                within_s=60.0,
                written=_written(occurred, zone),
                lane=Lane.FAILURE,
                type=EntryType.EVENT,
                kind="failure",
                text=case.header.title,
                source=Source(file="case.toml", locator="case.occurred"),
            )
        )
    entries += [
        _day_entry(
            sample.sampled, Lane.OIL, "oil sample", _sample_text(sample), sample.source, zone
        )
        for sample in samples
        if sample.sampled is not None and not sample.new_oil
    ]
    entries += _bench(case, zone)
    return tuple(sorted(entries, key=lambda e: e.start_s))


def _history(when: date, kind: str, text: str, source: Source, zone: tzinfo) -> Entry:
    words = kind.casefold()
    type_ = EntryType.CONDITION if any(w in words for w in _CONDITION) else EntryType.EVENT
    if isinstance(when, datetime):
        moment = when if when.tzinfo is not None else when.replace(tzinfo=zone)
        return Entry(
            start_s=moment.timestamp(),
            within_s=60.0,
            written=_written(moment, zone),
            lane=Lane.HISTORY,
            type=type_,
            kind=kind,
            text=text,
            source=source,
        )
    return _day_entry(when, Lane.HISTORY, kind, text, source, zone, type_)


def _day_entry(
    when: date,
    lane: Lane,
    kind: str,
    text: str,
    source: Source,
    zone: tzinfo,
    type_: EntryType = EntryType.EVENT,
) -> Entry:
    start = datetime.combine(when, time(), tzinfo=zone)
    return Entry(
        start_s=start.timestamp(),
        within_s=DAY_S,
        written=when.isoformat(),
        lane=lane,
        type=type_,
        kind=kind,
        text=text,
        source=source,
    )


def _sample_text(sample: OilSample) -> str:
    return f"{sample.id}, set aside: {sample.excluded}" if sample.excluded else sample.id


def _bench(case: Case, zone: tzinfo) -> list[Entry]:
    """First hand-over of each exhibit and each day on which parts were read."""
    entries = []
    seen: set[str] = set()
    for row in case.custody:
        if row.when is None or row.exhibit in seen:
            continue
        seen.add(row.exhibit)
        entries.append(
            Entry(
                start_s=row.when.timestamp(),
                within_s=60.0,
                written=_written(row.when, zone),
                lane=Lane.BENCH,
                type=EntryType.EVENT,
                kind="exhibit secured",
                text=f"{row.exhibit}, {row.description}, by {row.handed_to}",
                source=row.source,
            )
        )
    days: dict[date, list[str]] = {}
    for finding in case.findings:
        if finding.when is not None:
            days.setdefault(finding.when, []).append(finding.id)
    for when, ids in sorted(days.items()):
        first = next(f for f in case.findings if f.id == ids[0])
        entries.append(
            _day_entry(
                when,
                Lane.BENCH,
                "parts read",
                f"{counted(len(ids), 'finding')}, {ids[0]} to {ids[-1]}",
                first.source,
                zone,
            )
        )
    return entries


def _written(moment: datetime, zone: tzinfo) -> str:
    if moment.tzinfo is None:
        moment = moment.replace(tzinfo=zone)
    return moment.astimezone(zone).strftime("%Y-%m-%d %H:%M")


def local_day(seconds: float, zone: tzinfo) -> datetime:
    """A moment as a wall-clock time of the case, without its zone, for drawing."""
    epoch = datetime(1970, 1, 1, tzinfo=UTC)
    return (epoch + timedelta(seconds=seconds)).astimezone(zone).replace(tzinfo=None)
