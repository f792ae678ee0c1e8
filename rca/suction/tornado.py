"""Which uncertain input moves the suction margin most, and how cold the oil may be."""

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
from scipy.optimize import brentq

from rca.case.model import Case
from rca.physics.viscosity import kinematic_viscosity
from rca.suction.budget import fluid_viscosities, pressure_budget, pump_flow
from rca.suction.state import draws, inlet_limit, sampled_losses, usable_temperature

FloatArray = npt.NDArray[np.float64]
COLDEST = 233.15  # [K]; oil below -40 degC is not pumped
HOTTEST = 413.15  # [K]


@dataclass(frozen=True, slots=True, kw_only=True)
class Swing:
    """The inlet pressure with one input at its 5 and at its 95 % point, the others at the middle.

    ``low`` and ``high`` [Pa] are differences from the middle, by input at 5 % and at 95 %.
    """

    name: str
    low: float
    high: float

    @property
    def width(self) -> float:
        """How far it moves the inlet [Pa]."""
        return abs(self.high - self.low)


NAMES = {
    "loss": "losses of pipe, bends and valves",
    "strainer": "rated loss of the strainer",
    "viscosity": "viscosity of the oil",
    "atmosphere": "weather",
    "temperature": "oil temperature",
}


def margin_swings(case: Case, temperature: float, *, seed: int) -> tuple[Swing, ...]:
    """Swings of the clean line's inlet pressure at a temperature [K], widest first.

    Empty where the budget can't be computed.
    """
    flow = pump_flow(case)
    if flow is None or fluid_viscosities(case) is None or not case.suction_line:
        return ()
    draw = draws(case, seed=seed, samples=1024)
    middle = {k: np.median(v) for k, v in draw.items()}
    rows = {k: np.full(2 * len(NAMES) + 1, v) for k, v in middle.items()}
    for place, key in enumerate(NAMES):
        rows[key][2 * place : 2 * place + 2] = np.quantile(draw[key], [0.05, 0.95])
    pressure, _ = sampled_losses(case, float(flow), temperature, rows)
    base = pressure[-1]
    swings = [
        Swing(
            name=name,
            low=float(pressure[2 * place] - base),
            high=float(pressure[2 * place + 1] - base),
        )
        for place, name in enumerate(NAMES.values())
    ]
    return tuple(sorted(swings, key=lambda s: -s.width))


def coldest_within_limit(case: Case) -> float | None:
    """Lowest oil temperature [K] at which the clean line holds the limit at full flow.

    None where there is no limit or no budget, or where the limit is missed even in oil at the
    normal temperature; ``COLDEST`` where it holds down to there. Viscosity so far below the
    measured points errs low, so the true temperature may lie higher.
    """
    limit, _ = inlet_limit(case)
    flow, warm = pump_flow(case), case.fluid.temperature
    if limit is None or flow is None or warm is None or not case.suction_line:
        return None
    if fluid_viscosities(case) is None or float(flow) <= 0.0 or not usable_temperature(warm):
        return None

    def margin(t: float) -> float:
        return float(pressure_budget(case, float(flow), t).inlet) - limit

    if margin(warm.value) < 0.0:
        return None
    if margin(COLDEST) > 0.0:
        return COLDEST
    return float(brentq(margin, COLDEST, warm.value, xtol=0.05))


def coldest_as_found(
    case: Case, *, inlet: float, viscous: float, temperature: float
) -> float | None:
    """The same of the line as found, from its inlet pressure and viscous loss [Pa].

    ``inlet`` and ``viscous`` hold at ``temperature`` [K], full flow. None where there is no limit,
    or where even oil at 140 degC would not do.
    """
    limit, _ = inlet_limit(case)
    viscosities = fluid_viscosities(case)
    if limit is None or viscosities is None or viscous <= 0.0:
        return None
    nu_0 = float(kinematic_viscosity(temperature, *viscosities))
    allowed = (inlet + viscous - limit) / viscous * nu_0

    def excess(t: float) -> float:
        return float(kinematic_viscosity(t, *viscosities)) - allowed

    if excess(HOTTEST) > 0.0:
        return None
    if excess(COLDEST) < 0.0:
        return COLDEST
    return float(brentq(excess, COLDEST, HOTTEST, xtol=0.05))
