"""The suction side of a case: computed budget, measured record, released air."""

from dataclasses import dataclass

from rca.case.model import Case
from rca.case.series import AlignedRecord
from rca.case.site import local_atmosphere
from rca.suction.budget import line_residence, pump_flow
from rca.suction.counterfactual import Change, Counterfactual, NotComputed, counterfactuals
from rca.suction.explanations import WEATHER, Explanation, Explanations, explain
from rca.suction.inverse import Inverse, estimate_resistances
from rca.suction.measured import MeasuredInlet, measure_inlet
from rca.suction.priors import NOTICED
from rca.suction.spread import Spread
from rca.suction.state import (
    RELEASED_MATTERS,
    InletState,
    computed_state,
    draws,
    inlet_limit,
    inlet_state,
    missing_inputs,
)

__all__ = [
    "RELEASED_MATTERS",
    "Change",
    "Counterfactual",
    "InletState",
    "NotComputed",
    "SuctionCheck",
    "check_suction",
    "inlet_limit",
    "inlet_state",
    "transducer_error",
]
COLD_BELOW_NORMAL = 30.0  # [K], a start is taken this much colder where none is stated


@dataclass(frozen=True, slots=True, kw_only=True)
class SuctionCheck:
    """What the suction side looks like, computed for its clean state and as measured."""

    atmosphere: float  # [Pa]
    limit: float | None  # [Pa], lowest allowed inlet pressure
    limit_source: str
    residence: float | None  # [s], time of the oil in the suction line
    normal: InletState | None
    cold: InletState | None
    measured: MeasuredInlet | None
    inverse: Inverse | None = None  # resistances over the record
    inverse_missing: str = ""  # why there is none
    explanations: Explanations | None = None
    counterfactuals: tuple[Counterfactual, ...] = ()
    not_computed: tuple[NotComputed, ...] = ()
    missing: tuple[str, ...] = ()
    seed: int = 0
    samples: int = 0


def check_suction(
    case: Case, aligned: AlignedRecord | None, *, seed: int, samples: int = 4096
) -> SuctionCheck:
    """Budget at the normal and at the coldest temperature, and the record beside it."""
    missing = missing_inputs(case)
    flow = pump_flow(case)
    limit, source = inlet_limit(case)
    normal = cold = None
    if not missing and flow is not None and case.fluid.temperature is not None:
        warm_t = case.fluid.temperature.value
        start = case.fluid.coldest_start
        cold_t = start.value if start is not None else warm_t - COLD_BELOW_NORMAL
        draw = draws(case, seed=seed, samples=samples)
        normal = computed_state(case, float(flow), warm_t, limit, draw)
        cold = computed_state(case, float(flow), cold_t, limit, draw)
    measured = measure_inlet(case, aligned, limit=limit) if aligned is not None else None
    found = (
        estimate_resistances(case, aligned, seed=seed)
        if aligned is not None
        else "no slow record of the inlet pressure"
    )
    changes, not_computed = counterfactuals(case, found, seed=seed)
    return SuctionCheck(
        atmosphere=local_atmosphere(case),
        limit=limit,
        limit_source=source,
        residence=line_residence(case),
        normal=normal,
        cold=cold,
        measured=measured,
        inverse=None if isinstance(found, str) else found[0],
        inverse_missing=found if isinstance(found, str) else "",
        explanations=None if isinstance(found, str) else explain(case, *found, seed=seed),
        counterfactuals=changes,
        not_computed=not_computed,
        missing=missing,
        seed=seed,
        samples=samples,
    )


def transducer_error(check: SuctionCheck) -> Spread | None:
    """How much too low the transducer reads at the end of the record [Pa]; negative: too high.

    From the resistances where the record gives them, else from its reading at standstill. None
    where neither tells it, or it is too small to matter.
    """
    if check.explanations is not None:
        share = next(
            s for s in check.explanations.shares if s.explanation is Explanation.DRIFTED_TRANSDUCER
        )
        known = share.identified and max(share.amount.p05, -share.amount.p95) > NOTICED
        return share.amount if known else None
    late = check.measured.offset if check.measured is not None else None
    if late is None or abs(late) < NOTICED + 1.645 * WEATHER:
        return None
    return Spread(
        mean=-late, sd=WEATHER, p05=-late - 1.645 * WEATHER, p50=-late, p95=-late + 1.645 * WEATHER
    )
