"""How fast the oil darkened: over which days most of the change in colour came."""

from collections.abc import Sequence
from dataclasses import dataclass
from datetime import date

from rca.base.source import Source
from rca.oil.reference import Reference
from rca.oil.trends import Row

MOST_OF_IT = 0.6  # share of the change whose shortest time is looked for
FAST_DAYS = 200  # half a year and a sampling interval; common practice, no source
DARK = 2.0  # ASTM D1500 units above new: twice the method's R


@dataclass(frozen=True, slots=True, kw_only=True)
class Darkening:
    """Colour of the last fill, ASTM D1500."""

    text: str  # of the latest sample
    sample: str
    source: Source
    new: float
    new_from: str
    u_new: float
    change: float  # at least this much where the latest result is "over 8"
    step_days: int | None  # shortest time that holds most of the change; None if unknown
    step_from: str  # sample at its beginning, or "fill"
    gradual: bool  # most of the change took longer than FAST_DAYS, over three results or more
    points: int


def darkening_of(
    rows: Sequence[Row], reference: Reference | None, filled: date | None
) -> Darkening | None:
    """The darkening of one fill from its colour results; ``filled`` is the day of the oil change.

    None without a colour or without anything to compare it with.
    """
    if not rows or reference is None or rows[-1].value.op == "<":
        return None
    last = rows[-1]
    change = last.value.value - reference.value
    step_days, step_from = _step(rows, reference.value, change, filled)
    gradual = len(rows) >= 3 and step_days is not None and step_days > FAST_DAYS
    return Darkening(
        text=last.value.text,
        sample=last.sample.id,
        source=last.value.source,
        new=reference.value,
        new_from=reference.text,
        u_new=reference.u,
        change=change,
        step_days=step_days,
        step_from=step_from,
        gradual=gradual,
        points=len(rows),
    )


def _step(
    rows: Sequence[Row], new: float, change: float, filled: date | None
) -> tuple[int | None, str]:
    """Shortest time between two results that holds most of the change, and its beginning.

    The oil was as new on the day of the fill, where that day is known.
    """
    if change < DARK:
        return None, ""
    series = [
        (row.sample.sampled, row.value.value, row.sample.id)
        for row in rows
        if row.sample.sampled is not None
    ]
    if filled is not None:
        series.insert(0, (filled, new, "fill"))
    best: tuple[int, str] | None = None
    for i, (begin, level, name) in enumerate(series):
        for end, later, _ in series[i + 1 :]:
            if later - level < MOST_OF_IT * change:
                continue
            days = (end - begin).days
            if best is None or days < best[0]:
                best = (days, name)
    return best if best is not None else (None, "")
