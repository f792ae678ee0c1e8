"""Pressure and released air along the suction path, from the reservoir to the pump."""

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from rca.case.model import Case, SuctionPart
from rca.case.vocabulary import PartKind
from rca.physics.dissolved_air import released_ratio
from rca.physics.line_losses import kinetic_coefficient, reynolds
from rca.physics.viscosity import kinematic_viscosity
from rca.suction.budget import (
    fluid_viscosities,
    oil_density,
    pressure_budget,
    pump_flow,
)
from rca.suction.spread import Spread, spread
from rca.suction.state import draws, usable_temperature

FloatArray = npt.NDArray[np.float64]
STEPS = 8  # pieces a pipe is cut into
SHORT = 0.1  # [s], time taken for a part without a length; judgement
SAMPLES = 512


@dataclass(frozen=True, slots=True, kw_only=True)
class Station:
    """One place on the path: where the oil leaves a part."""

    name: str
    time: float  # [s], since the oil left the reservoir
    pressure: float  # [Pa], static
    equilibrium: float  # gas per oil if it had all the time it wants [-]
    released: Spread  # gas per oil at the rate it has [-]


@dataclass(frozen=True, slots=True, kw_only=True)
class Path:
    """Stations in flow order for one state of the line."""

    state: str  # "clean line" or "as found"
    temperature: float  # [K]
    stations: tuple[Station, ...]


def air_along_path(
    case: Case,
    *,
    seed: int,
    state: str = "clean line",
    viscous_excess: float = 0.0,
    quadratic_excess: float = 0.0,
    depression: float = 0.0,
    head_loss: float = 0.0,
) -> Path | None:
    """Released air at each part, first-order release with the time each part gives.

    Excesses [Pa] are put where they belong: viscous on the strainer (on pipes and hoses where
    there is none), quadratic on fittings and valves (else pipes), depression and head on the
    reservoir. None where the budget can't be computed. It errs low where gas that is out already
    helps more come out, high where bubbles dissolve again.
    """
    flow, warm = pump_flow(case), case.fluid.temperature
    if flow is None or float(flow) <= 0.0 or warm is None or not case.suction_line:
        return None
    viscosities = fluid_viscosities(case)
    if viscosities is None or not usable_temperature(warm):
        return None
    nu = float(kinematic_viscosity(warm.value, *viscosities))
    budget = pressure_budget(case, float(flow), warm.value)
    losses = np.array([float(loss) for _, loss in budget.parts])
    losses += _placed(case, viscous_excess, (PartKind.STRAINER,), (PartKind.PIPE, PartKind.HOSE))
    losses += _placed(
        case, quadratic_excess, (PartKind.FITTING, PartKind.VALVE), (PartKind.PIPE, PartKind.HOSE)
    )
    draw = draws(case, seed=seed, samples=SAMPLES)
    now = budget.atmosphere + float(budget.head) - head_loss - float(budget.breather) - depression
    rho = oil_density(case, warm.value)
    stations: list[Station] = []
    released = np.zeros(draw["tau"].size)
    elapsed = 0.0
    for part, loss, (name, _) in zip(case.suction_line, losses, budget.parts, strict=True):
        pieces = STEPS if part.length is not None else 1
        time = _time(part, float(flow)) / pieces
        speed_head = _speed_head(part, float(flow), nu, rho)
        static = now
        for _ in range(pieces):
            now -= loss / pieces
            static = max(now - speed_head, 500.0)
            released = _advance(released, static, time, warm.value, draw)
            elapsed += time
        stations.append(
            Station(
                name=name,
                time=elapsed,
                pressure=static,
                equilibrium=float(np.median(_equilibrium(static, warm.value, draw))),
                released=spread(released),
            )
        )
    return Path(state=state, temperature=warm.value, stations=tuple(stations))


def _advance(
    released: FloatArray,
    pressure: float,
    time: float,
    temperature: float,
    draw: dict[str, FloatArray],
) -> FloatArray:
    """Gas per oil after a stay; never less than before, as dissolving takes far longer."""
    target = _equilibrium(pressure, temperature, draw)
    step = (target - released) * (1.0 - np.exp(-time / draw["tau"]))
    return np.asarray(released + np.maximum(step, 0.0))


def _equilibrium(pressure: float, temperature: float, draw: dict[str, FloatArray]) -> FloatArray:
    return released_ratio(
        pressure, bunsen=draw["bunsen"], temperature=temperature, saturation=draw["atmosphere"]
    )


def _placed(
    case: Case, excess: float, first: tuple[PartKind, ...], else_: tuple[PartKind, ...]
) -> FloatArray:
    for kinds in (first, else_):
        places = np.array([float(p.part in kinds) for p in case.suction_line])
        if places.any():
            return np.asarray(excess * places / places.sum())
    return np.full(len(case.suction_line), excess / len(case.suction_line))


def _time(part: SuctionPart, flow: float) -> float:
    if part.bore is None or part.length is None:
        return SHORT
    return float(np.pi / 4.0 * part.bore.value**2 * part.length.value * part.count / flow)


def _speed_head(part: SuctionPart, flow: float, nu: float, rho: float) -> float:
    if part.bore is None:
        return 0.0
    bore = part.bore.value
    factor = kinetic_coefficient(reynolds(np.asarray(flow), bore, np.asarray(nu)))
    return float(factor * 0.5 * rho * (flow / (np.pi / 4.0 * bore**2)) ** 2)
