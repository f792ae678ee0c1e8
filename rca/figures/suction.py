"""Figures of the suction side: the budget as a waterfall, the measured inlet in time."""

import numpy as np
from matplotlib.axes import Axes
from matplotlib.dates import AutoDateLocator, ConciseDateFormatter
from matplotlib.figure import Figure

from rca.case.model import Case
from rca.case.series import AlignedRecord
from rca.figures.style import DISCHARGE, GREY, PALE, SUCTION, limit_line, new_figure
from rca.records.running import running_bins
from rca.suction.budget import pressure_budget
from rca.suction.check import SuctionCheck

MOST_DOTS = 6000


def figures_suction(
    case: Case, check: SuctionCheck, aligned: AlignedRecord | None
) -> dict[str, Figure]:
    """Every figure the panels of the suction side refer to."""
    drawn: dict[str, Figure] = {}
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
    figure, axes = new_figure(height_in=2.7)
    ax = axes[0]
    rows: list[tuple[str, float, float]] = [("air outside", 0.0, check.atmosphere / 1e5)]
    level = state.pressure.mean + sum(p[1] for p in state.parts)
    rows.append(("oil head", check.atmosphere / 1e5, level / 1e5))
    now = level / 1e5
    for name, loss, _ in state.parts:
        rows.append((name, now, now - loss / 1e5))
        now -= loss / 1e5
    rows.append(("at the pump", 0.0, state.pressure.mean / 1e5))
    for place, (name, begin, end) in enumerate(rows):
        whole = name in ("air outside", "at the pump")
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
    low = min(0.9 * (check.limit or 8e4) / 1e5, 0.95 * now)
    ax.set_xlim(low, max(r[2] for r in rows) + 0.12 * (max(r[2] for r in rows) - low) + 0.03)
    if check.limit is not None:
        ax.axvline(check.limit / 1e5, color=DISCHARGE, linewidth=0.9, linestyle=(0, (4, 2)))
        ax.annotate(
            "lowest allowed",
            (check.limit / 1e5, len(rows) - 0.5),
            xytext=(3, 0),
            textcoords="offset points",
            color=DISCHARGE,
            fontsize=7.5,
            va="bottom",
        )
    ax.set_xlabel("pressure [bar(a)]; the bars of air and pump begin left of the axis")
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
    ax.set_ylim(0, max(1.15, float(np.nanmax(p)) + 0.1))
    if check.limit is not None:
        limit_line(ax, check.limit / 1e5, "lowest allowed", colour=DISCHARGE)
    ax.set_xlabel("oil temperature [\u00b0C]")
    ax.set_ylabel("inlet pressure [bar(a)]")
    return figure


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
