"""Due dates as an iCalendar (RFC 5545), one all-day event an open action with a due date."""

from collections.abc import Iterable
from dataclasses import dataclass
from datetime import UTC, date, datetime, time, timedelta

from icalendar import Alarm, Calendar, Event

REMIND = timedelta(days=-7)


@dataclass(frozen=True, slots=True, kw_only=True)
class DueDate:
    """One action that waits for its day."""

    case: str
    id: str
    text: str
    owner: str
    asset: str
    due: date
    caution: str = ""


def calendar_bytes(dates: Iterable[DueDate], *, stamp: date) -> bytes:
    """The calendar; the same actions and the same stamp give the same bytes.

    Each event keeps its name (UID) from run to run, so that a calendar program replaces it. A
    reminder comes seven days before. Text is escaped by the library.
    """
    calendar = Calendar()
    calendar.add("prodid", "-//rca//corrective actions//EN")
    calendar.add("version", "2.0")
    calendar.add("method", "PUBLISH")
    for one in sorted(dates, key=lambda d: (d.due, d.case, d.id)):
        event = Event()
        event.add("uid", f"{_safe(one.case)}-{_safe(one.id)}@actions.rca.invalid")
        event.add("dtstamp", datetime.combine(stamp, time.min, tzinfo=UTC))
        event.add("dtstart", one.due)
        event.add("dtend", one.due + timedelta(days=1))
        event.add("transp", "TRANSPARENT")
        event.add("summary", f"{one.case} {one.id}: {one.text}")
        event.add("description", _described(one))
        alarm = Alarm()
        alarm.add("action", "DISPLAY")
        alarm.add("description", f"{one.case} {one.id} is due on {one.due}")
        alarm.add("trigger", REMIND)
        event.add_component(alarm)
        calendar.add_component(event)
    return bytes(calendar.to_ical())


def _described(one: DueDate) -> str:
    lines = [one.text, f"Owner: {one.owner or 'nobody'}", f"Machine: {one.asset or 'not named'}"]
    return "\n".join([*lines, one.caution] if one.caution else lines)


def _safe(text: str) -> str:
    """A name for a UID: letters, digits, dots and hyphens, the rest by its code."""
    return "".join(
        c if c.isascii() and (c.isalnum() or c in ".-") else f"_{ord(c):x}" for c in text
    )
