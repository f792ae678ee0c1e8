"""The pressure budget of a case's suction path, part by part, from the reservoir to the pump."""

from dataclasses import dataclass, field

import numpy as np
import numpy.typing as npt

from rca.case.model import Case, SuctionPart
from rca.case.site import local_atmosphere
from rca.case.vocabulary import PartKind
from rca.physics.fluid_class import class_values, density
from rca.physics.line_losses import (
    breather_loss,
    entry_loss,
    fitting_coefficient,
    kinetic_coefficient,
    pipe_loss,
    reducer_coefficient,
    reynolds,
    strainer_loss,
)
from rca.physics.viscosity import grade_viscosities, kinematic_viscosity

FloatArray = npt.NDArray[np.float64]
GRAVITY = 9.80665  # [m/s2], standard
HOSE_ROUGHNESS = 0.03e-3  # [m], common practice, no source
PIPE_ROUGHNESS = 0.05e-3  # [m], drawn and commercial steel between; common practice, no source
AIR_BREATHING = 0.3  # air drawn through the breather as a share of pump flow where no level swing
# is given; common practice, no source


@dataclass(frozen=True, slots=True, kw_only=True)
class Condition:
    """What is supposed about the suction path; the defaults are its rated, clean state."""

    strainer_open: float = 1.0  # open share of the mesh
    breather_open: float = 1.0  # open share of the breather
    extra_resistance: float = 1.0  # factor on pipe, hose and fittings: a pinched line is above 1
    level_change: float = 0.0  # [m], below the stated level counts negative


@dataclass(frozen=True, slots=True, kw_only=True)
class Budget:
    """Contributions to the inlet pressure [Pa]; losses are positive and subtracted."""

    atmosphere: float
    head: FloatArray
    breather: FloatArray
    parts: tuple[tuple[str, FloatArray], ...]
    kinetic: FloatArray
    inlet: FloatArray = field(default_factory=lambda: np.empty(0))


def fluid_viscosities(case: Case) -> tuple[float, float] | None:
    """Viscosity at 40 and 100 degC [m2/s]: the case's, else its grade's; None where neither."""
    fluid = case.fluid
    if fluid.viscosity_40 is not None and fluid.viscosity_100 is not None:
        return fluid.viscosity_40.value, fluid.viscosity_100.value
    if fluid.iso_vg is not None:
        return grade_viscosities(fluid.iso_vg)
    return None


def fluid_class_name(case: Case) -> str:
    """The class of the fluid; mineral where the case does not say."""
    return case.fluid.fluid_class.value if case.fluid.fluid_class is not None else "mineral"


def oil_density(case: Case, temperature: float) -> float:
    """Density [kg/m3] at a temperature [K]; measured wins over class."""
    values = class_values(fluid_class_name(case))
    rho_15 = case.fluid.density_15.value if case.fluid.density_15 else values.density_15
    return density(temperature, rho_15, values.expansion)


def oil_densities(case: Case, temperature: FloatArray) -> FloatArray:
    """Density [kg/m3] at many temperatures [K], by the same relation as ``oil_density``."""
    expansion = class_values(fluid_class_name(case)).expansion
    return np.asarray(oil_density(case, 288.15) / (1.0 + expansion * (temperature - 288.15)))


def pump_flow(case: Case, speed: float | FloatArray | None = None) -> FloatArray | None:
    """Flow the pump draws [m3/s] at a speed [1/s], by default its own; None where unknown.

    Full displacement: an upper bound for a pump whose stroke is set back.
    """
    pump = case.pump
    if pump.displacement is None:
        return None
    turns = speed if speed is not None else (pump.speed.value if pump.speed else None)
    return None if turns is None else np.asarray(pump.displacement.value * np.asarray(turns))


def line_residence(case: Case) -> float | None:
    """Time of the oil in pipes and hoses of the suction line [s] at full flow."""
    flow = pump_flow(case)
    volume = sum(
        np.pi / 4.0 * p.bore.value**2 * p.length.value * p.count
        for p in case.suction_line
        if p.part in (PartKind.PIPE, PartKind.HOSE) and p.bore and p.length
    )
    return float(volume / flow) if flow is not None and volume > 0 and float(flow) > 0 else None


def bunsen(case: Case) -> tuple[float, float]:
    """Bunsen coefficient [-] of the case and its standard uncertainty; measured wins."""
    given = case.fluid.bunsen_coefficient
    values = class_values(fluid_class_name(case))
    if given is not None:
        return given.value, given.u if given.u is not None else 0.05 * given.value
    return values.bunsen, values.bunsen * values.bunsen_u


