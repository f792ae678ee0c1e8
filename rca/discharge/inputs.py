"""The uncertain inputs of the discharge check: what the case gives, what is assumed instead."""

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np
import numpy.typing as npt

from rca.base.source import Origin, Reading
from rca.case.model import Case
from rca.case.site import local_atmosphere
from rca.case.vocabulary import PumpKind
from rca.discharge.model import RiseTime, Spread
from rca.physics.bubble import OilSide
from rca.physics.collapse import ramp_time
from rca.physics.fluid_class import class_values, density
from rca.physics.oil_thermal import (
    petroleum_conductivity,
    petroleum_heat_capacity,
    surface_tension,
)
from rca.physics.viscosity import kinematic_viscosity
from rca.suction.budget import fluid_class_name, fluid_viscosities

if TYPE_CHECKING:  # its module loads scipy.signal, which nothing here needs
    from rca.records.bursts import BurstFinding

Floats = npt.NDArray[np.float64]

# Shaft angle from inlet to discharge pressure, 5 % and 95 % points [degrees]; common practice, no
# source. Gear and screw pumps may also see one pitch only, which the lower end covers.
TRANSITION_DEGREES = {
    PumpKind.AXIAL_PISTON: (5.0, 20.0),
    PumpKind.RADIAL_PISTON: (5.0, 25.0),
    PumpKind.VANE: (10.0, 30.0),
    PumpKind.GEAR: (30.0, 180.0),
    PumpKind.SCREW: (60.0, 360.0),
}
STATED_ANGLE_SPREAD = 0.30  # ln; relief grooves bend the rise inside the stated angle
UNKNOWN_RISE = (0.3e-3, 20e-3)  # [s], 5 % and 95 % where the pump is not described at all
USUAL_SPEED = (16.0, 50.0)  # [1/s], 5 % and 95 % where no speed is stated
FEWEST_POINTS = 6  # of a recorded rise that may drive a bubble
LARGE_RISE = 0.5  # of the discharge pressure: a burst must rise this far to show the compression
_Z95 = 1.6448536


@dataclass(frozen=True, slots=True, kw_only=True)
class Inputs:
    """Everything the sampling needs, with the words on what was assumed."""

    inlet: Reading
    discharge: Reading
    temperature: Reading
    rise: RiseTime
    oil: OilSide
    assumed: tuple[str, ...]


def spread(values: Floats) -> Spread:
    """Mean, standard deviation and 5, 50, 95 % points of a sample."""
    low, middle, high = (float(q) for q in np.quantile(values, [0.05, 0.5, 0.95]))
    return Spread(
        mean=float(np.mean(values)), sd=float(np.std(values)), p05=low, p50=middle, p95=high
    )


def gather(
    case: Case,
    inlet: tuple[float, float] | None,
    discharge: Reading,
    bursts: "tuple[BurstFinding, ...]",
) -> Inputs:
    """The inputs of a case; ``inlet`` = mean and standard uncertainty [Pa abs] or None."""
    assumed: list[str] = []
    if inlet is None:
        inlet = 0.92 * local_atmosphere(case), 0.06 * local_atmosphere(case)
        assumed.append("inlet pressure 8 % below the atmosphere, ± 6 %")
    temperature = case.fluid.temperature
    if temperature is None:
        temperature = Reading(value=323.15, unit="K", u=8.0, origin=Origin.ASSUMED)
        assumed.append("oil at 50 °C, ± 8 K")
    rise = rise_time(case, discharge, bursts)
    if not rise.measured and case.pump.transition_angle is None:
        assumed.append(f"pressure rise: {rise.basis}")
    return Inputs(
        inlet=Reading(value=inlet[0], unit="Pa", u=inlet[1], origin=Origin.CALCULATED),
        discharge=discharge,
        temperature=temperature,
        rise=rise,
        oil=oil_side(case, temperature.value),
        assumed=tuple(assumed),
    )


def rise_time(case: Case, discharge: Reading, bursts: "tuple[BurstFinding, ...]" = ()) -> RiseTime:
    """Rise from inlet to discharge pressure that a bubble in the pump's chamber meets.

    The chamber follows the geometry: it is connected to a line that stands at pressure already.
    A pressure port sees the line, not the chamber, so a rise measured there counts only where it
    is the faster of the two, or where the pump is not described.
    """
    line = _measured_rise(discharge, bursts)
    chamber = _chamber_rise(case)
    described = case.pump.transition_angle is not None or case.pump.kind is not None
    if line is None:
        return chamber
    if described and line.spread.p50 > chamber.spread.p50:
        slower = (
            f"{chamber.basis}; the {line.basis}, takes {line.spread.p50 * 1e3:.2g} ms, but that "
            "is the line behind the pump, not its chamber"
        )
        return replace(chamber, basis=slower)
    return line


