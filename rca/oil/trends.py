"""Trends of one property over one fill: on oil hours, inside laboratories, beyond R."""

from collections.abc import Sequence
from dataclasses import dataclass, replace
from itertools import pairwise
from typing import Any

import numpy as np

from rca.base.errors import OutOfRangeError
from rca.case.oil import OilSample, OilValue
from rca.oil.fills import OilEvent, Place
from rca.oil.precision import noise_floor
from rca.stats.change_point import pettitt
from rca.stats.control import individuals
from rca.stats.mann_kendall import mann_kendall
from rca.stats.outliers import apart_from_median
from rca.stats.theil_sen import Slope, censored_slope, theil_sen

LEAST = 5  # results since the last reset; four can't reach 5 %
ALPHA = 0.05
LEAST_FOR_CHANGE_POINT = 10
LEAST_SEGMENT = 4
LEAST_FOR_CHART = 8
# what stays in the oil and is thinned by a top-up
ACCUMULATING = {
    "Fe", "Cu", "Cr", "Al", "Pb", "Sn", "Ni", "Ti", "Ag", "Mn",
    "soot", "nitration", "oxidation", "sulfation", "insolubles", "acid_number",
}  # fmt: skip


@dataclass(frozen=True, slots=True, kw_only=True)
class Row:
    """One result with the place of its sample."""

    sample: OilSample
    value: OilValue
    place: Place


@dataclass(frozen=True, slots=True, kw_only=True)
class Trend:
    """What one property did over one fill."""

    property: str
    unit: str
    fill: int
    points: int
    limits: int  # results known only as "<" or ">"
    axis: str  # "oil hours", "machine hours" or "days"
    span: float  # on the axis
    verdict: str  # "rises", "falls", "no change shown", "too few results", "not testable"
    s: int | None = None
    p: float | None = None  # two-sided
    exact: bool = False
    per_1000h: float | None = None  # per 1000 h of the axis; days count 24 h
    low: float | None = None
    high: float | None = None
    change: float | None = None  # slope times span
    noise: float = 0.0  # R at the middle level
    first_x: float = 0.0  # [h], where the line begins
    first_y: float | None = None  # on the line
    laboratories: int = 1  # or methods; pairs are compared inside one only
    laboratory_step: float | None = None  # between the neighbours of the change
    corrected: bool = False  # for top-ups
    outliers: tuple[str, ...] = ()  # sample ids, flagged and kept
    per_1000h_without: float | None = None  # the slope with the flagged results left out
    change_after: str = ""  # exploratory: id of the last sample before a change of level
    change_p: float | None = None
    chart_signals: tuple[str, ...] = ()  # samples outside the limits of the residuals


def trend_of(
    name: str,
    rows: Sequence[Row],
    *,
    top_ups: Sequence[OilEvent] = (),
    volume: float | None = None,
    new: float | None = None,
) -> Trend:
    """The trend of one property over the rows of one fill, in order of sampling.

    ``volume`` [m3] and ``new`` allow the correction for top-ups. A trend is reported only where
    p < 0.05 and the change over the fill exceeds R at the middle level.
    """
    axis, x = _axis(rows)
    values = [row.value.value for row in rows]
    ops = [row.value.op for row in rows]
    corrected = _corrected(name, rows, top_ups, volume, new)
    limits = sum(op in ("<", ">") for op in ops)
    base = Trend(
        property=name,
        unit=rows[-1].value.unit,
        fill=rows[-1].place.fill,
        points=len(rows),
        limits=limits,
        axis=axis,
        span=x[-1] - x[0],
        verdict="too few results",
        corrected=corrected is not None,
    )
    if len(rows) < LEAST:
        return base
    groups = _stretches(rows)
    try:
        return _tested(base, x, corrected or values, ops, groups, rows)
    except OutOfRangeError:
        return replace(base, verdict="not testable")


def _stretches(rows: Sequence[Row]) -> list[int]:
    """A number for each stretch of one laboratory and one method."""
    kinds = [(row.place.stretch, row.value.method) for row in rows]
    names = list(dict.fromkeys(kinds))
    return [names.index(kind) for kind in kinds]


def _tested(
    base: Trend,
    x: Sequence[float],
    values: Sequence[float],
    ops: Sequence[str],
    groups: Sequence[int],
    rows: Sequence[Row],
) -> Trend:
    test = mann_kendall(values, ops=ops, groups=groups)
    slope = _slope(x, values, ops, groups)
    level = float(np.median(values))
    noise = noise_floor(base.property, level).R
    change = slope.slope * base.span
    if test.p_two_sided < ALPHA and abs(change) > noise:
        verdict = "rises" if test.s > 0 else "falls"
    else:
        verdict = "no change shown"
    residuals = np.asarray(values) - slope.slope * np.asarray(x)
    step, centred = _laboratory_step(np.asarray(values), residuals, groups)
    apart = _apart(centred, ops, noise)
    return replace(
        base,
        verdict=verdict,
        s=test.s,
        p=test.p_two_sided,
        exact=test.exact,
        per_1000h=1000.0 * slope.slope,
        low=1000.0 * slope.low,
        high=1000.0 * slope.high,
        change=change,
        noise=noise,
        first_x=x[0],
        first_y=slope.intercept + slope.slope * x[0],
        laboratories=len(set(groups)),
        laboratory_step=step,
        outliers=tuple(rows[k].sample.id for k in apart),
        per_1000h_without=_slope_without(x, values, ops, groups, apart),
        **_exploratory(centred, ops, rows),
    )


