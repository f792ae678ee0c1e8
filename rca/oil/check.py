"""The oil reports judged: latest sample against limits and new oil, trends of the last fill."""

import tomllib
from dataclasses import dataclass
from datetime import date
from functools import cache
from importlib.resources import files

from rca.base.errors import OutOfRangeError
from rca.base.source import Source
from rca.case.model import Case
from rca.case.oil import OilSample, OilValue
from rca.oil.precision import certain, reproducibility
from rca.stats.trend import mann_kendall, theil_sen

LEAST_FOR_TREND = 5
ALPHA = 0.05
OIL_CHANGE_KINDS = ("oil change", "oil changed", "fluid change")
LAB_CHANGE_KINDS = ("laboratory change", "lab change")


@dataclass(frozen=True, slots=True, kw_only=True)
class Limit:
    """One limit with its basis, source and flag."""

    property: str
    direction: str
    value: float
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
    source: Source
    new: float | None  # of the new oil, same property
    change: float | None  # from new, in the unit
    noise: float  # R at this level
    stands_out: float | None  # change / R; 1 is the edge of chance
    last_step: float | None  # change since the earlier sample of this fill, over R
    beyond: tuple[str, ...]  # limits crossed, in words
    trend_p: float | None  # two-sided probability of a trend by chance
    trend_per_1000h: float | None
    trend_real: bool  # p below ALPHA and the change over the fill larger than R
    points: int


@dataclass(frozen=True, slots=True, kw_only=True)
class Point:
    """One plotted result."""

    property: str
    sampled: date
    hours: float | None
    value: float
    op: str
    laboratory: str
    fill: int
    excluded: bool


@dataclass(frozen=True, slots=True, kw_only=True)
class OilCheck:
    """The oil of a case."""

    samples: int
    excluded: tuple[tuple[str, str], ...]  # (sample, reason)
    unread: int
    latest: str  # id of the latest sample
    latest_date: date | None
    previous_date: date | None
    reference: str  # id of the new-oil sample, "" where there is none
    fills: tuple[date, ...]  # first days of fills after the first
    laboratory_changes: tuple[date, ...]
    judged: dict[str, Judged]
    points: tuple[Point, ...]


@cache
def limits() -> tuple[Limit, ...]:
    """The shipped limits."""
    text = files("rca.oil").joinpath("limits.toml").read_text(encoding="utf-8")
    return tuple(Limit(**row) for row in tomllib.loads(text)["limit"])


def check_oil(case: Case, samples: tuple[OilSample, ...], *, unread: int = 0) -> OilCheck | None:
    """Judge the oil; None where no usable sample is on record."""
    used = [s for s in samples if not s.excluded and not s.new_oil and s.sampled is not None]
    if not used:
        return None
    fills = _days(case, OIL_CHANGE_KINDS)
    labs = _lab_changes(case, used)
    reference = _reference(samples)
    last_fill = [s for s in used if _fill(s.sampled, fills) == _fill(used[-1].sampled, fills)]
    names = sorted({name for s in last_fill for name in s.values})
    judged = {
        name: one
        for name in names
        if (one := _judge(name, last_fill, reference, labs)) is not None
    }
    return OilCheck(
        samples=len(samples),
        excluded=tuple((s.id, s.excluded) for s in samples if s.excluded),
        unread=unread,
        latest=used[-1].id,
        latest_date=used[-1].sampled,
        previous_date=last_fill[-2].sampled if len(last_fill) > 1 else None,
        reference=reference.id if reference is not None else "",
        fills=tuple(fills),
        laboratory_changes=tuple(labs),
        judged=judged,
        points=_points(samples, fills),
    )


