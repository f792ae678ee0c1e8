"""Figures of the suction side: the budget as a waterfall, the measured inlet in time."""

import numpy as np
import numpy.typing as npt
from matplotlib.axes import Axes
from matplotlib.dates import AutoDateLocator, ConciseDateFormatter
from matplotlib.figure import Figure

from rca.case.model import Case
from rca.case.series import AlignedRecord
from rca.figures.style import DISCHARGE, GREY, PALE, SUCTION, limit_line, new_figure
from rca.figures.suction_inverse import figures_inverse
from rca.physics.viscosity import kinematic_viscosity
from rca.records.running import running_bins
from rca.suction.budget import fluid_viscosities, pressure_budget
from rca.suction.check import SuctionCheck
from rca.suction.explanations import Explanation
from rca.suction.rows import STARVED

FloatArray = npt.NDArray[np.float64]
MOST_DOTS = 6000
_IN_THE_LINE = {
    Explanation.CLOGGED_STRAINER: "viscosity",
    Explanation.PINCHED_LINE: "flow squared",
    Explanation.PLUGGED_BREATHER: "the breather",
    Explanation.SAGGING_LEVEL: "the level",
}


def figures_suction(
    case: Case, check: SuctionCheck, aligned: AlignedRecord | None
) -> dict[str, Figure]:
    """Every figure the panels of the suction side refer to."""
    drawn: dict[str, Figure] = figures_inverse(case, check, aligned)
    if check.paths:
        drawn["suction-path"] = air_along_line(check)
    if check.swings_warm and check.swings_cold:
        drawn["suction-swings"] = swings(check)
    if check.normal is not None:
        drawn["suction-budget"] = budget_waterfall(check)
        drawn["suction-temperature"] = inlet_against_temperature(case, check, aligned)
    if check.measured is not None and check.measured.pieces:
        drawn["suction-development"] = development(check)
    return drawn


def budget_waterfall(check: SuctionCheck) -> Figure:
    """From the air on the reservoir to the pressure at the pump, loss by loss."""
    assert check.normal is not None
    state = check.normal
    ax_height = 0.22 * (len(state.parts) + 4 + 5 * (check.explanations is not None))
    figure, axes = new_figure(height_in=ax_height + 0.5)
    ax = axes[0]
    rows: list[tuple[str, float, float]] = [("air outside", 0.0, check.atmosphere / 1e5)]
    level = state.pressure.mean + sum(p[1] for p in state.parts)
    rows.append(("oil head", check.atmosphere / 1e5, level / 1e5))
    now = level / 1e5
    for name, loss, _ in state.parts:
        rows.append((name, now, now - loss / 1e5))
        now -= loss / 1e5
    rows.append(("at the pump, clean", 0.0, state.pressure.mean / 1e5))
    rows += _excess_rows(check, state.pressure.mean / 1e5)
    for place, (name, begin, end) in enumerate(rows):
        whole = name.startswith(("air outside", "at the pump"))
        ax.barh(
            place,
            end - begin,
            left=begin,
            height=0.62,
            color=SUCTION if whole else (PALE if end >= begin else GREY),
            hatch="" if whole else "///" if end < begin else "",
            edgecolor="white",
        )
        tail = f"{end:.3f} bar(a)" if whole else f"{end - begin:+.4f} bar".replace("-", "\u2212")
        ax.annotate(
            tail,
            (max(begin, end), place),
            xytext=(4, 0),
            textcoords="offset points",
            va="center",
            fontsize=7.5,
        )
    ax.set_yticks(range(len(rows)), [r[0] for r in rows])
    ax.invert_yaxis()
    least = min(r[2] for r in rows)
    low = min(0.9 * (check.limit or 8e4) / 1e5, least - 0.08)
    ax.set_xlim(low, max(r[2] for r in rows) + 0.12 * (max(r[2] for r in rows) - low) + 0.03)
    if check.limit is not None:
        ax.axvline(check.limit / 1e5, color=DISCHARGE, linewidth=0.9, linestyle=(0, (4, 2)))
        ax.annotate(
            "lowest allowed",
            (check.limit / 1e5, 3.5),
            xytext=(-3, 0),
            textcoords="offset points",
            color=DISCHARGE,
            fontsize=7.5,
            ha="right",
            va="center",
        )
    ax.set_xlabel("pressure [bar(a)]; the bars of air and pump begin left of the axis")
    return figure


