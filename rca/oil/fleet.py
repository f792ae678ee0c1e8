"""Warning levels from a fleet of like machines: shares of the sorted results."""

from collections.abc import Sequence
from dataclasses import dataclass
from math import isfinite

import numpy as np

from rca.base.errors import OutOfRangeError
from rca.case.oil import OilSample, OilValue

LEAST = 30  # results; fewer say little about the last twentieth; common practice, no source
SHARES = (85.0, 95.0, 98.0)  # per cent; common practice, no source


@dataclass(frozen=True, slots=True, kw_only=True)
class FleetLevels:
    """Levels of one property over a fleet of like machine, fluid, filter and interval."""

    property: str
    unit: str
    results: int
    levels: tuple[tuple[float, float], ...]  # (per cent of results at or below, level)


def sorted_share(values: Sequence[float], per_cent: float) -> float:
    """The value below which ``per_cent`` of the results lie, at Hazen's places (k - 1/2)/n.

    Source of the approach: ASTM D7720, percent cumulative distribution; the place is the common
    choice that makes the 95 % level of 20 results the mean of the two highest. Raises
    OutOfRangeError without values, for NaN, or for a share outside 0 to 100.
    """
    x = [float(v) for v in values]
    if not x or not all(isfinite(v) for v in x) or not 0.0 <= per_cent <= 100.0:
        raise OutOfRangeError("finite values and a share of 0 to 100 per cent are needed")
    return float(np.percentile(x, per_cent, method="hazen"))


def fleet_levels(samples: Sequence[OilSample]) -> tuple[FleetLevels, ...]:
    """Levels of every property with enough results; new oil and samples set aside are left out.

    The caller answers for the fleet being alike. Results under a limit of detection count at the
    bottom, where they do not move the upper levels; a property with results over a limit at the
    top is left out, as its upper levels are not known.
    """
    found: dict[str, list[OilValue]] = {}
    for sample in samples:
        if not sample.new_oil and not sample.excluded:
            for name, value in sample.values.items():
                found.setdefault(name, []).append(value)
    return tuple(
        FleetLevels(
            property=name,
            unit=values[0].unit,
            results=len(values),
            levels=tuple(
                (share, sorted_share([v.value for v in values], share)) for share in SHARES
            ),
        )
        for name, values in sorted(found.items())
        if len(values) >= LEAST and all(v.op != ">" for v in values)
    )
