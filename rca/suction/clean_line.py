"""The clean line as described, in the unknowns that the record can be asked for."""

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from rca.case.model import Case
from rca.case.vocabulary import PartKind
from rca.physics.viscosity import kinematic_viscosity
from rca.suction.budget import fluid_viscosities, pressure_budget

FloatArray = npt.NDArray[np.float64]
LINE_U, STRAINER_U = 0.15, 0.35  # relative, of the computed losses; common practice, no source


@dataclass(frozen=True, slots=True, kw_only=True)
class Excitation:
    """How much the record varied, which decides what can be told apart."""

    temperature_low: float  # [K], 1 % of the running bins
    temperature_high: float  # [K], 99 %
    viscosity_ratio: float  # largest over smallest, 1 to 99 %
    flow_ratio: float
    rest_rows: int
    condition: float  # of the scaled regressors of the running bins; above 30: nearly collinear


@dataclass(frozen=True, slots=True, kw_only=True)
class CleanLine:
    """Losses of the line as described and clean, at the reference state [Pa]."""

    viscous: float
    viscous_u: float
    quadratic: float
    quadratic_u: float
    depression: float


def clean_line(
    case: Case, flow: float, temperature: float, excitation: Excitation
) -> CleanLine | None:
    """The clean line's losses split into a part that follows viscosity and one that does not.

    Least squares over flows of 0.6 to 1 of the reference and the record's temperatures, widened to
    at least 20 K; pipe flow in transition is neither, and is shared between the two.
    """
    if not case.suction_line:
        return None
    q0, t0 = flow, temperature
    middle = 0.5 * (excitation.temperature_low + excitation.temperature_high)
    half = max(10.0, excitation.temperature_high - middle)
    temperatures = np.clip(np.linspace(middle - half, middle + half, 9), 204.0, 572.0)
    t, q = np.tile(temperatures, 5), q0 * np.repeat(np.linspace(0.6, 1.0, 5), 9)
    viscosities = fluid_viscosities(case)
    assert viscosities is not None
    nu = kinematic_viscosity(t, *viscosities)
    x = np.column_stack(
        [nu / float(kinematic_viscosity(t0, *viscosities)) * q / q0, (q / q0) ** 2]
    )
    budget = pressure_budget(case, q, t)
    split = {name: _split(x, loss) for name, loss in budget.parts}
    kinetic = float(pressure_budget(case, q0, t0).kinetic)
    strainers = {f"{p.index + 1} " for p in case.suction_line if p.part is PartKind.STRAINER}
    own = np.zeros(2)
    for name, values in split.items():
        if any(name.startswith(s) for s in strainers):
            own += values
    rest = np.sum(list(split.values()), axis=0) - own
    u = np.hypot(STRAINER_U * own, LINE_U * rest)
    return CleanLine(
        viscous=float(own[0] + rest[0]),
        viscous_u=float(u[0]),
        quadratic=float(own[1] + rest[1] + kinetic),
        quadratic_u=float(np.hypot(u[1], LINE_U * kinetic)),
        depression=float(np.mean(pressure_budget(case, q0, t0).breather)),
    )


def _split(x: FloatArray, loss: FloatArray) -> FloatArray:
    return np.asarray(np.maximum(np.linalg.lstsq(x, loss, rcond=None)[0], 0.0))
