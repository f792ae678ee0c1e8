"""Panels of the records."""

from collections.abc import Sequence
from dataclasses import dataclass

from rca.base.counted import counted
from rca.base.panel import Column, FigureRef, Panel, Section, Table
from rca.figures.numbers import bar, celsius, moment
from rca.records.check import RecordCheck


@dataclass(frozen=True, slots=True, kw_only=True)
class FileRow:
    """One record file as it was read, for the table of record quality."""

    file: str
    rows: int
    start_s: float
    end_s: float
    interval_s: float
    gaps: tuple[tuple[float, float], ...]
    bad_stamps: int
    backward_stamps: int
    bad_cells: int
    offset_s: float


def panels_records(check: RecordCheck, files: Sequence[FileRow]) -> Section:
    """The section of the records."""
    panels = [_quality(check, files)]
    if check.duty is not None:
        panels.append(_events(check))
    if check.bursts:
        panels.append(_bursts(check))
    return Section(stage="records", title="Records", panels=tuple(panels))


def _quality(check: RecordCheck, files: Sequence[FileRow]) -> Panel:
    gaps = [
        (f.file, moment(a), moment(b), f"{(b - a) / 3600:.1f}") for f in files for a, b in f.gaps
    ]
    tables = [
        Table(
            name="records-files",
            title="Record files",
            columns=(
                Column(title="File"),
                Column(title="Samples", numeric=True),
                Column(title="From (UTC)"),
                Column(title="To (UTC)"),
                Column(title="Interval", unit="s", numeric=True),
                Column(title="Clock", unit="s", numeric=True),
                Column(title="Unread", numeric=True),
                Column(title="Gaps", numeric=True),
            ),
            rows=tuple(
                (
                    f.file.removeprefix("pressure/"),
                    f"{f.rows}",
                    moment(f.start_s),
                    moment(f.end_s),
                    f"{f.interval_s:.3g}",
                    f"{f.offset_s:+g}".replace("-", "\u2212"),
                    f"{f.bad_cells + f.bad_stamps + f.backward_stamps}",
                    f"{len(f.gaps)}",
                )
                for f in files
            ),
            note="Clock: seconds added to the stamps, as stated in case.toml. Unread: cells or "
            "stamps that hold no number or time; they are left out and never filled in.",
        )
    ]
    if gaps:
        tables.append(
            Table(
                name="records-gaps",
                title="Gaps",
                columns=(
                    Column(title="File"),
                    Column(title="From (UTC)"),
                    Column(title="To (UTC)"),
                    Column(title="Length", unit="h", numeric=True),
                ),
                rows=tuple(gaps),
            )
        )
    aside = [s for s in check.sensors if s.set_aside]
    return Panel(
        key="records.quality",
        title="What was recorded, and how well",
        question="Which channels are on record, over what time, and can they be trusted?",
        answer=(
            f"{counted(len(files), 'file')} with {', '.join(check.quantities)}."
            if files
            else "No record could be read."
        ),
        status=f"{counted(len(aside), 'channel')} set aside" if aside else "all channels usable",
        paragraphs=tuple(
            f"{s.quantity.capitalize()}: {s.finding}{'; set aside' if s.set_aside else '; kept'}."
            for s in check.sensors
        ),
        tables=tuple(tables),
    )


def _events(check: RecordCheck) -> Panel:
    duty = check.duty
    assert duty is not None
    rows = sorted(check.events, key=lambda e: -e.duration_s)[:12]
    worst = f"{check.events_total} times, {check.events_hours:.1f} h in all"
    if check.limit is None:
        answer = "No limit is known, so no event can be counted."
    elif check.events_total:
        answer = f"Below {bar(check.limit)} bar(a) while running: {worst}."
    else:
        answer = f"Never below {bar(check.limit)} bar(a) while running."
    return Panel(
        key="records.events",
        title="Time below the inlet limit",
        question="How often, how long and in what state was the inlet pressure below the limit?",
        answer=answer,
        status="below the limit" if check.events_total else "within the limit",
        paragraphs=(
            f"Recorded {duty.hours_recorded:.0f} h, running {duty.hours_running:.0f} h, "
            f"{duty.starts} starts, {duty.cold_starts} of them cold.",
        ),
        tables=(
            Table(
                name="records-events",
                title="Longest events",
                columns=(
                    Column(title="Start (UTC)"),
                    Column(title="Length", unit="h", numeric=True),
                    Column(title="Lowest", unit="bar(a)", numeric=True),
                    Column(title="Oil", unit="\u00b0C", numeric=True),
                    Column(title="State"),
                ),
                rows=tuple(
                    (
                        moment(e.start_s),
                        f"{e.duration_s / 3600:.2f}",
                        bar(e.lowest),
                        celsius(e.temperature) if e.temperature is not None else "",
                        "cold" if e.cold else "warm",
                    )
                    for e in rows
                ),
                note="An event lasts while the lowest sample of each bin stays below the limit.",
            ),
        )
        if rows
        else (),
        figures=(
            FigureRef(
                name="records-inlet",
                caption="Inlet pressure over the whole record: median (line) and extremes (band).",
                alt=answer,
            ),
        )
        if "inlet pressure" in check.quantities
        else (),
    )


def _bursts(check: RecordCheck) -> Panel:
    rows = tuple(
        (
            b.source.file.removeprefix("pressure/"),
            b.quantity,
            f"{b.rate_hz / 1e3:.0f}",
            f"{b.duration_s:.1f}",
            bar(b.ripple),
            f"{b.kurtosis:.1f}",
            f"{b.rise_time * 1e3:.2f}" if b.rise_time is not None else "no large rise",
            "yes" if b.rise_resolved else "no",
        )
        for b in check.bursts
    )
    rises = [b for b in check.bursts if b.rise_time is not None and "discharge" in b.quantity]
    answer = "The fast records show no large pressure rise."
    if rises:
        one = min(rises, key=lambda b: b.rise_time or 1.0)
        assert one.rise_time is not None and one.rise_size is not None  # noqa: PT018
        answer = (
            f"The discharge pressure rises {bar(one.rise_size, digits=0)} bar from 10 to 90 % in "
            f"{one.rise_time * 1e3:.2f} ms at its fastest."
        )
    return Panel(
        key="records.bursts",
        title="Fast records",
        question="How fast does the discharge pressure rise, and what does the ripple show?",
        answer=answer,
        tables=(
            Table(
                name="records-bursts",
                title="Fast records",
                columns=(
                    Column(title="File"),
                    Column(title="Quantity"),
                    Column(title="Rate", unit="kHz", numeric=True),
                    Column(title="Length", unit="s", numeric=True),
                    Column(title="Ripple", unit="bar", numeric=True),
                    Column(title="Kurtosis", numeric=True),
                    Column(title="Fastest rise", unit="ms", numeric=True),
                    Column(title="Resolved"),
                ),
                rows=rows,
                note="Ripple: 1 to 99 % of the samples. Kurtosis is 3 for noise, more for "
                "impulses. A rise is resolved from 20 kHz upwards.",
            ),
        ),
        figures=(
            FigureRef(
                name="records-burst",
                caption="A fast record of the discharge pressure in time, and by frequency.",
                alt=answer,
            ),
        )
        if any("discharge" in b.quantity for b in check.bursts)
        else (),
        limits=(
            "A pressure measured in the line rises more slowly than in the pump's chamber; the "
            "chamber's own rise follows from the transition angle.",
        ),
    )
