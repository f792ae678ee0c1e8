"""The oil reports judged: latest sample against limits and new oil, trends of every fill."""

import re
from collections import Counter, defaultdict
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
from rca.oil.reference import new_oil_samples, reference_of
from rca.oil.trends import Row, Trend, trend_of

# what belongs to the whole oil and is the same at every sample point
DISSOLVED = frozenset(
    {
        "viscosity_40", "viscosity_100", "acid_number", "colour", "oxidation", "nitration",
        "sulfation", "soot", "antioxidant_remaining", "oxidation_life", "patch_colour",
        "air_release", "foam_tendency", "foam_stability", "flash_point", "conductivity",
        "Zn", "P", "Ca", "Mg", "Ba", "B", "Mo", "S", "Cl",
    }
)  # fmt: skip


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
    other_points: tuple[
        str, ...
    ]  # points with fewer samples; their metals and counts are left out
    other_assets: tuple[str, ...]  # machines of the report that are not the one of the case
    fill: int  # the fill judged: the one in service at the failure, from 0
    later: tuple[str, ...]  # samples of fills after the failure, not judged
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

    Samples set aside are shown and not judged. Metals, magnetic iron and particle counts are
    judged at the sample point with the most samples only; what is dissolved in the whole oil is
    judged from every point. The fill in service at the failure is judged, not one put in later.
    """
    dated = [s for s in samples if s.sampled is not None and not s.new_oil]
    usable = [s for s in dated if not s.excluded]
    if not usable:
        return None
    usable, other_assets = _of_the_machine(case, usable)
    point, others = _main_point(usable)
    used = _one_a_bottle(sorted(usable, key=_when))
    life = oil_life(case, used)
    rows = _rows(used, life, point)
    fill = _fill_that_failed(case, life)
    of_fill = [(s, p) for s, p in zip(used, life.places, strict=True) if p.fill == fill]
    last, place = of_fill[-1]
    reference = new_oil_samples(samples, last.laboratory)
    shown = [s for s in dated if s.asset not in other_assets]
    limits = merged(shipped_limits(), tuple(site_limits))
    fluid = _fluid_class(case)
    trends = _trends(case, rows, reference, life, used)
    judged = _judged(case, rows, fill, reference, limits, fluid, trends, usable)
    dark = _darkening(case, rows, fill, reference, life)
    return OilCheck(
        samples=len(samples),
        point=point,
        other_points=others,
        other_assets=other_assets,
        fill=fill,
        later=_later(used, life, fill),
        excluded=tuple((s.id, s.excluded) for s in samples if s.excluded),
        undated=tuple(s.id for s in samples if s.sampled is None and not s.new_oil),
        unread=tuple(unread),
        latest=last.id,
        latest_date=last.sampled,
        previous_date=of_fill[-2][0].sampled if len(of_fill) > 1 else None,
        days_before_failure=_days_before(case, last.sampled),
        oil_hours=place.oil_hours,
        reference=reference[0].id if reference else "",
        fills=life.days("oil change"),
        laboratory_changes=life.days("laboratory change"),
        events=life.events,
        judged=judged,
        darkening=dark,
        pictures=pictures_of(judged, dark),
        trends=trends,
        points=_points(shown, point, life, used),
        fluid_class=fluid or "",
    )


def _days_before(case: Case, sampled: date | None) -> int | None:
    """Days from a sample to the failure; negative where it was drawn after it."""
    if case.header.occurred is None or sampled is None:
        return None
    return (case.header.occurred.date() - sampled).days


def _fluid_class(case: Case) -> str | None:
    return case.fluid.fluid_class.value if case.fluid.fluid_class is not None else None


def _later(used: Sequence[OilSample], life: OilLife, fill: int) -> tuple[str, ...]:
    """Samples of oil put in after the failure."""
    return tuple(s.id for s, p in zip(used, life.places, strict=True) if p.fill > fill)


def _of_the_machine(
    case: Case, samples: Sequence[OilSample]
) -> tuple[list[OilSample], tuple[str, ...]]:
    """The samples of the machine of the case, and the names of the others in the reports."""
    names = {s.asset for s in samples}
    if len(names) < 2:
        return list(samples), ()
    wanted = _tokens(case.header.asset)
    fitting = {n for n in names if n and (_tokens(n) <= wanted or wanted <= _tokens(n)) and wanted}
    counts = Counter(s.asset for s in samples)
    chosen = fitting or {max(sorted(names), key=lambda name: counts[name])}
    kept = [s for s in samples if s.asset in chosen or not s.asset]
    return kept, tuple(sorted(names - chosen - {""}))


def _tokens(text: str) -> frozenset[str]:
    return frozenset(re.findall(r"[a-z0-9]+", text.casefold()))


def _fill_that_failed(case: Case, life: OilLife) -> int:
    """The fill in service at the failure: changes from that day on came after it."""
    fills = [place.fill for place in life.places]
    if case.header.occurred is None:
        return max(fills)
    day = case.header.occurred.date()
    then = sum(change < day for change in life.days("oil change"))
    return max((fill for fill in fills if fill <= then), default=min(fills))


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


def _rows(
    used: Sequence[OilSample], life: OilLife, point: str
) -> dict[tuple[int, str], list[Row]]:
    rows: dict[tuple[int, str], list[Row]] = defaultdict(list)
    for sample, place in zip(used, life.places, strict=True):
        for name, value in sorted(_with_scale_of_14(sample.values).items()):
            if sample.point != point and name not in DISSOLVED:
                continue
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
    reference: Sequence[OilSample],
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
    fill: int,
    reference: Sequence[OilSample],
    limits: tuple[Limit, ...],
    fluid: str | None,
    trends: tuple[Trend, ...],
    usable: Sequence[OilSample],
) -> dict[str, Judged]:
    found = {}
    for (number, name), of_property in sorted(rows.items()):
        if number != fill:
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
    fill: int,
    reference: Sequence[OilSample],
    life: OilLife,
) -> Darkening | None:
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
        if s.sampled is not None
        for name, v in sorted(s.values.items())
        if s.point == point or name in DISSOLVED
    )


def _when(sample: OilSample) -> tuple[date, int, int]:
    return sample.sampled or date.min, sample.revision, sample.retest
