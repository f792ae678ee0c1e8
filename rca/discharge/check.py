"""The discharge check: could a bubble stay hot in this machine, and was there fuel for it?"""

from typing import TYPE_CHECKING

import numpy as np

from rca.base.errors import OutOfRangeError
from rca.base.source import Origin, Reading
from rca.case.model import Case
from rca.discharge.chart import core_map, trace
from rca.discharge.delay import P_RANGE
from rca.discharge.fuel import fuel_path
from rca.discharge.inputs import Inputs, gather, spread
from rca.discharge.model import DischargeCheck, FuelPath, HighPressure, Population, Status
from rca.discharge.sampling import Sampled, influences, sample, unit_points
from rca.physics.compression import (
    adiabatic_end_temperature,
    constant_gamma_end_temperature,
    effective_exponent,
)
from rca.physics.consequences import Budget, energy_budget
from rca.physics.fluid_class import class_values
from rca.suction.budget import fluid_class_name

if TYPE_CHECKING:
    from rca.records.bursts import BurstFinding

# Air carried in where nobody measured it [gas per oil at the inlet]; common practice, no source.
USUAL_CARRIED_AIR = 0.005
SUPPORTED_SHARE = 0.5  # of the entrained air that must stay hot, with the margin
EXCLUDED_SHARE = 0.05  # of it that may be possible or indeterminate
RELIEF_TOLERANCE = 1.10  # a relief valve's own override; common practice, no source
RATING_TOLERANCE = 1.25  # over the stated pressure where no relief setting is known; same


def check_discharge(
    case: Case,
    suction_inlet_pressure: tuple[float, float] | None,
    released_air: float | None,
    bursts: "tuple[BurstFinding, ...] | None",
    *,
    seed: int = 0,
    samples: int = 1024,
    carried_air: float | None = None,
    flash_point: Reading | None = None,
    discharge_peak: Reading | None = None,
    workers: int = 1,
) -> DischargeCheck:
    """Judge the discharge side.

    ``suction_inlet_pressure``: mean and standard uncertainty [Pa abs] at the pump port, or None;
    ``released_air`` and ``carried_air``: gas per volume of oil at the port [-], None if unknown;
    ``bursts``: fast records, None if there are none; ``flash_point`` [K]: newest measured value;
    ``discharge_peak`` [Pa abs]: highest recorded discharge pressure. ``samples`` per origin of
    bubbles (next power of two); ``workers`` threads, one by default.
    Raises OutOfRangeError for values a model can't take and SolverError when it fails.
    """
    _refuse_bad(suction_inlet_pressure, released_air, carried_air)
    found = bursts or ()
    pressure = case.pump.discharge_pressure
    high = high_pressure(case, found, discharge_peak)
    if pressure is None:
        return DischargeCheck(
            missing=("discharge pressure",), high_pressure=high, seed=seed, samples=samples
        )
    inputs = gather(case, suction_inlet_pressure, pressure, found)
    if pressure.value < 2.0 * inputs.inlet.value:
        raise OutOfRangeError(
            "check_discharge needs a discharge pressure of at least twice the inlet's (absolute); "
            f"got {pressure.value:.4g} Pa and {inputs.inlet.value:.4g} Pa"
        )
    unit = unit_points(samples, 9, seed)
    sampled = [
        sample(inputs, origin, weight, unit, workers=workers)
        for origin, weight in _weights(released_air, carried_air)
    ]
    return _assemble(
        case, inputs, sampled, released_air=released_air, carried_air=carried_air,
        flash_point=flash_point, high=high, seed=seed,
    )  # fmt: skip


def _assemble(
    case: Case,
    inputs: Inputs,
    sampled: list[Sampled],
    *,
    released_air: float | None,
    carried_air: float | None,
    flash_point: Reading | None,
    high: HighPressure | None,
    seed: int,
) -> DischargeCheck:
    coarse = sampled[-1]
    assumed = inputs.assumed
    if inputs.discharge.value > P_RANGE[1]:
        assumed = (
            *assumed,
            f"ignition delay beyond its table's {P_RANGE[1] / 1e5:.0f} bar, by extrapolation",
        )
    t, p1, p2 = inputs.temperature.value, inputs.inlet.value, inputs.discharge.value
    drawn = coarse.draw
    populations = tuple(s.population for s in sampled)
    possible, indeterminate = (
        sum(p.weight * getattr(p, name) for p in populations)
        for name in ("possible", "indeterminate")
    )
    hot = hot_status(possible, indeterminate)
    fuel = fuel_path(
        case, flash_point=flash_point, pressure=drawn.discharge, wall=coarse.wall,
        unit=drawn.spare, inlet=(t, p1),
    )  # fmt: skip
    air = (released_air or 0.0) + (USUAL_CARRIED_AIR if carried_air is None else carried_air)
    if carried_air is None:
        assumed = (*assumed, f"carried-in air {USUAL_CARRIED_AIR:.1%} of the oil's volume")
    return DischargeCheck(
        inlet_pressure=inputs.inlet,
        discharge_pressure=inputs.discharge,
        temperature=inputs.temperature,
        rise_time=inputs.rise,
        adiabatic=spread(
            adiabatic_end_temperature(drawn.temperature, drawn.inlet, drawn.discharge)
        ),
        constant_gamma=float(constant_gamma_end_temperature(t, p1, p2)),
        exponent=effective_exponent(t, float(adiabatic_end_temperature(t, p1, p2)), p2 / p1),
        populations=populations,
        possible=possible,
        indeterminate=indeterminate,
        excluded=1.0 - possible - indeterminate,
        hot=hot,
        fuel=fuel,
        ignition=ignition_status(hot, fuel),
        budget=_budget(case, inputs, air),
        air_fraction=air,
        influences=influences(inputs, coarse),
        map=core_map(inputs),
        trace=trace(inputs, coarse.population.radius.p50),
        high_pressure=high,
        assumed=assumed,
        seed=seed,
        samples=drawn.radius.size,
    )


