"""The oil reports judged: latest sample against limits and new oil, trends of every fill."""

from collections import defaultdict
from collections.abc import Sequence
from dataclasses import dataclass, replace
from datetime import date

from rca.case.model import Case
from rca.case.oil import OilSample, OilValue, UnreadCell
from rca.oil.combinations import Picture, pictures_of
from rca.oil.darkening import Darkening, darkening_of
from rca.oil.fills import OilEvent, OilLife, oil_life
from rca.oil.judge import Judged, judge
from rca.oil.limits import Limit, limits_for, merged, shipped_limits
from rca.oil.precision import certain, site_precision
from rca.oil.reference import new_oil_sample, reference_of
from rca.oil.trends import Row, Trend, trend_of


@dataclass(frozen=True, slots=True, kw_only=True)
class Point:
    """One plotted result."""

    property: str
    sample: str
    sampled: date
    hours: float | None
    value: float
    op: str
    laboratory: str
    fill: int
    excluded: bool


@dataclass(frozen=True, slots=True, kw_only=True)
class OilCheck:
    """The oil of a case at one sample point."""

    samples: int
    point: str  # the sample point judged
    other_points: tuple[str, ...]  # points with fewer samples, listed and not mixed in
    excluded: tuple[tuple[str, str], ...]  # (sample, reason)
    undated: tuple[str, ...]  # samples without a usable day of sampling
    unread: tuple[UnreadCell, ...]
    latest: str  # id of the latest sample
    latest_date: date | None
    previous_date: date | None
    days_before_failure: int | None  # of the latest sample; negative: drawn after it
    oil_hours: float | None  # of the latest sample
    reference: str  # id of the new-oil sample, "" where there is none
    fills: tuple[date, ...]  # first days of fills after the first
    laboratory_changes: tuple[date, ...]
    events: tuple[OilEvent, ...]
    judged: dict[str, Judged]
    darkening: Darkening | None
    pictures: tuple[Picture, ...]  # combinations of results
    trends: tuple[Trend, ...]  # of every fill
    points: tuple[Point, ...]
    fluid_class: str  # "" where case.toml does not say


def check_oil(
    case: Case,
    samples: Sequence[OilSample],
    *,
    unread: Sequence[UnreadCell] = (),
    site_limits: Sequence[Limit] = (),
) -> OilCheck | None:
    """Judge the oil; None where no usable sample is on record.

    Samples set aside are shown and not judged. Several sample points are never mixed: the point
    with the most samples is judged.
    """
    dated = [s for s in samples if s.sampled is not None and not s.new_oil]
    usable = [s for s in dated if not s.excluded]
    if not usable:
        return None
    point, others = _main_point(usable)
    used = _one_a_bottle(sorted((s for s in usable if s.point == point), key=_when))
    life = oil_life(case, used)
    rows = _rows(used, life)
    reference = new_oil_sample(samples)
    limits = merged(shipped_limits(), tuple(site_limits))
    fluid = case.fluid.fluid_class.value if case.fluid.fluid_class is not None else None
    trends = _trends(case, rows, reference, life, used)
    judged = _judged(case, rows, reference, limits, fluid, trends, usable)
    dark = _darkening(case, rows, reference, life)
    last = used[-1]
    failed = case.header.occurred.date() if case.header.occurred is not None else None
    before = [s for s, p in zip(used, life.places, strict=True) if p.fill == life.places[-1].fill]
    return OilCheck(
        samples=len(samples),
        point=point,
        other_points=others,
        excluded=tuple((s.id, s.excluded) for s in samples if s.excluded),
        undated=tuple(s.id for s in samples if s.sampled is None and not s.new_oil),
        unread=tuple(unread),
        latest=last.id,
        latest_date=last.sampled,
        previous_date=before[-2].sampled if len(before) > 1 else None,
        days_before_failure=(failed - last.sampled).days if failed and last.sampled else None,
        oil_hours=life.places[-1].oil_hours,
        reference=reference.id if reference is not None else "",
        fills=life.days("oil change"),
        laboratory_changes=life.days("laboratory change"),
        events=life.events,
        judged=judged,
        darkening=dark,
        pictures=pictures_of(judged, dark),
        trends=trends,
        points=_points(dated, point, life, used),
        fluid_class=fluid or "",
    )


def _main_point(samples: Sequence[OilSample]) -> tuple[str, tuple[str, ...]]:
    counts: dict[str, int] = defaultdict(int)
    for sample in samples:
        counts[sample.point] += 1
    names = sorted(counts, key=lambda name: (-counts[name], name))
    return names[0], tuple(names[1:])


