"""Invented machines with invented faults: what physics makes of them, and which mechanisms ran.

Nothing here reads the verdict's knowledge file. A case is drawn by its faults; inlet pressure,
released air and the heat of bubbles follow from the line losses, Henry's law with a finite rate
and the time heat takes to leave a bubble; thresholds at which a mechanism counts as having taken
part are drawn anew for every case, since nobody knows them.
"""

from dataclasses import dataclass

import numpy as np

from rca.base.source import Reading, Source
from rca.case.model import Breather, Case, Fluid, Header, Pump, Reservoir, SuctionPart
from rca.case.site import local_atmosphere
from rca.case.vocabulary import CAUSES, MECHANISMS, FluidClass, PartKind, PumpKind
from rca.physics.compression import adiabatic_end_temperature
from rca.physics.dissolved_air import released_ratio, released_share_in_time
from rca.suction.budget import bunsen, line_residence, pressure_budget, pump_flow

SOURCE = Source(file="case.toml", locator="simulated")
# Faults drawn as the first of a case, by weight: near even, so that rare ones are tested as well.
FAULTS = (*(c for c in CAUSES if c != "unknown"), "groove design", "fluid chemistry", "none")
SECOND = 0.3  # share of cases with a second, independent fault
HEAT_DIFFUSIVITY = 2.2e-5  # [m2/s], air at 1 bar and 300 K; textbook value


@dataclass(frozen=True, slots=True, kw_only=True)
class Truth:
    """One simulated case as it really was."""

    case: Case
    causes: frozenset[str]
    mechanisms: frozenset[str]
    warm: float  # [Pa], inlet pressure at the end, warm
    cold: float  # [Pa], at the coldest start
    cold_hours: float  # per 100 h of running
    carried: float  # air carried in, gas per oil [-]
    hot_share: float  # share of bubbles that stay hot, as a check would find it [-]


def draw_truth(rng: np.random.Generator) -> Truth:
    """A failed machine: drawn again until at least one mechanism, or a broken drive, ran."""
    for _ in range(200):
        truth = _draw(rng)
        if truth.mechanisms or "drive or coupling failure" in truth.causes:
            return truth
    raise RuntimeError("no failing machine in 200 draws")


def _reading(value: float, unit: str) -> Reading:
    return Reading(value=float(value), unit=unit, source=SOURCE)


def _draw(rng: np.random.Generator) -> Truth:
    faults = {str(rng.choice(FAULTS))}
    if rng.random() < SECOND:
        faults.add(str(rng.choice(FAULTS)))
    severity = {f: float(rng.uniform(0.3, 1.0)) for f in faults}
    case = _machine(rng, faults)
    warm, cold, cold_hours = _inlet(case, rng, severity)
    carried = _carried(rng, severity)
    released = _released(case, warm, rng)
    hot = _hot_share(case, warm, rng)
    mechanisms = _suction(rng, warm, cold, cold_hours, released, carried)
    mechanisms |= _burning(case, rng, released + carried, hot)
    mechanisms |= _others(rng, severity, case, warm)
    return Truth(
        case=case,
        causes=frozenset(f for f in faults if f in CAUSES),
        mechanisms=frozenset(mechanisms),
        warm=warm,
        cold=cold,
        cold_hours=cold_hours,
        carried=carried,
        hot_share=hot,
    )


