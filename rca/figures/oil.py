"""Figures of the oil reports: one small plot a property over the running time."""

from collections.abc import Sequence
from datetime import date

import matplotlib as mpl
from matplotlib import dates
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from rca.case.model import Case
from rca.figures.style import DISCHARGE, GREY, INK, PALE, SUCTION, new_figure, rc
from rca.oil.check import OilCheck, Point
from rca.oil.judge import Judged
from rca.oil.trends import Trend
from rca.oil.words import property_label

ORDER = (
    "colour",
    "soot",
    "nitration",
    "oxidation",
    "acid_number",
    "viscosity_40",
    "antioxidant_remaining",
    "patch_colour",
    "air_release",
    "water",
    "Fe",
    "Cu",
    "ferrous_index",
    "Si",
    "Al",
    "particles_4",
    "particles_14",
    "cleanliness_code",
)
CHEMISTRY = "oil-chemistry"
WEAR = "oil-wear"
_WEAR = {"Fe", "Cu", "Pb", "Cr", "Sn", "Al", "Si", "ferrous_index", "cleanliness_code"} | {
    f"particles_{size}" for size in (4, 6, 14)
}
MOST = 8
EVENT = "event"  # the words at events stand in the top row only
FAR = 1.5  # a limit farther than this many spans of the results is named, not drawn


def figures_oil(case: Case, check: OilCheck | None) -> dict[str, Figure]:
    """The figures of the oil section by name; empty where no sample is usable."""
    _ = case
    if check is None:
        return {}
    drawn: dict[str, Figure] = {}
    for name in (CHEMISTRY, WEAR):
        properties = shown_properties(check, name)
        if properties:
            drawn[name] = trend_figure(check, properties)
    return drawn


def shown_properties(check: OilCheck, figure: str) -> tuple[str, ...]:
    """The properties one figure shows: those with at least two results, in a fixed order."""
    counts: dict[str, int] = {}
    for point in check.points:
        counts[point.property] = counts.get(point.property, 0) + 1
    rest = sorted(name for name in counts if name not in ORDER)
    wear = figure == WEAR
    names = [n for n in (*ORDER, *rest) if counts.get(n, 0) >= 2 and (n in _WEAR) is wear]
    return tuple(names[:MOST])


def trend_figure(check: OilCheck, properties: Sequence[str]) -> Figure:
    """Small multiples, one a property; resets, laboratories, limits and R are drawn and named."""
    rows = (len(properties) + 1) // 2
    with mpl.rc_context(rc()):
        figure, axes = new_figure(height_in=0.45 + 1.35 * rows, rows=rows, columns=2)
        for place, (axis, name) in enumerate(zip(axes, properties, strict=False)):
            _draw(axis, check, name)
            if place >= 2:
                for text in [t for t in axis.texts if t.get_gid() == EVENT]:
                    text.remove()
            if place < len(properties) - 2:
                axis.set_xlabel("")
        for axis in axes[len(properties) :]:
            axis.set_axis_off()
    return figure


def _draw(axes: Axes, check: OilCheck, name: str) -> None:
    points = [p for p in check.points if p.property == name]
    judged = check.judged.get(name)
    on_hours = all(p.hours is not None for p in check.points)
    unit = judged.unit if judged is not None else ""
    axes.set_title(property_label(name, unit), loc="left", pad=3)
    if judged is not None:
        _reference_band(axes, judged)
    for fill in sorted({p.fill for p in points}):
        line = [p for p in points if p.fill == fill and not p.excluded and p.op in ("=", "~")]
        axes.plot(
            [_x(p, on_hours=on_hours) for p in line],
            [p.value for p in line],
            color=GREY,
            linewidth=0.6,
        )
    for laboratory, marker in zip(
        dict.fromkeys(p.laboratory for p in points), "osD^v", strict=False
    ):
        _markers(
            axes, [p for p in points if p.laboratory == laboratory], marker, on_hours=on_hours
        )
    for trend in check.trends:
        if trend.property == name and trend.laboratories == 1 and not trend.corrected:
            _trend_line(axes, trend, points, on_hours=on_hours)
    _events(axes, check, on_hours=on_hours)
    axes.margins(x=0.04, y=0.18)
    _limits(axes, judged)
    axes.set_xlabel("machine hours [h]" if on_hours else "date of sampling")
    axes.tick_params(axis="x", rotation=0)
    axes.locator_params(axis="y", nbins=4)
    if on_hours:
        axes.locator_params(axis="x", nbins=5)
    else:
        locator = dates.AutoDateLocator(maxticks=5)
        axes.xaxis.set_major_locator(locator)
        formatter = dates.DateFormatter("%b %y")
        axes.xaxis.set_major_formatter(formatter)


