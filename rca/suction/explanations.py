"""What each explanation could account for of the pressure missing at the inlet, in pascal."""

from dataclasses import dataclass
from enum import StrEnum

import numpy as np
import numpy.typing as npt

from rca.case.model import Case, SuctionPart
from rca.case.vocabulary import PartKind
from rca.physics.viscosity import kinematic_viscosity
from rca.suction.breathing import Breathing
from rca.suction.budget import (
    GRAVITY,
    fluid_viscosities,
    oil_density,
)
from rca.suction.clean_line import CleanLine
from rca.suction.inverse import Inverse, InverseDraws
from rca.suction.priors import BAR, NOTICED
from rca.suction.spread import Spread, spread
from rca.suction.state import inlet_limit

FloatArray = npt.NDArray[np.float64]
DEEPEST_SAG = 0.5  # [m], how far a level can fall unseen where no depth is stated; judgement
LOW = 0.7e5  # [Pa], low for any pump, where no limit is known; common practice, no source
WEATHER = 1.0e3  # [Pa], standard deviation of the air pressure about the site's mean
LEADS = 0.7  # an explanation is named where its probability is above this
TOGETHER = 0.9  # those not told apart are named where together they reach this
STEP_SHARE = 0.7  # a rise is called a step where this much of it lies between two knots


class Explanation(StrEnum):
    """Ways for the inlet pressure to be low, or to seem so."""

    CLOGGED_STRAINER = "clogging strainer"
    PINCHED_LINE = "pinched line or half-closed valve"
    PLUGGED_BREATHER = "plugged breather"
    SAGGING_LEVEL = "sagging oil level"
    COLD_OIL = "cold oil"
    AIR_LEAK = "air leak"
    DRIFTED_TRANSDUCER = "drifted transducer"


CAUSE_OF = {
    Explanation.CLOGGED_STRAINER: "suction strainer clogged",
    Explanation.PINCHED_LINE: "suction line restricted",
    Explanation.PLUGGED_BREATHER: "breather plugged",
    Explanation.SAGGING_LEVEL: "low oil level",
    Explanation.COLD_OIL: "cold or too viscous oil",
    Explanation.AIR_LEAK: "air leak on the suction side",
    Explanation.DRIFTED_TRANSDUCER: "",  # no cause of a failure
}


@dataclass(frozen=True, slots=True, kw_only=True)
class Share:
    """How much of the missing pressure one explanation could account for, end of the record.

    ``amount`` counts from the clean line as described, or, where none is described, from the
    start of the record; positive lowers the inlet. ``growth`` is the change over the record.
    ``probability``: that this explanation is the largest, and above ``NOTICED``.
    """

    explanation: Explanation
    cause: str
    amount: Spread  # [Pa]
    growth: Spread  # [Pa]
    probability: float
    raised: float  # P(amount above NOTICED)
    raised_before: float  # the same before the record was seen
    identified: bool  # the record tells this one's amount from the others'
    stepwise: bool  # most of the growth lies between two neighbouring knots
    note: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Explanations:
    """All explanations beside each other, and the drop they have to explain."""

    drop: Spread  # [Pa], clean line minus record at the reference state, end of the record
    counted_from: str  # "the clean line as described" or "the start of the record"
    clean: CleanLine | None
    shares: tuple[Share, ...]
    none: float  # probability that none is above NOTICED: a normal vacuum
    leading: str  # an Explanation, "normal vacuum", or "not identifiable"
    leading_probability: float
    between: tuple[str, ...]  # explanations that together hold most, where none leads
    coldest: float  # [K], of the running pump
    cold_drop: float  # [Pa], more loss there than at the reference, line as found
    cold_inlet: float  # [Pa], inlet pressure there, line as found; not below zero


def explain(case: Case, inverse: Inverse, draws: InverseDraws, *, seed: int) -> Explanations:
    """Every explanation with what it could account for, and which is the largest."""
    rng = np.random.default_rng(seed)
    clean = inverse.clean
    amounts = excesses(case, inverse, draws, clean, rng)
    growth = {name: draws.last[:, j] - draws.first[:, j] for j, name in enumerate(_ORDER)}
    growth["level"] = np.full(draws.last.shape[0], _level_change(inverse, draws))
    growth["transducer"] = -growth.pop("offset")
    if not inverse.level_known:
        growth["level"] = np.clip(growth["transducer"], None, _deepest(case))
    table = np.column_stack([amounts[name] for name in _SHARED])
    largest = np.where(table.max(axis=1) > NOTICED, table.argmax(axis=1), -1)
    chance = {name: float(np.mean(largest == j)) for j, name in enumerate(_SHARED)}
    none = float(np.mean(largest == -1))
    cold = _cold(inverse, draws, clean, case)
    drop = spread(
        amounts["viscous"] + amounts["quadratic"] + amounts["depression"] + amounts["offset"]
    )
    limit, _ = inlet_limit(case)
    inlet = cold.inlet(draws)
    too_cold = float(np.mean(inlet < (limit if limit is not None else LOW)))
    if cold.clean is None or float(np.median(cold.clean)) < NOTICED:
        too_cold = 0.0
    leading, probability, between = _leading(chance, none, too_cold)
    return Explanations(
        drop=drop,
        counted_from="the clean line as described"
        if clean is not None
        else "the start of the record",
        clean=clean,
        shares=(
            *_shares(case, inverse, amounts, growth, chance),
            _cold_share(cold, none * too_cold),
            _leak_share(),
        ),
        none=none,
        leading=leading,
        leading_probability=probability,
        between=between,
        coldest=cold.temperature,
        cold_drop=float(np.median(cold.found)),
        cold_inlet=max(float(np.median(inlet)), 0.0),
    )


