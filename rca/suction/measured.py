"""The measured inlet pressure while the pump runs, beside what the clean line predicts."""

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from rca.case.model import Case
from rca.case.series import AlignedRecord
from rca.case.site import local_atmosphere
from rca.physics.dissolved_air import released_ratio, released_share_in_time
from rca.records.running import running_bins, standing_bins
from rca.suction.budget import (
    bunsen,
    fluid_viscosities,
    line_residence,
    pressure_budget,
    pump_flow,
)

FloatArray = npt.NDArray[np.float64]
Mask = npt.NDArray[np.bool_]
WARM_BELOW = 12.0  # [K] below normal temperature counts as cold
SENSOR_U = 0.02e5  # [Pa], standard uncertainty of an industrial transducer where none is stated;
# common practice, no source
LEAST_BINS = 20
NEAR_VAPOUR = 0.15e5  # [Pa]; oil vapour is below 10 Pa, but a chamber lags the port by a few
# tenths of a bar, so a port this low has vapour in the chamber; common practice, no source
MIDDLE_TAU = 1.0  # [s], middle of the range of release time constants
STEPS = 12  # pieces in time over which the development is shown


@dataclass(frozen=True, slots=True, kw_only=True)
class Regime:
    """The inlet pressure in one state of the machine."""

    hours: float
    median: float  # [Pa]
    p05: float
    p95: float
    lowest: float
    below_limit: float  # share of the time with the bin's mean below the limit
    near_vapour: float  # share of the time near vapour pressure
    released: float  # median gas per oil at the port, finite rate [-]


@dataclass(frozen=True, slots=True, kw_only=True)
class Piece:
    """One piece of the record in time: measured and predicted at the same temperature."""

    start_s: float
    end_s: float
    measured: float  # [Pa], median while running
    predicted: float | None  # [Pa], median for the clean line
    viscous_excess: float | None  # measured loss over predicted loss beyond the clean line [-]


@dataclass(frozen=True, slots=True, kw_only=True)
class MeasuredInlet:
    """What the inlet transducer saw."""

    sensor_u: float  # [Pa]
    standstill: float | None  # [Pa], median where the shaft stands; None where never seen
    standstill_expected: float | None  # [Pa], atmosphere and head
    offset: float | None  # [Pa], measured minus expected at standstill
    warm: Regime | None
    cold: Regime | None
    last: Regime | None  # the last tenth of the warm running time: the state nearest the failure
    pieces: tuple[Piece, ...]
    predicted_warm: float | None  # [Pa], clean line at the same bins, median
    shortfall: float | None  # [Pa], predicted minus measured in the last tenth, warm
    drift_per_week: float | None  # [Pa], Theil-Sen slope of the pieces' residuals
    remark: str = ""


def measure_inlet(
    case: Case, aligned: AlignedRecord, *, limit: float | None
) -> MeasuredInlet | None:
    """The measured inlet pressure by state of the machine; None without a usable record."""
    inlet = aligned.get("inlet pressure")
    if inlet is None:
        return None
    seen: Mask = np.isfinite(inlet.mean)
    running = running_bins(case, aligned) & seen
    if running.sum() < LEAST_BINS:
        return None
    expected = _expected_at_rest(case)
    rest = standing_bins(aligned) & seen
    standstill = float(np.median(inlet.mean[rest])) if rest.sum() >= LEAST_BINS else None
    offset = standstill - expected if standstill is not None and expected is not None else None
    warm, cold = _by_temperature(case, aligned, running)
    predicted = _predicted(case, aligned)
    pieces = _pieces(aligned, inlet.mean, predicted, warm)
    last_mask = _last_tenth(warm)
    sensor_u = SENSOR_U if offset is None else float(np.hypot(SENSOR_U / 2, abs(offset) / 2))

    def regime(mask: Mask) -> Regime | None:
        return _regime(case, aligned, mask, limit)

    return MeasuredInlet(
        sensor_u=sensor_u,
        standstill=standstill,
        standstill_expected=expected,
        offset=offset,
        warm=regime(warm),
        cold=regime(cold),
        last=regime(last_mask),
        pieces=pieces,
        predicted_warm=_median(predicted, warm),
        shortfall=_difference(_median(predicted, last_mask), _median(inlet.mean, last_mask)),
        drift_per_week=_drift(pieces),
        remark=inlet.remark,
    )


def _expected_at_rest(case: Case) -> float | None:
    level = case.reservoir.level_above_inlet
    if level is None:
        return None
    return local_atmosphere(case) + 860.0 * 9.80665 * level.value


