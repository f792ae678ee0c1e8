"""How fast the oil darkened: over which days most of the change in colour came."""

from collections.abc import Sequence
from dataclasses import dataclass
from datetime import date

from rca.base.source import Source
from rca.oil.reference import Reference
from rca.oil.trends import Row

MOST_OF_IT = 0.6  # share of the change that has to come inside one interval to call it a step
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
    step_days: int | None  # longest time most of the change can have taken; None if unknown
    step_from: str  # sample before the step, or "fill"
    gradual: bool  # three results or more and no interval holds most of the change
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
    gradual = step_days is None and len(rows) >= 3 and change >= DARK
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
    """Days between the last result before most of the change and the first one after it."""
    if change < DARK:
        return None, ""
    before_day, before_level, before = filled, new, "fill"
    for row in rows:
        day = row.sample.sampled
        if row.value.value - before_level >= MOST_OF_IT * change:
            if before_day is None or day is None:
                return None, before
            return (day - before_day).days, before
        before_day, before_level, before = day, row.value.value, row.sample.id
    return None, ""
