"""Figure of the actions: predicted gain of inlet pressure and the measured one."""

from matplotlib.figure import Figure

from rca.actions.effect import Match
from rca.actions.review import ActionsCheck
from rca.figures.numbers import bar
from rca.figures.style import DISCHARGE, GOOD, GREY, INK, SUCTION, new_figure

FIGURE = "actions-effect"
LOOKS = {Match.AS_PREDICTED: (GOOD, "D"), Match.LESS: (DISCHARGE, "s"), Match.MORE: (INK, "^")}


def drawn(check: ActionsCheck) -> bool:
    """Whether there is an effect to draw."""
    return any(e.gain is not None and e.predicted_gain is not None for e in check.effects)


def figures_actions(check: ActionsCheck) -> dict[str, Figure]:
    """The figure of predicted and measured gain, where something was measured."""
    if not drawn(check):
        return {}
    shown = [e for e in check.effects if e.gain is not None and e.predicted_gain is not None]
    figure, axes = new_figure(height_in=0.7 + 0.3 * len(shown))
    ax = axes[0]
    for place, e in enumerate(shown):
        assert e.gain is not None
        assert e.predicted_gain is not None
        ends = [e.predicted_gain.p05 / 1e5, e.predicted_gain.p95 / 1e5]
        ax.plot(
            ends, [-place, -place], color=SUCTION, linewidth=6, alpha=0.35, solid_capstyle="butt"
        )
        ax.plot([e.predicted_gain.p50 / 1e5], [-place], "|", color=SUCTION, markersize=12)
        colour, marker = LOOKS.get(e.match, (GREY, "o"))
        ax.plot([e.gain / 1e5], [-place], marker=marker, color=colour, markersize=7)
        ax.annotate(
            f"{bar(e.gain)} bar, {e.match.value}",
            (max(e.gain / 1e5, ends[1]), -place),
            xytext=(8, 0),
            textcoords="offset points",
            va="center",
            color=colour,
        )
    ax.axvline(0.0, color=GREY, linewidth=0.8)
    ax.set_yticks([-k for k in range(len(shown))], [f"{e.action}: {e.change}" for e in shown])
    ax.tick_params(axis="y", length=0)
    ax.spines["left"].set_visible(False)
    ax.margins(x=0.35, y=0.4)
    ax.set_xlabel("gain of inlet pressure [bar], warm and running")
    return {FIGURE: figure}
