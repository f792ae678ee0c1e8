"""The network in the state of this case: causes, conditions, mechanisms, with probabilities."""

from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.patches import Rectangle

from rca.case.vocabulary import DISCHARGE_MECHANISMS, SUCTION_MECHANISMS
from rca.figures.numbers import share
from rca.figures.style import DISCHARGE, GREY, INK, PALE, SUCTION, new_figure
from rca.verdict.knowledge import INLET
from rca.verdict.model import VerdictCheck

CAUSES_SHOWN = 10
LEAST_LINK = 0.02  # parent's probability times strength below which no line is drawn
COLUMNS = (0.0, 0.37, 0.74)
WIDTH = 0.26
HEIGHT = 0.62
Places = dict[str, tuple[float, float]]


def network(check: VerdictCheck) -> Figure:
    """Three columns of boxes; a bar in each box is its probability, the number stands beside."""
    causes = {c.cause: c.probability for c in check.causes if c.cause != "unknown"}
    top = dict(sorted(causes.items(), key=lambda kv: -kv[1])[:CAUSES_SHOWN])
    conditions = {
        name: 1.0 - next(iter(states.values()))
        for name, states in check.verdict.conditions.items()
    }
    columns = (top, conditions, dict(check.verdict.mechanisms))
    rows = max(len(c) for c in columns)
    figure, axes = new_figure(height_in=0.5 + 0.27 * rows)
    ax = axes[0]
    places: Places = {}
    for x, title, column in zip(
        COLUMNS, ("causes", "conditions", "mechanisms"), columns, strict=True
    ):
        gap = rows / max(len(column), 1)
        ax.text(x, -0.75, title, color=GREY, fontsize=8)
        for n, (name, p) in enumerate(column.items()):
            y = (n + 0.5) * gap
            places[name] = (x, y)
            _box(ax, name, p, x, y)
    known = {k: p for column in columns for k, p in column.items()}
    _lines(ax, check, places, known)
    ax.set_xlim(-0.01, COLUMNS[-1] + WIDTH + 0.01)
    ax.set_ylim(rows + 0.1, -1.1)
    ax.axis("off")
    return figure


def _box(ax: Axes, name: str, p: float, x: float, y: float) -> None:
    colour = (
        SUCTION
        if name in SUCTION_MECHANISMS
        else DISCHARGE
        if name in DISCHARGE_MECHANISMS
        else GREY
    )
    low = y - HEIGHT / 2
    ax.add_patch(Rectangle((x, low), WIDTH, HEIGHT, facecolor="white", edgecolor="none", zorder=2))
    ax.add_patch(
        Rectangle((x, low), WIDTH * p, HEIGHT, facecolor=PALE, edgecolor="none", zorder=2)
    )
    ax.add_patch(
        Rectangle(
            (x, low), WIDTH, HEIGHT, facecolor="none", edgecolor=colour,
            linewidth=1.8 if p >= 0.5 else 0.6, zorder=3,
        )
    )  # fmt: skip
    bold = "semibold" if p >= 0.5 else "normal"
    ax.text(
        x + 0.006, y, _label(name), va="center", fontsize=6.7, color=INK, zorder=4, fontweight=bold
    )
    ax.text(
        x + WIDTH - 0.005, y, share(p), va="center", ha="right", fontsize=6.7, color=colour,
        zorder=4, fontweight=bold,
    )  # fmt: skip


def _label(name: str) -> str:
    return f"{INLET} low" if name == INLET else name


def _lines(ax: Axes, check: VerdictCheck, places: Places, known: dict[str, float]) -> None:
    for link in check.verdict.links:
        if link.parent not in places or link.child not in places:
            continue
        carried = known[link.parent] * link.strength
        if carried < LEAST_LINK:
            continue
        (x0, y0), (x1, y1) = places[link.parent], places[link.child]
        same = x0 == x1
        start, end = (x0 + WIDTH, x1 + WIDTH) if same else (x0 + WIDTH, x1)
        bulge = [start + 0.02, end + 0.02] if same else []
        ax.plot(
            [start, *bulge, end] if same else [start, end],
            [y0, y0, y1, y1] if same else [y0, y1],
            color=INK if carried >= 0.25 else GREY,
            linewidth=0.4 + 2.2 * carried,
            alpha=0.9 if carried >= 0.25 else 0.45,
            zorder=1,
        )
