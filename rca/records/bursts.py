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
    low, high = np.quantile(values, [0.01, 0.99])
    span = float(high - low)
    if span <= 0.05 * abs(float(np.mean(values))):
        return None, None
    ten, ninety = low + 0.1 * span, low + 0.9 * span
    up = np.flatnonzero((values[:-1] < ninety) & (values[1:] >= ninety))
    starts = np.flatnonzero((values[:-1] < ten) & (values[1:] >= ten))
    if not up.size or not starts.size:
        return None, None
    places = np.searchsorted(starts, up, side="right") - 1
    good = places >= 0
    if not good.any():
        return None, None
    times = (up[good] - starts[places[good]] + 1) / rate_hz
    return float(np.min(times)), span


def _share(centred: FloatArray, rate_hz: float, frequency: float) -> float | None:
    grid, power = spectrum(centred, rate_hz)
    total = float(np.sum(power))
    if total <= 0 or frequency * 2 > rate_hz:
        return None
    near = np.zeros(grid.shape, dtype=bool)
    for order in range(1, 6):
        near |= np.abs(grid - order * frequency) < max(2.0 * (grid[1] - grid[0]), 0.01 * frequency)
    return float(np.sum(power[near]) / total)