_ORDER = ("viscous", "quadratic", "depression", "offset")
_SHARED = ("viscous", "quadratic", "depression", "level", "transducer")
_EXPLAINED_BY = {
    "viscous": Explanation.CLOGGED_STRAINER,
    "quadratic": Explanation.PINCHED_LINE,
    "depression": Explanation.PLUGGED_BREATHER,
    "level": Explanation.SAGGING_LEVEL,
    "transducer": Explanation.DRIFTED_TRANSDUCER,
}


def excesses(
    case: Case,
    inverse: Inverse,
    draws: InverseDraws,
    clean: CleanLine | None,
    rng: np.random.Generator,
) -> dict[str, FloatArray]:
    """Draws of what lowers the inlet at the end of the record, beyond the clean line [Pa].

    Keys "viscous", "quadratic", "depression", "level", "transducer", and "offset" (the last two
    together). Without a level record the offset is first given to the level as far as it can sag,
    and the same draws to the transducer: the two can't be told apart then.
    """
    n = draws.last.shape[0]
    if clean is not None:
        base = np.column_stack(
            [
                rng.normal(clean.viscous, clean.viscous_u, n),
                rng.normal(clean.quadratic, clean.quadratic_u, n),
                np.full(n, clean.depression),
            ]
        )
    else:
        base = draws.first[:, :3]
    over = draws.last[:, :3] - base
    over[:, 2] += inverse.headspace_drop or 0.0
    offset = -draws.last[:, 3] - rng.normal(0.0, WEATHER, n)
    if inverse.level_known:
        level = np.full(n, -_level_change(inverse, draws))
        transducer = offset
        both = offset + level
    else:
        sag = np.clip(offset, 0.0, _deepest(case))
        half = rng.random(n) < 0.5  # nothing tells the two apart within the depth of a sag
        level = np.where(half, sag, 0.0)
        transducer = offset - level
        both = offset
    return {
        "viscous": over[:, 0],
        "quadratic": over[:, 1],
        "depression": over[:, 2],
        "offset": both,
        "level": level,
        "transducer": transducer,
    }


def _deepest(case: Case) -> float:
    """The most a sagging level can take from the inlet before it draws air [Pa]."""
    depth = case.reservoir.oil_depth
    rho = oil_density(case, 313.15)
    return rho * GRAVITY * (depth.value if depth is not None else DEEPEST_SAG)


