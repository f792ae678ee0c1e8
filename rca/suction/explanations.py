"""What each explanation could account for of the pressure missing at the inlet, in pascal."""

from dataclasses import dataclass, replace
from enum import StrEnum

import numpy as np
import numpy.typing as npt

from rca.case.model import Case, SuctionPart
from rca.case.vocabulary import PartKind
from rca.physics.viscosity import kinematic_viscosity
from rca.suction.budget import (
    GRAVITY,
    fluid_viscosities,
    oil_density,
    pressure_budget,
)
from rca.suction.inverse import Inverse, InverseDraws
from rca.suction.spread import Spread, spread

FloatArray = npt.NDArray[np.float64]
NOTICED = 0.02e5  # [Pa], a loss smaller than this explains nothing worth mending; judgement
LINE_U, STRAINER_U = 0.15, 0.35  # relative, of the computed losses; common practice, no source
DEEPEST_SAG = 0.5  # [m], how far a level can fall unseen where no depth is stated; judgement
WEATHER = 1.0e3  # [Pa], standard deviation of the air pressure about the site's mean
COLD_SHARE = 0.02  # the coldest share of the running bins
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
class CleanLine:
    """Losses of the line as described and clean, at the reference state [Pa]."""

    viscous: float
    viscous_u: float
    quadratic: float
    quadratic_u: float
    depression: float


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
    cold_drop: float  # [Pa], more loss at the coldest recorded running than at the reference
    cold_drop_clean: float | None  # [Pa], of it in the clean line: viscosity alone
    coldest: float  # [K]


def clean_line(case: Case, inverse: Inverse) -> CleanLine | None:
    """The clean line's losses split into a part that follows viscosity and one that does not.

    Least squares over flows of 0.6 to 1 of the reference and the record's temperatures, widened to
    at least 20 K; pipe flow in transition is neither, and is shared between the two.
    """
    if not case.suction_line:
        return None
    q0, t0 = inverse.reference_flow, inverse.reference_temperature
    middle = 0.5 * (inverse.excitation.temperature_low + inverse.excitation.temperature_high)
    half = max(10.0, inverse.excitation.temperature_high - middle)
    temperatures = np.clip(np.linspace(middle - half, middle + half, 9), 204.0, 572.0)
    t, q = np.tile(temperatures, 5), q0 * np.repeat(np.linspace(0.6, 1.0, 5), 9)
    viscosities = fluid_viscosities(case)
    assert viscosities is not None
    nu = kinematic_viscosity(t, *viscosities)
    x = np.column_stack([nu / inverse.reference_viscosity * q / q0, (q / q0) ** 2])
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


def explain(case: Case, inverse: Inverse, draws: InverseDraws, *, seed: int) -> Explanations:
    """Every explanation with what it could account for, and which is the largest."""
    rng = np.random.default_rng(seed)
    clean = clean_line(case, inverse)
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
    cold, cold_clean, coldest = _cold(case, inverse, draws, clean)
    drop = spread(
        amounts["viscous"] + amounts["quadratic"] + amounts["depression"] + amounts["offset"]
    )
    leading, probability = _leading(chance, none)
    return Explanations(
        drop=drop,
        counted_from="the clean line as described"
        if clean is not None
        else "the start of the record",
        clean=clean,
        shares=_shares(case, inverse, amounts, growth, chance),
        none=none,
        leading=leading,
        leading_probability=probability,
        cold_drop=cold,
        cold_drop_clean=cold_clean,
        coldest=coldest,
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


def _split(x: FloatArray, loss: FloatArray) -> FloatArray:
    return np.asarray(np.maximum(np.linalg.lstsq(x, loss, rcond=None)[0], 0.0))


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


def _cold(
    case: Case, inverse: Inverse, draws: InverseDraws, clean: CleanLine | None
) -> tuple[float, float | None, float]:
    """Loss at the coldest running bins beyond the reference's: as found, and of the clean line."""
    run = draws.rows.running
    temperature = draws.rows.temperature[run]
    coldest = float(np.quantile(temperature, COLD_SHARE))
    viscosities = fluid_viscosities(case)
    assert viscosities is not None
    ratio = float(kinematic_viscosity(coldest, *viscosities)) / inverse.reference_viscosity
    found = float(np.median(draws.last[:, 0])) * (ratio - 1.0)
    return found, clean.viscous * (ratio - 1.0) if clean is not None else None, coldest


def _leading(chance: dict[str, float], none: float) -> tuple[str, float]:
    best = max(chance, key=lambda name: chance[name])
    if none > max(0.5, chance[best]):
        return "normal vacuum", none
    if chance[best] > 0.5:
        return _EXPLAINED_BY[best].value, chance[best]
    return "not identifiable", max(none, chance[best])


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
    shares = []
    for name in _SHARED:
        kind = _EXPLAINED_BY[name]
        track = tracks[name]
        known = track.identified_at_end and (name != "level" or inverse.level_known)
        shares.append(
            Share(
                explanation=kind,
                cause=_cause(case, kind),
                amount=spread(amounts[name]),
                growth=spread(growth[name]),
                probability=chance[name],
                identified=known,
                stepwise=_stepwise(track.p50),
                note=notes[name],
            )
        )
    nothing = spread(np.zeros(2))
    cold = Share(
        explanation=Explanation.COLD_OIL,
        cause=CAUSE_OF[Explanation.COLD_OIL],
        amount=nothing,
        growth=nothing,
        probability=0.0,
        identified=True,
        stepwise=False,
        note="Cold oil raises the loss only while it is cold; at the reference temperature it "
        "explains nothing.",
    )
    leak = replace(
        cold,
        explanation=Explanation.AIR_LEAK,
        cause=CAUSE_OF[Explanation.AIR_LEAK],
        note="A leak lets air in and does not lower the inlet pressure; it explains none of the "
        "drop and is not excluded by a normal one.",
    )
    return (*shares, cold, leak)


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
    if inverse.headspace_known:
        breather = "The head space is on record and already taken off; what is left is not it."
    rest = (
        "The pump was seen at rest, which fixes the offset."
        if e.rest_rows
        else "The pump was never seen at rest: an offset can't be told from a depression."
    )
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


def _stepwise(values: tuple[float, ...]) -> bool:
    steps = np.diff(values)
    rise = values[-1] - values[0]
    return bool(steps.size > 3 and rise > NOTICED and steps.max() > STEP_SHARE * rise)