def _excess_rows(check: SuctionCheck, clean: float) -> list[tuple[str, float, float]]:
    """What the record shows beyond the clean line, down to the inlet as found [bar]."""
    if check.explanations is None or not check.counterfactuals:
        return []
    now, rows = clean, []
    for share in check.explanations.shares:
        if share.explanation in _IN_THE_LINE and abs(share.amount.p50) >= 50.0:
            step = share.amount.p50 / 1e5
            name = f"beyond clean, with {_IN_THE_LINE[share.explanation]}"
            rows.append((name, now, now - step))
            now -= step
    found = check.counterfactuals[0].before.p50 / 1e5
    rows.append(("at the pump, as found", 0.0, found))
    return rows


def air_along_line(check: SuctionCheck) -> Figure:
    """Released air at every part of the line: clean and as found."""
    figure, axes = new_figure(height_in=3.6, rows=2, sharex=True, height_ratios=[1.0, 1.2])
    looks = {"clean line": (GREY, "^", (1, 1.5)), "as found": (SUCTION, "o", "-")}
    for path in check.paths:
        colour, marker, dash = looks[path.state]
        line = (0, dash) if isinstance(dash, tuple) else dash
        place = np.arange(1, len(path.stations) + 1)
        height = [s.pressure / 1e5 for s in path.stations]
        axes[0].plot(place, height, color=colour, marker=marker, markersize=4, linestyle=line)
        gas = [[100 * v for v in (s.released.p05, s.released.p95)] for s in path.stations]
        low, high = np.array(gas).T
        axes[1].fill_between(place, low, high, color=colour, alpha=0.18, linewidth=0)
        middle = [100 * s.released.p50 for s in path.stations]
        axes[1].plot(place, middle, color=colour, marker=marker, markersize=4, linestyle=line)
        full = [100 * s.equilibrium for s in path.stations]
        axes[1].plot(place, full, color=colour, linewidth=0.7, linestyle=(0, (4, 2)))
        for ax, last in ((axes[0], path.stations[-1].pressure / 1e5), (axes[1], middle[-1])):
            ax.annotate(
                path.state,
                (place[-1], last),
                xytext=(6, 0),
                textcoords="offset points",
                va="center",
                color=colour,
            )
        if path.state == check.paths[-1].state and full[-1] > 0:
            axes[1].annotate(
                "given all the time it wants",
                (place[0], full[0]),
                xytext=(0, 8),
                textcoords="offset points",
                color=colour,
                fontsize=7.5,
            )
    if check.limit is not None:
        limit_line(axes[0], check.limit / 1e5, "lowest allowed", colour=DISCHARGE)
    stations = check.paths[-1].stations
    axes[1].set_xticks(
        range(1, len(stations) + 1),
        [f"after {s.name}\n{s.time:.1f} s" for s in stations],
        fontsize=7.5,
    )
    axes[1].margins(x=0.1)
    axes[1].set_ylim(-0.05 * axes[1].get_ylim()[1], 1.12 * axes[1].get_ylim()[1])
    axes[0].set_ylabel("pressure [bar(a)]")
    axes[1].set_ylabel("gas per oil [%]")
    return figure


def swings(check: SuctionCheck) -> Figure:
    """Which uncertain input moves the clean line's inlet, warm and at a cold start."""
    names = [s.name for s in check.swings_cold]
    figure, axes = new_figure(height_in=0.28 * len(names) + 0.95, columns=2)
    for ax, rows, title in (
        (axes[0], check.swings_warm, "warm"),
        (axes[1], check.swings_cold, "cold start"),
    ):
        by_name = {s.name: s for s in rows}
        for place, name in enumerate(names):
            swing = by_name[name]
            for value, colour, hatch in ((swing.low, PALE, "///"), (swing.high, SUCTION, "")):
                ax.barh(
                    place,
                    value / 1e5,
                    height=0.6,
                    color=colour,
                    hatch=hatch,
                    edgecolor="white",
                )
        ax.axvline(0.0, color=GREY, linewidth=0.6)
        ax.invert_yaxis()
        ax.set_xlabel(f"inlet moves by [bar], {title}")
    axes[0].set_yticks(range(len(names)), names)
    axes[1].set_yticks([])
    return figure


