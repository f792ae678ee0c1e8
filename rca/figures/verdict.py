"""Figures of the verdict: what each item did, the sides with their bands, the weight by group."""

import numpy as np
from matplotlib.figure import Figure
from scipy.special import expit, logit

from rca.figures.numbers import share
from rca.figures.style import DISCHARGE, GREY, INK, MARKS, PALE, SUCTION, Mark, new_figure
from rca.figures.verdict_network import network
from rca.verdict.model import VerdictCheck
from rca.verdict.side import HELD

MECHANISMS_SHOWN = 10
TORNADO = 8


def figures_verdict(check: VerdictCheck) -> dict[str, Figure]:
    """Every figure of the verdict; the item figures only where there are items."""
    drawn = {
        "verdict-sides": sides(check),
        "verdict-mechanisms": mechanisms(check),
        "verdict-network": network(check),
    }
    if check.evidence:
        drawn["verdict-running"] = running(check)
        drawn["verdict-tornado"] = tornado(check)
        drawn["verdict-items"] = items(check)
        drawn["verdict-matrix"] = matrix(check)
    return drawn


def sides(check: VerdictCheck) -> Figure:
    """Probability of each side before and after the evidence, with the band of the draws."""
    verdict = check.verdict
    figure, axes = new_figure(height_in=1.25)
    ax = axes[0]
    rows = (
        (
            "suction side",
            verdict.sides["suction"],
            verdict.robustness.suction,
            verdict.prior["suction"],
            SUCTION,
            "o",
        ),
        (
            "discharge side",
            verdict.sides["discharge"],
            verdict.robustness.discharge,
            verdict.prior["discharge"],
            DISCHARGE,
            "s",
        ),
    )
    for place, (name, p, band, prior, colour, marker) in enumerate(rows):
        y = -place
        ax.plot([0, 1], [y, y], color=PALE, linewidth=6, solid_capstyle="round", zorder=0)
        ax.plot([band.p05, band.p95], [y, y], color=colour, linewidth=3, solid_capstyle="butt")
        ax.plot([p], [y], marker=marker, color=colour, markersize=8)
        ax.plot([prior], [y], marker="|", color=GREY, markersize=11, markeredgewidth=1.4)
        ax.text(-0.02, y, name, ha="right", va="center")
        ax.text(1.03, y, share(p), va="center", fontweight="semibold", color=colour)
    for x in (0.6, 0.75):
        ax.axvline(x, color=GREY, linewidth=0.7, linestyle=(0, (3, 2)))
    ax.annotate(
        "left out below 0.60, held from 0.75",
        (0.6, 0.5),
        xytext=(-4, 0),
        ha="right",
        textcoords="offset points",
        fontsize=7.5,
        color=GREY,
        va="bottom",
    )
    ax.set_xlim(-0.02, 1.14)
    ax.set_ylim(-1.6, 0.9)
    ax.set_yticks([])
    ax.set_xticks([0, 0.25, 0.5, 0.75, 1.0])
    ax.spines["left"].set_visible(False)
    ax.set_xlabel("probability that this side took part; grey tick: before any evidence")
    return figure


def mechanisms(check: VerdictCheck) -> Figure:
    """Probability of each mechanism, before and after."""
    verdict = check.verdict
    ranked = sorted(verdict.mechanisms.items(), key=lambda kv: -kv[1])[:MECHANISMS_SHOWN]
    figure, axes = new_figure(height_in=2.5)
    ax = axes[0]
    suction = {"vapour cavitation", "gaseous cavitation", "aeration"}
    for place, (name, p) in enumerate(ranked):
        colour = SUCTION if name in suction else DISCHARGE if "diesel" in name else GREY
        hatch = "" if name in suction else "///" if "diesel" in name else "..."
        ax.barh(-place, p, height=0.6, color=colour, hatch=hatch, edgecolor="white")
        ax.plot([verdict.prior[name]], [-place], marker="|", color="black", markersize=9)
        ax.text(p + 0.012, -place, f"{p:.2f}", va="center", fontsize=8)
    ax.set_yticks([-k for k in range(len(ranked))], [name for name, _ in ranked])
    ax.set_xlim(0, 1.08)
    ax.set_xlabel("probability that this mechanism took part; tick: before any evidence")
    return figure


def items(check: VerdictCheck) -> Figure:
    """What each item did to the odds of either side, on a logarithmic scale."""
    shown = [
        i
        for i in check.evidence
        if max(abs(np.log10(i.suction_ratio)), abs(np.log10(i.discharge_ratio))) > 0.02
    ]
    shown = sorted(
        shown, key=lambda i: -max(abs(np.log(i.suction_ratio)), abs(np.log(i.discharge_ratio)))
    )[:18]
    figure, axes = new_figure(height_in=0.9 + 0.19 * max(len(shown), 4))
    ax = axes[0]
    for place, item in enumerate(shown):
        y = -place
        for ratio, colour, marker, shift in (
            (item.suction_ratio, SUCTION, "o", 0.12),
            (item.discharge_ratio, DISCHARGE, "s", -0.12),
        ):
            ax.plot([1, ratio], [y + shift, y + shift], color=colour, linewidth=1.6)
            ax.plot([ratio], [y + shift], marker=marker, color=colour, markersize=3.5)
    ax.set_xscale("log")
    ax.axvline(1, color=GREY, linewidth=0.8)
    reach = (
        max(
            (
                max(i.suction_ratio, 1 / i.suction_ratio, i.discharge_ratio, 1 / i.discharge_ratio)
                for i in shown
            ),
            default=2.0,
        )
        * 1.3
    )
    ax.set_xlim(1 / reach, reach)
    ticks = [
        t for t in (0.01, 0.03, 0.1, 0.2, 0.5, 1, 2, 5, 10, 30, 100) if 1 / reach <= t <= reach
    ]
    ax.set_xticks(ticks, [f"\u00d7 {t:g}" if t >= 1 else f"\u00f7 {1 / t:g}" for t in ticks])
    ax.minorticks_off()
    ax.set_yticks([-k for k in range(len(shown))], [f"{i.id} {i.node}" for i in shown])
    ax.set_xlabel("change of the odds: suction (dots), discharge (squares)")
    return figure