def _machine(rng: np.random.Generator, faults: set[str]) -> Case:
    kind = rng.choice([PumpKind.AXIAL_PISTON, PumpKind.VANE, PumpKind.GEAR], p=[0.6, 0.2, 0.2])
    size = float(rng.choice([45, 71, 100, 140])) * 1e-6
    speed = float(rng.choice([970, 1480, 1780])) / 60
    bore = np.sqrt(4 * size * speed / (np.pi * rng.uniform(0.7, 1.1)))  # 0.7 to 1.1 m/s
    if "suction line undersized" in faults:
        bore *= rng.uniform(0.5, 0.65)
    high = rng.uniform(2200, 4000) if "high altitude" in faults else rng.uniform(0, 900)
    glycol = rng.random() < 0.06
    phosphate = "fluid chemistry" in faults and rng.random() < 0.8
    fluid = (
        FluidClass.WATER_GLYCOL
        if glycol
        else FluidClass.PHOSPHATE_ESTER
        if phosphate
        else FluidClass.MINERAL
    )
    pressure = {PumpKind.AXIAL_PISTON: 220e5, PumpKind.VANE: 130e5, PumpKind.GEAR: 170e5}[kind]
    return Case(
        header=Header(id="S", title="simulated", altitude=_reading(high, "m")),
        pump=Pump(
            kind=kind,
            displacement=_reading(size, "m3"),
            speed=_reading(speed, "1/s"),
            elements=9 if kind is PumpKind.AXIAL_PISTON else 12,
            discharge_pressure=_reading(pressure * rng.uniform(0.6, 1.3), "Pa"),
            inlet_pressure_min=_reading(0.8e5, "Pa"),
        ),
        reservoir=Reservoir(
            oil_volume=_reading(size * speed * 180, "m3"),
            level_above_inlet=_reading(rng.uniform(-0.2, 0.8), "m"),
            breather=Breather(
                rated_flow=_reading(size * speed * 5, "m3/s"), rated_loss=_reading(3e3, "Pa")
            ),
        ),
        suction_line=(
            SuctionPart(
                index=0,
                part=PartKind.STRAINER,
                rated_flow=_reading(1.6 * size * speed, "m3/s"),
                rated_loss=_reading(3e3, "Pa"),
                rated_viscosity=_reading(30e-6, "m2/s"),
            ),
            SuctionPart(
                index=1,
                part=PartKind.PIPE,
                bore=_reading(bore, "m"),
                length=_reading(rng.uniform(0.8, 3.0), "m"),
                roughness=_reading(5e-5, "m"),
            ),
        ),
        fluid=Fluid(
            fluid_class=fluid,
            iso_vg=46,
            viscosity_40=_reading(46e-6, "m2/s"),
            viscosity_100=_reading(6.8e-6, "m2/s"),
            temperature=_reading(273.15 + rng.uniform(42, 60), "K"),
            coldest_start=_reading(273.15 + rng.uniform(5, 20), "K"),
        ),
    )


def _inlet(
    case: Case, rng: np.random.Generator, severity: dict[str, float]
) -> tuple[float, float, float]:
    """True inlet pressure warm and at the coldest start [Pa], and hours of cold per 100 h."""
    flow = pump_flow(case)
    assert flow is not None
    assert case.fluid.temperature is not None
    assert case.fluid.coldest_start is not None
    q = float(flow) * (1 + 0.4 * severity.get("pump overspeed", 0.0))
    cold_t = case.fluid.coldest_start.value - 25 * severity.get("cold or too viscous oil", 0.0)
    thick = 1.0 + 1.5 * severity.get("cold or too viscous oil", 0.0) * rng.random()
    loss = float(np.exp(0.15 * rng.normal()))
    low = 0.0
    for fault, most in (
        ("breather plugged", 0.5e5),
        ("suction line restricted", 0.6e5),
        ("low oil level", 0.04e5),
    ):
        low += most * severity.get(fault, 0.0) * rng.uniform(0.5, 1.0)
    clog = 0.45e5 * severity.get("suction strainer clogged", 0.0) * rng.uniform(0.6, 1.2)
    warm = pressure_budget(
        case, q, case.fluid.temperature.value, loss_factor=loss, viscosity_factor=thick
    )
    cold = pressure_budget(case, q, cold_t, loss_factor=loss, viscosity_factor=thick)
    ratio = min(float(np.sum([p for _, p in cold.parts]) / np.sum([p for _, p in warm.parts])), 4)
    hours = rng.uniform(0.2, 2.0) + 6.0 * severity.get("cold or too viscous oil", 0.0)
    return (
        max(float(warm.inlet) - low - clog, 2e3),
        max(float(cold.inlet) - low - clog * ratio, 2e3),
        float(hours),
    )


def _carried(rng: np.random.Generator, severity: dict[str, float]) -> float:
    """Air carried in, gas per oil at the inlet [-]; a few per mille are usual."""
    usual = float(np.exp(np.log(0.002) + 0.7 * rng.normal()))
    for fault in (
        "air leak on the suction side",
        "low oil level",
        "return flow aerates the reservoir",
        "poor air release",
    ):
        usual += 0.06 * severity.get(fault, 0.0) * rng.uniform(0.2, 1.0)
    return usual


