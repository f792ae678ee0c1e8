"""Figures of the suction line's resistances over the record, and of what they explain."""

import numpy as np
import numpy.typing as npt
from matplotlib.axes import Axes
from matplotlib.dates import AutoDateLocator, ConciseDateFormatter
from matplotlib.figure import Figure

from rca.case.model import Case
from rca.case.series import AlignedRecord
from rca.figures.style import DISCHARGE, GOOD, GREY, INK, PALE, SUCTION, new_figure
from rca.physics.viscosity import kinematic_viscosity
from rca.suction.budget import fluid_viscosities, pressure_budget
from rca.suction.check import SuctionCheck
from rca.suction.explanations import Explanation
from rca.suction.inverse import Inverse, Track, regressors
from rca.suction.rows import Rows, suction_rows

FloatArray = npt.NDArray[np.float64]
BAR = 1e5
CELLS = 90  # of the density of samples


def figures_inverse(
    case: Case, check: SuctionCheck, aligned: AlignedRecord | None
) -> dict[str, Figure]:
    """Every figure of the resistances that the check has numbers for."""
    drawn: dict[str, Figure] = {}
    if check.inverse is None or check.explanations is None or aligned is None:
        return drawn
    drawn["suction-resistances"] = resistances(check.inverse)
    drawn["suction-explanations"] = explanations(check)
    rows = suction_rows(case, aligned)
    if not isinstance(rows, str):
        drawn["suction-predicted"] = predicted_against_measured(case, check.inverse, rows)
        drawn["suction-map"] = flow_and_temperature(case, check, rows)
    if check.counterfactuals:
        drawn["suction-changes"] = changes(check)
    return drawn


def resistances(inverse: Inverse) -> Figure:
    """The four unknowns over the record, with 90 % bands and the clean line."""
    figure, axes = new_figure(height_in=3.9, rows=2, columns=2, sharex=True)
    when = np.array([1e3 * k for k in inverse.knots_s]).astype("datetime64[ms]")
    clean = inverse.clean
    cells = (
        (inverse.viscous, "follows viscosity", clean.viscous if clean else None),
        (inverse.quadratic, "follows flow squared", clean.quadratic if clean else None),
        (inverse.depression, "reservoir depression", clean.depression if clean else None),
        (inverse.offset, "transducer and level offset", 0.0),
    )
    for ax, (track, name, reference) in zip(axes, cells, strict=True):
        _band(ax, when, track)
        if reference is not None:
            ax.axhline(reference / BAR, color=GREY, linewidth=0.9, linestyle=(0, (1, 1.5)))
        ax.text(0.02, 0.97, name, transform=ax.transAxes, va="top", color=INK, fontsize=8.5)
        if not track.identified_at_end:
            ax.text(
                0.02,
                0.87,
                "not told apart by this record",
                transform=ax.transAxes,
                va="top",
                color=DISCHARGE,
                fontsize=7.5,
            )
        top = max(*track.p95, reference or 0.0) / BAR
        low = min(0.0, *(v / BAR for v in track.p05))
        ax.set_ylim(low - 0.004 if low < 0 else 0.0, top * 1.35 + 0.01)
        _days(ax)
    axes[0].set_ylabel("loss at warm, full flow [bar]")
    axes[2].set_ylabel("[bar]")
    return figure


def _band(ax: Axes, when: npt.NDArray[np.datetime64], track: Track) -> None:
    low, mid, high = (np.array(v) / BAR for v in (track.p05, track.p50, track.p95))
    if when.size == 1:
        ax.errorbar(
            when, mid, yerr=[mid - low, high - mid], color=SUCTION, marker="o", markersize=3
        )
        return
    ax.fill_between(when, low, high, color=SUCTION, alpha=0.2, linewidth=0)
    ax.plot(when, mid, color=SUCTION, marker="o", markersize=2.5)


def _days(ax: Axes) -> None:
    locator = AutoDateLocator(minticks=3, maxticks=6)
    ax.xaxis.set_major_locator(locator)
    ax.xaxis.set_major_formatter(ConciseDateFormatter(locator))


