"""Aligned samples of the slow records, small enough to hold in memory, in SI."""

from dataclasses import dataclass, field

import numpy as np
import numpy.typing as npt

from rca.base.source import Source

FloatArray = npt.NDArray[np.float64]


@dataclass(frozen=True, slots=True, kw_only=True)
class Series:
    """One quantity on the common time base of an ``AlignedRecord``.

    ``mean``, ``low`` and ``high`` have the length of the time base; NaN where there is no sample.
    ``low`` and ``high`` are the extremes inside each bin, so a short dip is never averaged away.
    """

    quantity: str
    unit: str  # SI: Pa (absolute), K, 1/s, m3/s, m
    mean: FloatArray
    low: FloatArray
    high: FloatArray
    source: Source
    usable: bool = True  # False where a sensor check set it aside
    remark: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class Spell:
    """A run of raw samples below a limit, finer than the bins of the record."""

    start_s: float  # seconds since 1970-01-01 UTC
    duration_s: float
    lowest: float  # SI


@dataclass(frozen=True, slots=True, kw_only=True)
class AlignedRecord:
    """All slow channels on one time base of equal bins.

    ``time_s`` is seconds since 1970-01-01 UTC at each bin's centre, true time (offset applied).
    ``bin_s`` is the width; ``bin_s`` equal to the sampling interval means nothing was pooled.
    """

    time_s: FloatArray
    bin_s: float
    series: dict[str, Series] = field(default_factory=dict)

    def get(self, quantity: str) -> Series | None:
        """The usable series of that quantity, or None."""
        found = self.series.get(quantity)
        return found if found is not None and found.usable else None
