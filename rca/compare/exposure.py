"""How long each machine was watched, in calendar days or in running hours.

Without an exposure table a machine is watched from its own first incident, which then starts the
count and is not counted itself, to the last day of observation. That needs no knowledge of when
the machine was put in, and makes no rate out of one incident.
"""

import csv
from collections.abc import Sequence
from dataclasses import dataclass
from datetime import date
from pathlib import Path

import numpy as np
import numpy.typing as npt

from rca.base.errors import ArchiveError
from rca.compare.table import EPOCH, IncidentTable

FloatArray = npt.NDArray[np.float64]
COLUMNS = ("asset", "from", "to", "running_hours")  # and "site" where two share a name


@dataclass(frozen=True, slots=True, kw_only=True)
class Watch:
    """One machine watched from one day to another; days since 1970-01-01."""

    machine: str  # as in ``IncidentTable.machines``
    start: float
    end: float
    hours: float | None = None  # running hours in that time
    starts_with_incident: bool = False

    @property
    def days(self) -> float:
        """Calendar days watched."""
        return self.end - self.start


def read_exposure(path: Path) -> tuple[Watch, ...]:
    """A CSV table with the columns asset, from, to and, where known, running_hours.

    Raises ArchiveError naming the row, what was found and what was expected.
    """
    try:
        text = path.read_text(encoding="utf-8-sig")
    except (OSError, UnicodeDecodeError) as error:
        raise ArchiveError(f"{path} can't be read: {error}") from error
    reader = csv.DictReader(text.splitlines())
    missing = [c for c in COLUMNS[:3] if c not in (reader.fieldnames or ())]
    if missing:
        raise ArchiveError(
            f"{path.name}: found the columns {', '.join(reader.fieldnames or ()) or 'none'}; "
            f"expected {', '.join(COLUMNS)}"
        )
    return tuple(_watch(row, f"{path.name}, line {n}") for n, row in enumerate(reader, start=2))


def _watch(row: dict[str, str], place: str) -> Watch:
    days = []
    for name in ("from", "to"):
        found = (row.get(name) or "").strip()
        try:
            days.append(float((date.fromisoformat(found) - EPOCH).days))
        except ValueError as error:
            raise ArchiveError(
                f"{place}, {name}: found {found!r}, expected a date such as 2024-01-31"
            ) from error
    if days[1] <= days[0]:
        raise ArchiveError(f"{place}: the last day does not come after the first")
    asset, site = ((row.get(name) or "").strip() for name in ("asset", "site"))
    return Watch(
        machine=f"{asset}, {site}" if site else asset,
        start=days[0],
        end=days[1],
        hours=_hours((row.get("running_hours") or "").strip(), days[1] - days[0], place),
    )


def _hours(text: str, days: float, place: str) -> float | None:
    if not text:
        return None
    try:
        hours = float(text)
    except ValueError as error:
        raise ArchiveError(f"{place}, running_hours: found {text!r}, expected hours") from error
    if not 0 < hours <= 24 * (days + 1):
        raise ArchiveError(
            f"{place}, running_hours: found {text}; {days:g} days hold at most {24 * days:g} h"
        )
    return hours


def watches(
    table: IncidentTable, given: Sequence[Watch], *, until: date, since: date | None = None
) -> tuple[Watch, ...]:
    """One or more watches for every machine of the table."""
    end = float((until - EPOCH).days)
    machines = table.machines
    found = [w for w in given if w.machine in set(machines)]
    known = {w.machine for w in found}
    days = np.where(np.isfinite(table.days), table.days, np.inf)
    column = np.array(machines, dtype=object)
    for machine in sorted(set(machines) - known):
        first = float(days[column == machine].min())
        start = first if since is None else float((since - EPOCH).days)
        if start < end:
            found.append(
                Watch(machine=machine, start=start, end=end, starts_with_incident=since is None)
            )
    return tuple(found)


def in_hours(watched: Sequence[Watch]) -> bool:
    """Whether every watch states its running hours."""
    return bool(watched) and all(w.hours is not None for w in watched)


def length(watched: Sequence[Watch]) -> float:
    """All exposure together, in running hours where every watch has them, else machine-days."""
    if in_hours(watched):
        return float(sum(w.hours or 0.0 for w in watched))
    return float(sum(w.days for w in watched))


def ages(watched: Sequence[Watch], machine_days: Sequence[tuple[str, float]]) -> list[float]:
    """The exposure gathered by all watched machines together up to each event, sorted.

    Events outside every watch of their machine are left out, and so is the first incident where
    it starts the watch. Machines that join or leave are allowed for: the clock of the trend is
    exposure, not the calendar. Running hours count as spread evenly over their watch.
    """
    by_machine: dict[str, list[Watch]] = {}
    for w in watched:
        by_machine.setdefault(w.machine, []).append(w)
    kept = sorted(
        day
        for machine, day in machine_days
        if any(
            (w.start < day if w.starts_with_incident else w.start <= day) and day <= w.end
            for w in by_machine.get(machine, ())
        )
    )
    return _gathered(watched, np.array(kept)).tolist() if kept else []


def _gathered(watched: Sequence[Watch], days: FloatArray) -> FloatArray:
    """Exposure of all machines up to each day, [days]."""
    hours = in_hours(watched)
    total = np.zeros(days.size)
    for w in watched:
        part = np.clip((days - w.start) / w.days, 0.0, 1.0)
        total += part * ((w.hours or 0.0) if hours else w.days)
    return total