def _by_temperature(case: Case, aligned: AlignedRecord, running: Mask) -> tuple[Mask, Mask]:
    temperature = aligned.get("oil temperature")
    if temperature is None:
        return running, np.zeros_like(running)
    known = np.isfinite(temperature.mean)
    normal = (
        case.fluid.temperature.value
        if case.fluid.temperature is not None
        else float(np.nanmedian(temperature.mean[running & known]))
        if (running & known).any()
        else float("nan")
    )
    cold = running & known & (temperature.mean < normal - WARM_BELOW)
    return running & ~cold, cold


def _predicted(case: Case, aligned: AlignedRecord) -> FloatArray | None:
    """Inlet pressure of the clean line at every bin with speed and temperature."""
    temperature = aligned.get("oil temperature")
    flow_series, speed = aligned.get("flow"), aligned.get("shaft speed")
    flow = (
        flow_series.mean
        if flow_series is not None
        else pump_flow(case, speed.mean)
        if speed is not None
        else None
    )
    if temperature is None or flow is None or not case.suction_line:
        return None
    if fluid_viscosities(case) is None:
        return None
    good = np.isfinite(temperature.mean) & np.isfinite(flow) & (temperature.mean > 203.0)
    good &= temperature.mean < 573.0
    out = np.full(aligned.time_s.shape, np.nan)
    if good.any():
        out[good] = pressure_budget(case, flow[good], temperature.mean[good]).inlet
    return out


def _regime(case: Case, aligned: AlignedRecord, mask: Mask, limit: float | None) -> Regime | None:
    if mask.sum() < LEAST_BINS:
        return None
    inlet = aligned.series["inlet pressure"]
    values = inlet.mean[mask]
    low, mid, high = np.quantile(values, [0.05, 0.5, 0.95])
    return Regime(
        hours=float(mask.sum()) * aligned.bin_s / 3600.0,
        median=float(mid),
        p05=float(low),
        p95=float(high),
        lowest=float(np.nanmin(inlet.low[mask])),
        below_limit=float(np.mean(values < limit)) if limit is not None else 0.0,
        near_vapour=float(np.mean(values < NEAR_VAPOUR)),
        released=_released(case, float(mid)),
    )


def _released(case: Case, pressure: float) -> float:
    time = line_residence(case) or 1.0
    temperature = case.fluid.temperature.value if case.fluid.temperature else 323.15
    full = released_ratio(
        max(pressure, 500.0),
        bunsen=bunsen(case)[0],
        temperature=temperature,
        saturation=local_atmosphere(case),
    )
    return float(full * released_share_in_time(time, MIDDLE_TAU))


def _pieces(
    aligned: AlignedRecord, measured: FloatArray, predicted: FloatArray | None, mask: Mask
) -> tuple[Piece, ...]:
    places = np.flatnonzero(mask)
    if places.size < STEPS * 3:
        return ()
    pieces = []
    for block in np.array_split(places, STEPS):
        middle = float(np.median(measured[block]))
        clean = _median_of(predicted[block]) if predicted is not None else None
        pieces.append(
            Piece(
                start_s=float(aligned.time_s[block[0]]),
                end_s=float(aligned.time_s[block[-1]]),
                measured=middle,
                predicted=clean,
                viscous_excess=clean - middle if clean is not None else None,
            )
        )
    return tuple(pieces)


def _last_tenth(mask: Mask) -> Mask:
    places = np.flatnonzero(mask)
    out = np.zeros_like(mask)
    if places.size:
        out[places[-max(LEAST_BINS, places.size // 10) :]] = True
    return out


def _drift(pieces: tuple[Piece, ...]) -> float | None:
    rows = [(0.5 * (p.start_s + p.end_s), p.viscous_excess) for p in pieces]
    rows = [(t, x) for t, x in rows if x is not None]
    if len(rows) < 5:
        return None
    slopes = [
        (b[1] - a[1]) / (b[0] - a[0])  # type: ignore[operator]  # None is filtered above
        for i, a in enumerate(rows)
        for b in rows[i + 1 :]
        if b[0] > a[0]
    ]
    return float(np.median(slopes)) * 7 * 86400.0 if slopes else None


def _median(values: FloatArray | None, mask: Mask) -> float | None:
    return _median_of(values[mask]) if values is not None and mask.any() else None


def _median_of(values: FloatArray) -> float | None:
    finite = values[np.isfinite(values)]
    return float(np.median(finite)) if finite.size else None


def _difference(one: float | None, other: float | None) -> float | None:
    return one - other if one is not None and other is not None else None