def _trend_line(axes: Axes, trend: Trend, points: Sequence[Point], *, on_hours: bool) -> None:
    """The line of a trend that is shown, over its own fill."""
    own = [p for p in points if p.fill == trend.fill and not p.excluded]
    known = trend.per_1000h is not None and trend.first_y is not None
    if trend.verdict not in ("rises", "falls") or not known or len(own) < 2 or not on_hours:
        return
    first, last = _x(own[0], on_hours=on_hours), _x(own[-1], on_hours=on_hours)
    start = trend.first_y or 0.0
    end = start + (trend.per_1000h or 0.0) * trend.span / 1000.0
    axes.plot([first, last], [start, end], color=DISCHARGE, linewidth=1.0, dashes=(5, 1.5))


def _markers(axes: Axes, points: Sequence[Point], marker: str, *, on_hours: bool) -> None:
    for p in points:
        x = _x(p, on_hours=on_hours)
        if p.excluded:
            axes.plot(x, p.value, "x", color=GREY, markersize=5)
        elif p.op in ("<", ">"):
            axes.plot(x, p.value, marker, color=SUCTION, markersize=4, markerfacecolor="white")
            axes.annotate(
                p.op, (x, p.value), xytext=(3, 3), textcoords="offset points", fontsize=7
            )
        else:
            axes.plot(x, p.value, marker, color=SUCTION, markersize=4)


def _reference_band(axes: Axes, judged: Judged) -> None:
    if judged.new is None:
        return
    axes.axhspan(
        judged.new - judged.noise, judged.new + judged.noise, color=PALE, alpha=0.5, linewidth=0
    )
    axes.axhline(judged.new, color=GREY, linewidth=0.6)
    axes.annotate(
        "new ± R",
        (0.0, judged.new - judged.noise),
        xycoords=("axes fraction", "data"),
        xytext=(2, 1),
        textcoords="offset points",
        fontsize=7,
        color=GREY,
    )


def _events(axes: Axes, check: OilCheck, *, on_hours: bool) -> None:
    for days, word, dash in (
        (check.fills, "oil change", "-"),
        (check.laboratory_changes, "laboratory", (0, (1, 2))),
    ):
        for day in days:
            x = _event_x(check, day) if on_hours else _day(day)
            if x is None:
                continue
            axes.axvline(x, color=INK, linewidth=0.6, linestyle=dash)
            axes.annotate(
                word,
                (x, 1.0),
                xycoords=("data", "axes fraction"),
                xytext=(-2, -2),
                textcoords="offset points",
                rotation=90,
                ha="right",
                va="top",
                fontsize=6.5,
                color=GREY,
                gid=EVENT,
            )


def _event_x(check: OilCheck, day: date) -> float | None:
    """Machine hours at a day, between the samples on both sides of it."""
    known = sorted({(p.sampled, p.hours) for p in check.points if p.hours is not None})
    before = [(d, h) for d, h in known if d <= day]
    after = [(d, h) for d, h in known if d > day]
    if not before or not after:
        return None
    (d0, h0), (d1, h1) = before[-1], after[0]
    return h0 + (h1 - h0) * (day - d0).days / max((d1 - d0).days, 1)


def _limits(axes: Axes, judged: Judged | None) -> None:
    """Limits near the results as lines; those far off as words in the corner."""
    far = []
    for value, name in judged.limit_lines if judged is not None else ():
        low, high = axes.get_ylim()
        span = high - low
        if not low - FAR * span <= value <= high + FAR * span:
            far.append(name.removesuffix(" from new"))
            continue
        axes.axhline(value, color=DISCHARGE, linewidth=0.8, linestyle=(0, (4, 2)))
        above = value <= low + 0.85 * span
        axes.annotate(
            name.removesuffix(" from new"),
            (1.0, value),
            xycoords=("axes fraction", "data"),
            xytext=(-2, 2 if above else -2),
            textcoords="offset points",
            ha="right",
            va="bottom" if above else "top",
            fontsize=7,
            color=DISCHARGE,
        )
    if far:
        axes.annotate(
            "off scale: " + "; ".join(far),
            (1.0, 1.0),
            xycoords="axes fraction",
            xytext=(-2, -1),
            textcoords="offset points",
            ha="right",
            va="top",
            fontsize=7,
            color=DISCHARGE,
        )


def _x(point: Point, *, on_hours: bool) -> float:
    if on_hours and point.hours is not None:
        return point.hours
    return _day(point.sampled)


def _day(day: date) -> float:
    return float(dates.date2num(day))
