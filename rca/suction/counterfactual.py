"""One thing put right, everything else as found: what would the inlet pressure have been?

The state as found is that of the end of the record, at warm, full flow, with the resistances
estimated from the record and the transducer's own offset taken off. Each change then gives back
what its explanation takes beyond the clean line; draws are kept together, so that a gain is the
gain within one draw.
"""

from dataclasses import dataclass
from enum import StrEnum

import numpy as np
import numpy.typing as npt

from rca.case.model import Case
from rca.case.site import local_atmosphere
from rca.physics.dissolved_air import released_share_in_time
from rca.physics.viscosity import kinematic_viscosity
from rca.suction.budget import GRAVITY, fluid_viscosities, line_residence
from rca.suction.clean_line import CleanLine
from rca.suction.explanations import excesses, has_strainer
from rca.suction.inverse import Inverse, InverseDraws
from rca.suction.rows import STARVED
from rca.suction.spread import Spread, spread
from rca.suction.state import RELEASED_MATTERS, draws, inlet_limit, released_in_line

FloatArray = npt.NDArray[np.float64]
LEAST_PRESSURE = 0.05e5  # [Pa]; losses linear in flow would go below zero, where in truth the
# pump starves and draws less; common practice, no source


class Change(StrEnum):
    """What is put right."""

    CLEAN_STRAINER = "clean strainer"
    FREE_LINE = "free line"
    FREE_BREATHER = "free breather"
    NORMAL_LEVEL = "normal level"
    WARM_OIL = "warm oil"
    LEAK_CLOSED = "leak closed"
    ALL = "all of these"


CAUSE_REMOVED = {
    Change.CLEAN_STRAINER: "suction strainer clogged",
    Change.FREE_LINE: "suction line restricted",
    Change.FREE_BREATHER: "breather plugged",
    Change.NORMAL_LEVEL: "low oil level",
    Change.WARM_OIL: "cold or too viscous oil",
    Change.LEAK_CLOSED: "air leak on the suction side",
    Change.ALL: "",
}


@dataclass(frozen=True, slots=True, kw_only=True)
class Counterfactual:
    """One change and the inlet with and without it; pressures absolute [Pa].

    ``before`` is as found, ``after`` with the change, ``gain`` their difference within one draw.
    ``margin`` is the median of ``after`` above the limit, ``air_margin`` above the pressure below
    which more than ``RELEASED_MATTERS`` of gas per oil comes out; negative: below it.
    ``identified`` is False where the record does not tell this change's gain from another's; the
    interval of ``gain`` is then wide, and says so.
    """

    change: Change
    cause: str  # the named cause it removes; "" where there is not one
    temperature: float  # [K], of the oil after the change
    flow: float  # [m3/s]
    before: Spread
    after: Spread
    gain: Spread
    released_before: Spread  # gas per volume of oil at the port [-]
    released_after: Spread
    limit: float | None
    margin: float | None
    air_margin: float
    below_limit_before: float | None  # P(inlet below the limit)
    below_limit: float | None  # the same after the change
    releases_before: float  # P(more than RELEASED_MATTERS comes out)
    releases: float
    starved_before: float  # P(the pump draws less than its displacement), before and after
    starved: float
    identified: bool
    basis: str  # what the numbers rest on, in words


@dataclass(frozen=True, slots=True, kw_only=True)
class NotComputed:
    """A change whose effect can't be given, and why."""

    change: Change
    why: str


def counterfactuals(
    case: Case, found: tuple[Inverse, InverseDraws] | str, *, seed: int
) -> tuple[tuple[Counterfactual, ...], tuple[NotComputed, ...]]:
    """Every change with its effect, and those that can't be computed with the reason.

    ``found`` is what ``estimate_resistances`` gave. Losses are taken as linear down to
    ``LEAST_PRESSURE``; a pump that starves draws less, so the lowest pressures err low.
    """
    if isinstance(found, str):
        why = f"the state as found is not known: {found}"
        return (), tuple(NotComputed(change=c, why=why) for c in Change)
    inverse, inverse_draws = found
    state = _AsFound(case, inverse, inverse_draws, seed)
    done, not_done = [], []
    for change in Change:
        why = state.why_not(change)
        if why:
            not_done.append(NotComputed(change=change, why=why))
        else:
            done.append(state.changed(change))
    return tuple(done), tuple(not_done)