def _level_change(inverse: Inverse, draws: InverseDraws) -> float:
    """Change of the recorded head, last twentieth of the running bins against the first [Pa]."""
    if not inverse.level_known:
        return 0.0
    still = draws.rows.still[draws.rows.running]
    n = max(1, still.size // 20)
    return float(np.median(still[-n:]) - np.median(still[:n]))


@dataclass(frozen=True, slots=True, kw_only=True)
class _Cold:
    """The coldest running: its temperature and draws of the loss beyond the reference's [Pa]."""

    temperature: float
    found: FloatArray
    clean: FloatArray | None

    def inlet(self, draws: InverseDraws) -> FloatArray:
        """Inlet pressure there, line as found, transducer's offset taken as real."""
        running = draws.rows.still[draws.rows.running]
        still = float(np.median(running[-max(1, running.size // 20) :]))
        last = draws.last
        return np.asarray(still - last[:, :3].sum(axis=1) + last[:, 3] - self.found)


def _cold(inverse: Inverse, draws: InverseDraws, clean: CleanLine | None, case: Case) -> _Cold:
    coldest = draws.rows.coldest
    viscosities = fluid_viscosities(case)
    assert viscosities is not None
    ratio = float(kinematic_viscosity(coldest, *viscosities)) / inverse.reference_viscosity - 1.0
    return _Cold(
        temperature=coldest,
        found=draws.last[:, 0] * ratio,
        clean=np.minimum(draws.last[:, 0], clean.viscous) * ratio if clean is not None else None,
    )


def _leading(
    chance: dict[str, float], none: float, too_cold: float
) -> tuple[str, float, tuple[str, ...]]:
    """The explanation that leads, its probability, and those not told apart where none does."""
    every = {_EXPLAINED_BY[name].value: p for name, p in chance.items()}
    every[Explanation.COLD_OIL.value] = none * too_cold
    every["normal vacuum"] = none * (1.0 - too_cold)
    order = sorted(every, key=lambda name: -every[name])
    if every[order[0]] > LEADS:
        return order[0], every[order[0]], ()
    held: list[str] = []
    for name in order:
        held.append(name)
        if sum(every[n] for n in held) >= TOGETHER:
            break
    return "not identifiable", every[order[0]], tuple(held)


def _cold_share(cold: _Cold, probability: float) -> Share:
    nothing = spread(np.zeros(2))
    return Share(
        explanation=Explanation.COLD_OIL,
        cause=CAUSE_OF[Explanation.COLD_OIL],
        amount=spread(cold.clean) if cold.clean is not None else nothing,
        growth=nothing,
        probability=probability,
        raised=float(np.mean(cold.clean > NOTICED)) if cold.clean is not None else 0.5,
        raised_before=0.5,
        identified=cold.clean is not None,
        stepwise=False,
        note=f"At the coldest running, {cold.temperature - 273.15:.0f} \u00b0C, in the line with "
        "no resistance raised; at the reference temperature it explains nothing.",
    )


def _leak_share() -> Share:
    nothing = spread(np.zeros(2))
    return Share(
        explanation=Explanation.AIR_LEAK,
        cause=CAUSE_OF[Explanation.AIR_LEAK],
        amount=nothing,
        growth=nothing,
        probability=0.0,
        raised=0.0,
        raised_before=0.0,
        identified=True,
        stepwise=False,
        note="A leak lets air in and does not lower the inlet pressure; it explains none of the "
        "drop and is not excluded by a normal one.",
    )


def _shares(
    case: Case,
    inverse: Inverse,
    amounts: dict[str, FloatArray],
    growth: dict[str, FloatArray],
    chance: dict[str, float],
) -> tuple[Share, ...]:
    notes = _notes(case, inverse)
    tracks = {
        "viscous": inverse.viscous,
        "quadratic": inverse.quadratic,
        "depression": inverse.depression,
        "level": inverse.offset,
        "transducer": inverse.offset,
    }
    off = inverse.raised_before[3]
    before = dict(zip(_SHARED, (*inverse.raised_before[:3], 0.5 * off, off), strict=True))
    shares = []
    for name in _SHARED:
        kind = _EXPLAINED_BY[name]
        track = tracks[name]
        known = track.identified_at_end and (name != "level" or inverse.level_known)
        if name == "transducer":
            known = known and inverse.level_stated
        shares.append(
            Share(
                explanation=kind,
                cause=_cause(case, kind),
                amount=spread(amounts[name]),
                growth=spread(growth[name]),
                probability=chance[name],
                raised=float(np.mean(amounts[name] > NOTICED)),
                raised_before=before[name],
                identified=known,
                stepwise=_stepwise(track.p50),
                note=notes[name],
            )
        )
    return tuple(shares)


def _cause(case: Case, kind: Explanation) -> str:
    if kind is Explanation.CLOGGED_STRAINER and not has_strainer(case):
        return CAUSE_OF[Explanation.PINCHED_LINE]
    return CAUSE_OF[kind]


def has_strainer(case: Case) -> bool:
    """Whether the line as described has a strainer; an undescribed line may have one."""
    return not case.suction_line or any(_is_strainer(p) for p in case.suction_line)


def _is_strainer(part: SuctionPart) -> bool:
    return part.part is PartKind.STRAINER


def _notes(case: Case, inverse: Inverse) -> dict[str, str]:
    e = inverse.excitation
    viscous = (
        "Told from the rest by the change of viscosity with temperature."
        if e.viscosity_ratio > 1.1
        else "The viscosity hardly varied, so a viscous loss can't be told from the others."
    )
    if not has_strainer(case):
        viscous += " The line as described has no strainer: a viscous loss lies in pipe or hose."
    flow = (
        "Told from the rest by the change of flow."
        if e.flow_ratio > 1.15
        else "The flow hardly varied: quadratic loss and tank depression are known only together."
    )
    breather = flow
    if inverse.breathing is not None:
        breather += " " + _breath_words(inverse.breathing)
    if inverse.headspace_known:
        breather = "The head space is on record and already taken off; what is left is not it."
    rest = (
        "The pump was seen at rest, which fixes the offset."
        if e.rest_rows
        else "The pump was never seen at rest: an offset can't be told from a depression."
    )
    if not inverse.level_stated:
        rest += " The level above the inlet is not stated, so an offset may be a level."
    level = (
        "The recorded level says how much."
        if inverse.level_known
        else "Without a level record, level and transducer are known only together."
    )
    return {
        "viscous": viscous,
        "quadratic": flow,
        "depression": breather,
        "level": level,
        "transducer": rest,
    }


def _breath_words(found: Breathing) -> str:
    swing = f"{found.level_swing * 1e3:.0f} mm of level move the tank by "
    swing += (
        f"{abs(found.tank_swing.p50) / BAR:.3f} bar, a shut one by {found.shut_swing / BAR:.2f}"
    )
    return {
        "free": f"The reservoir breathes: {swing}.",
        "shut": f"The reservoir does not breathe: {swing}.",
    }.get(found.verdict, f"Breathing not told: {swing}.")


def _stepwise(values: tuple[float, ...]) -> bool:
    steps = np.diff(values)
    rise = values[-1] - values[0]
    return bool(steps.size > 3 and rise > NOTICED and steps.max() > STEP_SHARE * rise)
