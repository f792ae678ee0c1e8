"""Figures of the discharge side."""

from typing import Any, cast

import matplotlib as mpl
import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from rca.case.model import Case
from rca.discharge.model import DischargeCheck, Map, Population
from rca.figures.style import DISCHARGE, GOOD, GREY, INK, NEITHER, SUCTION, new_figure, rc

CORE_MAP = "discharge-core-map"
HISTORY = "discharge-bubble-history"
INFLUENCES = "discharge-influences"
SHARES = "discharge-bands"
_LEVELS = (473.15, 673.15, 873.15, 1073.15, 1273.15)  # [K], 200 to 1000 degC
_COLOUR = {"released air": SUCTION, "carried-in air": DISCHARGE}
_DASH: dict[str, object] = {"released air": "-", "carried-in air": (0, (5, 1.5))}


def figures_discharge(case: Case, check: DischargeCheck) -> dict[str, Figure]:
    """All figures the check has data for, by file stem."""
    del case  # the check holds all that is drawn
    with mpl.rc_context(cast("Any", rc())):
        return _drawn(check)


def _drawn(check: DischargeCheck) -> dict[str, Figure]:
    figures: dict[str, Figure] = {}
    if check.map is not None:
        figures[CORE_MAP] = core_map(check)
    if check.trace is not None:
        figures[HISTORY] = bubble_history(check)
    if check.populations:
        figures[SHARES] = bands(check)
    if check.influences:
        figures[INFLUENCES] = influences(check)
    return figures


def core_map(check: DischargeCheck) -> Figure:
    """Peak core temperature over bubble radius and rise time, with the ignition band."""
    chart = check.map
    assert chart is not None
    figure, (axes,) = new_figure(height_in=3.5)
    x, y = np.array(chart.radius) * 1e3, np.array(chart.rise_time) * 1e3
    core = np.array(chart.core)
    axes.set(
        xscale="log", yscale="log", xlim=(x[0], x[-1]), ylim=(y[0], y[-1]),
        xlabel="bubble radius at the inlet, mm", ylabel="pressure rise time, ms",
    )  # fmt: skip
    _plain_ticks(axes)
    levels = [v for v in _LEVELS if core.min() < v < core.max()]
    axes.contour(x, y, core, levels=levels, colors=GREY, linewidths=0.7)
    _name_levels(axes, levels, x, y, core)
    _ignition_band(axes, chart, x, y)
    rise = check.rise_time
    for number, population in enumerate(check.populations):
        if rise is not None:
            _region(axes, population, rise.log_mean, rise.log_sd, number)
    return figure


def _name_levels(
    axes: Axes, levels: list[float], x: np.ndarray, y: np.ndarray, core: np.ndarray
) -> None:
    """Name each temperature where its line crosses a height of its own above the machine."""
    row = int(0.8 * y.size)
    for level in levels:
        at = np.exp(np.interp(level, core[row], np.log(x)))
        axes.annotate(f"{level - 273.15:.0f} °C", (at, y[row]), ha="center", va="center",
                      fontsize=7, color=GREY, rotation=58,
                      bbox={"facecolor": "white", "edgecolor": "none", "pad": 0.6,
                            "alpha": 0.8})  # fmt: skip


def _ignition_band(axes: Axes, chart: Map, x: np.ndarray, y: np.ndarray) -> None:
    critical = np.array(chart.critical) * 1e3
    known = np.isfinite(critical)
    if not known.any():
        axes.annotate("no radius in this range stays hot past the ignition delay", (0.03, 0.95),
                      xycoords="axes fraction", va="top", fontsize=8)  # fmt: skip
        return
    r, t = critical[known], y[known]
    axes.fill_betweenx(t, 1.5 * r, x[-1], color=DISCHARGE, alpha=0.14, linewidth=0)
    axes.fill_betweenx(t, 0.5 * r, 1.5 * r, color=GREY, alpha=0.16, linewidth=0)
    axes.plot(r, t, color=INK, linewidth=1.0, linestyle=(0, (6, 2, 1, 2)))
    low = int(0.12 * r.size)
    axes.annotate("loses its heat in time", (0.02, 0.97), xycoords="axes fraction", ha="left",
                  va="top", fontsize=8, color=GOOD)  # fmt: skip
    axes.annotate("thermally possible", (1.5 * r[low], t[low]), xytext=(8, 0),
                  textcoords="offset points", ha="left", fontsize=8, color=DISCHARGE)  # fmt: skip
    axes.annotate("indeterminate", (0.72 * r[2 * low], t[2 * low]), ha="center", va="center",
                  fontsize=8, color=INK, rotation=58)  # fmt: skip


def _region(
    axes: Axes, population: Population, log_mean: float, log_sd: float, number: int
) -> None:
    """The region of this pump: nine tenths of the bubbles and of the rise time."""
    low, high = (np.log10(v * 1e3) for v in (population.radius.p05, population.radius.p95))
    middle = (log_mean + np.log(1e3)) / np.log(10)
    half = 1.645 * log_sd / np.log(10)
    angle = np.linspace(0, 2 * np.pi, 120)
    colour, dash = _COLOUR[population.origin], _DASH[population.origin]
    r = 10 ** (0.5 * (low + high) + 0.5 * (high - low) * np.cos(angle))
    t = 10 ** (middle + half * np.sin(angle))
    axes.plot(r, t, color=colour, linestyle=dash, linewidth=1.6)
    first = number == 0
    place = 90 if first else 30
    axes.annotate(
        f"this pump, {population.origin}", (r[place], t[place]),
        xytext=(0, -5) if first else (6, 4), textcoords="offset points",
        ha="center" if first else "left", va="top" if first else "bottom", fontsize=8,
        color=colour,
        bbox={"facecolor": "white", "edgecolor": "none", "pad": 0.6, "alpha": 0.75},
    )  # fmt: skip


