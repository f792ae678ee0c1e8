"""The suction path of this case drawn part by part, with the pressure left after each.

A neutral schematic in the manner of ISO 1219-1 (simple outlines, not a maker's drawing); lengths
are not to scale.
"""

import math
import re
import textwrap
from dataclasses import dataclass

from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.patches import Polygon, Rectangle

from rca.case.model import Case, SuctionPart
from rca.case.vocabulary import PartKind
from rca.figures.numbers import written
from rca.figures.style import DISCHARGE, GREY, INK, PALE, SUCTION, limit_line, new_figure
from rca.suction.check import InletState, SuctionCheck

LINE_Y = 0.0
TANK_LEFT, TANK_RIGHT = 0.1, 1.75
SMALL = 7.0
CROWDED = 7  # parts; above it the labels stand in two rows


@dataclass(frozen=True, slots=True)
class _Stop:
    """One place along the path."""

    x: float
    label: str
    part: SuctionPart | None


def circuit(case: Case, check: SuctionCheck) -> Figure:
    """The path above, the pressure along it below on the same places.

    Without a computed state only the path is drawn.
    """
    stops = _stops(case)
    computed = check.normal is not None
    figure, axes = new_figure(
        height_in=3.7 if computed else 1.9,
        rows=2 if computed else 1,
        sharex=True,
        height_ratios=[1.15, 1.0] if computed else None,
    )
    _draw_path(axes[0], case, stops)
    if computed:
        _draw_pressure(axes[1], check, stops)
    axes[0].set_xlim(-0.1, stops[-1].x + 0.75)
    return figure


def _stops(case: Case) -> list[_Stop]:
    stops = [_Stop(0.9, "oil surface", None)]
    x = 1.25
    for part in case.suction_line:
        if part.part is PartKind.STRAINER and part.index == 0:
            x = 1.45  # stands in the oil
        elif x < TANK_RIGHT + 0.5:
            x = TANK_RIGHT + 0.55
        else:
            x += 1.0
        stops.append(_Stop(x, _label(part), part))
    stops.append(_Stop(max(x, TANK_RIGHT) + 1.1, "pump inlet", None))
    return stops


def _label(part: SuctionPart) -> str:
    """What stands beside the symbol: the part, its size, how many."""
    name = part.label or part.form or part.part.value
    many = f"{part.count} \u00d7 " if part.count > 1 else ""
    sizes = [written(r.text) for r in (part.bore, part.length) if r is not None]
    if part.rated_loss is not None and part.rated_flow is not None:
        sizes.append(f"{part.rated_loss.text} at {part.rated_flow.text}")
    head = textwrap.fill(f"{many}{name}", 15)
    return "\n".join([head, *(textwrap.fill(size, 15) for size in sizes)])


def _draw_path(ax: Axes, case: Case, stops: list[_Stop]) -> None:
    ax.set_axis_off()
    ax.set_ylim(-1.75, 2.1)
    _draw_reservoir(ax, case)
    pump = stops[-1]
    begin = stops[1].x if len(stops) > 2 else 1.3
    ax.plot([begin, pump.x], [LINE_Y, LINE_Y], color=SUCTION, linewidth=2.2, zorder=2)
    crowded = len(stops) - 2 > CROWDED
    for number, stop in enumerate(stops[1:-1]):
        assert stop.part is not None
        _symbol(ax, stop.x, stop.part)
        inside = stop.x < TANK_RIGHT
        low = crowded and number % 2 == 1
        ax.text(
            stop.x,
            -0.62 if inside else (-0.95 if low else -0.3),
            f"{stop.part.index + 1}  {stop.label}",
            ha="center",
            va="top",
            fontsize=SMALL if not crowded else 6.2,
            linespacing=1.1,
        )
    _draw_pump(ax, case, pump.x)


