"""What the discharge check finds, as plain values."""

from dataclasses import dataclass
from enum import StrEnum

from rca.base.source import Reading
from rca.physics.consequences import Budget


class Status(StrEnum):
    """The three answers a physical check can give."""

    SUPPORTED = "supported"
    NOT_EXCLUDED = "not excluded"
    EXCLUDED = "excluded by physics"


@dataclass(frozen=True, slots=True, kw_only=True)
class Spread:
    """A distribution by its mean, standard deviation and 5, 50 and 95 % points."""

    mean: float
    sd: float
    p05: float
    p50: float
    p95: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Population:
    """Bubbles of one origin: their radii and what compression makes of them."""

    origin: str  # "released air" or "carried-in air"
    weight: float  # share of the entrained air [-]
    radius: Spread  # at the inlet [m]
    peclet: Spread
    core: Spread  # peak temperature at the centre [K]
    mean: Spread  # peak of the mean temperature [K]
    wall: Spread  # peak of the oil surface [K]
    overshoot: Spread  # gas pressure peak over the discharge pressure [-]
    inertial: float  # share of bubbles that overtake the line pressure [-]
    beyond: float  # share whose collapse passes 6000 K, where the model ends [-]
    possible: float  # share hot for long enough, with the margin [-]
    indeterminate: float  # share within the margin [-]
    excluded: float  # share that loses its heat in time, with the margin [-]


@dataclass(frozen=True, slots=True, kw_only=True)
class FuelPath:
    """Whether fuel can be where the hot gas is."""

    status: Status
    flash_point: Reading | None  # [K]
    lean_limit: Spread | None  # [K], surface temperature at which vapour reaches the lean limit
    margin: Spread | None  # [K], that less the wall's peak temperature
    vapour: float  # P(vapour from the wall reaches the lean limit)
    reasons: tuple[str, ...]
    # equivalence ratio of saturated vapour at the inlet, 5, 50 and 95 % [-]; None if not asked
    inlet_phi: tuple[float, float, float] | None = None
    drop: float | None = (
        None  # diameter of the oil drop that is fuel enough, over the bubble's [-]
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class RiseTime:
    """How long the pressure takes from inlet to discharge."""

    spread: Spread  # [s]
    basis: str  # in words
    measured: bool
    log_mean: float  # of ln(rise time [s])
    log_sd: float
    # measured course of the rise: seconds from its foot, share of the way up [-]; empty if none
    course: tuple[tuple[float, float], ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class Influence:
    """How much one uncertain input moves the peak core temperature."""

    name: str
    low: float  # [K], peak core with the input at its 5 % point, all others at their middle
    high: float  # [K], with it at its 95 % point
    share: float  # of the variance of the ranks explained by it alone [-]


@dataclass(frozen=True, slots=True, kw_only=True)
class Map:
    """Peak core temperature over radius and rise time at the machine's middle state."""

    radius: tuple[float, ...]  # [m]
    rise_time: tuple[float, ...]  # [s]
    core: tuple[tuple[float, ...], ...]  # [K], row per rise time
    critical: tuple[float, ...]  # [m], radius whose delay integral reaches 1, per rise time; inf


@dataclass(frozen=True, slots=True, kw_only=True)
class Trace:
    """One bubble's history, thinned."""

    radius_0: float  # [m]
    rise_time: float  # [s]
    time: tuple[float, ...]  # [s]
    line: tuple[float, ...]  # [Pa]
    pressure: tuple[float, ...]  # of the gas [Pa]
    radius: tuple[float, ...]  # [m]
    core: tuple[float, ...]  # [K]
    mean: tuple[float, ...]  # [K]
    wall: tuple[float, ...]  # [K]
    above_800: float  # [s]
    linear_core: float | None = None  # peak core of the same bubble under an even rise [K]


@dataclass(frozen=True, slots=True, kw_only=True)
class HighPressure:
    """The highest discharge pressure seen against what the machine is set to."""

    peak: Reading
    limit: Reading
    rule: str


@dataclass(frozen=True, slots=True, kw_only=True)
class DischargeCheck:
    """Could a bubble stay hot on the discharge side, and was there fuel for it?"""

    inlet_pressure: Reading | None = None  # [Pa]
    discharge_pressure: Reading | None = None  # [Pa]
    temperature: Reading | None = None  # [K]
    rise_time: RiseTime | None = None
    adiabatic: Spread | None = None  # [K], end temperature with no heat loss
    constant_gamma: float | None = None  # [K], the rule-of-thumb figure, for comparison only
    exponent: float | None = None  # effective polytropic exponent of the adiabatic end state [-]
    populations: tuple[Population, ...] = ()
    possible: float | None = None  # weighted over the populations
    indeterminate: float | None = None
    excluded: float | None = None
    hot: Status | None = None
    fuel: FuelPath | None = None
    ignition: Status | None = None
    budget: Budget | None = None
    air_fraction: float | None = None  # taken for the budget [-]
    influences: tuple[Influence, ...] = ()
    map: Map | None = None
    trace: Trace | None = None
    high_pressure: HighPressure | None = None
    missing: tuple[str, ...] = ()
    assumed: tuple[str, ...] = ()
    seed: int = 0
    samples: int = 0
