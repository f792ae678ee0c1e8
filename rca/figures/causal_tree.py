"""The causal tree: root causes at the left, the failure at the right; hypotheses dashed."""

import textwrap
from collections.abc import Mapping, Sequence

from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.patches import FancyBboxPatch

from rca.figures.numbers import share
from rca.figures.style import GREY, INK, PALE, SUCTION, new_figure
from rca.verdict.causal_tree import Role, TreeNode
from rca.verdict.knowledge import INLET

COLUMNS = (Role.ROOT, Role.CONDITION, Role.MECHANISM, Role.OUTCOME)
BOX_WIDTH = 0.8
WORDS = {INLET: "low inlet pressure"}
HEADS = {
    Role.ROOT: "root causes",
    Role.CONDITION: "contributing conditions",
    Role.MECHANISM: "proximate causes",
    Role.OUTCOME: "failure",
}


def causal_tree_figure(nodes: Sequence[TreeNode]) -> Figure:
    """Boxes in columns with their probabilities; lines run to the right."""
    depth = _columns(nodes)
    columns = [[n for n in nodes if depth[n.name] == x] for x in range(max(depth.values()) + 1)]
    tallest = max(len(c) for c in columns)
    figure, axes = new_figure(height_in=0.4 + 0.52 * max(tallest, 2))
    ax = axes[0]
    ax.set_axis_off()
    places: dict[str, tuple[float, float]] = {}
    for x, column in enumerate(columns):
        wished = {n.name: _height_before(n, nodes, places, tallest) for n in column}
        ordered = sorted(column, key=lambda n: (-wished[n.name], -n.probability))
        top = tallest + 0.5
        for n, node in enumerate(ordered):
            lowest = len(ordered) - n - 0.5  # room for those below it
            top = max(min(wished[node.name], top - 1.0), lowest)
            places[node.name] = (float(x), top)
    for role in COLUMNS:
        xs = [places[n.name][0] for n in nodes if n.role is role]
        if xs:
            middle = (min(xs) + max(xs)) / 2
            ax.text(middle, tallest + 0.05, HEADS[role], ha="center", fontsize=7.5, color=GREY)
    for node in nodes:
        for target in node.leads_to:
            _link(ax, places[node.name], places[target], shown=node.shown)
    for node in nodes:
        _box(ax, places[node.name], node)
    ax.set_xlim(-0.45, len(columns) - 0.55)
    ax.set_ylim(-0.05, tallest + 0.3)
    return figure


def _columns(nodes: Sequence[TreeNode]) -> dict[str, int]:
    """The column of each node: causes first, conditions by what leads to them, then the rest."""
    depth = {n.name: 0 if n.role is Role.ROOT else 1 for n in nodes}
    conditions = [n for n in nodes if n.role is Role.CONDITION]
    for _ in conditions:  # the longest path is no longer than their number
        for node in conditions:
            for target in node.leads_to:
                if any(target == c.name for c in conditions):
                    depth[target] = max(depth[target], depth[node.name] + 1)
    last = max((depth[c.name] for c in conditions), default=0)
    for node in nodes:
        if node.role is Role.MECHANISM:
            depth[node.name] = last + 1
        elif node.role is Role.OUTCOME:
            depth[node.name] = last + 2
    return depth


def _height_before(
    node: TreeNode,
    nodes: Sequence[TreeNode],
    places: Mapping[str, tuple[float, float]],
    tallest: int,
) -> float:
    """Mean height of what leads to a node, so that lines cross little."""
    before = [places[n.name][1] for n in nodes if node.name in n.leads_to and n.name in places]
    if not before:
        return tallest * node.probability if node.role is Role.ROOT else 0.5
    return sum(before) / len(before)


def _box(ax: Axes, place: tuple[float, float], node: TreeNode) -> None:
    x, y = place
    ax.add_patch(
        FancyBboxPatch(
            (x - BOX_WIDTH / 2, y - 0.4),
            BOX_WIDTH,
            0.8,
            boxstyle="round,pad=0,rounding_size=0.04",
            facecolor=PALE if node.role is Role.OUTCOME else "white",
            edgecolor=INK if node.shown else GREY,
            linewidth=1.0 if node.shown else 0.7,
            linestyle="-" if node.shown else (0, (3, 2)),
            zorder=3,
        )
    )
    words = textwrap.fill(WORDS.get(node.name, node.name), 18)
    if node.role is not Role.OUTCOME:
        words += f"\n{share(node.probability)}"
    size = 7 if words.count("\n") < 3 else 6.2
    ax.text(x, y, words, ha="center", va="center", fontsize=size, linespacing=1.0, zorder=4)


def _link(ax: Axes, begin: tuple[float, float], end: tuple[float, float], *, shown: bool) -> None:
    ax.annotate(
        "",
        (end[0] - BOX_WIDTH / 2, end[1]),
        (begin[0] + BOX_WIDTH / 2, begin[1]),
        arrowprops={
            "arrowstyle": "-|>,head_width=0.12,head_length=0.25",
            "color": SUCTION if shown else GREY,
            "linewidth": 0.9 if shown else 0.6,
            "linestyle": "-" if shown else (0, (3, 2)),
            "shrinkA": 0,
            "shrinkB": 0,
        },
        zorder=2,
    )