def explanations(check: SuctionCheck) -> Figure:
    """What each explanation could account for, beside the drop there is to explain."""
    assert check.explanations is not None
    found = check.explanations
    rows = [(s.explanation.value, s.amount, s.identified) for s in found.shares]
    figure, axes = new_figure(height_in=0.32 * (len(rows) + 1) + 0.75)
    ax = axes[0]
    drop = found.drop
    ax.axvspan(drop.p05 / BAR, drop.p95 / BAR, color=PALE, alpha=0.6, linewidth=0)
    ax.axvline(drop.p50 / BAR, color=GREY, linewidth=0.9, linestyle=(0, (4, 2)))
    ax.annotate(
        "to explain, warm",
        (drop.p05 / BAR, -0.75),
        xytext=(-3, 0),
        textcoords="offset points",
        ha="right",
        va="center",
        color=GREY,
        fontsize=7.5,
    )
    for place, (name, amount, identified) in enumerate(rows):
        colour = SUCTION if identified else DISCHARGE
        ax.plot(
            [amount.p05 / BAR, amount.p95 / BAR],
            [place, place],
            color=colour,
            linewidth=2.2,
            linestyle="-" if identified else (0, (2, 1)),
        )
        ax.plot(
            amount.p50 / BAR,
            place,
            color=colour,
            marker="o" if identified else "s",
            markersize=4,
            markerfacecolor="white" if name == Explanation.COLD_OIL.value else colour,
        )
    ax.axvline(0.0, color=GREY, linewidth=0.6)
    ax.set_yticks(range(len(rows)), [name for name, *_ in rows])
    ax.set_ylim(len(rows) - 0.5, -1.1)
    ax.set_xlabel(
        "lowers the inlet by [bar], median and 90 %; square: not told apart; "
        f"open: only at {found.coldest - 273.15:.0f} \u00b0C"
    )
    return figure


def predicted_against_measured(case: Case, inverse: Inverse, rows: Rows) -> Figure:
    """Every running bin: the clean line's prediction and the fitted one against the reading."""
    figure, axes = new_figure(height_in=3.1, columns=2)
    run = rows.running
    measured = rows.pressure[run] / BAR
    fitted = fitted_pressure(inverse, rows)[run] / BAR
    panels: list[tuple[str, FloatArray]] = []
    if case.suction_line:
        clean = pressure_budget(case, rows.flow[run], rows.temperature[run]).inlet / BAR
        panels.append(("clean line as described", clean))
    panels.append(("with the resistances found", fitted))
    for ax, (name, values) in zip(axes, panels, strict=False):
        low = min(float(np.quantile(measured, 0.0005)), float(values.min())) - 0.02
        high = max(float(measured.max()), float(values.max())) + 0.02
        ax.hexbin(
            values,
            measured,
            gridsize=CELLS,
            extent=(low, high, low, high),
            bins="log",
            mincnt=1,
            cmap="Blues" if name.startswith("with") else "Greys",
            linewidths=0,
            rasterized=True,
        )
        ax.plot([low, high], [low, high], color=DISCHARGE, linewidth=0.8)
        ax.set_xlim(low, high)
        ax.set_ylim(low, high)
        off = float(np.sqrt(np.mean((values - measured) ** 2)))
        ax.text(
            0.03,
            0.97,
            f"{name}\nroot mean square {off:.3f} bar",
            transform=ax.transAxes,
            va="top",
            fontsize=8,
        )
        ax.set_xlabel("predicted [bar(a)]")
    axes[0].set_ylabel("measured inlet pressure [bar(a)]")
    for ax in axes[len(panels) :]:
        ax.set_visible(False)
    return figure


def fitted_pressure(inverse: Inverse, rows: Rows) -> FloatArray:
    """Inlet pressure of every row with the median resistances of the record [Pa]."""
    x = regressors(
        rows, inverse.reference_flow, inverse.reference_viscosity, inverse.reference_density
    )
    tracks = (inverse.viscous, inverse.quadratic, inverse.depression, inverse.offset)
    values = [np.interp(rows.time, inverse.knots_s, track.p50) for track in tracks]
    return np.asarray(rows.still + (np.column_stack(values) * x).sum(axis=1))