def matrix(check: VerdictCheck) -> Figure:
    """Items by mechanisms: plus for, minus against, size by weight."""
    names = sorted(check.verdict.mechanisms, key=lambda n: -check.verdict.mechanisms[n])[:9]
    rows = [
        i
        for i in check.evidence
        if max(abs(np.log(i.by_mechanism[n])) for n in names) > np.log(1.1)
    ][:26]
    figure, axes = new_figure(height_in=1.35 + 0.165 * max(len(rows), 4))
    ax = axes[0]
    for y, item in enumerate(rows):
        ax.axhline(-y, color=PALE, linewidth=0.4, zorder=0)
        for x, name in enumerate(names):
            weight = float(np.log10(item.by_mechanism[name]))
            if abs(weight) < np.log10(1.1):
                continue
            size = 4 + 9 * min(abs(weight), 1.0)
            ax.plot(
                [x],
                [-y],
                marker="P" if weight > 0 else "_",
                color=SUCTION if weight > 0 else DISCHARGE,
                markersize=size * 0.62,
                markeredgewidth=1.4 if weight < 0 else 0.2,
            )
    ax.set_yticks([-k for k in range(len(rows))], [f"{i.id} {i.node}" for i in rows])
    ax.set_xticks(range(len(names)), names, rotation=28, ha="left")
    ax.xaxis.tick_top()
    ax.set_xlim(-0.6, len(names) - 0.4)
    ax.set_ylim(-len(rows) + 0.4, 0.7)
    ax.tick_params(length=0)
    for side in ("left", "bottom"):
        ax.spines[side].set_visible(False)
    return figure


def running(check: VerdictCheck) -> Figure:
    """The two sides as one group of evidence after the other is let in."""
    steps = check.verdict.running
    figure, axes = new_figure(height_in=2.4)
    ax = axes[0]
    x = np.arange(len(steps))
    for name, mark in (("suction", MARKS["suction"]), ("discharge", MARKS["discharge"])):
        y = [getattr(step, name) for step in steps]
        ax.plot(x, y, color=mark.colour, linestyle=_dash(mark), marker=mark.marker, markersize=4)
        ax.annotate(
            f"{name} {share(y[-1])}",
            (x[-1], y[-1]),
            xytext=(6, 0 if name == "suction" else -2),
            textcoords="offset points",
            color=mark.colour,
            va="center"
            if abs(steps[-1].suction - steps[-1].discharge) > 0.08
            else ("bottom" if name == "suction" else "top"),
        )
    ax.axhline(HELD, color=GREY, linewidth=0.7, linestyle=(0, (3, 2)))
    ax.text(-0.3, HELD, f"held from {HELD:.2f}", fontsize=7.5, color=GREY, va="bottom")
    ax.set_xticks(x, ["before", *(f"+ {s.group}" for s in steps[1:])], rotation=18, ha="right")
    ax.set_xlim(-0.35, len(steps) - 1 + 0.9)
    ax.set_ylim(0, 1.05)
    ax.set_ylabel("probability")
    return figure


def tornado(check: VerdictCheck) -> Figure:
    """Each side with one item left out, widest first, on a scale of log odds."""
    verdict = check.verdict
    named = {i.id: i.node for i in check.evidence}
    figure, axes = new_figure(height_in=2.5, columns=2)
    for ax, side in zip(axes, ("suction", "discharge"), strict=True):
        colour, hatch = MARKS[side].colour, "" if side == "suction" else "///"
        now = float(logit(verdict.sides[side]))
        rows = sorted(
            ((str(s["without"]), float(logit(float(s[side])))) for s in verdict.sensitivity),
            key=lambda r: -abs(r[1] - now),
        )[:TORNADO]
        for place, (_, x) in enumerate(rows):
            ax.barh(
                -place, x - now, left=now, height=0.6, color=colour, hatch=hatch,
                edgecolor="white",
            )  # fmt: skip
            ax.annotate(
                share(float(expit(x))), (x, -place), xytext=(-3 if x < now else 3, 0),
                textcoords="offset points", ha="right" if x < now else "left", va="center",
                fontsize=7.5,
            )  # fmt: skip
        ax.axvline(now, color=INK, linewidth=0.8)
        ax.axvline(float(logit(HELD)), color=GREY, linewidth=0.7, linestyle=(0, (3, 2)))
        ax.set_yticks([-k for k in range(len(rows))], [_short(i, named[i]) for i, _ in rows])
        reach = [now, float(logit(HELD)), *(x for _, x in rows)]
        low, high = min(reach) - 0.9, max(reach) + 0.6
        ticks = [t for t in (0.01, 0.1, 0.5, 0.75, 0.9, 0.99) if low <= logit(t) <= high]
        ax.set_xticks([float(logit(t)) for t in ticks], [f"{t:g}" for t in ticks])
        ax.set_xlim(low, high)
        ax.set_xlabel(f"{side}, one item left out")
    return figure


def _short(identity: str, node: str) -> str:
    return f"{identity} {node if len(node) <= 24 else node[:22] + chr(0x2026)}"


def _dash(mark: Mark) -> str | tuple[float, tuple[float, ...]]:
    return mark.dash if isinstance(mark.dash, str) else (0.0, mark.dash)
