"""Runs of samples below a limit and the longest unbroken stretch, found while a file is read."""

import numpy as np
import numpy.typing as npt

from rca.case.series import Spell

FloatArray = npt.NDArray[np.float64]
BRIDGED_S = 1.0  # spells this close together are one; a signal at the limit chatters
MOST_SPELLS = 200_000


class SpellFinder:
    """Spells of one channel below a limit, on its raw samples, block after block."""

    def __init__(self, limit: float, lowest_possible: float, interval: float) -> None:
        self.limit, self.floor, self.interval = limit, lowest_possible, interval
        self.bridged = max(BRIDGED_S, 2.0 * interval)
        self.broken = False  # stamps ran backwards, or too many spells to keep
        self._found: list[list[float]] = []  # start, end of the last sample, lowest
        self._last = -np.inf

    def add(self, time: FloatArray, values: FloatArray) -> None:
        """Samples in the order of time; impossible ones are passed over."""
        if self.broken or not time.size:
            return
        if time[0] < self._last or np.any(np.diff(time) < 0):
            self.broken = True
            return
        self._last = float(time[-1])
        below = (values < self.limit) & (values > self.floor)
        edges = np.flatnonzero(np.diff(np.concatenate([[False], below, [False]]).astype(np.int8)))
        for first, after in zip(edges[::2], edges[1::2], strict=True):
            # a hole in the record ends a spell: nobody saw what was in between
            cuts = np.flatnonzero(np.diff(time[first:after]) > self.bridged) + 1
            for piece in np.split(np.arange(first, after), cuts):
                self._keep(
                    float(time[piece[0]]),
                    float(time[piece[-1]]) + self.interval,
                    float(values[piece].min()),
                )
        if len(self._found) > MOST_SPELLS:
            self.broken = True

    def _keep(self, start: float, end: float, lowest: float) -> None:
        if self._found and start - self._found[-1][1] <= self.bridged:
            self._found[-1][1] = end
            self._found[-1][2] = min(self._found[-1][2], lowest)
        else:
            self._found.append([start, end, lowest])

    def spells(self) -> tuple[Spell, ...] | None:
        """The spells in order of time; None where they could not be told."""
        if self.broken:
            return None
        return tuple(
            Spell(start_s=start, duration_s=end - start, lowest=lowest)
            for start, end, lowest in self._found
        )


class Stretch:
    """The longest unbroken stretch of a fast record, up to a number of samples."""

    def __init__(self, tick: float, most: int) -> None:
        self.tick, self.most = tick, most
        self.best = _Piece(0)
        self._now = _Piece(0)
        self._seen = 0
        self._last: float | None = None

    def add(self, time: FloatArray, columns: dict[str, FloatArray]) -> None:
        """Samples in the order of the file; a gap is never bridged."""
        if not time.size:
            return
        before = self._last if self._last is not None else float(time[0])
        steps = np.diff(np.concatenate([[before], time]))
        cuts = np.flatnonzero((steps > self.tick) | (steps < 0))
        for piece in np.split(np.arange(time.size), cuts):
            if piece.size and cuts.size and piece[0] in cuts:
                self._close(self._seen + int(piece[0]))
            self._now.take(time[piece], {q: v[piece] for q, v in columns.items()}, self.most)
        self._seen += time.size
        self._last = float(time[-1])

    def _close(self, first: int) -> None:
        if self._now.count > self.best.count:
            self.best = self._now
        self._now = _Piece(first)

    def longest(self) -> tuple[int, FloatArray, dict[str, FloatArray]]:
        """Number of the first sample, times and values of the longest stretch."""
        self._close(self._seen)
        return self.best.first, *self.best.joined()


class _Piece:
    """Samples of one stretch; counted to its end, kept up to a number."""

    def __init__(self, first: int) -> None:
        self.first, self.count, self._kept = first, 0, 0
        self._time: list[FloatArray] = []
        self._columns: dict[str, list[FloatArray]] = {}

    def take(self, time: FloatArray, columns: dict[str, FloatArray], most: int) -> None:
        self.count += time.size
        room = most - self._kept
        if room <= 0:
            return
        self._time.append(time[:room].copy())
        for quantity, values in columns.items():
            self._columns.setdefault(quantity, []).append(values[:room].copy())
        self._kept += min(room, time.size)

    def joined(self) -> tuple[FloatArray, dict[str, FloatArray]]:
        if not self._time:
            return np.empty(0), {}
        return np.concatenate(self._time), {
            q: np.concatenate(parts) for q, parts in self._columns.items()
        }