def _slope(
    x: Sequence[float], values: Sequence[float], ops: Sequence[str], groups: Sequence[int]
) -> Slope:
    if any(op in ("<", ">") for op in ops):
        return censored_slope(x, values, ops, groups=groups)
    return theil_sen(x, values, groups=groups)


def _laboratory_step(
    values: np.ndarray, residuals: np.ndarray, groups: Sequence[int]
) -> tuple[float | None, np.ndarray]:
    """Step of the residuals at the last change of laboratory, and residuals about each level.

    The step is between the neighbours of the change, the smaller of with and without the slope:
    a line that bends would otherwise look like a step.
    """
    labels = np.asarray(groups)
    centred = residuals.astype(float)
    for label in dict.fromkeys(groups):
        inside = labels == label
        centred[inside] -= float(np.median(residuals[inside]))
    changes = np.nonzero(np.diff(labels))[0]
    if changes.size == 0:
        return None, centred
    last = int(changes[-1])
    steps = (
        float(residuals[last + 1] - residuals[last]),
        float(values[last + 1] - values[last]),
    )
    same_way = steps[0] * steps[1] > 0.0
    return (min(steps, key=abs) if same_way else 0.0), centred


def _apart(centred: np.ndarray, ops: Sequence[str], noise: float) -> tuple[int, ...]:
    """Places far from the line by spread and by R; limits are never flagged."""
    numbers = [k for k, op in enumerate(ops) if op in ("=", "~")]
    if len(numbers) < LEAST:
        return ()
    far = apart_from_median([float(centred[k]) for k in numbers])
    return tuple(numbers[k] for k in far if abs(centred[numbers[k]]) > noise)


def _slope_without(
    x: Sequence[float],
    values: Sequence[float],
    ops: Sequence[str],
    groups: Sequence[int],
    apart: Sequence[int],
) -> float | None:
    kept = [k for k in range(len(x)) if k not in apart]
    if not apart or len(kept) < LEAST - 1:
        return None
    slope = _slope(
        [x[k] for k in kept],
        [values[k] for k in kept],
        [ops[k] for k in kept],
        [groups[k] for k in kept],
    )
    return 1000.0 * slope.slope


def _exploratory(centred: np.ndarray, ops: Sequence[str], rows: Sequence[Row]) -> dict[str, Any]:
    """Change point and control chart of the residuals; hints, not findings."""
    found: dict[str, Any] = {}
    if any(op in ("<", ">") for op in ops):
        return found
    n = len(rows)
    if n >= LEAST_FOR_CHANGE_POINT:
        split = pettitt(centred.tolist())
        inside = LEAST_SEGMENT <= split.last_before + 1 <= n - LEAST_SEGMENT
        if split.p < ALPHA and inside:
            found |= {"change_after": rows[split.last_before].sample.id, "change_p": split.p}
    if n >= LEAST_FOR_CHART:
        chart = individuals(centred.tolist())
        found["chart_signals"] = tuple(rows[k].sample.id for k in chart.signals)
    return found


def _axis(rows: Sequence[Row]) -> tuple[str, list[float]]:
    """Hours where every sample has them and they rise; else days, counted as 24 h."""
    for axis, hours in (
        ("oil hours", [row.place.oil_hours for row in rows]),
        ("machine hours", [row.sample.machine_hours for row in rows]),
    ):
        known = [h for h in hours if h is not None]
        complete = len(known) == len(rows) and all(a <= b for a, b in pairwise(known))
        if complete and (known[-1] > known[0] or len(rows) == 1):
            return axis, known
    days = [row.sample.sampled.toordinal() * 24.0 for row in rows if row.sample.sampled]
    return "days", [d - days[0] for d in days]


def _corrected(
    name: str,
    rows: Sequence[Row],
    top_ups: Sequence[OilEvent],
    volume: float | None,
    new: float | None,
) -> list[float] | None:
    """Values with what top-ups took away added back; None where nothing is to correct.

    C*_k = C_k + sum of f_i (C_i - C_new) over the top-ups before k, f_i the share of the oil
    replaced and C_i the result before it (balance of a mixed tank).
    """
    if name not in ACCUMULATING or volume is None or new is None:
        return None
    if any(row.value.op not in ("=", "~") for row in rows):
        return None
    out, added, touched = [rows[0].value.value], 0.0, False
    for earlier, later in pairwise(rows):
        first, last = earlier.sample.sampled, later.sample.sampled
        for event in top_ups:
            if first and last and event.volume and first <= event.when < last:
                share = min(event.volume / volume, 1.0)
                added += share * (earlier.value.value - new)
                touched = True
        out.append(later.value.value + added)
    return out if touched else None
