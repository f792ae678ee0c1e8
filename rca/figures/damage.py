"""Where the damage lies: a neutral drawing of the pump's faces with the observed zones marked."""

from collections.abc import Callable
from typing import Any

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.patches import Circle, FancyBboxPatch, Patch, Polygon, Wedge

from rca.case.model import Case
from rca.case.vocabulary import Extent, PumpKind, Side
from rca.damage.check import DamageCheck, Observation
from rca.figures.style import DISCHARGE, GREY, INK, NEITHER, PALE, SUCTION, new_figure

MOST_FIELDS = 14
ORDER = [Extent.NONE, Extent.SLIGHT, Extent.MODERATE, Extent.SEVERE]
HATCH = {Extent.SLIGHT: "..", Extent.MODERATE: "///", Extent.SEVERE: "xxx"}
SIDE_COLOUR = {Side.INLET: SUCTION, Side.DISCHARGE: DISCHARGE, Side.NEITHER: NEITHER}
SIDE_WORD = {Side.INLET: "inlet", Side.DISCHARGE: "discharge", Side.NEITHER: "neither"}


def figures_damage(case: Case, check: DamageCheck) -> dict[str, Figure]:
    """The drawing with its marks; none without findings."""
    return {"damage-map": damage_map(case, check)} if check.observations else {}


def worst_by_zone(check: DamageCheck) -> dict[str, Observation]:
    """The most severe finding of every zone, absences included."""
    worst: dict[str, Observation] = {}
    for one in check.observations:
        old = worst.get(one.zone)
        if old is None or ORDER.index(one.extent) > ORDER.index(old.extent):
            worst[one.zone] = one
    return worst


def damage_map(case: Case, check: DamageCheck) -> Figure:
    """The face where inlet and discharge meet, and the other zones as fields beside it."""
    figure, axes = new_figure(height_in=3.1, columns=2)
    face, fields = axes
    worst = worst_by_zone(check)
    drawn = _FACES.get(case.pump.kind or PumpKind.SCREW, _two_ports)(face, worst)
    face.set_aspect("equal")
    face.axis("off")
    _fields(fields, {z: o for z, o in worst.items() if z not in drawn})
    return figure


def _style(worst: dict[str, Observation], zone: str) -> dict[str, Any]:
    one = worst.get(zone)
    if one is None:
        return {"facecolor": "white", "edgecolor": GREY, "linewidth": 0.7}
    if one.extent is Extent.NONE:
        return {"facecolor": PALE, "edgecolor": GREY, "linewidth": 0.7}
    return {
        "facecolor": "white",
        "edgecolor": SIDE_COLOUR[one.side],
        "linewidth": 1.1,
        "hatch": HATCH[one.extent],
    }


def _label(axes: Axes, worst: dict[str, Observation], zone: str, at: tuple[float, float]) -> None:
    one = worst.get(zone)
    words = "no finding" if one is None else f"{one.sign.value}, {one.extent.value}"
    if one is not None and one.extent is Extent.NONE:
        words = "looked for, absent"
    axes.text(
        *at,
        f"{zone}\n{words}",
        ha="center",
        va="center",
        fontsize=7,
        color=INK,
        bbox={"facecolor": "white", "edgecolor": "none", "alpha": 0.85, "pad": 1},
    )


def _valve_plate(axes: Axes, worst: dict[str, Observation]) -> set[str]:
    axes.add_patch(Circle((0, 0), 1.0, **_style(worst, "valve plate")))
    axes.add_patch(Circle((0, 0), 0.22, facecolor="white", edgecolor=GREY, linewidth=0.7))
    axes.add_patch(Wedge((0, 0), 0.82, 110, 250, width=0.26, **_style(worst, "inlet kidney")))
    for first, last in ((-70, -28), (-20, 20), (28, 70)):
        axes.add_patch(
            Wedge((0, 0), 0.82, first, last, width=0.26, **_style(worst, "discharge kidney"))
        )
    for middle in (90, 270):
        axes.add_patch(
            Wedge(
                (0, 0),
                0.82,
                middle - 15,
                middle + 15,
                width=0.26,
                **_style(worst, "transition land"),
            )
        )
    _label(axes, worst, "inlet kidney", (-1.0, 0.0))
    _label(axes, worst, "discharge kidney", (1.0, 0.0))
    _label(axes, worst, "transition land", (0.0, 0.95))
    _label(axes, worst, "valve plate", (0.0, -0.95))
    axes.set_xlim(-1.5, 1.5)
    axes.set_ylim(-1.2, 1.2)
    return {"inlet kidney", "discharge kidney", "transition land", "valve plate"}


