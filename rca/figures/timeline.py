"""The sequence of events as a picture: what is dated, what was recorded, and where nothing was."""

from collections.abc import Sequence
from dataclasses import dataclass
from datetime import datetime, tzinfo

from matplotlib.axes import Axes
from matplotlib.dates import AutoDateLocator, ConciseDateFormatter, date2num
from matplotlib.figure import Figure

from rca.case.sequence import DAY_S, Entry, EntryType, Lane, local_day
from rca.figures.style import DISCHARGE, GREY, INK, PALE, SUCTION, new_figure

CLOSE_UP_DAYS = 75.0
CROWDED = 0.035  # of the span; marks nearer than this share one label
EN_DASH = "\u2013"
LANES = (Lane.HISTORY, Lane.OIL, "records", Lane.BENCH)
MARKERS = {EntryType.EVENT: "o", EntryType.CONDITION: "D"}


@dataclass(frozen=True, slots=True, kw_only=True)
class Coverage:
    """The time a record covers [s], and its gaps; a fast record is drawn as a mark."""

    start_s: float
    end_s: float
    gaps: tuple[tuple[float, float], ...] = ()
    fast: bool = False


def timeline(entries: Sequence[Entry], records: Sequence[Coverage], zone: tzinfo) -> Figure:
    """All of the time above, the last weeks before the failure below; numbers are table rows."""
    first, last = _span(entries, records)
    near = _close_up(entries, first, last)
    if near is None:
        figure, axes = new_figure(height_in=1.75)
        _draw(axes[0], entries, records, zone, (first, last), whole=None)
    else:
        figure, axes = new_figure(height_in=3.3, rows=2)
        _draw(axes[0], entries, records, zone, (first, last), whole=near)
        _draw(axes[1], entries, records, zone, near, whole=None)
    return figure


def _span(entries: Sequence[Entry], records: Sequence[Coverage]) -> tuple[float, float]:
    times = [e.start_s for e in entries] + [t for r in records for t in (r.start_s, r.end_s)]
    first, last = min(times), max(times)
    edge = max(0.02 * (last - first), DAY_S)
    return first - edge, last + edge


def _close_up(entries: Sequence[Entry], first: float, last: float) -> tuple[float, float] | None:
    """The weeks up to the last entry, where the whole is much longer than they are."""
    failures = [e.start_s for e in entries if e.lane is Lane.FAILURE]
    if not failures or last - first < 2.0 * CLOSE_UP_DAYS * DAY_S:
        return None
    return failures[0] - CLOSE_UP_DAYS * DAY_S, min(last, failures[0] + 21.0 * DAY_S)


