"""What the records show: sensors, low-pressure events, duty, rise time of the pressure."""

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
import numpy.typing as npt

from rca.case.model import Case
from rca.case.series import AlignedRecord, FloatArray, Series, Spell
from rca.case.site import local_atmosphere
from rca.records.bursts import BurstFinding
from rca.records.running import running_bins, standing_bins

Mask = npt.NDArray[np.bool_]
STUCK_HOURS = 24.0  # a running channel this long on one value is stuck; common practice
COARSE_STUCK_HOURS = 168.0  # the same of a channel that knows few values at all; judgement
COARSE_VALUES = 100  # distinct values; a thermometer in whole degrees rests on one for a shift
COLD_BELOW = 12.0  # [K] below normal temperature
LONGEST_LIST = 200
LEAST_DELIVERY = 20  # bins at either end of the record for a comparison of the delivery
ABSOLUTE = (
    "inlet pressure",
    "discharge pressure",
    "case drain pressure",
    "headspace pressure",
    "return pressure",
)
MAY_STAND_STILL = ("shaft speed", "valve command", "reservoir level")
ZERO_TOLERANCE = 0.05e5  # [Pa] below zero absolute that a transducer's own error explains;
# common practice, no source
SPIKE_SHARE = 1e-3  # of the samples; more of them impossible is no spike any more
GAUGE_SHARE = 0.2  # of the samples at or below zero; vapour at the port is above zero


@dataclass(frozen=True, slots=True, kw_only=True)
class SensorRemark:
    """Something a channel's own samples say about its sensor."""

    quantity: str
    finding: str
    set_aside: bool


@dataclass(frozen=True, slots=True, kw_only=True)
class LowEvent:
    """The inlet pressure stayed below the limit while the pump ran."""

    start_s: float
    duration_s: float
    lowest: float  # [Pa]
    temperature: float | None  # [K]
    speed: float | None  # [1/s]
    cold: bool


@dataclass(frozen=True, slots=True, kw_only=True)
class Duty:
    """How the machine was used, over the whole record."""

    hours_recorded: float
    hours_running: float
    starts: int
    cold_starts: int
    temperature_p95: float | None  # [K]
    discharge_p95: float | None  # [Pa]
    speed_p95: float | None  # [1/s]


@dataclass(frozen=True, slots=True, kw_only=True)
class Delivery:
    """Recorded flow over displacement times speed, at the record's two ends [-]."""

    first: float
    last: float
    spread: float  # robust standard deviation of the bins about their own end


@dataclass(frozen=True, slots=True, kw_only=True)
class RecordCheck:
    """The records of a case, judged."""

    limit: float | None  # [Pa], of the inlet pressure
    sensors: tuple[SensorRemark, ...]
    events: tuple[LowEvent, ...]  # the longest, in order of time
    events_total: int
    events_hours: float
    events_cold_share: float | None  # share of the events' time with cold oil
    cold_share_of_running: float | None
    duty: Duty | None
    bursts: tuple[BurstFinding, ...]
    quantities: tuple[str, ...]
    delivery: Delivery | None = None


def check_records(
    case: Case,
    aligned: AlignedRecord | None,
    bursts: tuple[BurstFinding, ...],
    *,
    limit: float | None,
    spells: Sequence[Spell] | None = None,
) -> RecordCheck:
    """Judge the records; ``limit`` [Pa] is the lowest allowed inlet pressure.

    ``spells`` are runs of raw samples below it, finer than the bins; without them the bins count.
    """
    if aligned is None:
        return RecordCheck(
            limit=limit,
            sensors=(),
            events=(),
            events_total=0,
            events_hours=0.0,
            events_cold_share=None,
            cold_share_of_running=None,
            duty=None,
            bursts=bursts,
            quantities=tuple(sorted({b.quantity for b in bursts})),
        )
    running = running_bins(case, aligned)
    cold = _cold(case, aligned)
    events = (
        _of_bins(aligned, running, cold, limit)
        if spells is None
        else _of_spells(aligned, running, cold, spells)
    )
    hours = sum(e.duration_s for e in events) / 3600.0
    kept = sorted(sorted(events, key=lambda e: -e.duration_s)[:LONGEST_LIST], key=_start)
    return RecordCheck(
        limit=limit,
        sensors=_sensors(case, aligned, running),
        events=tuple(kept),
        events_total=len(events),
        events_hours=hours,
        events_cold_share=_cold_share(events, cold),
        cold_share_of_running=float(np.mean(cold[running]))
        if cold is not None and running.any()
        else None,
        duty=_duty(aligned, running, cold),
        bursts=bursts,
        quantities=tuple(sorted(aligned.series)),
        delivery=_delivery(case, aligned, running),
    )


