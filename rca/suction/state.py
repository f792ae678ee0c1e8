"""Computed state of the inlet: pressure and released air as distributions, and the limit."""

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
from scipy.stats import norm, qmc

from rca.base.source import Reading
from rca.case.model import Case
from rca.case.site import local_atmosphere
from rca.case.vocabulary import PartKind, PumpKind
from rca.physics.atmosphere import WEATHER_SPREAD
from rca.physics.dissolved_air import TAU_RELEASE, released_ratio, released_share_in_time
from rca.physics.viscosity import kinematic_viscosity
from rca.suction.budget import (
    Budget,
    Condition,
    bunsen,
    fluid_viscosities,
    line_residence,
    pressure_budget,
    pump_flow,
)
from rca.suction.measured import NEAR_VAPOUR
from rca.suction.spread import Spread, spread

FloatArray = npt.NDArray[np.float64]
RELEASED_MATTERS = 0.01  # gas per volume of oil that a pump notices; common practice, no source
# Lowest continuous inlet pressure where the maker's is not given [Pa]; common practice, no source
USUAL_LIMIT = {
    PumpKind.GEAR: 0.75e5,
    PumpKind.SCREW: 0.75e5,
    PumpKind.VANE: 0.83e5,
    PumpKind.AXIAL_PISTON: 0.83e5,
    PumpKind.RADIAL_PISTON: 0.83e5,
}


@dataclass(frozen=True, slots=True, kw_only=True)
class InletState:
    """Inlet pressure [Pa] and released gas per oil [-] at one temperature, with probabilities."""

    temperature: float  # [K]
    flow: float  # [m3/s]
    viscosity: float  # [m2/s]
    pressure: Spread
    released: Spread
    below_limit: float  # P(inlet pressure below the limit)
    releases: float  # P(released gas above RELEASED_MATTERS)
    near_vapour: float  # P(inlet pressure below NEAR_VAPOUR)
    parts: tuple[tuple[str, float, float], ...]  # (name, loss [Pa], standard uncertainty [Pa])


def inlet_limit(case: Case) -> tuple[float | None, str]:
    """The lowest allowed inlet pressure [Pa] and where it comes from."""
    if case.pump.inlet_pressure_min is not None:
        return case.pump.inlet_pressure_min.value, "the maker's limit, as stated in case.toml"
    if case.pump.kind is not None:
        return USUAL_LIMIT[case.pump.kind], (
            f"usual for a self-priming {case.pump.kind.value} pump; common practice, no source"
        )
    return None, "no limit: neither the maker's nor the kind of pump is stated"


def released_in_line(
    case: Case, pressure: FloatArray, temperature: float, draw: dict[str, FloatArray]
) -> FloatArray:
    """Gas per oil released by the time the oil reaches the pump [-]; finite rate."""
    time = line_residence(case) or 1.0
    equilibrium = released_ratio(
        np.maximum(pressure, 500.0),
        bunsen=draw["bunsen"],
        temperature=temperature,
        saturation=draw["atmosphere"],
    )
    return np.asarray(equilibrium * released_share_in_time(time, draw["tau"]))


def inlet_state(
    case: Case, *, condition: Condition, temperature: float, seed: int, samples: int = 1024
) -> InletState | None:
    """Inlet pressure and released air under a supposed condition: the counterfactual."""
    flow = pump_flow(case)
    if missing_inputs(case) or flow is None:
        return None
    limit, _ = inlet_limit(case)
    draw = draws(case, seed=seed, samples=samples)
    return computed_state(case, float(flow), temperature, limit, draw, condition)