def flow_and_temperature(case: Case, check: SuctionCheck, rows: Rows) -> Figure:
    """Inlet pressure over flow and oil temperature, line as found, limits and recorded points."""
    inverse = check.inverse
    assert inverse is not None
    viscosities = fluid_viscosities(case)
    assert viscosities is not None
    figure, axes = new_figure(height_in=3.2)
    ax = axes[0]
    run = rows.running
    per_minute = 60e3
    top_q = 1.12 * max(inverse.reference_flow, float(np.quantile(rows.flow[run], 0.999)))
    t_low = min(273.15, rows.coldest - 2.0)
    t_high = max(inverse.reference_temperature, float(rows.temperature[run].max())) + 8.0
    q, t = np.meshgrid(np.linspace(0.02, 1.0, 70) * top_q, np.linspace(t_low, t_high, 90))
    nu = kinematic_viscosity(t, *viscosities)
    last = [tr.p50[-1] for tr in (inverse.viscous, inverse.quadratic, inverse.depression)]
    share = q / inverse.reference_flow
    still = float(np.median(rows.still[run][-max(1, int(run.sum()) // 20) :]))
    found = still - last[0] * nu / inverse.reference_viscosity * share - last[1] * share**2
    found = np.maximum(found - last[2], 0.0) / BAR
    lines = ax.contour(
        q * per_minute,
        t - 273.15,
        found,
        levels=[0.2, 0.4, 0.6, 0.7, 0.9],
        colors=GREY,
        linewidths=0.6,
    )
    ax.clabel(lines, fmt="%.1f bar(a)", fontsize=7)
    keep = np.flatnonzero(run)
    keep = keep[:: max(1, keep.size // 6000)]
    low = check.limit is not None and rows.pressure[keep] < check.limit
    for mask, colour, marker in (
        (~np.asarray(low), SUCTION, "o"),
        (np.asarray(low), DISCHARGE, "s"),
    ):
        chosen = keep[np.broadcast_to(mask, keep.shape)]
        ax.plot(
            rows.flow[chosen] * per_minute,
            rows.temperature[chosen] - 273.15,
            linestyle="",
            marker=marker,
            color=colour,
            markersize=1.6,
            alpha=0.5,
            rasterized=True,
        )
    if check.limit is not None:
        _limit_contour(
            ax, q * per_minute, t - 273.15, found, check.limit / BAR, DISCHARGE, "found"
        )
        if case.suction_line:
            clean = pressure_budget(case, q.ravel(), t.ravel()).inlet.reshape(q.shape) / BAR
            _limit_contour(ax, q * per_minute, t - 273.15, clean, check.limit / BAR, GOOD, "clean")
    ax.set_xlabel("flow [L/min]")
    ax.set_ylabel("oil temperature [\u00b0C]")
    return figure


def _limit_contour(
    ax: Axes, q: FloatArray, t: FloatArray, p: FloatArray, limit: float, colour: str, name: str
) -> None:
    if not float(p.min()) < limit < float(p.max()):
        return
    dash = (0, (5, 1.5)) if name == "clean" else "-"
    line = ax.contour(q, t, p, levels=[limit], colors=colour, linewidths=1.4, linestyles=[dash])
    ax.clabel(line, fmt=f"limit, line {'as ' if name == 'found' else ''}{name}", fontsize=7.5)


def changes(check: SuctionCheck) -> Figure:
    """The inlet before and after each change, with the limit."""
    rows = check.counterfactuals
    figure, axes = new_figure(height_in=0.34 * len(rows) + 0.8)
    ax = axes[0]
    for place, row in enumerate(rows):
        ax.annotate(
            "",
            (row.after.p50 / BAR, place),
            (row.before.p50 / BAR, place),
            arrowprops={"arrowstyle": "-|>", "color": GREY, "lw": 0.9},
        )
        for value, colour, marker in ((row.before, GREY, "^"), (row.after, SUCTION, "o")):
            ax.plot([value.p05 / BAR, value.p95 / BAR], [place] * 2, color=colour, linewidth=1.8)
            ax.plot(value.p50 / BAR, place, color=colour, marker=marker, markersize=4)
    if check.limit is not None:
        ax.axvline(check.limit / BAR, color=DISCHARGE, linewidth=0.9, linestyle=(0, (4, 2)))
        ax.annotate(
            "lowest allowed",
            (check.limit / BAR, -0.7),
            xytext=(3, 0),
            textcoords="offset points",
            color=DISCHARGE,
            fontsize=7.5,
            va="center",
        )
    ax.set_yticks(range(len(rows)), [row.change.value for row in rows])
    ax.set_ylim(len(rows) - 0.5, -1.0)
    ax.set_xlabel("inlet pressure [bar(a)]; triangle as found, dot after the change; median, 90 %")
    return figure
