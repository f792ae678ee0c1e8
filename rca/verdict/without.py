"""One cause taken away, everything else as found: would the mechanism still have been possible?

The inlet comes from the suction check's own counterfactuals. The bubble's temperature is that of
air compressed without heat loss from the inlet pressure: an upper bound, and it changes little
with the inlet, since it follows the logarithm of the pressure ratio. What a better inlet takes
away is the air, not the heat.
"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from rca.discharge.model import DischargeCheck, Map, Status
from rca.physics.compression import adiabatic_end_temperature
from rca.suction.check import SuctionCheck
from rca.suction.counterfactual import LEAST_PRESSURE, Counterfactual

# Share of the draws above which a thing counts as likely, below which as hardly possible.
LIKELY, HARDLY = 0.5, 0.1
STARVED = 1.01 * LEAST_PRESSURE
SLOWER = 5.0  # times the rise of the pressure, in the row on a slower rise


@dataclass(frozen=True, slots=True, kw_only=True)
class Without:
    """What one change would have made of the inlet, the air and the bubble."""

    change: str
    cause: str  # "" where the change removes no single named cause
    inlet_before: float | None  # [Pa], medians
    inlet_after: float | None
    inlet_low: float | None  # [Pa], 5 and 95 % of the inlet with the change
    inlet_high: float | None
    released_before: float | None  # gas per oil at the port [-]
    released_after: float | None
    bubble_before: float | None  # [K], no heat loss unless ``basis`` says otherwise
    bubble_after: float | None
    below_limit: float | None  # P(inlet below its limit) with the change
    releases: float | None  # P(air comes out of solution) with the change
    still: str  # in words: what would still have been possible
    basis: str


def without_causes(
    suction: SuctionCheck | None, discharge: DischargeCheck | None
) -> tuple[Without, ...]:
    """Every change the checks can compute; empty where they can compute none."""
    rows = [_row(c, discharge) for c in (suction.counterfactuals if suction else ())]
    slower = _slower(discharge)
    return (*rows, *((slower,) if slower is not None else ()))


def _row(one: Counterfactual, discharge: DischargeCheck | None) -> Without:
    return Without(
        change=one.change.value,
        cause=one.cause,
        inlet_before=one.before.p50,
        inlet_after=one.after.p50,
        inlet_low=one.after.p05,
        inlet_high=one.after.p95,
        released_before=one.released_before.p50,
        released_after=one.released_after.p50,
        bubble_before=_bubble(discharge, one.before.p50),
        bubble_after=_bubble(discharge, one.after.p50),
        below_limit=one.below_limit,
        releases=one.releases,
        still=_still(one, discharge),
        basis=one.basis
        + ("" if one.identified else " The record does not tell this gain from another's."),
    )


def _still(one: Counterfactual, discharge: DischargeCheck | None) -> str:
    words = []
    if one.below_limit is not None:
        words.append(
            _graded(
                one.below_limit, "inlet still too low", "inlet may be too low", "inlet healthy"
            )
        )
    words.append(
        _graded(one.releases, "air still released", "air may be released", "no air released")
    )
    if discharge is not None and discharge.ignition not in (None, Status.EXCLUDED):
        words.append(
            "micro-dieseling from carried air only"
            if one.releases < HARDLY
            else "micro-dieseling still possible"
        )
    return "; ".join(words)


def _graded(p: float, yes: str, perhaps: str, no: str) -> str:
    return yes if p >= LIKELY else perhaps if p >= HARDLY else no


def _bubble(discharge: DischargeCheck | None, inlet: float) -> float | None:
    """End temperature of air compressed without heat loss [K]; an upper bound."""
    if discharge is None or discharge.temperature is None or discharge.discharge_pressure is None:
        return None
    if inlet <= STARVED:
        return None  # the pump starves; its inlet pressure is not known
    return float(
        adiabatic_end_temperature(
            discharge.temperature.value, inlet, discharge.discharge_pressure.value
        )
    )


def _slower(discharge: DischargeCheck | None) -> Without | None:
    """The usual bubble with the pressure rising more slowly, from the check's own map."""
    if discharge is None or discharge.map is None or discharge.rise_time is None:
        return None
    if not discharge.populations:
        return None
    rise, radius = discharge.rise_time.spread.p50, discharge.populations[-1].radius.p50
    before, after = (_core(discharge.map, radius, t) for t in (rise, SLOWER * rise))
    return Without(
        change=f"pressure rise {SLOWER:g} times slower",
        cause="",
        inlet_before=None,
        inlet_after=None,
        inlet_low=None,
        inlet_high=None,
        released_before=None,
        released_after=None,
        bubble_before=before,
        bubble_after=after,
        below_limit=None,
        releases=None,
        still="the usual bubble keeps its heat less well" if after < before else "no change",
        basis=(
            f"Core of a bubble of {2e3 * radius:.2g} mm with heat loss, line pressure only, rise "
            f"{1e3 * rise:.2g} and {1e3 * SLOWER * rise:.2g} ms."
        ),
    )


def _core(chart: Map, radius: float, rise: float) -> float:
    """Peak core temperature of the map [K], linear in the logarithms, held at its edges."""
    r, t = np.log(chart.radius), np.log(chart.rise_time)
    by_rise = [float(np.interp(np.log(radius), r, np.asarray(row))) for row in chart.core]
    return float(np.interp(np.log(rise), t, np.asarray(by_rise)))


def for_cause(rows: Sequence[Without], cause: str) -> Without | None:
    """The row that takes one cause away; None where none does."""
    return next((row for row in rows if row.cause == cause), None)
