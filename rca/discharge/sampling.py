"""Quasi-Monte-Carlo over the uncertain inputs, through the resolved bubble model."""

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
from scipy.special import ndtri

from rca.discharge.delay import delays
from rca.discharge.inputs import Inputs, spread
from rca.discharge.model import Influence, Population
from rca.physics.bubble import BubblePeaks, bubble_batch
from rca.physics.thermal_regime import peclet

Floats = npt.NDArray[np.float64]

# Radii at the inlet [m], 2.5 % and 97.5 % points of a log-normal over the gas volume. Bubbles that
# came out of solution are finer than air carried in through a leak or from the reservoir; common
# practice, no source. No measured distribution inside a pump's suction chamber is known.
RELEASED = (0.03e-3, 0.35e-3)
CARRIED = (0.06e-3, 2.0e-3)
ORIGINS = {"released air": RELEASED, "carried-in air": CARRIED}
# Air out of solution in fresh oil holds about a third of oxygen, an aged oil has used it up: delay
# times 0.45-1 (the shipped table at 800-1000 K, 0.35 against 0.2095); air from outside does not.
OXYGEN_FACTOR = {"released air": (0.45, 1.0), "carried-in air": (1.0, 1.0)}
KINETICS_SPREAD = 0.4  # of ln(delay); 50 % either way
CONDUCTION = (1.0, 1.3)  # dense gas beside the cold wall conducts better than the dilute law
LOW_MARGIN, HIGH_MARGIN = 0.5, 1.5  # radius over critical radius: excluded below, possible above
DISCHARGE_SPREAD = 0.02  # relative, where the case gives none
TEMPERATURE_SPREAD = 5.0  # [K], where the case gives none
HOLD = 0.05  # [s] at the discharge pressure before the bubble expands again; upper estimate
_Z975 = 1.959964


@dataclass(frozen=True, slots=True, kw_only=True)
class Draw:
    """Sampled inputs of one population; arrays of one length."""

    radius: Floats
    rise: Floats
    inlet: Floats
    temperature: Floats
    discharge: Floats
    delay: Floats
    conduction: Floats
    spare: Floats  # two more uniform columns


@dataclass(frozen=True, slots=True, kw_only=True)
class Sampled:
    """One population's draw and what the model made of it."""

    population: Population
    draw: Draw
    peaks: BubblePeaks
    wall: Floats  # peak of the oil surface without inertia [K]


def unit_points(samples: int, dimensions: int, seed: int) -> Floats:
    """Scrambled Sobol points in the open unit cube; the next power of two of ``samples``."""
    from scipy.stats import qmc  # noqa: PLC0415 - half a second to import, needed only here

    power = int(np.ceil(np.log2(max(samples, 64))))
    points = qmc.Sobol(d=dimensions, seed=np.random.default_rng(seed)).random_base2(power)
    return np.asarray(np.clip(points, 1e-9, 1 - 1e-9))


def draw(inputs: Inputs, origin: str, unit: Floats) -> Draw:
    """Map the unit cube to the inputs of one population."""
    z = ndtri(unit)
    low, high = np.log(ORIGINS[origin])
    t, p2, p1 = inputs.temperature, inputs.discharge, inputs.inlet
    u_p1 = p1.u if p1.u is not None else 0.05 * p1.value
    discharge = p2.value * np.exp((p2.u / p2.value if p2.u else DISCHARGE_SPREAD) * z[:, 4])
    fresh = OXYGEN_FACTOR[origin]
    return Draw(
        radius=np.exp(0.5 * (low + high) + (high - low) / (2 * _Z975) * z[:, 0]),
        rise=np.exp(inputs.rise.log_mean + inputs.rise.log_sd * z[:, 1]),
        inlet=p1.value * np.exp(u_p1 / p1.value * z[:, 2]),
        temperature=t.value + (t.u if t.u is not None else TEMPERATURE_SPREAD) * z[:, 3],
        discharge=discharge,
        delay=np.exp(KINETICS_SPREAD * z[:, 5]) * (fresh[0] + (fresh[1] - fresh[0]) * unit[:, 7]),
        conduction=CONDUCTION[0] + (CONDUCTION[1] - CONDUCTION[0]) * unit[:, 6],
        spare=unit[:, 7:9],
    )


def compress(inputs: Inputs, drawn: Draw, *, workers: int = 1) -> BubblePeaks:
    """The sampled bubbles through the resolved model, with inertia where it matters."""
    return bubble_batch(
        drawn.radius, drawn.temperature, drawn.inlet, drawn.discharge, drawn.rise, hold=HOLD,
        oil=inputs.oil, conduction_factor=drawn.conduction, delays=delays(),
        delay_factor=drawn.delay, keep_beyond=True, workers=workers,
    )  # fmt: skip


