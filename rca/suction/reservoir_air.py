"""What the reservoir does with the air in the oil: time to rise, time to release, bubbles kept."""

from dataclasses import dataclass

from rca.case.model import Case
from rca.case.site import local_atmosphere
from rca.physics.bubbles_in_oil import (
    carried_air_after_dwell,
    nucleus_radius,
    release_time_at,
)
from rca.physics.dissolved_air import carried_over_diameter
from rca.physics.fluid_class import class_values
from rca.physics.viscosity import kinematic_viscosity
from rca.suction.budget import fluid_class_name, fluid_viscosities, pump_flow
from rca.suction.state import usable_temperature

MIXED, BAFFLED = 0.4, 0.7  # share of the ideal dwell the oil gets, without and with a baffle;
# common practice, no source
USUAL_RELEASE = 600.0  # [s] at 50 degC; the 10 min DIN 51524-2 allows HLP 46 and 68 (from memory)
DEPTH = 0.5  # [m], where none is stated


@dataclass(frozen=True, slots=True, kw_only=True)
class ReservoirAir:
    """Dwell of the oil in the reservoir against what its air needs."""

    ideal_dwell: float  # [s], oil volume over return flow
    dwell: float  # [s], what the oil gets: part of it passes by
    baffle: bool | None
    depth: float  # [m]
    depth_stated: bool
    release_time: float  # [s], air release time at the oil's temperature
    release_stated: bool  # measured or stated, not the usual value
    remaining: float  # share of entering air still carried after the dwell [-]
    kept_diameter: float  # [m], largest bubble that does not rise out, stiff surface (Stokes)
    clean_diameter: float | None  # [m], the same with a clean surface; None beyond Re 1
    nucleus: float | None  # [m], radius of the smallest gas nucleus that grows at the inlet


def reservoir_air(case: Case, inlet: float | None) -> ReservoirAir | None:
    """Dwell, rise and release at the normal temperature; None where volume or flow is not known.

    None too where the viscosity is beyond eight times, or below an eighth of, that at 50 degC.

    ``inlet`` [Pa] is the inlet pressure as measured or computed. Return flow is as stated, else
    the pump's full flow. It errs low in carried air for fine bubbles, see
    ``carried_air_after_dwell``.
    """
    volume, warm = case.reservoir.oil_volume, case.fluid.temperature
    stated = case.reservoir.return_flow
    flow = stated.value if stated is not None else pump_flow(case)
    viscosities = fluid_viscosities(case)
    if volume is None or warm is None or flow is None or viscosities is None:
        return None
    if float(flow) <= 0.0 or volume.value <= 0.0 or not usable_temperature(warm):
        return None
    ideal = volume.value / float(flow)
    dwell = ideal * (BAFFLED if case.reservoir.baffle else MIXED)
    depth = case.reservoir.oil_depth
    nu = float(kinematic_viscosity(warm.value, *viscosities))
    nu_50 = float(kinematic_viscosity(323.15, *viscosities))
    release_50 = case.fluid.air_release.value if case.fluid.air_release else USUAL_RELEASE
    if not 0.125 <= nu / nu_50 <= 8.0:  # outside the range of release_time_at
        return None
    release = float(release_time_at(release_50, nu, nu_50))
    height = depth.value if depth is not None else DEPTH
    kept = carried_over_diameter(height, dwell, nu)
    air = local_atmosphere(case)
    tension = class_values(fluid_class_name(case)).surface_tension
    low = inlet is not None and 0.0 < inlet < air
    return ReservoirAir(
        ideal_dwell=ideal,
        dwell=dwell,
        baffle=case.reservoir.baffle,
        depth=height,
        depth_stated=depth is not None,
        release_time=release,
        release_stated=case.fluid.air_release is not None,
        remaining=float(carried_air_after_dwell(1e-2, dwell, release)) / 1e-2,
        kept_diameter=kept,
        clean_diameter=_clean_diameter(height / dwell, nu),
        nucleus=float(nucleus_radius(tension, air, inlet)) if low and inlet is not None else None,
    )


def _clean_diameter(speed: float, nu: float) -> float | None:
    """Diameter of a clean bubble that rises at a speed: inverse of ``clean_rise``, within Re 1."""
    diameter = float((12.0 * nu * speed / 9.80665) ** 0.5)
    return diameter if speed * diameter / nu <= 1.0 else None