def usable(case: Case, aligned: AlignedRecord) -> AlignedRecord:
    """The record with every channel set aside that its own samples disown; nothing is dropped."""
    remarks = {
        r.quantity: r.finding
        for r in _sensors(case, aligned, running_bins(case, aligned))
        if r.set_aside
    }
    return replace(
        aligned,
        series={
            q: replace(s, usable=False, remark=remarks[q]) if q in remarks else _without_spikes(s)
            for q, s in aligned.series.items()
        },
    )


def _start(event: LowEvent) -> float:
    return event.start_s


def _cold(case: Case, aligned: AlignedRecord) -> Mask | None:
    temperature = aligned.get("oil temperature")
    if temperature is None or case.fluid.temperature is None:
        return None
    return np.nan_to_num(temperature.mean, nan=1e3) < case.fluid.temperature.value - COLD_BELOW


def _of_spells(
    aligned: AlignedRecord, running: Mask, cold: Mask | None, spells: Sequence[Spell]
) -> list[LowEvent]:
    """Spells while the pump ran; its state is that of the bins they fall into."""
    if aligned.get("inlet pressure") is None or not spells:
        return []
    origin = aligned.time_s[0] - aligned.bin_s / 2
    last = aligned.time_s.size - 1
    events = []
    for spell in spells:
        first = int(np.clip((spell.start_s - origin) // aligned.bin_s, 0, last))
        end = spell.start_s + spell.duration_s - origin
        after = int(np.clip(np.ceil(end / aligned.bin_s), first + 1, last + 1))
        block = slice(first, after)
        if not running[block].any():
            continue
        events.append(
            LowEvent(
                start_s=spell.start_s,
                duration_s=spell.duration_s,
                lowest=spell.lowest,
                temperature=_middle(aligned.get("oil temperature"), block),
                speed=_middle(aligned.get("shaft speed"), block),
                cold=bool(np.mean(cold[block]) > 0.5) if cold is not None else False,
            )
        )
    return events


def _of_bins(
    aligned: AlignedRecord, running: Mask, cold: Mask | None, limit: float | None
) -> list[LowEvent]:
    inlet = aligned.get("inlet pressure")
    if inlet is None or limit is None:
        return []
    below = running & (np.nan_to_num(inlet.low, nan=np.inf) < limit)
    edges = np.flatnonzero(np.diff(np.concatenate([[False], below, [False]]).astype(np.int8)))
    events = []
    for first, after in zip(edges[::2], edges[1::2], strict=True):
        block = slice(int(first), int(after))
        events.append(
            LowEvent(
                start_s=float(aligned.time_s[first] - aligned.bin_s / 2),
                duration_s=float(after - first) * aligned.bin_s,
                lowest=float(np.nanmin(inlet.low[block])),
                temperature=_middle(aligned.get("oil temperature"), block),
                speed=_middle(aligned.get("shaft speed"), block),
                cold=bool(np.mean(cold[block]) > 0.5) if cold is not None else False,
            )
        )
    return events


def _middle(series: Series | None, block: slice) -> float | None:
    if series is None:
        return None
    values = series.mean[block]
    return float(np.nanmedian(values)) if np.isfinite(values).any() else None


def _cold_share(events: list[LowEvent], cold: Mask | None) -> float | None:
    total = sum(e.duration_s for e in events)
    if cold is None or total <= 0:
        return None
    return sum(e.duration_s for e in events if e.cold) / total


def _sensors(case: Case, aligned: AlignedRecord, running: Mask) -> tuple[SensorRemark, ...]:
    remarks = []
    for quantity, series in sorted(aligned.series.items()):
        for finding, aside in _remarks(case, aligned, quantity, series, running):
            remarks.append(SensorRemark(quantity=quantity, finding=finding, set_aside=aside))
    return tuple(remarks)


def _remarks(
    case: Case, aligned: AlignedRecord, quantity: str, series: Series, running: Mask
) -> list[tuple[str, bool]]:
    found: list[tuple[str, bool]] = []
    values = series.mean[np.isfinite(series.mean)]
    if not values.size:
        return [("holds no readable sample", True)]
    if quantity in ABSOLUTE:
        found += _below_zero(values, series)
    stuck = _longest_same(series.mean, running) * aligned.bin_s / 3600.0
    if stuck > STUCK_HOURS and quantity not in MAY_STAND_STILL:
        coarse = np.unique(values).size <= COARSE_VALUES and stuck <= COARSE_STUCK_HOURS
        word = "coarse, or stuck" if coarse else "stuck"
        found.append((f"stays on one value for {stuck:.0f} running hours: {word}", not coarse))
    if quantity == "inlet pressure":
        rest = standing_bins(aligned) & np.isfinite(series.mean)
        level = case.reservoir.level_above_inlet
        if rest.sum() >= 20 and level is not None:
            offset = float(np.median(series.mean[rest])) - (
                local_atmosphere(case) + 860.0 * 9.80665 * level.value
            )
            if abs(offset) > 0.03e5:
                aside = abs(offset) > 0.5e5
                found.append(
                    (f"reads {offset / 1e5:+.3f} bar against air and head at standstill", aside)
                )
    return found


def _below_zero(values: FloatArray, series: Series) -> list[tuple[str, bool]]:
    """No absolute pressure lies below zero: many such samples tell a gauge, a few tell spikes."""
    impossible = float(np.mean(values < -ZERO_TOLERANCE))
    if impossible > SPIKE_SHARE or float(np.mean(values <= 0.0)) > GAUGE_SHARE:
        return [("lies at or below zero absolute; the unit may be gauge, not absolute", True)]
    spikes = int(np.sum(_spikes(series)))
    if spikes:
        return [(f"falls below zero absolute in {spikes} bins: spikes, left out", False)]
    return []


def _spikes(series: Series) -> Mask:
    """Bins holding an absolute pressure that can't be."""
    return np.asarray(np.nan_to_num(series.low, nan=0.0) < -ZERO_TOLERANCE)


def _without_spikes(series: Series) -> Series:
    if series.quantity not in ABSOLUTE or not series.usable or not _spikes(series).any():
        return series
    keep = ~_spikes(series)
    return replace(
        series,
        mean=np.where(keep, series.mean, np.nan),
        low=np.where(keep, series.low, np.nan),
        high=np.where(keep, series.high, np.nan),
        remark=f"{int((~keep).sum())} bins with spikes below zero absolute are left out",
    )


def _longest_same(values: FloatArray, running: Mask) -> int:
    """Most running bins within one stretch of equal neighbouring samples.

    A stretch ends where the value moves, the pump running or not: a sensor that follows the
    cooling of a standing machine is alive.
    """
    seen = np.isfinite(values)
    if seen.sum() < 2:
        return 0
    stretch = np.cumsum(np.concatenate([[0], np.diff(values[seen]) != 0]))
    return int(np.bincount(stretch, weights=running[seen].astype(float)).max())


def _duty(aligned: AlignedRecord, running: Mask, cold: Mask | None) -> Duty:
    hour = aligned.bin_s / 3600.0
    known = np.any([np.isfinite(s.mean) for s in aligned.series.values()], axis=0)
    seen = _seen_standing_or_running(aligned, known)
    starts = np.flatnonzero(running[1:] & ~running[:-1] & seen[:-1]) + 1
    return Duty(
        hours_recorded=float(known.sum()) * hour,
        hours_running=float((running & known).sum()) * hour,
        starts=int(starts.size),
        cold_starts=int(np.sum(cold[starts])) if cold is not None else 0,
        temperature_p95=_p95(aligned, "oil temperature", running),
        discharge_p95=_p95(aligned, "discharge pressure", running),
        speed_p95=_p95(aligned, "shaft speed", running),
    )


def _seen_standing_or_running(aligned: AlignedRecord, known: Mask) -> Mask:
    """Bins in which the state of the machine is on record; a gap's end is no start."""
    for quantity in ("shaft speed", "discharge pressure"):
        series = aligned.get(quantity)
        if series is not None:
            return np.asarray(np.isfinite(series.mean))
    return known


def _delivery(case: Case, aligned: AlignedRecord, running: Mask) -> Delivery | None:
    """A pump set back by its control delivers less as well: see the remark of the item."""
    flow, speed, size = aligned.get("flow"), aligned.get("shaft speed"), case.pump.displacement
    if flow is None or speed is None or size is None:
        return None
    good = running & np.isfinite(flow.mean) & np.isfinite(speed.mean)
    ratio = flow.mean[good] / (size.value * speed.mean[good])
    part = ratio.size // 10
    if part < LEAST_DELIVERY:
        return None
    ends = ratio[:part], ratio[-part:]
    middles = [float(np.median(end)) for end in ends]
    away = np.concatenate([np.abs(e - m) for e, m in zip(ends, middles, strict=True)])
    return Delivery(first=middles[0], last=middles[1], spread=1.4826 * float(np.median(away)))


def _p95(aligned: AlignedRecord, quantity: str, running: Mask) -> float | None:
    series = aligned.get(quantity)
    if series is None:
        return None
    values = series.mean[running & np.isfinite(series.mean)]
    return float(np.quantile(values, 0.95)) if values.size else None