def draws(case: Case, *, seed: int, samples: int) -> dict[str, FloatArray]:
    """Uncertain inputs, quasi-random (Sobol) in the unit cube, mapped to their distributions."""
    power = int(np.ceil(np.log2(max(samples, 64))))
    unit = qmc.Sobol(d=7, seed=np.random.default_rng(seed)).random_base2(power)
    z = norm.ppf(np.clip(unit, 1e-9, 1 - 1e-9))
    alpha, alpha_u = bunsen(case)
    air = local_atmosphere(case)
    measured = case.fluid.viscosity_40 is not None and case.fluid.viscosity_100 is not None
    low, high = np.log(TAU_RELEASE)
    return {
        "loss": np.exp(0.15 * z[:, 0]),  # correlations of line losses; common practice
        "strainer": np.exp(0.35 * z[:, 1]),  # rated loss of a mesh; common practice
        "viscosity": np.exp((0.03 if measured else 0.10) * z[:, 2]),
        "bunsen": np.maximum(alpha + alpha_u * z[:, 3], 0.1 * alpha),
        "tau": np.exp(low + (high - low) * unit[:, 4]),
        "atmosphere": air * (1.0 + WEATHER_SPREAD * z[:, 5]),
        "temperature": 2.0 * z[:, 6],  # [K]
    }


def computed_state(
    case: Case,
    flow: float,
    temperature: float,
    limit: float | None,
    draw: dict[str, FloatArray],
    condition: Condition | None = None,
) -> InletState:
    """The inlet at one flow [m3/s] and temperature [K] for every draw of the uncertain inputs."""
    pressure, parts = sampled_losses(case, flow, temperature, draw, condition)
    released = released_in_line(case, pressure, temperature, draw)
    viscosities = fluid_viscosities(case)
    nominal = pressure_budget(case, flow, temperature, condition)
    nu = float(kinematic_viscosity(temperature, *viscosities)) if viscosities else float("nan")
    return InletState(
        temperature=temperature,
        flow=flow,
        viscosity=nu,
        pressure=spread(pressure),
        released=spread(released),
        below_limit=float(np.mean(pressure < limit)) if limit is not None else 0.0,
        releases=float(np.mean(released > RELEASED_MATTERS)),
        near_vapour=float(np.mean(pressure < NEAR_VAPOUR)),
        parts=_rows(nominal, parts),
    )


def sampled_losses(
    case: Case,
    flow: float,
    temperature: float,
    draw: dict[str, FloatArray],
    condition: Condition | None = None,
) -> tuple[FloatArray, dict[str, FloatArray]]:
    """Inlet pressure [Pa] and the loss of each part [Pa] for every draw."""
    q = np.full_like(draw["loss"], flow)
    budget = pressure_budget(
        case,
        q,
        temperature + draw["temperature"],
        condition,
        viscosity_factor=draw["viscosity"],
        loss_factor=draw["loss"],
    )
    strainers = {f"{p.index + 1} " for p in case.suction_line if p.part is PartKind.STRAINER}
    parts: dict[str, FloatArray] = {}
    for name, loss in budget.parts:
        own = any(name.startswith(prefix) for prefix in strainers)
        parts[name] = loss / draw["loss"] * draw["strainer"] if own else loss
    lost = np.sum(list(parts.values()), axis=0) if parts else np.zeros_like(q)
    pressure = draw["atmosphere"] + budget.head - budget.breather - lost - budget.kinetic
    return np.asarray(pressure), parts


def _rows(nominal: Budget, parts: dict[str, FloatArray]) -> tuple[tuple[str, float, float], ...]:
    rows = [("reservoir breather", float(nominal.breather), 0.5 * float(nominal.breather))]
    rows += [(name, float(np.mean(loss)), float(np.std(loss))) for name, loss in parts.items()]
    rows.append(("speed of the oil at the port", float(nominal.kinetic), 0.0))
    return tuple(rows)


def usable_temperature(temperature: Reading | None) -> bool:
    """Whether the viscosity relation holds there, with room for the uncertainty."""
    return temperature is not None and 213.0 <= temperature.value <= 563.0


def missing_inputs(case: Case) -> tuple[str, ...]:
    """What the pressure budget needs and the case does not give, as keys of case.toml."""
    pump, fluid = case.pump, case.fluid
    tests = (
        (not case.suction_line, "suction_line"),
        (pump.displacement is None, "pump.displacement"),
        (pump.speed is None, "pump.speed"),
        (fluid.temperature is None, "fluid.temperature"),
        (
            fluid.temperature is not None and not usable_temperature(fluid.temperature),
            "fluid.temperature between -60 and 290 degC",
        ),
        (fluid_viscosities(case) is None, "fluid.viscosity_40 and viscosity_100, or fluid.iso_vg"),
    )
    return tuple(name for absent, name in tests if absent)
