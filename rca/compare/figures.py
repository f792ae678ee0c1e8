"""Figures of the comparison: incidents in time, rankings, the course of the count."""

import numpy as np
from matplotlib.dates import AutoDateLocator, ConciseDateFormatter, date2num
from matplotlib.figure import Figure
from matplotlib.ticker import MaxNLocator

from rca.compare.check import Comparison
from rca.compare.pareto import Ranking, ordered
from rca.compare.recurrence import FEWEST_FOR_TREND, Recurrence
from rca.compare.table import IncidentTable
from rca.figures.style import DISCHARGE, GREY, INK, PALE, SUCTION, new_figure

MACHINES_SHOWN = 24
BARS_SHOWN = 12
LOOKS = {
    "suction": (SUCTION, "o"),
    "discharge": (DISCHARGE, "s"),
    "both": (INK, "D"),
    "neither": (GREY, "^"),
    "undetermined": (GREY, "x"),
}


def figures_comparison(table: IncidentTable, check: Comparison) -> dict[str, Figure]:
    """Every figure the comparison can draw, by name."""
    drawn = {}
    if np.isfinite(table.days).any():
        drawn["compare-time"] = in_time(table, check)
    for number, group in enumerate(check.groups):
        for ranking in group.rankings[:2]:
            if ranking.bars:
                drawn[f"compare-{ranking.by}-{number}"] = bars(ranking)
    fleet = check.recurrences[0]
    if len(fleet.ages) >= FEWEST_FOR_TREND:
        drawn["compare-course"] = course(fleet)
    return drawn


def in_time(table: IncidentTable, check: Comparison) -> Figure:
    """Each incident a mark: when, on which machine, which side; the machines with most on top."""
    shown, machines = _machines(table), table.machines
    figure, axes = new_figure(height_in=0.9 + 0.2 * len(shown))
    ax = axes[0]
    place = {machine: -k for k, machine in enumerate(shown)}
    for watch in check.watched:
        if watch.machine in place:
            y = place[watch.machine]
            ax.plot([watch.start, watch.end], [y, y], color=PALE, linewidth=4, zorder=0)
    few = len(table) <= 400
    for side, (colour, marker) in LOOKS.items():
        rows = [
            k
            for k in range(len(table))
            if table.sides[k] == side and np.isfinite(table.days[k]) and machines[k] in place
        ]
        if not rows:
            continue
        ax.plot(
            table.days[rows],
            [place[machines[k]] for k in rows],
            linestyle="none",
            marker=marker,
            color=colour,
            markersize=5.5 if few else 2.5,
            alpha=1.0 if few else 0.5,
            rasterized=not few,
            label=f"{side} ({len(rows)})",
        )
    ax.set_yticks([-k for k in range(len(shown))], shown)
    ax.tick_params(axis="y", length=0)
    ax.spines["left"].set_visible(False)
    ax.set_ylim(-len(shown) + 0.4, 0.6)
    ax.set_xlim(right=date2num(check.until))
    locator = AutoDateLocator(maxticks=9)
    ax.xaxis.set_major_locator(locator)
    ax.xaxis.set_major_formatter(ConciseDateFormatter(locator))
    figure.legend(loc="outside upper left", ncols=5, handletextpad=0.2, columnspacing=1.2)
    return figure


def _machines(table: IncidentTable) -> list[str]:
    names, counts = np.unique(np.array(table.machines), return_counts=True)
    order = sorted(range(names.size), key=lambda k: (-counts[k], names[k]))
    return [str(names[k]) for k in order[:MACHINES_SHOWN]]


def bars(ranking: Ranking) -> Figure:
    """Counts with their intervals, the most on top; a thin mark is the sum of probabilities."""
    shown = ordered(ranking, "count")[:BARS_SHOWN]
    figure, axes = new_figure(height_in=0.55 + 0.21 * len(shown))
    ax = axes[0]
    for place, bar in enumerate(shown):
        low, high = bar.share.low * ranking.n, bar.share.high * ranking.n
        ax.barh(-place, bar.count, height=0.62, color=_colour(bar.name))
        ax.plot([low, high], [-place, -place], color=INK, linewidth=0.8)
        if bar.expected is not None:
            ax.plot([bar.expected], [-place], marker="|", color=INK, markersize=9)
        ax.annotate(
            f"{bar.count}",
            (max(high, bar.count), -place),
            xytext=(5, 0),
            textcoords="offset points",
            va="center",
        )
    ax.set_yticks([-k for k in range(len(shown))], [b.name for b in shown])
    ax.tick_params(axis="y", length=0)
    ax.spines["left"].set_visible(False)
    ax.set_xlim(left=0)
    ax.set_xlabel(f"incidents of {ranking.n}; line: 90 % interval; tick: sum of probabilities")
    ax.xaxis.set_major_locator(MaxNLocator(integer=True))
    return figure


def _colour(name: str) -> str:
    if name in {"vapour cavitation", "gaseous cavitation", "aeration", "suction"}:
        return SUCTION
    return DISCHARGE if name in {"micro-dieseling", "discharge"} else GREY


def course(one: Recurrence) -> Figure:
    """The count over exposure, with the power law where one was fitted."""
    figure, axes = new_figure(height_in=2.3)
    ax = axes[0]
    x = np.concatenate([[0.0], one.ages, [one.exposure]])
    y = np.concatenate([np.arange(len(one.ages) + 1), [len(one.ages)]])
    ax.step(x, y, where="post", color=INK)
    if one.growth is not None:
        t = np.linspace(0.0, one.exposure, 200)
        ax.plot(t, one.growth.scale * t**one.growth.exponent, color=SUCTION, linestyle=(0, (5, 2)))
        ax.annotate(
            f"power law, exponent {one.growth.exponent:.2f}",
            (t[120], one.growth.scale * t[120] ** one.growth.exponent),
            xytext=(6, -10),
            textcoords="offset points",
            color=SUCTION,
        )
    rate = len(one.ages) / one.exposure
    ax.plot([0, one.exposure], [0, rate * one.exposure], color=PALE, linewidth=0.9, zorder=0)
    ax.set_xlabel(f"exposure of all machines together, {one.unit}")
    ax.set_ylabel("incidents counted")
    ax.set_ylim(bottom=0)
    ax.set_xlim(0, one.exposure)
    return figure