def _judge(
    name: str, fill: list[OilSample], reference: OilSample | None, labs: list[date]
) -> Judged | None:
    rows = [(s, s.values[name]) for s in fill if name in s.values]
    if not rows:
        return None
    sample, value = rows[-1]
    new_value = reference.values.get(name) if reference is not None else None
    new = certain(new_value)
    noise = reproducibility(
        name, max(abs(value.value), abs(new or 0.0)) * 0.5 + 0.5 * abs(value.value)
    )
    change = value.value - new if new is not None and value.op in ("=", "~", ">") else None
    same_lab = [(s, v) for s, v in rows if _fill(s.sampled, labs) == _fill(sample.sampled, labs)]
    p, slope, real = _trend(name, same_lab)
    earlier = certain(same_lab[-2][1]) if len(same_lab) > 1 else None
    return Judged(
        property=name,
        unit=value.unit,
        text=value.text,
        op=value.op,
        value=value.value,
        sample=sample.id,
        sampled=sample.sampled,
        source=value.source,
        new=new,
        change=change,
        noise=noise,
        stands_out=change / noise if change is not None and noise > 0 else None,
        last_step=(value.value - earlier) / noise if earlier is not None and noise > 0 else None,
        beyond=tuple(_crossed(name, value, new)),
        trend_p=p,
        trend_per_1000h=slope,
        trend_real=real,
        points=len(same_lab),
    )


def _crossed(name: str, value: OilValue, new: float | None) -> list[str]:
    words = []
    x = value.value
    if value.op == "<":
        return []
    for limit in (one for one in limits() if one.property == name):
        rise = x - new if new is not None else None
        share = 100.0 * rise / new if rise is not None and new else None
        crossed = {
            "above": x > limit.value,
            "below": x < limit.value,
            "rise": rise is not None and rise >= limit.value,
            "fall": rise is not None and -rise >= limit.value,
            "rise %": share is not None and share > limit.value,
            "fall %": share is not None and -share > limit.value,
        }[limit.direction]
        if crossed:
            words.append(f"{limit.direction} {limit.value:g} ({limit.source}; {limit.flag})")
    return words


def _trend(
    name: str, rows: list[tuple[OilSample, OilValue]]
) -> tuple[float | None, float | None, bool]:
    """Trend on hours where every sample has them, else on days counted as 24 h."""
    points = [(s, v.value) for s, v in rows if v.op in ("=", "~")]
    if len(points) < LEAST_FOR_TREND:
        return None, None, False
    values = tuple(v for _, v in points)
    hours = [s.machine_hours for s, _ in points]
    if all(h is not None for h in hours) and all(
        a < b for a, b in zip(hours, hours[1:], strict=False) if a is not None and b is not None
    ):
        times = tuple(float(h) for h in hours if h is not None)
    else:
        times = tuple(s.sampled.toordinal() * 24.0 for s, _ in points if s.sampled is not None)
    try:
        test = mann_kendall(values)
        slope, _ = theil_sen(times, values)
    except OutOfRangeError:
        return None, None, False
    over = abs(slope) * (times[-1] - times[0])
    level = sum(values) / len(values)
    real = test.p_two_sided < ALPHA and over > reproducibility(name, level)
    return test.p_two_sided, slope * 1000.0, real


def _points(samples: tuple[OilSample, ...], fills: list[date]) -> tuple[Point, ...]:
    return tuple(
        Point(
            property=name,
            sampled=s.sampled,
            hours=s.machine_hours,
            value=v.value,
            op=v.op,
            laboratory=s.laboratory,
            fill=_fill(s.sampled, fills),
            excluded=bool(s.excluded),
        )
        for s in samples
        if s.sampled is not None and not s.new_oil
        for name, v in sorted(s.values.items())
    )


def _reference(samples: tuple[OilSample, ...]) -> OilSample | None:
    new = [s for s in samples if s.new_oil and not s.excluded]
    return new[-1] if new else None


def _days(case: Case, kinds: tuple[str, ...]) -> list[date]:
    return sorted(
        e.when if type(e.when) is date else e.when.date()  # type: ignore[union-attr]
        for e in case.history
        if e.kind.casefold().strip() in kinds
    )


def _lab_changes(case: Case, used: list[OilSample]) -> list[date]:
    changes = set(_days(case, LAB_CHANGE_KINDS))
    for one, other in zip(used, used[1:], strict=False):
        if one.laboratory != other.laboratory and other.sampled is not None:
            earlier = [c for c in changes if one.sampled and one.sampled <= c <= other.sampled]
            if not earlier:
                changes.add(other.sampled)
    return sorted(changes)


def _fill(day: date | None, changes: list[date]) -> int:
    return sum(day is not None and day >= change for change in changes)
