"""Fast records: ripple, the pump's own frequency, impulses, and how fast the pressure rises."""

from dataclasses import dataclass

import numpy as np
from scipy.signal import welch

from rca.base.errors import OutOfRangeError
from rca.base.source import Source
from rca.case.series import FloatArray

RESOLVES = 20_000.0  # [Hz], sampling needed to see a rise of a fraction of a millisecond


@dataclass(frozen=True, slots=True, kw_only=True)
class BurstFinding:
    """One fast record of one quantity."""

    quantity: str
    source: Source
    rate_hz: float
    duration_s: float
    mean: float
    ripple: float  # peak to peak, 1 to 99 %
    crest: float  # largest deviation over standard deviation [-]
    kurtosis: float  # 3 for noise, above it for impulses [-]
    element_frequency: float | None  # [Hz], elements times speed
    element_share: float | None  # share of the variance at that frequency and 4 harmonics [-]
    rise_time: float | None  # [s], fastest 10-90 % of a large rise
    rise_size: float | None  # [SI], of that rise
    rise_resolved: bool
    # that rise from its foot to its first crest: seconds, and share of the way up [-]
    rise_course: tuple[tuple[float, float], ...] = ()


def burst_finding(
    quantity: str,
    values: FloatArray,
    rate_hz: float,
    source: Source,
    *,
    speed: float | None,
    elements: int | None,
) -> BurstFinding:
    """Describe a burst in SI; ``speed`` [1/s] and ``elements`` place the pump's own frequency.

    Raises OutOfRangeError for fewer than 64 samples.
    """
    x = values[np.isfinite(values)]
    if x.size < 64:
        raise OutOfRangeError(f"a burst needs at least 64 samples; {quantity} has {x.size}")
    sd = float(np.std(x)) or 1e-300
    centred = x - np.mean(x)
    frequency = speed * elements if speed is not None and elements is not None else None
    rise, size = fastest_rise(x, rate_hz)
    return BurstFinding(
        quantity=quantity,
        source=source,
        rate_hz=rate_hz,
        duration_s=x.size / rate_hz,
        mean=float(np.mean(x)),
        ripple=float(np.quantile(x, 0.99) - np.quantile(x, 0.01)),
        crest=float(np.max(np.abs(centred)) / sd),
        kurtosis=float(np.mean(centred**4) / sd**4),
        element_frequency=frequency,
        element_share=_share(centred, rate_hz, frequency) if frequency else None,
        rise_time=rise,
        rise_size=size,
        rise_resolved=rate_hz >= RESOLVES,
        rise_course=fastest_rise_course(x, rate_hz),
    )


def spectrum(values: FloatArray, rate_hz: float) -> tuple[FloatArray, FloatArray]:
    """Frequency [Hz] and power density by Welch's method (Hann, half overlap)."""
    length = min(values.size, int(2 ** np.ceil(np.log2(rate_hz / 2.0))))
    frequency, power = welch(values - np.mean(values), fs=rate_hz, nperseg=length)
    return np.asarray(frequency), np.asarray(power)


def fastest_rise(values: FloatArray, rate_hz: float) -> tuple[float | None, float | None]:
    """Time of the fastest 10-90 % rise [s] and its size, of rises over half the span.

    None where the signal shows no such rise within the record.
    """
    found = _fastest(values)
    if found is None:
        return None, None
    begin, end, span = found
    return (end - begin) / rate_hz, span


def fastest_rise_course(
    values: FloatArray, rate_hz: float, *, points: int = 48
) -> tuple[tuple[float, float], ...]:
    """The fastest rise from its foot to its first crest, at most ``points`` of it.

    Rows of time [s] from the foot and share of the way from foot to crest [-], 0 first, 1 last;
    empty where the signal shows no such rise. Foot and crest: where the signal, going out from the
    10 % and 90 % points, turns round.
    """
    found = _fastest(values)
    if found is None:
        return ()
    foot, crest, _ = found
    while foot > 0 and values[foot - 1] < values[foot]:
        foot -= 1
    while crest + 1 < values.size and values[crest + 1] > values[crest]:
        crest += 1
    part = np.asarray(values[foot : crest + 1], dtype=float)
    time = np.arange(part.size) / rate_hz
    share = (part - part[0]) / (part[-1] - part[0])
    at = time if part.size <= points else np.linspace(0.0, time[-1], points)
    return tuple(zip(at.tolist(), np.interp(at, time, share).tolist(), strict=True))


def _fastest(values: FloatArray) -> tuple[int, int, float] | None:
    """Last sample under 10 % and first over 90 % of the fastest large rise, and the span."""
    low, high = np.quantile(values, [0.01, 0.99])
    span = float(high - low)
    if span <= 0.05 * abs(float(np.mean(values))):
        return None
    ten, ninety = low + 0.1 * span, low + 0.9 * span
    up = np.flatnonzero((values[:-1] < ninety) & (values[1:] >= ninety))
    starts = np.flatnonzero((values[:-1] < ten) & (values[1:] >= ten))
    if not up.size or not starts.size:
        return None
    places = np.searchsorted(starts, up, side="right") - 1
    good = places >= 0
    if not good.any():
        return None
    ends, begins = up[good], starts[places[good]]
    fastest = int(np.argmin(ends - begins))
    return int(begins[fastest]), int(ends[fastest]) + 1, span


def _share(centred: FloatArray, rate_hz: float, frequency: float) -> float | None:
    grid, power = spectrum(centred, rate_hz)
    total = float(np.sum(power))
    if total <= 0 or frequency * 2 > rate_hz:
        return None
    near = np.zeros(grid.shape, dtype=bool)
    for order in range(1, 6):
        near |= np.abs(grid - order * frequency) < max(2.0 * (grid[1] - grid[0]), 0.01 * frequency)
    return float(np.sum(power[near]) / total)