def _plain_ticks(axes: Axes) -> None:
    for axis in (axes.xaxis, axes.yaxis):
        axis.set_major_formatter(lambda v, _: f"{v:g}")


def bubble_history(check: DischargeCheck) -> Figure:
    """One bubble: temperatures above, pressure and radius below, against time."""
    one = check.trace
    assert one is not None
    figure, (upper, lower) = new_figure(height_in=3.6, rows=2, sharex=True, height_ratios=[2, 1.2])
    time = np.array(one.time) * 1e3
    for values, name, colour, dash in (
        (one.core, "core", DISCHARGE, "-"),
        (one.mean, "mean", NEITHER, (0, (5, 1.5))),
        (one.wall, "oil surface", SUCTION, (0, (1, 1.2))),
    ):
        celsius = np.array(values) - 273.15
        upper.plot(time, celsius, color=colour, linestyle=dash)
        place = int(np.argmax(celsius))
        upper.annotate(name, (time[place], celsius[place]), xytext=(4, 3), color=colour,
                       textcoords="offset points", fontsize=8)  # fmt: skip
    if check.adiabatic is not None:
        ideal = check.adiabatic.p50 - 273.15
        upper.axhline(ideal, color=GREY, linewidth=0.8, linestyle=(0, (4, 2)))
        upper.annotate("no heat loss", (0.995, ideal), xycoords=("axes fraction", "data"),
                       ha="right", va="bottom", fontsize=7.5, color=GREY)  # fmt: skip
    upper.set(ylabel="temperature, °C", ylim=(0, None))
    lower.plot(time, np.array(one.pressure) / 1e5, color=INK)
    lower.plot(time, np.array(one.line) / 1e5, color=GREY, linestyle=(0, (4, 2)), linewidth=0.9)
    lower.annotate("gas (solid), line (dashed)", (time[-1], one.pressure[-1] / 1e5),
                   xytext=(-4, -3), textcoords="offset points", ha="right", va="top",
                   fontsize=7.5)  # fmt: skip
    lower.set(ylabel="pressure, bar (a)", xlabel="time, ms")
    twin = lower.twinx()
    twin.plot(time, np.array(one.radius) * 1e6, color=SUCTION, linestyle=(0, (5, 1.5)))
    twin.set_ylabel("radius, µm", color=SUCTION)
    twin.spines["right"].set_visible(True)
    twin.set_ylim(0, None)
    lower.set_xlim(0, time[-1])
    return figure


def bands(check: DischargeCheck) -> Figure:
    """Share of each kind of bubble that loses its heat, is indeterminate, or stays hot."""
    figure, (axes,) = new_figure(height_in=1.5)
    rows = [*check.populations]
    for place, population in enumerate(rows):
        left = 0.0
        for value, colour, name in (
            (population.excluded, GOOD, "loses its heat in time"),
            (population.indeterminate, "#b9c0c5", "indeterminate"),
            (population.possible, DISCHARGE, "thermally possible"),
        ):
            axes.barh(place, value, left=left, color=colour, height=0.55,
                      edgecolor="white", linewidth=0.8)  # fmt: skip
            if value > 0.06:
                ink = INK if colour.startswith("#b9") else "white"
                axes.annotate(f"{value:.0%}", (left + value / 2, place), ha="center",
                              va="center", color=ink, fontsize=8)  # fmt: skip
            if place == len(rows) - 1 and value > 0.12:
                axes.annotate(name, (left + value / 2, place + 0.32), ha="center", va="bottom",
                              fontsize=7.5, color=INK)  # fmt: skip
            left += value
    axes.set_yticks(range(len(rows)), [f"{p.origin} ({p.weight:.0%})" for p in rows])
    axes.set(xlim=(0, 1), ylim=(-0.5, len(rows) - 0.25), xlabel="share of the bubbles' gas")
    axes.xaxis.set_major_formatter(lambda v, _: f"{v:.0%}")
    return figure


def influences(check: DischargeCheck) -> Figure:
    """What moves the peak core temperature: one input at a time, and its share by rank."""
    figure, (axes,) = new_figure(height_in=1.9)
    rows = check.influences[::-1]
    for place, row in enumerate(rows):
        low, high = row.low - 273.15, row.high - 273.15
        axes.plot([low, high], [place, place], color=GREY, linewidth=4, solid_capstyle="butt")
        axes.plot(low, place, "o", color=SUCTION, markersize=5)
        axes.plot(high, place, "s", color=DISCHARGE, markersize=5)
        axes.annotate(f"{row.share:.0%}", (1.01, place), xycoords=("axes fraction", "data"),
                      va="center", fontsize=7.5, color=INK)  # fmt: skip
    axes.set_yticks(range(len(rows)), [row.name for row in rows])
    axes.set(xlabel="peak core temperature of a middling carried-in bubble, °C",
             ylim=(-0.6, len(rows) - 0.4))  # fmt: skip
    axes.annotate("● input at its 5 % point   ■ at its 95 % point", (0.9, 1),
                  xycoords="axes fraction", ha="right", va="bottom", fontsize=7.5)  # fmt: skip
    axes.annotate("explains", (1.01, 1), xycoords="axes fraction", va="bottom", fontsize=7.5)
    return figure


__all__ = ["bands", "bubble_history", "core_map", "figures_discharge", "influences"]