class _AsFound:
    """Draws of the losses as found and what each change gives back."""

    def __init__(self, case: Case, inverse: Inverse, found: InverseDraws, seed: int) -> None:
        self.case, self.inverse = case, inverse
        n = found.last.shape[0]
        rng = np.random.default_rng(seed)
        self.clean: CleanLine | None = inverse.clean
        self.excess = excesses(case, inverse, found, self.clean, rng)
        self.draw = {k: v[:n] for k, v in draws(case, seed=seed, samples=n).items()}
        level = case.reservoir.level_above_inlet
        head = inverse.reference_density * GRAVITY * (level.value if level is not None else 0.0)
        weather = self.draw["atmosphere"] - local_atmosphere(case)
        self.still = local_atmosphere(case) + weather + head - self.excess["level"]
        self.viscous = found.last[:, 0]
        self.steady = found.last[:, 1] + found.last[:, 2] + (inverse.headspace_drop or 0.0)
        self.limit, _ = inlet_limit(case)
        viscosities = fluid_viscosities(case)
        assert viscosities is not None
        start = case.fluid.coldest_start
        self.cold = min(
            start.value if start is not None else np.inf,
            inverse.excitation.temperature_low,
            float(np.min(found.rows.temperature[found.rows.running])),
        )
        nu = float(kinematic_viscosity(self.cold, *viscosities))
        self.cold_ratio = nu / inverse.reference_viscosity

    def why_not(self, change: Change) -> str:
        """Why a change has no number; empty where it has one."""
        if change is Change.CLEAN_STRAINER and not has_strainer(self.case):
            return "the line as described has no strainer"
        if change is Change.WARM_OIL and self.cold_ratio < 1.05:
            return "no running with oil colder than the reference is recorded or stated"
        return ""

    def changed(self, change: Change) -> Counterfactual:
        """The inlet before and after one change."""
        cold = change is Change.WARM_OIL
        before = self._pressure(self.cold_ratio if cold else 1.0, 0.0)
        after = self._pressure(1.0, self._given_back(change))
        t_after = self.inverse.reference_temperature
        t_before = self.cold if cold else t_after
        released_before = released_in_line(self.case, before, t_before, self.draw)
        released = released_in_line(self.case, after, t_after, self.draw)
        limit = self.limit
        return Counterfactual(
            change=change,
            cause=CAUSE_REMOVED[change],
            temperature=t_after,
            flow=self.inverse.reference_flow,
            before=spread(before),
            after=spread(after),
            gain=spread(after - before),
            released_before=spread(released_before),
            released_after=spread(released),
            limit=limit,
            margin=float(np.median(after)) - limit if limit is not None else None,
            air_margin=float(np.median(after - self._release_pressure(t_after))),
            below_limit_before=float(np.mean(before < limit)) if limit is not None else None,
            below_limit=float(np.mean(after < limit)) if limit is not None else None,
            releases_before=float(np.mean(released_before > RELEASED_MATTERS)),
            releases=float(np.mean(released > RELEASED_MATTERS)),
            starved_before=float(np.mean(before < STARVED)),
            starved=float(np.mean(after < STARVED)),
            identified=self._identified(change),
            basis=self._basis(change),
        )

    def _pressure(self, viscosity_ratio: float, back: FloatArray | float) -> FloatArray:
        lost = self.viscous * viscosity_ratio + self.steady
        return np.asarray(np.maximum(self.still - lost + back, LEAST_PRESSURE))

    def _given_back(self, change: Change) -> FloatArray | float:
        over = {k: np.maximum(v, 0.0) for k, v in self.excess.items()}
        strainer = over["viscous"] if has_strainer(self.case) else 0.0 * over["viscous"]
        line = over["quadratic"] + (over["viscous"] - strainer)
        parts = {
            Change.CLEAN_STRAINER: strainer,
            Change.FREE_LINE: line,
            Change.FREE_BREATHER: over["depression"],
            Change.NORMAL_LEVEL: over["level"],
        }
        if change is Change.ALL:
            return np.asarray(np.sum(list(parts.values()), axis=0))
        return parts.get(change, 0.0)

    def _release_pressure(self, temperature: float) -> FloatArray:
        """Pressure below which RELEASED_MATTERS comes out in the time the line gives [Pa]."""
        time = line_residence(self.case) or 1.0
        full = self.draw["bunsen"] * temperature / 273.15
        full = full * released_share_in_time(time, self.draw["tau"])
        return np.asarray(self.draw["atmosphere"] / (1.0 + RELEASED_MATTERS / full))

    def _identified(self, change: Change) -> bool:
        inverse = self.inverse
        return {
            Change.CLEAN_STRAINER: inverse.viscous.identified_at_end,
            Change.FREE_LINE: inverse.quadratic.identified_at_end,
            Change.FREE_BREATHER: inverse.depression.identified_at_end,
            Change.NORMAL_LEVEL: inverse.level_known,
            Change.WARM_OIL: inverse.viscous.identified_at_end,
            Change.LEAK_CLOSED: True,
            Change.ALL: inverse.total.identified_at_end,
        }[change]

    def _basis(self, change: Change) -> str:
        if change is Change.LEAK_CLOSED:
            return (
                "A leak does not lower the inlet pressure and adds no air from solution; closing "
                "it takes away the carried air only, whose amount is not known."
            )
        if change is Change.WARM_OIL:
            return (
                f"Line as found, from oil at {self.cold - 273.15:.0f} \u00b0C to "
                f"{self.inverse.reference_temperature - 273.15:.0f} \u00b0C."
            )
        since = "the clean line as described" if self.clean is not None else "its first state"
        return f"Resistances from the record, set back to {since}."