def inlet_against_temperature(
    case: Case, check: SuctionCheck, aligned: AlignedRecord | None
) -> Figure:
    """Inlet pressure of the clean line over oil temperature, with the recorded points."""
    assert check.normal is not None
    figure, axes = new_figure(height_in=2.8)
    ax = axes[0]
    if aligned is not None:
        _recorded(ax, case, aligned)
    t = np.linspace(min(check.normal.temperature - 50, 273.15), check.normal.temperature + 20, 80)
    p = pressure_budget(case, check.normal.flow, t).inlet / 1e5
    ax.plot(t - 273.15, p, color=SUCTION)
    ax.annotate(
        "clean line, computed",
        (t[-1] - 273.15, p[-1]),
        xytext=(-4, 5),
        textcoords="offset points",
        ha="right",
        color=SUCTION,
    )
    _as_found(ax, case, check, t)
    ax.set_ylim(0, max(1.15, float(np.nanmax(p)) + 0.1))
    if check.limit is not None:
        limit_line(ax, check.limit / 1e5, "lowest allowed", colour=DISCHARGE)
    ax.set_xlabel("oil temperature [\u00b0C]")
    ax.set_ylabel("inlet pressure [bar(a)]")
    return figure


def _as_found(ax: Axes, case: Case, check: SuctionCheck, t: FloatArray) -> None:
    """The line with the resistances of the end of the record, down to where the pump starves."""
    viscosities = fluid_viscosities(case)
    if check.inverse is None or not check.counterfactuals or viscosities is None:
        return
    viscous = check.inverse.viscous.p50[-1]
    ratio = kinematic_viscosity(t, *viscosities) / check.inverse.reference_viscosity
    found = (check.counterfactuals[0].before.p50 - viscous * (ratio - 1.0)) / 1e5
    held = found > STARVED / 1e5
    if not held.any():
        return
    ax.plot(t[held] - 273.15, found[held], color=DISCHARGE, linestyle=(0, (5, 1.5)))
    place = np.flatnonzero(held)[int(0.12 * held.sum())]
    ax.annotate(
        "as found at the end",
        (t[place] - 273.15, found[place]),
        xytext=(8, -8),
        textcoords="offset points",
        color=DISCHARGE,
    )


def _recorded(ax: Axes, case: Case, aligned: AlignedRecord) -> None:
    inlet, temperature = aligned.get("inlet pressure"), aligned.get("oil temperature")
    if inlet is None or temperature is None:
        return
    use = np.flatnonzero(
        running_bins(case, aligned) & np.isfinite(inlet.mean) & np.isfinite(temperature.mean)
    )
    use = use[:: max(1, use.size // MOST_DOTS)]
    if not use.size:
        return
    age = (aligned.time_s[use] - aligned.time_s[0]) / 86400.0
    dots = ax.scatter(
        temperature.mean[use] - 273.15,
        inlet.mean[use] / 1e5,
        c=age,
        s=2.5,
        cmap="cividis_r",
        linewidths=0,
        rasterized=True,
    )
    bar = ax.figure.colorbar(dots, ax=ax, pad=0.01, fraction=0.04)
    bar.set_label("days since the record began")
    bar.outline.set_visible(False)


def development(check: SuctionCheck) -> Figure:
    """The warm, running inlet pressure over the record, measured and predicted."""
    assert check.measured is not None
    pieces = check.measured.pieces
    figure, axes = new_figure(height_in=2.5)
    ax = axes[0]
    middle = np.array([0.5e3 * (p.start_s + p.end_s) for p in pieces]).astype("datetime64[ms]")
    measured = [p.measured / 1e5 for p in pieces]
    ax.plot(middle, measured, color=SUCTION, marker="o", markersize=3.5)
    ax.annotate(
        "measured",
        (middle[-1], measured[-1]),
        xytext=(5, 0),
        color=SUCTION,
        textcoords="offset points",
        va="center",
    )
    clean = [p.predicted / 1e5 if p.predicted is not None else np.nan for p in pieces]
    if np.isfinite(clean).any():
        ax.plot(middle, clean, color=GREY, linestyle=(0, (1, 1.5)), marker="^", markersize=3)
        ax.annotate(
            "clean line",
            (middle[-1], clean[-1]),
            xytext=(5, 0),
            color=GREY,
            textcoords="offset points",
            va="center",
        )
    if check.limit is not None:
        limit_line(ax, check.limit / 1e5, "lowest allowed", colour=DISCHARGE)
    ax.set_ylabel("inlet pressure [bar(a)]")
    locator = AutoDateLocator()
    ax.xaxis.set_major_locator(locator)
    ax.xaxis.set_major_formatter(ConciseDateFormatter(locator))
    ax.margins(x=0.08)
    return figure