def hot_status(possible: float, indeterminate: float) -> Status:
    """The three-way answer from the shares of entrained air in the bands.

    Supported where at least half the air stays hot with the margin; excluded by physics where no
    more than a twentieth is possible or indeterminate; else not excluded.
    """
    if possible + indeterminate <= EXCLUDED_SHARE:
        return Status.EXCLUDED
    return Status.SUPPORTED if possible >= SUPPORTED_SHARE else Status.NOT_EXCLUDED


def ignition_status(hot: Status, fuel: FuelPath) -> Status:
    """Ignition needs both heat and fuel: excluded by either, supported only by both."""
    both = {hot, fuel.status}
    if Status.EXCLUDED in both:
        return Status.EXCLUDED
    return Status.SUPPORTED if both == {Status.SUPPORTED} else Status.NOT_EXCLUDED


def high_pressure(
    case: Case, bursts: "tuple[BurstFinding, ...]", recorded: Reading | None
) -> HighPressure | None:
    """The highest discharge pressure seen against the relief setting or the stated pressure."""
    peaks = [
        Reading(value=b.mean + 0.5 * b.ripple, unit="Pa", origin=Origin.MEASURED, source=b.source)
        for b in bursts
        if b.quantity == "discharge pressure"
    ]
    if recorded is not None:
        peaks.append(recorded)
    relief, stated = case.pump.relief_pressure, case.pump.discharge_pressure
    if not peaks or (relief is None and stated is None):
        return None
    if relief is not None:
        limit, rule = RELIEF_TOLERANCE * relief.value, "10 % over the relief setting"
    else:
        assert stated is not None
        limit, rule = RATING_TOLERANCE * stated.value, "25 % over the stated discharge pressure"
    return HighPressure(
        peak=max(peaks, key=lambda r: r.value),
        limit=Reading(value=limit, unit="Pa", origin=Origin.CALCULATED),
        rule=f"{rule}; common practice, no source",
    )


def _weights(released: float | None, carried: float | None) -> tuple[tuple[str, float], ...]:
    """Share of the entrained air by origin; carried-in air last."""
    outside = USUAL_CARRIED_AIR if carried is None else carried
    inside = USUAL_CARRIED_AIR if released is None else released
    total = outside + inside
    share = outside / total if total > 0 else 0.5
    return (("released air", 1.0 - share), ("carried-in air", share))


def _budget(case: Case, inputs: Inputs, air: float) -> Budget:
    values = class_values(fluid_class_name(case))
    return energy_budget(
        air_fraction=min(air, 1.0),
        inlet_pressure=inputs.inlet.value,
        inlet_temperature=inputs.temperature.value,
        discharge_pressure=inputs.discharge.value,
        oil_density=inputs.oil.density,
        oil_heat_capacity=inputs.oil.heat_capacity,
        oil_expansion=values.expansion,
    )


def _refuse_bad(
    inlet: tuple[float, float] | None, released: float | None, carried: float | None
) -> None:
    if inlet is not None and not (np.all(np.isfinite(inlet)) and inlet[0] > 0 and inlet[1] >= 0):
        raise OutOfRangeError(
            "check_discharge needs an inlet pressure > 0 Pa absolute with its standard "
            f"uncertainty >= 0; got {inlet}"
        )
    for name, value in (("released_air", released), ("carried_air", carried)):
        if value is not None and not 0 <= value < 20:
            raise OutOfRangeError(
                f"check_discharge needs {name} as gas per volume of oil, 0 to 20; got {value}"
            )


__all__ = ["Population", "check_discharge", "high_pressure", "hot_status", "ignition_status"]