def ignites(
    inputs: Inputs, drawn: Draw, scale: float, *, workers: int = 1
) -> npt.NDArray[np.bool_]:
    """Whether bubbles ``scale`` times as large would stay hot beyond the ignition delay.

    Without inertia: the short spike of a spherical collapse is an upper bound: no support.
    """
    peaks = bubble_batch(
        scale * drawn.radius, drawn.temperature, drawn.inlet, drawn.discharge, drawn.rise,
        hold=HOLD, oil=inputs.oil, inertial=False, conduction_factor=drawn.conduction,
        delays=delays(), delay_factor=drawn.delay, stop_at_ignition=True, workers=workers,
    )  # fmt: skip
    return np.asarray(peaks.delay_integral >= 1.0)


def sample(
    inputs: Inputs, origin: str, weight: float, unit: Floats, *, workers: int = 1
) -> Sampled:
    """One population: distributions and the shares in the three bands."""
    drawn = draw(inputs, origin, unit)
    peaks = compress(inputs, drawn, workers=workers)
    possible = ignites(inputs, drawn, 1.0 / HIGH_MARGIN, workers=workers)
    excluded = ~ignites(inputs, drawn, 1.0 / LOW_MARGIN, workers=workers)
    wall = quiet_wall(inputs, drawn, peaks)
    number = peclet(drawn.radius, drawn.rise, drawn.temperature, drawn.inlet)
    population = Population(
        origin=origin,
        weight=weight,
        radius=spread(drawn.radius),
        peclet=spread(number),
        core=spread(peaks.core),
        mean=spread(peaks.mean),
        wall=spread(wall),
        overshoot=spread(peaks.pressure / drawn.discharge),
        inertial=float(np.mean(peaks.inertial)),
        beyond=float(np.mean(peaks.beyond)),
        possible=float(np.mean(possible)),
        indeterminate=float(np.mean(~possible & ~excluded)),
        excluded=float(np.mean(excluded & ~possible)),
    )
    return Sampled(population=population, draw=drawn, peaks=peaks, wall=wall)


def quiet_wall(inputs: Inputs, drawn: Draw, peaks: BubblePeaks) -> Floats:
    """Peak temperature of the oil surface by the line pressure alone [K].

    The spike of a spherical collapse would heat the surface too, but only as an upper bound, which
    must not count for a fuel vapour.
    """
    wall, fast = peaks.wall.copy(), peaks.inertial
    if fast.any():
        wall[fast] = bubble_batch(
            drawn.radius[fast], drawn.temperature[fast], drawn.inlet[fast], drawn.discharge[fast],
            drawn.rise[fast], hold=HOLD, oil=inputs.oil, inertial=False,
            conduction_factor=drawn.conduction[fast],
        ).wall  # fmt: skip
    return wall


def influences(inputs: Inputs, sampled: Sampled) -> tuple[Influence, ...]:
    """What moves the peak core temperature, largest first: one input at a time, and by rank."""
    d, ranks = sampled.draw, _ranks(sampled.peaks.core)
    columns = {
        "bubble radius": d.radius,
        "rise time": d.rise,
        "inlet pressure": d.inlet,
        "oil temperature": d.temperature,
        "discharge pressure": d.discharge,
        "gas conductivity": d.conduction,
    }
    middle = np.array([np.median(v) for v in columns.values()])
    rows = np.tile(middle, (2 * middle.size, 1))
    for i, values in enumerate(columns.values()):
        rows[2 * i, i], rows[2 * i + 1, i] = np.quantile(values, [0.05, 0.95])
    r, rise, p1, t, p2, k = rows.T
    core = bubble_batch(
        r, t, p1, p2, rise, hold=HOLD, oil=inputs.oil, conduction_factor=k, keep_beyond=True
    ).core
    found = [
        Influence(
            name=name,
            low=float(core[2 * i]),
            high=float(core[2 * i + 1]),
            share=float(np.corrcoef(_ranks(values), ranks)[0, 1] ** 2),
        )
        for i, (name, values) in enumerate(columns.items())
    ]
    return tuple(sorted(found, key=lambda row: -abs(row.high - row.low)))


def _ranks(values: Floats) -> Floats:
    order = np.empty(values.size)
    order[np.argsort(values, kind="stable")] = np.arange(values.size)
    return order