def _draw(
    ax: Axes,
    entries: Sequence[Entry],
    records: Sequence[Coverage],
    zone: tzinfo,
    span: tuple[float, float],
    whole: tuple[float, float] | None,
) -> None:
    """One strip; ``whole`` is the span shown larger below, whose entries are numbered there."""

    def x(seconds: float) -> datetime:
        return local_day(seconds, zone)

    places = {lane: len(LANES) - 1 - n for n, lane in enumerate(LANES)}
    for lane in LANES:
        ax.axhline(places[lane], color=PALE, linewidth=0.6, zorder=0)
    _draw_records(ax, records, zone, places["records"], span)
    clusters: dict[str, list[list[tuple[int, float]]]] = {lane: [] for lane in LANES}
    for number, entry in numbered(entries):
        if not span[0] <= entry.start_s <= span[1]:
            continue
        here = date2num(x(entry.start_s))
        if entry.lane is Lane.FAILURE:
            _failure(ax, here, number)
            continue
        y = places[entry.lane]
        state = entry.type is EntryType.CONDITION
        ax.plot(
            [here],
            [y],
            MARKERS[entry.type],
            ms=4.2,
            mfc="white" if state else SUCTION,
            mec=SUCTION,
            mew=0.9,
            zorder=3,
        )
        if number is None or (whole is not None and whole[0] <= entry.start_s <= whole[1]):
            continue
        near = clusters[entry.lane]
        if near and here - near[-1][-1][1] < CROWDED * (span[1] - span[0]) / DAY_S:
            near[-1].append((number, here))
        else:
            near.append([(number, here)])
    for where, groups in clusters.items():
        for group in groups:
            ax.annotate(
                _ranges([n for n, _ in group]),
                ((group[0][1] + group[-1][1]) / 2, places[where]),
                xytext=(0, 3.5),
                textcoords="offset points",
                ha="center",
                va="bottom",
                fontsize=6.5,
                color=INK,
            )
    if whole is not None:
        ax.axvspan(
            date2num(x(whole[0])), date2num(x(whole[1])), color=PALE, alpha=0.45, lw=0, zorder=-1
        )
        ax.annotate(
            "enlarged below",
            (date2num(x(whole[0])), 0.0),
            xycoords=("data", "axes fraction"),
            xytext=(-3, 2),
            textcoords="offset points",
            ha="right",
            fontsize=7,
            color=GREY,
        )
    ax.set_yticks([places[lane] for lane in LANES], [str(lane) for lane in LANES])
    ax.set_ylim(-0.5, len(LANES) - 0.25)
    ax.set_xlim(date2num(x(span[0])), date2num(x(span[1])))
    ax.spines["left"].set_visible(False)
    ax.tick_params(axis="y", length=0)
    locator = AutoDateLocator(minticks=4, maxticks=9)
    ax.xaxis.set_major_locator(locator)
    ax.xaxis.set_major_formatter(ConciseDateFormatter(locator))


def numbered(entries: Sequence[Entry]) -> list[tuple[int | None, Entry]]:
    """Entries with the number of their row in the table; oil samples have tables of their own."""
    rows: list[tuple[int | None, Entry]] = []
    last = 0
    for entry in entries:
        last += entry.lane is not Lane.OIL
        rows.append((None if entry.lane is Lane.OIL else last, entry))
    return rows


def _failure(ax: Axes, here: float, number: int | None) -> None:
    ax.axvline(here, color=DISCHARGE, linewidth=1.0, zorder=1)
    ax.annotate(
        f"{number} failure",
        (here, 1.0),
        xycoords=("data", "axes fraction"),
        xytext=(-3, 0),
        textcoords="offset points",
        ha="right",
        va="bottom",
        color=DISCHARGE,
        fontsize=7.5,
    )


def _ranges(numbers: list[int]) -> str:
    """3, 4, 5, 9 as "3-5, 9"."""
    runs: list[list[int]] = []
    for n in numbers:
        if runs and n == runs[-1][-1] + 1:
            runs[-1].append(n)
        else:
            runs.append([n])
    return ", ".join(
        str(r[0]) if len(r) == 1 else f"{r[0]}{', ' if len(r) == 2 else EN_DASH}{r[-1]}"
        for r in runs
    )


def _draw_records(
    ax: Axes, records: Sequence[Coverage], zone: tzinfo, y: float, span: tuple[float, float]
) -> None:
    for record in records:
        if record.end_s < span[0] or record.start_s > span[1]:
            continue
        if record.fast:
            at = date2num(local_day(record.start_s, zone))
            ax.plot([at], [y + 0.22], "v", ms=4.5, color=DISCHARGE, zorder=4)
            continue
        begin = record.start_s
        for start, end in (*record.gaps, (record.end_s, record.end_s)):
            a, b = date2num(local_day(begin, zone)), date2num(local_day(start, zone))
            ax.barh(y, b - a, left=a, height=0.3, color=GREY, lw=0, zorder=2)
            if end > start:
                c = date2num(local_day(end, zone))
                ax.barh(
                    y,
                    c - b,
                    left=b,
                    height=0.3,
                    facecolor="white",
                    edgecolor=DISCHARGE,
                    hatch="////",
                    linewidth=0.6,
                    zorder=2,
                )
            begin = end
