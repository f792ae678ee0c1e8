"""Figures of the records: inlet pressure in time with its extremes, spectrum of a burst."""

from collections.abc import Sequence

import numpy as np
from matplotlib.dates import AutoDateLocator, ConciseDateFormatter
from matplotlib.figure import Figure

from rca.case.series import AlignedRecord, FloatArray
from rca.figures.style import DISCHARGE, GREY, PALE, SUCTION, limit_line, new_figure
from rca.records.bursts import BurstFinding, spectrum
from rca.records.check import RecordCheck

COLUMNS = 900


def figures_records(
    check: RecordCheck,
    aligned: AlignedRecord | None,
    fast: Sequence[tuple[BurstFinding, FloatArray]],
) -> dict[str, Figure]:
    """Every figure the panels of the records refer to; ``fast`` holds bursts with samples."""
    drawn: dict[str, Figure] = {}
    if aligned is not None and aligned.get("inlet pressure") is not None:
        drawn["records-inlet"] = inlet_in_time(check, aligned)
    bursts = [(b, v) for b, v in fast if b.quantity == "discharge pressure"]
    if bursts:
        drawn["records-burst"] = burst_figure(*bursts[0])
    return drawn


def inlet_in_time(check: RecordCheck, aligned: AlignedRecord) -> Figure:
    """Mean and extremes of the inlet pressure over the whole record."""
    series = aligned.series["inlet pressure"]
    figure, axes = new_figure(height_in=2.5)
    ax = axes[0]
    blocks = np.array_split(np.arange(aligned.time_s.size), min(COLUMNS, aligned.time_s.size))
    time, low, mid, high = [], [], [], []
    for block in blocks:
        time.append(1e3 * float(aligned.time_s[block].mean()))
        seen = np.isfinite(series.mean[block])
        part = block[seen]
        low.append(series.low[part].min() / 1e5 if part.size else np.nan)
        high.append(series.high[part].max() / 1e5 if part.size else np.nan)
        mid.append(float(np.median(series.mean[part])) / 1e5 if part.size else np.nan)
    days = np.array(time).astype("datetime64[ms]")
    ax.fill_between(days, low, high, color=PALE, linewidth=0, rasterized=True)
    ax.plot(days, mid, color=SUCTION, linewidth=0.9, rasterized=True)
    if check.limit is not None:
        limit_line(ax, check.limit / 1e5, "lowest allowed", colour=DISCHARGE)
    ax.set_ylim(bottom=0)
    ax.set_ylabel("inlet pressure [bar(a)]")
    locator = AutoDateLocator()
    ax.xaxis.set_major_locator(locator)
    ax.xaxis.set_major_formatter(ConciseDateFormatter(locator))
    return figure


def burst_figure(burst: BurstFinding, values: FloatArray) -> Figure:
    """A fast record of the discharge pressure, in time and by frequency."""
    figure, axes = new_figure(height_in=2.5, columns=2)
    left, right = axes
    step = max(1, values.size // 6000)
    t = np.arange(values.size)[::step] / burst.rate_hz
    left.plot(t, values[::step] / 1e5, color=SUCTION, linewidth=0.4, rasterized=True)
    left.set_xlabel("time [s]")
    left.set_ylabel("discharge pressure [bar(a)]")
    frequency, power = spectrum(values, burst.rate_hz)
    right.semilogy(frequency[1:], np.sqrt(power[1:]) / 1e5, color=SUCTION, linewidth=0.6)
    right.set_xlim(0, min(2500.0, burst.rate_hz / 2))
    if burst.element_frequency is not None:
        for order in range(1, 5):
            right.axvline(
                order * burst.element_frequency, color=GREY, linewidth=0.6, linestyle=(0, (1, 2))
            )
        right.annotate(
            "piston frequency and multiples",
            (burst.element_frequency, 1.0),
            xycoords=("data", "axes fraction"),
            xytext=(3, -2),
            textcoords="offset points",
            va="top",
            fontsize=7.5,
            color=GREY,
        )
    right.set_xlabel("frequency [Hz]")
    right.set_ylabel("density [bar/\u221aHz]")
    return figure
