"""The life of the oil: fills between oil changes, top-ups, laboratories, hours on the oil."""

import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from datetime import date, datetime, timedelta
from itertools import pairwise

from rca.case.model import Case, HistoryEvent
from rca.case.oil import OilSample

_KINDS = {
    "oil change": r"(oil|fluid) (was )?(change|changed|replaced|renewed)|ölwechsel|vidange",
    "top-up": r"top(ped)?[ -]?up|make-?up oil|nachgefüllt|nachfüllung|appoint",
    "laboratory change": r"lab(oratory)? changed?|change of lab(oratory)?|laborwechsel",
    "filter change": r"filter (element )?(change|changed|replaced|renewed)|filterwechsel",
}
# a work order that only speaks of it
_NOT_DONE = re.compile(r"\b(due|planned|postponed|deferred|recommend\w*|cancel\w*|not|no|next)\b")
_LITRES = re.compile(r"(\d+(?:\.\d+)?)\s*(?:l|L|litres?|liters?)\b")
SETTLING_HOURS = 50.0  # oil younger than this is not yet mixed; common practice, no source


@dataclass(frozen=True, slots=True, kw_only=True)
class OilEvent:
    """An event in the life of the oil and how it is known."""

    when: date
    kind: str  # a key of _KINDS, or "hour meter set back"
    known_from: str
    volume: float | None = None  # [m3]


@dataclass(frozen=True, slots=True, kw_only=True)
class Place:
    """Where one sample stands: its fill, its laboratory's stretch, its hours."""

    fill: int
    stretch: int
    oil_hours: float | None


@dataclass(frozen=True, slots=True, kw_only=True)
class OilLife:
    """Events in order, and one place a sample (same order as the samples)."""

    events: tuple[OilEvent, ...]
    places: tuple[Place, ...]

    def days(self, kind: str) -> tuple[date, ...]:
        """The days of one kind of event."""
        return tuple(e.when for e in self.events if e.kind == kind)


def oil_life(case: Case, samples: Sequence[OilSample]) -> OilLife:
    """Fills and stretches of the samples (sorted by day of sampling, new oil left out).

    A sample drawn on the day of an oil change is taken to be of the old oil.
    """
    events = [e for row in case.history if (e := _event(row)) is not None]
    events += _changes_by_oil_hours(samples, events)
    events += _laboratories(samples, events)
    events += _meter_set_back(samples)
    events += [
        OilEvent(
            when=s.sampled,
            kind="top-up",
            known_from=f"report, sample {s.id}",
            volume=s.top_up,
        )
        for s in samples
        if s.top_up and s.sampled is not None
    ]
    events.sort(key=lambda e: (e.when, e.kind))
    changes = [e.when for e in events if e.kind == "oil change"]
    stretches = [e.when for e in events if e.kind == "laboratory change"]
    begins = {day: _hours_at(day, samples) for day in changes}
    places = tuple(
        Place(
            fill=sum(s.sampled is not None and s.sampled > day for day in changes),
            stretch=_count(stretches, s.sampled),
            oil_hours=s.oil_hours if s.oil_hours is not None else _hours_since(s, begins),
        )
        for s in samples
    )
    return OilLife(events=tuple(events), places=places)


def _event(row: HistoryEvent) -> OilEvent | None:
    kind, text = row.kind.casefold().replace("_", " ").strip(), row.text.casefold()
    for name, pattern in _KINDS.items():
        in_kind = name in kind or re.search(pattern, kind) is not None
        in_text = re.search(rf"\b({pattern})", text) is not None and not _NOT_DONE.search(text)
        if in_kind or in_text:
            litres = _LITRES.search(row.text)
            return OilEvent(
                when=row.when.date() if isinstance(row.when, datetime) else row.when,
                kind=name,
                known_from=f"{row.source.file}, {row.source.locator}",
                volume=float(litres[1]) / 1000.0 if litres else None,
            )
    return None


def _changes_by_oil_hours(
    samples: Sequence[OilSample], events: Sequence[OilEvent]
) -> list[OilEvent]:
    """Oil hours that fall from one sample to the next: the oil was changed between them."""
    found = []
    known = [e.when for e in events if e.kind == "oil change"]
    for one, other in pairwise(samples):
        if one.oil_hours is None or other.oil_hours is None or other.sampled is None:
            continue
        if other.oil_hours >= one.oil_hours - 1.0 or one.sampled is None:
            continue
        if not any(one.sampled <= day <= other.sampled for day in known):
            words = f"oil hours fall from {one.oil_hours:g} to {other.oil_hours:g}"
            day_before = other.sampled - timedelta(days=1)
            found.append(OilEvent(when=day_before, kind="oil change", known_from=words))
    return found


def _laboratories(samples: Sequence[OilSample], events: Sequence[OilEvent]) -> list[OilEvent]:
    found = []
    known = [e.when for e in events if e.kind == "laboratory change"]
    for one, other in pairwise(samples):
        if one.laboratory == other.laboratory or other.sampled is None or one.sampled is None:
            continue
        if not any(one.sampled <= day <= other.sampled for day in known):
            words = f"reports: {one.laboratory} until then, {other.laboratory} from then"
            found.append(OilEvent(when=other.sampled, kind="laboratory change", known_from=words))
    return found


def _meter_set_back(samples: Sequence[OilSample]) -> list[OilEvent]:
    found = []
    for one, other in pairwise(samples):
        a, b = one.machine_hours, other.machine_hours
        if a is not None and b is not None and b < a and other.sampled is not None:
            words = f"machine hours fall from {a:g} to {b:g}"
            found.append(
                OilEvent(when=other.sampled, kind="hour meter set back", known_from=words)
            )
    return found


def _hours_at(day: date, samples: Sequence[OilSample]) -> float | None:
    """Machine hours at a day, between the samples around it; None where the meter was set back."""
    known = [(s.sampled, s.machine_hours) for s in samples if s.sampled and s.machine_hours]
    before = [(d, h) for d, h in known if d <= day]
    after = [(d, h) for d, h in known if d >= day]
    if not before or not after or after[0][1] < before[-1][1]:
        return None
    (d0, h0), (d1, h1) = before[-1], after[0]
    return h0 + (day - d0).days / max((d1 - d0).days, 1) * (h1 - h0)


def _hours_since(sample: OilSample, begins: Mapping[date, float | None]) -> float | None:
    """Machine hours since the oil change; all machine hours where no change is on record."""
    if sample.machine_hours is None or sample.sampled is None:
        return None
    last = max((day for day in begins if day <= sample.sampled), default=None)
    if last is None:
        return sample.machine_hours
    at_change = begins[last]
    if at_change is None or sample.machine_hours < at_change:
        return None
    return sample.machine_hours - at_change


def _count(days: Sequence[date], day: date | None) -> int:
    return sum(day is not None and day >= change for change in days)