def _released(case: Case, inlet: float, rng: np.random.Generator) -> float:
    assert case.fluid.temperature is not None
    alpha, u = bunsen(case)
    full = released_ratio(
        inlet,
        bunsen=max(alpha + u * rng.normal(), 0.2 * alpha),
        temperature=case.fluid.temperature.value,
        saturation=local_atmosphere(case),
    )
    tau = float(np.exp(rng.uniform(np.log(0.1), np.log(10.0))))
    return float(full * released_share_in_time(line_residence(case) or 1.0, tau))


def _hot_share(case: Case, inlet: float, rng: np.random.Generator) -> float:
    """Share of bubbles too large to lose their heat while the pressure rises [-]."""
    pump = case.pump
    assert pump.discharge_pressure is not None
    assert pump.speed is not None
    assert case.fluid.temperature is not None
    end = float(
        adiabatic_end_temperature(
            case.fluid.temperature.value, inlet, max(pump.discharge_pressure.value, 2 * inlet)
        )
    )
    if end < 900.0:
        return 0.0
    rise = float(np.exp(np.log(12.0 / 360.0 / pump.speed.value) + 0.5 * rng.normal()))
    needed = 3.0 * np.sqrt(HEAT_DIFFUSIVITY * rise / 10.0)  # denser gas: a tenth on the way up
    radius = np.exp(np.log(0.25e-3) + 0.9 * rng.normal(size=200))
    return float(np.mean(radius > needed))


def _suction(
    rng: np.random.Generator,
    warm: float,
    cold: float,
    cold_hours: float,
    released: float,
    carried: float,
) -> set[str]:
    found = set()
    lag = float(np.exp(np.log(0.35e5) + 0.35 * rng.normal()))  # the chamber lags the port
    if warm < lag or (cold < lag and cold_hours > rng.uniform(0.5, 4.0)):
        found.add("vapour cavitation")
    if released > float(np.exp(np.log(0.012) + 0.4 * rng.normal())):
        found.add("gaseous cavitation")
    if carried > float(np.exp(np.log(0.012) + 0.4 * rng.normal())):
        found.add("aeration")
    return found


def _burning(case: Case, rng: np.random.Generator, air: float, hot: float) -> set[str]:
    trapped = 0.03 if rng.random() < 0.04 else 0.0  # cylinders not bled
    enough = (air + trapped) * hot > float(np.exp(np.log(0.010) + 0.6 * rng.normal()))
    fuel = rng.random() < (0.02 if case.fluid.fluid_class is FluidClass.WATER_GLYCOL else 0.45)
    return {"micro-dieseling"} if enough and fuel else set()


def _others(
    rng: np.random.Generator, severity: dict[str, float], case: Case, warm: float
) -> set[str]:
    """Mechanisms of neither side, from their own faults."""
    assert case.pump.discharge_pressure is not None
    chances = {
        "groove design": {"jet cavitation": 0.9},
        "fluid chemistry": {"electrochemical erosion": 0.85},
        "dirt ingress": {"abrasive wear": 0.9, "lubrication starvation": 0.1},
        "water ingress": {"water contamination": 0.95, "oxidation": 0.25},
        "wrong or mixed oil": {"lubrication starvation": 0.45, "oxidation": 0.3},
        "cooler failure": {"oxidation": 0.6, "hot spot": 0.15, "lubrication starvation": 0.3},
        "filter charging": {"electrostatic discharge": 0.9},
        "throttling hot spot": {"hot spot": 0.9, "oxidation": 0.2},
        "relief valve set or stuck": {"over-pressure": 0.65, "hot spot": 0.35},
        "low oil level": {"lubrication starvation": 0.35},
        "drive or coupling failure": {"lubrication starvation": 0.1},
        "suction strainer clogged": {"abrasive wear": 0.1},
    }
    found = {
        mechanism
        for fault in severity
        for mechanism, p in chances.get(fault, {}).items()
        if rng.random() < p * rng.uniform(0.8, 1.1)
    }
    if warm < 0.4e5 and rng.random() < 0.3:
        found.add("lubrication starvation")
    usual = {"abrasive wear": 0.06, "oxidation": 0.06, "jet cavitation": 0.04}
    found |= {m for m, p in usual.items() if rng.random() < p}
    assert found <= set(MECHANISMS)
    return found