def _draw_reservoir(ax: Axes, case: Case) -> None:
    tank = case.reservoir
    level = tank.level_above_inlet
    surface = 0.0 if level is None else math.copysign(min(abs(level.value), 1.0), level.value)
    surface = 0.75 if level is None or surface > 0.2 else max(surface, -0.9)
    bottom, top = min(-0.5, surface - 0.6), max(1.2, surface + 0.4)
    ax.add_patch(
        Rectangle((TANK_LEFT, bottom), TANK_RIGHT - TANK_LEFT, surface - bottom, color=PALE, lw=0)
    )
    for line in (
        ([TANK_LEFT, TANK_LEFT, TANK_RIGHT, TANK_RIGHT], [top, bottom, bottom, top]),
        ([TANK_LEFT, 0.55], [top, top]),
        ([0.75, TANK_RIGHT], [top, top]),
    ):
        ax.plot(*line, color=INK, linewidth=1.0, solid_capstyle="butt")
    ax.plot([TANK_LEFT, TANK_RIGHT], [surface, surface], color=SUCTION, linewidth=0.8)
    ax.plot([0.65, 0.65], [top, top + 0.22], color=INK, linewidth=1.0)
    ax.add_patch(Rectangle((0.5, top + 0.2), 0.3, 0.24, fill=False, edgecolor=INK, linewidth=1.0))
    ax.plot([0.5, 0.8], [top + 0.32] * 2, color=INK, linewidth=0.8, linestyle=(0, (2, 1.5)))
    if tank.breather is not None:
        told = f"breather {tank.breather.rated_loss.text} at {tank.breather.rated_flow.text}"
    else:
        told = "breather, size not recorded"
    ax.text(0.88, top + 0.32, told, fontsize=SMALL, va="center")
    volume = f"{tank.oil_volume.text} of oil" if tank.oil_volume is not None else "oil"
    ax.text(TANK_LEFT + 0.06, surface - 0.08, volume, fontsize=SMALL, va="top")
    _draw_level(ax, case, surface)


def _draw_level(ax: Axes, case: Case, surface: float) -> None:
    level = case.reservoir.level_above_inlet
    x = TANK_RIGHT + 0.28
    if level is None:
        ax.text(x - 0.1, surface, "level not recorded", fontsize=SMALL, va="center")
        return
    ax.plot([TANK_RIGHT + 0.04, x + 0.08], [surface, surface], color=GREY, linewidth=0.6)
    ax.annotate(
        "",
        (x, surface),
        (x, LINE_Y),
        arrowprops={
            "arrowstyle": "<->",
            "color": GREY,
            "linewidth": 0.7,
            "shrinkA": 0,
            "shrinkB": 0,
        },
    )
    words = f"{level.text.lstrip('-')} {'above' if level.value >= 0 else 'below'} the inlet"
    ax.text(x + 0.1, (surface + LINE_Y) / 2 + 0.06, words, fontsize=SMALL, va="bottom")


def _symbol(ax: Axes, x: float, part: SuctionPart) -> None:
    """A simple outline of the part on the line."""
    y = LINE_Y
    if part.part is PartKind.STRAINER:
        ax.add_patch(
            Polygon(
                [(x - 0.2, y), (x, y + 0.3), (x + 0.2, y), (x, y - 0.3)],
                facecolor="white",
                edgecolor=INK,
                linewidth=1.0,
                zorder=3,
            )
        )
        ax.plot([x, x], [y - 0.3, y + 0.3], color=INK, lw=0.9, linestyle=(0, (2, 1.5)), zorder=4)
    elif part.part is PartKind.VALVE or "valve" in part.form:
        for sign in (-1, 1):
            ax.add_patch(
                Polygon(
                    [(x, y), (x + 0.2 * sign, y + 0.2), (x + 0.2 * sign, y - 0.2)],
                    facecolor="white",
                    edgecolor=INK,
                    linewidth=1.0,
                    zorder=3,
                )
            )
    elif part.part is PartKind.PIPE:
        for sign in (-1, 1):
            ax.plot([x + 0.4 * sign] * 2, [y - 0.14, y + 0.14], color=INK, lw=1.0, zorder=3)
    elif part.part is PartKind.HOSE:
        xs = [x - 0.4 + 0.02 * n for n in range(41)]
        ax.plot([x - 0.4, x + 0.4], [y, y], color="white", linewidth=3.2, zorder=2.5)
        ys = [y + 0.13 * math.sin(2 * math.pi * (one - x) / 0.4) for one in xs]
        ax.plot(xs, ys, color=SUCTION, linewidth=2.0, zorder=3)
    elif "bend" in part.form:
        ax.plot(
            [x - 0.2, x - 0.02, x + 0.02, x + 0.2],
            [y, y + 0.26, y + 0.26, y],
            color=SUCTION,
            linewidth=2.0,
            zorder=3,
            solid_joinstyle="round",
        )
        ax.plot([x - 0.19, x + 0.19], [y, y], color="white", linewidth=3.4, zorder=2.5)
    else:
        ax.add_patch(
            Rectangle((x - 0.15, y - 0.15), 0.3, 0.3, facecolor="white", edgecolor=INK, zorder=3)
        )