def _one_a_bottle(samples: Sequence[OilSample]) -> list[OilSample]:
    """A re-test of one bottle stands once: the last one."""
    kept: dict[tuple[str, date | None], OilSample] = {}
    for sample in samples:
        kept[sample.id, sample.sampled] = sample
    return list(kept.values())


def _rows(used: Sequence[OilSample], life: OilLife) -> dict[tuple[int, str], list[Row]]:
    rows: dict[tuple[int, str], list[Row]] = defaultdict(list)
    for sample, place in zip(used, life.places, strict=True):
        for name, value in sorted(_with_scale_of_14(sample.values).items()):
            rows[place.fill, name].append(Row(sample=sample, value=value, place=place))
    return rows


def _with_scale_of_14(values: dict[str, OilValue]) -> dict[str, OilValue]:
    """The third number of a cleanliness code as a property of its own."""
    code = values.get("cleanliness_code")
    numbers = code.text.split("/") if code is not None else []
    if code is None or len(numbers) != 3 or not numbers[2].strip("≥>").isdigit():
        return values
    third = replace(code, property="cleanliness_14", value=float(numbers[2].strip("≥>")))
    return values | {"cleanliness_14": third}


def _trends(
    case: Case,
    rows: dict[tuple[int, str], list[Row]],
    reference: OilSample | None,
    life: OilLife,
    used: Sequence[OilSample],
) -> tuple[Trend, ...]:
    top_ups = [e for e in life.events if e.kind == "top-up"]
    volume = case.reservoir.oil_volume.value if case.reservoir.oil_volume is not None else None
    trends = []
    for (_, name), of_property in sorted(rows.items()):
        new = reference_of(name, case, reference, used)
        trends.append(
            trend_of(
                name,
                of_property,
                top_ups=top_ups,
                volume=volume,
                new=new.value if new is not None else None,
            )
        )
    return tuple(trends)


def _judged(
    case: Case,
    rows: dict[tuple[int, str], list[Row]],
    reference: OilSample | None,
    limits: tuple[Limit, ...],
    fluid: str | None,
    trends: tuple[Trend, ...],
    usable: Sequence[OilSample],
) -> dict[str, Judged]:
    last_fill = max(fill for fill, _ in rows)
    found = {}
    for (fill, name), of_property in sorted(rows.items()):
        if fill != last_fill:
            continue
        found[name] = judge(
            name,
            of_property,
            reference_of(name, case, reference, [row.sample for row in of_property]),
            limits_for(limits, name, fluid),
            next((t for t in trends if t.fill == fill and t.property == name), None),
            site=_site(name, usable),
        )
    return found


def _darkening(
    case: Case,
    rows: dict[tuple[int, str], list[Row]],
    reference: OilSample | None,
    life: OilLife,
) -> Darkening | None:
    fill = max(number for number, _ in rows)
    colours = rows.get((fill, "colour"), [])
    new = reference_of("colour", case, reference, [row.sample for row in colours])
    changes = life.days("oil change")
    return darkening_of(colours, new, changes[fill - 1] if fill else None)


def _site(name: str, samples: Sequence[OilSample]) -> float | None:
    """R' from bottles tested twice or more."""
    by_bottle: dict[tuple[str, date | None], list[float]] = defaultdict(list)
    for sample in samples:
        value = certain(sample.values.get(name))
        if value is not None:
            by_bottle[sample.id, sample.sampled].append(value)
    return site_precision([(v[0], v[1]) for v in by_bottle.values() if len(v) > 1])


def _points(
    samples: Sequence[OilSample], point: str, life: OilLife, used: Sequence[OilSample]
) -> tuple[Point, ...]:
    fills = {s.id: p.fill for s, p in zip(used, life.places, strict=True)}
    return tuple(
        Point(
            property=name,
            sample=s.id,
            sampled=s.sampled,
            hours=s.machine_hours,
            value=v.value,
            op=v.op,
            laboratory=s.laboratory,
            fill=fills.get(s.id, -1),
            excluded=bool(s.excluded),
        )
        for s in sorted(samples, key=_when)
        if s.sampled is not None and s.point == point
        for name, v in sorted(s.values.items())
    )


def _when(sample: OilSample) -> tuple[date, int, int]:
    return sample.sampled or date.min, sample.revision, sample.retest
