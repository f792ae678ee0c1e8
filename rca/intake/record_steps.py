"""The sampling of a record: interval, gaps, steps back, counted while it is read."""

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from rca.case.model import TimeAxis

FloatArray = npt.NDArray[np.float64]
GAP_INTERVALS = 5.0  # a step this many sampling intervals long is a gap
MOST_GAPS = 200
HELD_ROWS = 4_000_000  # stamps kept to sort a file whose clock ran back


@dataclass(frozen=True, slots=True)
class Timing:
    """What the stamps of a file say."""

    rows: int
    start: float  # [s]
    end: float
    interval: float  # [s]
    gaps: tuple[tuple[float, float], ...]
    backward: int
    repeated: int  # equal neighbours, and neighbours the wrong way round before sorting


class Steps:
    """Steps between stamps, block after block."""

    def __init__(self, interval: float) -> None:
        self.gap = GAP_INTERVALS * interval if interval > 0 else np.inf
        self.rows = self.backward = self.repeated = 0
        self.low, self.high = np.inf, -np.inf
        self._last: float | None = None
        self._intervals: list[tuple[float, int]] = []
        self._gaps: list[tuple[float, float]] = []
        self._held: list[FloatArray] | None = []

    def add(self, time: FloatArray) -> None:
        """True times of one block [s], in the order of the file."""
        if not time.size:
            return
        chain = time if self._last is None else np.concatenate([[self._last], time])
        steps = np.diff(chain)
        self.rows += time.size
        self.backward += int((steps < 0).sum())
        self.repeated += int((steps == 0).sum())
        self.low, self.high = min(self.low, float(time.min())), max(self.high, float(time.max()))
        if steps.size:
            self._intervals.append((sampling_interval(steps), int(steps.size)))
            for place in np.flatnonzero(steps > self.gap)[:MOST_GAPS]:
                self._gaps.append((float(chain[place]), float(chain[place + 1])))
        self._last = float(time[-1])
        if self._held is not None:
            self._held.append(time)
            if self.rows > HELD_ROWS:
                self._held = None

    def timing(self, axis: TimeAxis) -> Timing | None:
        """All that was seen; None where there was no stamp.

        Gaps of a file whose clock ran back are those of its sorted stamps; of one too long to be
        sorted they are not told.
        """
        if not self.rows:
            return None
        # differences of epoch seconds hold only 0.2 us; a stated rate is exact
        stated = axis.rate_hz if not axis.column else None
        gaps, repeated = self._gaps, self.repeated
        interval = 1.0 / stated if stated else self._interval()
        if self.backward:
            gaps = []
            if self._held is not None:
                time = np.sort(np.concatenate(self._held))
                steps = np.diff(time)
                interval = 1.0 / stated if stated else sampling_interval(steps)
                repeated = int((steps <= 0).sum())
                far = np.flatnonzero(steps > GAP_INTERVALS * (interval or np.inf))
                gaps = [(float(time[i]), float(time[i + 1])) for i in far]
        wide = [(a, b) for a, b in gaps if b - a > GAP_INTERVALS * interval]
        return Timing(
            rows=self.rows,
            start=self.low,
            end=self.high,
            interval=interval,
            gaps=tuple(wide[:MOST_GAPS]),
            backward=self.backward,
            repeated=repeated,
        )

    def _interval(self) -> float:
        """The median of the blocks' intervals, weighted by their samples."""
        if not self._intervals:
            return 0.0
        ordered = sorted(self._intervals)
        weights = np.cumsum([n for _, n in ordered])
        return ordered[int(np.searchsorted(weights, weights[-1] / 2.0))][0]


def sampling_interval(steps: FloatArray) -> float:
    """The sampling interval [s]; under a clock coarser than the sampling, tick over samples."""
    if steps.size and steps.min() == steps.max() and steps[0] > 0:
        return float(steps[0])
    forward = steps[steps > 0]
    if not forward.size:
        return 0.0
    if forward.size > 0.8 * steps.size:
        return float(np.median(forward))
    return float(np.median(forward)) * forward.size / steps.size
