"""Exact posterior of mechanisms, sides, causes and conditions from a set of items."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from functools import cache

import numpy as np
import numpy.typing as npt

from rca.case.vocabulary import DISCHARGE_MECHANISMS, MECHANISMS, SUCTION_MECHANISMS
from rca.evidence.item import EvidenceItem
from rca.verdict.inference import Factor, joint
from rca.verdict.knowledge import Knowledge
from rca.verdict.network import Numbers, evidence_factors, prior_factors, states_of
from rca.verdict.side import side_of

FloatArray = npt.NDArray[np.float64]
SIDED = frozenset((*SUCTION_MECHANISMS, *DISCHARGE_MECHANISMS))


@dataclass(frozen=True, slots=True)
class Posterior:
    """Probabilities of the mechanisms and sides for a batch, each of shape (B,)."""

    mechanisms: dict[str, FloatArray]
    suction: FloatArray
    discharge: FloatArray
    both: FloatArray
    neither: FloatArray

    def sides(self, member: int = 0) -> dict[str, float]:
        """The sides of one batch member."""
        return {
            "suction": float(self.suction[member]),
            "discharge": float(self.discharge[member]),
            "both": float(self.both[member]),
            "neither": float(self.neither[member]),
        }

    def mechanism(self, member: int = 0) -> dict[str, float]:
        """The mechanisms of one batch member, in the order of the vocabulary."""
        return {name: float(self.mechanisms[name][member]) for name in MECHANISMS}

    def side(self, groups: int, member: int = 0) -> tuple[str, str]:
        """The side of one batch member by the decision rules, and the rule."""
        return side_of(self.sides(member), others(self.mechanism(member)), groups)


def others(mechanisms: Mapping[str, float]) -> dict[str, float]:
    """The mechanisms that belong to neither side."""
    return {name: p for name, p in mechanisms.items() if name not in SIDED}


def posterior(
    knowledge: Knowledge,
    items: Sequence[EvidenceItem],
    numbers: Numbers | None = None,
    weights: Mapping[str, FloatArray] | None = None,
) -> Posterior:
    """Exact posterior of mechanisms and sides as the network gives it."""
    names = knowledge.names("mechanism")
    table = joint(_factors(knowledge, items, numbers, weights), names)
    rows = table.reshape(table.shape[0], -1)
    shares = (rows @ _indicators(names)) / rows.sum(axis=1, keepdims=True)
    no_suction, no_discharge, neither = shares[:, -3], shares[:, -2], shares[:, -1]
    return Posterior(
        mechanisms={name: shares[:, k] for k, name in enumerate(names)},
        suction=1.0 - no_suction,
        discharge=1.0 - no_discharge,
        both=np.maximum(1.0 - no_suction - no_discharge + neither, 0.0),
        neither=neither,
    )


_PRIORS: dict[str, Posterior] = {}  # by hash of the knowledge


def prior_of(knowledge: Knowledge) -> Posterior:
    """The posterior before any evidence but that the pump failed; kept for each knowledge."""
    if knowledge.sha256 not in _PRIORS:
        _PRIORS[knowledge.sha256] = posterior(knowledge, [])
    return _PRIORS[knowledge.sha256]


def held_back(found: Posterior, prior: Posterior, doubt: float) -> Posterior:
    """The posterior mixed with the prior by the chance that the network itself is wrong.

    Where it is, the evidence says nothing that could be reckoned with; so no probability comes
    nearer to 0 or 1 than that chance allows.
    """

    def mixed(a: FloatArray, b: FloatArray) -> FloatArray:
        return np.asarray((1.0 - doubt) * a + doubt * b)

    return replace(
        found,
        mechanisms={n: mixed(p, prior.mechanisms[n]) for n, p in found.mechanisms.items()},
        suction=mixed(found.suction, prior.suction),
        discharge=mixed(found.discharge, prior.discharge),
        both=mixed(found.both, prior.both),
        neither=mixed(found.neither, prior.neither),
    )


def reported(
    knowledge: Knowledge,
    items: Sequence[EvidenceItem],
    weights: Mapping[str, FloatArray] | None = None,
) -> Posterior:
    """The posterior as it is reported: held back by the doubt about the network itself."""
    found = posterior(knowledge, items, weights=weights)
    return held_back(found, prior_of(knowledge), knowledge.doubt)


def marginal(knowledge: Knowledge, items: Sequence[EvidenceItem], name: str) -> dict[str, float]:
    """Exact posterior of one variable that is no sign, by state."""
    return marginals(knowledge, items, (name,))[name]


def marginals(
    knowledge: Knowledge, items: Sequence[EvidenceItem], names: Sequence[str]
) -> dict[str, dict[str, float]]:
    """Exact posteriors of variables that are no signs, by name and state.

    One pass: each state of each variable is one member of the batch, in which that variable is
    held to that state.
    """
    asked = [(name, state) for name in names for state in states_of(name)]
    factors = _factors(knowledge, items, None, None)
    scale = Factor(("held",), np.ones((1, 1)))
    for name in names:
        table = np.ones((len(asked), len(states_of(name))))
        for member, (other, _) in enumerate(asked):
            if other == name:
                table[member] = 0.0
                table[member, states_of(name).index(asked[member][1])] = 1.0
        factors.append(Factor((name,), table))
    total = joint([*factors, scale], ("held",), scaled=False)[:, 0]
    out: dict[str, dict[str, float]] = {}
    for name in names:
        mine = {s: float(total[k]) for k, (n, s) in enumerate(asked) if n == name}
        whole = sum(mine.values())
        out[name] = {s: p / whole for s, p in mine.items()}
    return out


def odds(p: FloatArray | float) -> FloatArray:
    """Odds of a probability, kept off 0 and 1 by 1e-9."""
    clipped = np.clip(p, 1e-9, 1 - 1e-9)
    return np.asarray(clipped / (1 - clipped))


def leave_out(items: Sequence[EvidenceItem], sets: Sequence[set[str]]) -> dict[str, FloatArray]:
    """Weights that leave one set of item keys out of each batch member."""
    return {i.key: np.array([0.0 if i.key in out else 1.0 for out in sets]) for i in items}


def _factors(
    knowledge: Knowledge,
    items: Sequence[EvidenceItem],
    numbers: Numbers | None,
    weights: Mapping[str, FloatArray] | None,
) -> list[Factor]:
    chosen = numbers or Numbers()
    return prior_factors(knowledge, chosen) + evidence_factors(knowledge, items, chosen, weights)


@cache
def _indicators(names: tuple[str, ...]) -> FloatArray:
    """Columns of 0 and 1 over the joint states: each mechanism; no suction, no discharge, neither.

    Shape (2^mechanisms, mechanisms + 3).
    """
    states = np.array(list(np.ndindex(*(2 for _ in names))), dtype=np.float64)
    absent = [
        [names.index(n) for n in which]
        for which in (SUCTION_MECHANISMS, DISCHARGE_MECHANISMS, tuple(sorted(SIDED)))
    ]
    none = [(1.0 - states[:, which]).prod(axis=1) for which in absent]
    return np.column_stack([states, *none])
