"""One property of the last fill: against limits, against new oil, against the sample before."""

from collections.abc import Sequence
from dataclasses import dataclass
from datetime import date
from math import hypot

from rca.base.source import Source
from rca.oil.limits import Limit
from rca.oil.precision import PER_SD, Precision, certain, noise_floor
from rca.oil.reference import Reference
from rca.oil.trends import Row, Trend


@dataclass(frozen=True, slots=True, kw_only=True)
class Crossing:
    """One limit and whether the latest result passes it (None: can't be told, and why)."""

    words: str
    crossed: bool | None
    basis: str
    source: str
    flag: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Judged:
    """The latest result of one property of the last fill."""

    property: str
    unit: str
    text: str
    op: str
    value: float
    sample: str
    sampled: date | None
    laboratory: str
    source: Source
    new: float | None  # of the new oil, same property
    new_from: str  # where that comes from, in words
    new_is_measured: bool  # a new-oil sample of the same case
    change: float | None  # from new, in the unit; of a "<" result only where it is surely a fall
    noise: float  # R at this level, widened by the uncertainty of the new-oil value
    noise_source: str
    noise_flag: str
    noise_note: str
    stands_out: float | None  # change / noise; 1 is the edge of chance
    last_step: float | None  # change since the earlier sample of this fill, over noise
    last_step_days: int | None
    last_step_same_laboratory: bool
    crossings: tuple[Crossing, ...]
    limit_lines: tuple[tuple[float, str], ...]  # on the property's axis, for a figure
    trend: Trend | None
    points: int

    def beyond(self) -> tuple[str, ...]:
        """The limits crossed, in words with their source."""
        return tuple(
            f"{c.words} ({c.source}; {c.flag})" for c in self.crossings if c.crossed is True
        )


def judge(
    name: str,
    rows: Sequence[Row],
    reference: Reference | None,
    limits: Sequence[Limit],
    trend: Trend | None,
    *,
    site: float | None = None,
) -> Judged:
    """Judge the last of ``rows``; ``site`` is the site's own R' where re-tests give one."""
    last = rows[-1]
    value = last.value
    new = reference.value if reference is not None else None
    floor = noise_floor(name, 0.5 * (value.value + (value.value if new is None else new)))
    noise = _noise(floor, reference, site)
    change = _change(value.op, value.value, new)
    step, days, same = _last_step(rows, floor.R, name)
    drawn = [(line, one.words()) for one in limits if (line := one.line(new)) is not None]
    return Judged(
        property=name,
        unit=value.unit,
        text=value.text,
        op=value.op,
        value=value.value,
        sample=last.sample.id,
        sampled=last.sample.sampled,
        laboratory=last.sample.laboratory,
        source=value.source,
        new=new,
        new_from=reference.text if reference is not None else "",
        new_is_measured=reference is not None and reference.text.startswith("new oil, "),
        change=change,
        noise=noise,
        noise_source=floor.source if site is None else "re-tests of this case (R')",
        noise_flag=floor.flag if site is None else "measured",
        noise_note=floor.note,
        stands_out=change / noise if change is not None else None,
        last_step=step,
        last_step_days=days,
        last_step_same_laboratory=same,
        crossings=tuple(_crossing(one, rows[-1], new) for one in limits),
        limit_lines=tuple(drawn),
        trend=trend,
        points=len(rows),
    )


def _noise(floor: Precision, reference: Reference | None, site: float | None) -> float:
    own = max(floor.R, site) if site is not None else floor.R
    return hypot(own, PER_SD * reference.u) if reference is not None else own


def _change(op: str, value: float, new: float | None) -> float | None:
    """Change from new; of a limit only where its side is sure."""
    if new is None:
        return None
    if op in ("=", "~"):
        return value - new
    sure = (op == ">" and value >= new) or (op == "<" and value <= new)
    return value - new if sure else None


def _last_step(
    rows: Sequence[Row], noise: float, name: str
) -> tuple[float | None, int | None, bool]:
    if len(rows) < 2:
        return None, None, False
    last, before = rows[-1], rows[-2]
    same = last.place.stretch == before.place.stretch
    days = None
    if last.sample.sampled and before.sample.sampled:
        days = (last.sample.sampled - before.sample.sampled).days
    earlier = certain(before.value)
    if earlier is None or last.value.op == "<":
        return None, days, same
    floor = noise
    if same:
        precise = noise_floor(name, 0.5 * (earlier + last.value.value))
        floor = min(noise, 2.0 * precise.r) if precise.r is not None else noise
    return (last.value.value - earlier) / floor, days, same


def _crossing(limit: Limit, row: Row, new: float | None) -> Crossing:
    return Crossing(
        words=limit.words(),
        crossed=limit.crossed(row.value, new),
        basis=limit.basis(),
        source=f"{limit.source}, {limit.edition}" if limit.edition else limit.source,
        flag=limit.flag,
    )