def pressure_budget(
    case: Case,
    flow: float | FloatArray,
    temperature: float | FloatArray,
    condition: Condition | None = None,
    *,
    atmosphere: float | None = None,
    viscosity_factor: float | FloatArray = 1.0,
    loss_factor: float | FloatArray = 1.0,
) -> Budget:
    """Inlet pressure and what it is made of, for arrays of flow [m3/s] and temperature [K].

    Steady flow, the line as described, its losses multiplied by ``loss_factor`` (uncertainty of
    the correlations, about 15 %). It errs low by up to the strainer's own uncertainty, a factor
    of about 1.5 for the rated loss. Pulsation of the flow is not in it.
    """
    state = condition or Condition()
    q, t = np.broadcast_arrays(np.asarray(flow, dtype=float), np.asarray(temperature, dtype=float))
    viscosities = fluid_viscosities(case)
    if viscosities is None:
        raise ValueError("the case gives neither viscosities nor a grade")
    nu = kinematic_viscosity(np.asarray(t), *viscosities) * viscosity_factor
    rho = oil_densities(case, t)
    p_air = local_atmosphere(case) if atmosphere is None else atmosphere
    level = case.reservoir.level_above_inlet
    head = rho * GRAVITY * ((level.value if level else 0.0) + state.level_change)
    breather = _breather(case, q, state)
    parts = tuple(
        (part_name(part), _part_loss(part, q, nu, rho, state) * loss_factor)
        for part in case.suction_line
    )
    kinetic = _kinetic(case, q, nu, rho)
    losses = np.sum([loss for _, loss in parts], axis=0) if parts else np.zeros_like(q)
    inlet = p_air + head - breather - losses - kinetic
    return Budget(
        atmosphere=p_air, head=head, breather=breather, parts=parts, kinetic=kinetic, inlet=inlet
    )


def part_name(part: SuctionPart) -> str:
    """A part in words: its label, or its form or kind with a bore."""
    name = part.label or part.form or part.part.value
    bore = f" {part.bore.value * 1e3:.0f} mm" if part.bore is not None else ""
    many = f" x {part.count}" if part.count > 1 else ""
    return f"{part.index + 1} {name}{bore}{many}"


def _breather(case: Case, q: FloatArray, state: Condition) -> FloatArray:
    breather = case.reservoir.breather
    if breather is None:
        return np.zeros_like(q)
    swing = case.reservoir.level_swing
    air = np.full_like(q, swing.value) if swing is not None else AIR_BREATHING * q
    return breather_loss(
        air,
        rated_flow=breather.rated_flow.value,
        rated_loss=breather.rated_loss.value,
        open_share=state.breather_open,
    )


def _kinetic(case: Case, q: FloatArray, nu: FloatArray, rho: FloatArray) -> FloatArray:
    """Pressure turned into speed at the pump's inlet bore, taken as the last bore of the line."""
    bores = [part.bore.value for part in case.suction_line if part.bore is not None]
    if not bores:
        return np.zeros_like(q)
    velocity = q / (np.pi / 4.0 * bores[-1] ** 2)
    return np.asarray(kinetic_coefficient(reynolds(q, bores[-1], nu)) * 0.5 * rho * velocity**2)


def _part_loss(
    part: SuctionPart, q: FloatArray, nu: FloatArray, rho: FloatArray, state: Condition
) -> FloatArray:
    if part.part is PartKind.STRAINER:
        if part.rated_flow is None or part.rated_loss is None or part.rated_viscosity is None:
            return np.zeros_like(q)
        return strainer_loss(
            q,
            nu,
            rated_flow=part.rated_flow.value,
            rated_loss=part.rated_loss.value,
            rated_nu=part.rated_viscosity.value,
            open_share=state.strainer_open,
        )
    if part.bore is None:
        return np.zeros_like(q)
    bore = part.bore.value
    if part.part in (PartKind.PIPE, PartKind.HOSE):
        if part.length is None:
            return np.zeros_like(q)
        default = HOSE_ROUGHNESS if part.part is PartKind.HOSE else PIPE_ROUGHNESS
        rough = part.roughness.value if part.roughness is not None else default
        straight = pipe_loss(q, bore, part.length.value, rough, nu, rho)
        entry = entry_loss(q, bore, part.length.value, nu, rho)
        return np.asarray(part.count * (straight + entry) * state.extra_resistance)
    re = reynolds(q, bore, nu)
    velocity = q / (np.pi / 4.0 * bore**2)
    return np.asarray(
        part.count
        * _coefficient(part, re, bore)
        * 0.5
        * rho
        * velocity**2
        * state.extra_resistance
    )


def _coefficient(part: SuctionPart, re: FloatArray, bore: float) -> FloatArray:
    if part.loss_coefficient is not None:
        return np.asarray(
            (part.laminar_coefficient or 0.0) / np.maximum(re, 1e-9) + part.loss_coefficient
        )
    if part.form == "reducer":
        outlet = part.outlet_bore.value if part.outlet_bore is not None else bore
        return reducer_coefficient(re, bore, outlet)
    return fitting_coefficient(part.form or "ball valve", re, bore)