def _gears(axes: Axes, worst: dict[str, Observation]) -> set[str]:
    axes.add_patch(
        FancyBboxPatch(
            (-0.95, -1.15), 1.9, 2.3, boxstyle="round,pad=0.1", **_style(worst, "housing")
        )
    )
    for y in (0.5, -0.5):
        angle = np.linspace(0, 2 * np.pi, 241)
        radius = 0.5 + 0.06 * np.sign(np.sin(10 * angle))
        points = np.stack([radius * np.cos(angle), y + radius * np.sin(angle)], axis=1)
        axes.add_patch(Polygon(points, closed=True, **_style(worst, "tooth flank")))
        axes.add_patch(Circle((0, y), 0.15, facecolor="white", edgecolor=GREY))
    _label(axes, worst, "inlet port", (-1.15, 0))
    _label(axes, worst, "tooth flank", (0.95, 0))
    _label(axes, worst, "housing", (0, 1.2))
    axes.set_xlim(-1.7, 1.7)
    axes.set_ylim(-1.4, 1.4)
    return {"inlet port", "tooth flank", "housing"}


def _vanes(axes: Axes, worst: dict[str, Observation]) -> set[str]:
    angle = np.linspace(0, 2 * np.pi, 181)
    ring = np.stack([1.0 * np.cos(angle), 0.86 * np.sin(angle)], axis=1)
    axes.add_patch(Polygon(ring * 1.18, closed=True, **_style(worst, "cam ring")))
    axes.add_patch(Polygon(ring, closed=True, facecolor="white", edgecolor=GREY))
    axes.add_patch(Circle((0, 0), 0.76, **_style(worst, "side plate")))
    for turn in np.linspace(0, 2 * np.pi, 11)[:-1]:
        reach = 1.0 / np.hypot(np.cos(turn), np.sin(turn) / 0.86)
        axes.plot(
            [0.5 * np.cos(turn), reach * np.cos(turn)],
            [0.5 * np.sin(turn), reach * np.sin(turn)],
            color=GREY,
            linewidth=1.4,
        )
    _label(axes, worst, "cam ring", (0, 1.02))
    _label(axes, worst, "vane tip", (1.1, 0))
    _label(axes, worst, "side plate", (0, 0))
    axes.set_xlim(-1.6, 1.6)
    axes.set_ylim(-1.3, 1.3)
    return {"cam ring", "vane tip", "side plate"}


def _two_ports(axes: Axes, worst: dict[str, Observation]) -> set[str]:
    axes.add_patch(
        FancyBboxPatch(
            (-0.9, -0.6), 1.8, 1.2, boxstyle="round,pad=0.1", **_style(worst, "housing")
        )
    )
    axes.add_patch(Circle((-1.0, 0), 0.25, **_style(worst, "inlet port")))
    axes.add_patch(Circle((1.0, 0), 0.25, **_style(worst, "discharge kidney")))
    _label(axes, worst, "inlet port", (-1.0, -0.5))
    _label(axes, worst, "discharge kidney", (1.0, -0.5))
    _label(axes, worst, "housing", (0, 0.45))
    axes.set_xlim(-1.6, 1.6)
    axes.set_ylim(-1.1, 1.1)
    return {"inlet port", "discharge kidney", "housing"}


_FACES: dict[PumpKind, Callable[[Axes, dict[str, Observation]], set[str]]] = {
    PumpKind.AXIAL_PISTON: _valve_plate,
    PumpKind.GEAR: _gears,
    PumpKind.VANE: _vanes,
}


def _fields(axes: Axes, worst: dict[str, Observation]) -> None:
    """The zones outside the drawn face, one field each, by side."""
    axes.axis("off")
    every = sorted(worst.items(), key=lambda kv: (kv[1].side.value, kv[0]))
    rows = every[:MOST_FIELDS]
    if len(every) > len(rows):
        axes.text(
            0.8,
            -len(rows),
            f"and {len(every) - len(rows)} more zones, in the table",
            va="center",
            fontsize=7.5,
        )
    for place, (zone, one) in enumerate(rows):
        y = -place
        axes.add_patch(
            FancyBboxPatch(
                (0, y - 0.36), 0.6, 0.72, boxstyle="round,pad=0.02", **_style(worst, zone)
            )
        )
        words = "looked for, absent" if one.extent is Extent.NONE else one.extent.value
        axes.text(
            0.8,
            y,
            f"{zone} ({SIDE_WORD[one.side]}): {one.sign.value}, {words}",
            va="center",
            fontsize=7.5,
        )
    axes.set_xlim(-0.1, 6.0)
    axes.set_ylim(-max(len(every[: MOST_FIELDS + 1]), 8) - 1.2, 0.8)
    handles = [
        Patch(facecolor="white", edgecolor=INK, hatch=HATCH[e], label=e.value)
        for e in (Extent.SLIGHT, Extent.MODERATE, Extent.SEVERE)
    ] + [Patch(facecolor=PALE, edgecolor=GREY, label="looked for, absent")]
    axes.legend(handles=handles, loc="lower left", ncols=2, fontsize=7, handlelength=2.2)