def _draw_pump(ax: Axes, case: Case, x: float) -> None:
    # Markers keep their shape whatever the scales of the axes.
    ax.plot([x], [LINE_Y], "o", ms=25, mfc="white", mec=INK, mew=1.1, zorder=3)
    ax.plot([x + 0.16], [LINE_Y], marker=">", ms=8, color=INK, zorder=4)
    ax.plot([x, x + 0.62], [LINE_Y, LINE_Y], color=DISCHARGE, linewidth=2.2, zorder=2)
    pump = case.pump
    words = [pump.kind.value + " pump" if pump.kind else "pump"]
    words += [written(r.text) for r in (pump.displacement, pump.speed) if r is not None]
    ax.text(x, 0.62, "\n".join(words), ha="center", va="bottom", fontsize=SMALL, linespacing=1.1)


def _draw_pressure(ax: Axes, check: SuctionCheck, stops: list[_Stop]) -> None:
    """Steps of pressure at the places of the parts, warm and cold."""
    assert check.normal is not None
    drawn = [
        (*_levels(state, stops), state, colour, dash, word)
        for state, colour, dash, word in (
            (check.normal, SUCTION, "-", "warm"),
            (check.cold, GREY, (0, (4, 2)), "cold"),
        )
        if state is not None
    ]
    for xs, levels, state, colour, dash, word in drawn:
        ax.step(xs, levels, where="post", color=colour, linestyle=dash)
        ax.annotate(
            f"{word}, {state.temperature - 273.15:.0f} \u00b0C: {levels[-1]:.2f} bar(a)",
            (xs[-1], levels[-2]),
            xytext=(2, 3),
            textcoords="offset points",
            ha="right",
            va="bottom",
            color=colour,
            fontsize=7.5,
        )
    values = [v for _, levels, *_ in drawn for v in levels]
    if check.limit is not None:
        limit_line(ax, check.limit / 1e5, "lowest allowed at the inlet", colour=DISCHARGE)
        values.append(check.limit / 1e5)
    spread = max(values) - min(values)
    ax.set_ylim(min(values) - 0.08 * spread - 0.01, max(values) + 0.16 * spread + 0.01)
    ax.set_ylabel("pressure [bar(a)]")
    ax.set_xticks([s.x for s in stops], _ticks(stops, [levels for _, levels, *_ in drawn]))
    ax.tick_params(axis="x", labelsize=7)
    ax.set_xlabel("place, and the loss there [bar], " + " / ".join(d[5] for d in drawn))


def _ticks(stops: list[_Stop], courses: list[list[float]]) -> list[str]:
    """Name of each place and the losses there, one for each course."""
    names = ["oil surface"]
    for number, stop in enumerate(stops[1:], start=1):
        losses = " / ".join(f"{c[number - 1] - c[number]:.3f}" for c in courses)
        names.append(f"{_tick(stop) or 'inlet'}\n{losses}")
    return names


def _tick(stop: _Stop) -> str:
    return str(stop.part.index + 1) if stop.part is not None else ""


def _levels(state: InletState, stops: list[_Stop]) -> tuple[list[float], list[float]]:
    """Places and the pressure after each [bar]; steady level of the oil head is at the surface."""
    by_number: dict[str, float] = {}
    rest = 0.0
    for name, loss, _ in state.parts:
        match = re.match(r"(\d+) ", name)
        if match is None and "breather" in name:
            by_number["0"] = loss
        elif match is None:
            rest += loss  # the speed of the oil at the port
        else:
            by_number[match[1]] = loss
    level = state.pressure.mean + sum(loss for _, loss, _ in state.parts)
    level -= by_number.get("0", 0.0)
    xs, levels = [stops[0].x], [level / 1e5]
    for stop in stops[1:-1]:
        level -= by_number.get(_tick(stop), 0.0)
        xs.append(stop.x)
        levels.append(level / 1e5)
    xs.append(stops[-1].x)
    levels.append((level - rest) / 1e5)
    return xs, levels
