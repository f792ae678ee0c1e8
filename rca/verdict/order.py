"""Which side came first, where both took part: from dated evidence only, or it can't be told.

The suction side begins with the first piece of the record below the inlet limit. The discharge
side shows in the oil: it began between the last sample that was still clear and the first that
was not. Only where the one lies wholly before the other is an order stated. Neither date says
when the damage itself began.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from datetime import UTC, date, datetime

from rca.oil.check import OilCheck, Point
from rca.oil.darkening import DARK
from rca.suction.check import SuctionCheck

DAY = 86400.0
# Least rise over the first result of the fill that counts as a trace of burning, by property:
# colour of ASTM D1500, infrared soot and nitration [A/cm]; judgement. The noise floor of the
# method counts where it is larger.
TRACES = {"colour": DARK, "soot": 1.0, "nitration": 1.5}
STRAIN = 0.06e5  # [Pa], fall of the inlet under the clean line that counts as begun; judgement
QUIET = 0.02e5  # [Pa], change from the first piece that is still the noise of a transducer; same
UNKNOWN = "can't be told"


@dataclass(frozen=True, slots=True, kw_only=True)
class Began:
    """When one side began to show: between two days; None where that end is open."""

    after: date | None  # it did not show yet
    by: date  # it showed
    words: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Order:
    """Which side showed first, and on what that rests."""

    first: str  # "suction", "discharge" or "can't be told"
    suction: Began | None
    discharge: Began | None
    why: str


def order_of(suction: SuctionCheck | None, oil: OilCheck | None) -> Order:
    """The order of the two sides from the record of the inlet and the series of the oil."""
    one = _suction(suction) if suction is not None else None
    two = _discharge(oil) if oil is not None else None
    if one is None or two is None:
        missing = [
            words
            for words, began in (
                ("the day the inlet fell below its limit", one),
                ("the day the oil first showed burning", two),
            )
            if began is None
        ]
        return Order(
            first=UNKNOWN, suction=one, discharge=two, why=f"Not known: {' and '.join(missing)}."
        )
    if two.after is not None and one.by <= two.after:
        return Order(
            first="suction",
            suction=one,
            discharge=two,
            why=f"{one.words} {two.words} The inlet was low first.",
        )
    if one.after is not None and two.by <= one.after:
        return Order(
            first="discharge",
            suction=one,
            discharge=two,
            why=f"{two.words} {one.words} The oil showed burning first.",
        )
    return Order(
        first=UNKNOWN,
        suction=one,
        discharge=two,
        why=f"{one.words} {two.words} The two spans overlap, so neither is shown to be first.",
    )


def _suction(check: SuctionCheck) -> Began | None:
    """From the pieces of the warm record: the first of those that stay low to the end.

    Low is below the limit, or under the clean line by ``STRAIN``: air comes out of solution well
    above the limit, so the fall counts from where it shows.
    """
    measured, limit = check.measured, check.limit
    if measured is None or limit is None or not measured.pieces:
        return None
    low = [p.measured < limit or (p.viscous_excess or 0.0) > STRAIN for p in measured.pieces]
    if not (low[-1] and measured.pieces[-1].measured < limit):
        return None
    first = len(low) - next((k for k, is_low in enumerate(reversed(low)) if not is_low), len(low))
    by = _day(measured.pieces[first].end_s)
    start = measured.pieces[0].viscous_excess
    quiet = [
        p
        for p in measured.pieces[:first]
        if start is None or (p.viscous_excess or 0.0) - start < QUIET
    ]
    before = _day(quiet[-1].start_s) if quiet else None
    words = (
        f"The warm inlet pressure has fallen for good by {by.isoformat()} "
        f"(below {limit / 1e5:.2f} bar(a), or {STRAIN / 1e5:.2f} bar under the clean line); "
    )
    words += (
        f"on {before.isoformat()} no fall is seen."
        if before is not None
        else "the record does not reach back to before."
    )
    return Began(after=before, by=by, words=words)


def _discharge(check: OilCheck) -> Began | None:
    """Traces of burning in the fill in service: colour, soot or nitration.

    From the last sample without any to the one in which a second property shows it; one property
    alone is no proof of burning.
    """
    found = sorted(
        (b for name, need in TRACES.items() if (b := _trace(check.points, check, name, need))),
        key=lambda b: b.by,
    )
    if not found:
        return None
    told = found[:2]
    after = [b.after for b in told if b.after is not None]
    return Began(
        after=min(after, default=None), by=told[-1].by, words=" ".join(b.words for b in told)
    )


def _trace(points: Sequence[Point], check: OilCheck, name: str, need: float) -> Began | None:
    mine = sorted(
        (p for p in points if p.property == name and p.fill == check.fill and not p.excluded),
        key=lambda p: p.sampled,
    )
    if len(mine) < 2:
        return None
    judged = check.judged.get(name)
    need = max(need, judged.noise if judged is not None else 0.0)
    shown = [p.value - mine[0].value >= need for p in mine]
    if not shown[-1]:
        return None
    first = shown.index(True)
    clear, dark = mine[first - 1], mine[first]
    return Began(
        after=clear.sampled,
        by=dark.sampled,
        words=(
            f"{name.capitalize()} of the oil: {clear.value:g} on {clear.sampled.isoformat()} "
            f"({clear.sample}), {dark.value:g} on {dark.sampled.isoformat()} ({dark.sample})."
        ),
    )


def _day(seconds: float) -> date:
    return datetime.fromtimestamp(seconds, tz=UTC).date()