def _measured_rise(discharge: Reading, bursts: "tuple[BurstFinding, ...]") -> RiseTime | None:
    """The fastest rise over half the discharge pressure that the sampling resolves (20 kHz).

    The 10-90 % time is stretched to the whole rise by 1/0.8.
    """
    seen = [
        (burst.rise_time, burst)
        for burst in bursts
        if burst.quantity == "discharge pressure"
        and burst.rise_resolved
        and burst.rise_time is not None
        and (burst.rise_size or 0.0) >= LARGE_RISE * discharge.value
    ]
    if not seen:
        return None
    time, burst = min(seen, key=lambda pair: pair[0])
    words = f"fastest large rise recorded, {burst.source.file} at {burst.rate_hz / 1e3:.0f} kHz"
    return replace(
        _rise(float(np.log(time / 0.8)), 0.25, True, words), course=_usable_course(burst)
    )


def _usable_course(burst: "BurstFinding") -> tuple[tuple[float, float], ...]:
    """The recorded course where it has enough samples to drive a bubble, else nothing."""
    course = burst.rise_course
    return course if len(course) >= FEWEST_POINTS else ()


def _chamber_rise(case: Case) -> RiseTime:
    """The rise that the pump's geometry and speed give its chamber."""
    speed = case.pump.speed
    n = (speed.value, speed.value) if speed is not None else USUAL_SPEED
    turning = (
        f"at {n[0] * 60:.0f} rpm" if speed is not None else "at 960 to 3000 rpm (no speed given)"
    )
    angle, kind = case.pump.transition_angle, case.pump.kind
    if angle is not None:
        relative = angle.u / angle.value if angle.u else STATED_ANGLE_SPREAD
        low, high = (float(ramp_time(angle.value, x)) for x in (n[1], n[0]))
        return _rise(
            0.5 * np.log(low * high), float(np.hypot(relative, np.log(high / low) / (2 * _Z95))),
            False, f"{np.degrees(angle.value):.0f} degrees of shaft angle, as stated, {turning}",
        )  # fmt: skip
    if kind is not None:
        first, last = TRANSITION_DEGREES[kind]
        low, high = (
            float(ramp_time(np.radians(first), n[1])),
            float(ramp_time(np.radians(last), n[0])),
        )
        words = f"{first:.0f} to {last:.0f} degrees, usual for {kind.value} pumps, {turning}"
    else:
        low, high = UNKNOWN_RISE
        words = "0.3 to 20 ms, since the kind of pump is not stated"
    return _rise(0.5 * np.log(low * high), np.log(high / low) / (2 * _Z95), False, words)


def _rise(log_mean: float, log_sd: float, measured: bool, basis: str) -> RiseTime:
    middle, wide = float(np.exp(log_mean)), float(np.exp(_Z95 * log_sd))
    mean = middle * float(np.exp(0.5 * log_sd**2))
    return RiseTime(
        spread=Spread(
            mean=mean, sd=mean * float(np.sqrt(np.expm1(log_sd**2))),
            p05=middle / wide, p50=middle, p95=middle * wide,
        ),
        basis=basis, measured=measured, log_mean=float(log_mean), log_sd=float(log_sd),
    )  # fmt: skip


def oil_side(case: Case, temperature: float) -> OilSide:
    """Properties of the oil round a bubble, from the case or its class.

    Petroleum oils and polyalphaolefins after Cragoe (``rca.physics.oil_thermal``), other fluids by
    class values. An error of a tenth in them moves the wall by a few kelvin only.
    Raises OutOfRangeError outside the ranges of those properties.
    """
    values = class_values(fluid_class_name(case))
    rho15 = case.fluid.density_15.value if case.fluid.density_15 else values.density_15
    rho = density(temperature, rho15, values.expansion)
    nu = 30e-6
    points = fluid_viscosities(case)
    if points is not None:
        nu = float(kinematic_viscosity(temperature, *points))
    return OilSide(
        conductivity=values.conductivity or float(petroleum_conductivity(temperature, rho15)),
        density=rho,
        heat_capacity=values.heat_capacity or float(petroleum_heat_capacity(temperature, rho15)),
        viscosity=nu * rho,
        tension=float(surface_tension(temperature, values.surface_tension)),
        sound_speed=float(np.sqrt(values.bulk_modulus / rho)),
    )
