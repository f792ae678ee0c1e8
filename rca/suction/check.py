"""The suction side of a case: computed budget, measured record, released air."""

from dataclasses import dataclass

import numpy as np

from rca.case.model import Case
from rca.case.series import AlignedRecord
from rca.case.site import local_atmosphere
from rca.case.vocabulary import PumpKind
from rca.physics.flow_pulsation import rigid_column_dip
from rca.suction.budget import line_residence, oil_density, pump_flow
from rca.suction.counterfactual import Change, Counterfactual, NotComputed, counterfactuals
from rca.suction.explanations import WEATHER, Explanation, Explanations, excesses, explain
from rca.suction.inverse import Inverse, InverseDraws, estimate_resistances
from rca.suction.measured import MeasuredInlet, measure_inlet
from rca.suction.path import Path, air_along_path
from rca.suction.priors import NOTICED
from rca.suction.reservoir_air import ReservoirAir, reservoir_air
from rca.suction.spread import Spread
from rca.suction.state import (
    RELEASED_MATTERS,
    InletState,
    computed_state,
    draws,
    inlet_limit,
    inlet_state,
    missing_inputs,
    usable_temperature,
)
from rca.suction.tornado import Swing, coldest_as_found, coldest_within_limit, margin_swings

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
Found = tuple[Inverse, InverseDraws] | str
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
    paths: tuple[Path, ...] = ()  # released air along the line, clean and as found
    swings_warm: tuple[Swing, ...] = ()  # which input moves the clean line's inlet, warm
    swings_cold: tuple[Swing, ...] = ()  # and at the cold start
    coldest_clean: float | None = None  # [K], the clean line holds the limit down to here
    coldest_found: float | None = None  # [K], the line as found
    pulsation_bound: float | None = None  # [Pa], dip of a rigid oil column; an upper bound
    reservoir: ReservoirAir | None = None  # dwell against the time the air needs
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
        paths=_paths(case, found, seed),
        swings_warm=margin_swings(case, normal.temperature, seed=seed) if normal else (),
        swings_cold=margin_swings(case, cold.temperature, seed=seed) if cold else (),
        coldest_clean=coldest_within_limit(case),
        coldest_found=_coldest_found(case, found, changes),
        pulsation_bound=_pulsation_bound(case),
        reservoir=reservoir_air(case, _inlet(normal, measured)),
        missing=missing,
        seed=seed,
        samples=samples,
    )


def _inlet(normal: InletState | None, measured: MeasuredInlet | None) -> float | None:
    """Inlet pressure of the warm, running pump [Pa]: measured, else computed."""
    regime = measured and (measured.last or measured.warm)
    if regime:
        return regime.median
    return normal.pressure.p50 if normal is not None else None


def _paths(case: Case, found: Found, seed: int) -> tuple[Path, ...]:
    paths = [air_along_path(case, seed=seed)]
    if not isinstance(found, str):
        inverse, inverse_draws = found
        over = excesses(case, inverse, inverse_draws, inverse.clean, np.random.default_rng(seed))
        middle = {k: max(float(np.median(v)), 0.0) for k, v in over.items()}
        paths.append(
            air_along_path(
                case,
                seed=seed,
                state="as found",
                viscous_excess=middle["viscous"],
                quadratic_excess=middle["quadratic"],
                depression=middle["depression"],
                head_loss=middle["level"],
            )
        )
    return tuple(p for p in paths if p is not None)


def _coldest_found(case: Case, found: Found, changes: tuple[Counterfactual, ...]) -> float | None:
    state = next((c for c in changes if c.change is Change.ALL), None)
    if isinstance(found, str) or state is None:
        return None
    return coldest_as_found(
        case,
        inlet=state.before.p50,
        viscous=float(np.median(found[1].last[:, 0])),
        temperature=found[0].reference_temperature,
    )


def _pulsation_bound(case: Case) -> float | None:
    """Dip of the inlet by the pump's own pulsation if the oil column were rigid [Pa]."""
    flow, pump = pump_flow(case), case.pump
    axial = pump.kind is PumpKind.AXIAL_PISTON
    if not axial or flow is None or pump.speed is None or (pump.elements or 0) < 3:
        return None
    inertance = sum(
        p.length.value * p.count / (np.pi / 4.0 * p.bore.value**2)
        for p in case.suction_line
        if p.length is not None and p.bore is not None
    )
    if not inertance:
        return None
    warm = case.fluid.temperature
    usable = warm is not None and usable_temperature(warm)
    rho = oil_density(case, warm.value if warm is not None and usable else 313.15)
    return float(
        rigid_column_dip(rho, inertance, float(flow), pump.speed.value, pump.elements or 3)
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
