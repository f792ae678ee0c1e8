"""The diagnostic network as factors: numbers from the knowledge, evidence from the items."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field

import numpy as np
import numpy.typing as npt
from scipy.special import ndtri

from rca.evidence.item import EvidenceItem
from rca.verdict.inference import Factor
from rca.verdict.knowledge import INLET, INLET_STATES, Knowledge, Number, Variable

FloatArray = npt.NDArray[np.float64]
POINT_95 = float(ndtri(0.95))  # low and high are read as the 5 and 95 % points


@dataclass(frozen=True, slots=True)
class Numbers:
    """A set of numbers for each batch member: best values, or draws between low and high.

    ``z`` maps a (variable, what) pair to standard normal draws of shape (B,); missing means best.
    """

    batch: int = 1
    z: Mapping[tuple[str, str], FloatArray] = field(default_factory=dict)

    def of(self, variable: str, what: str, number: Number) -> FloatArray:
        """The number for every batch member, shape (B,) or (1,)."""
        draw = self.z.get((variable, what))
        if draw is None:
            return np.array([number.best])
        centre = np.log(number.best / (1 - number.best))
        low = centre - np.log(number.low / (1 - number.low))
        high = np.log(number.high / (1 - number.high)) - centre
        width = np.where(draw < 0, low, high) / POINT_95
        return np.asarray(1.0 / (1.0 + np.exp(-(centre + draw * width))))


def number_keys(knowledge: Knowledge) -> list[tuple[str, str]]:
    """Every number of the knowledge that may vary, in a fixed order."""
    keys: list[tuple[str, str]] = [("failure", "anyway")]
    for name, v in knowledge.variables.items():
        keys += [(name, f"leaves {p}") for p in v.leaves]
        keys += [(name, f"given {s}") for s in v.given] + [(name, f"gate {g}") for g in v.gate]
        keys += [(name, "anyway")] if v.anyway is not None else []
        keys += [(name, "explains")] if v.explains_failure is not None else []
        keys += [(name, "worse")] if v.worse is not None else []
    return keys


def prior_factors(knowledge: Knowledge, numbers: Numbers) -> list[Factor]:
    """Factors of causes, conditions and mechanisms, and of the fact that the pump failed."""
    factors = [_cpt(v, numbers) for v in knowledge.variables.values() if v.kind != "sign"]
    factors.append(_failed(knowledge, numbers))
    return factors


def evidence_factors(
    knowledge: Knowledge,
    items: Sequence[EvidenceItem],
    numbers: Numbers,
    weights: Mapping[str, FloatArray] | None = None,
) -> list[Factor]:
    """Factors of the items.

    Items of one common cause share one hidden variable, whether what they rest on is sound; when
    it is not, none of them says anything. A sign that several causes look at is one sign: it stays
    in the network as a variable. ``weights`` (item key -> (B,)) of 0 leaves an item out of a
    batch member, 1 keeps it.
    """
    shared = _looked_at_twice(knowledge, items)
    factors = [_cpt(knowledge.variables[node], numbers) for node in shared]
    by_cause: dict[str, list[EvidenceItem]] = {}
    for item in items:
        by_cause.setdefault(item.common_cause, []).append(item)
    for cause, group in by_cause.items():
        sound = f"sound: {cause}"
        r = min(knowledge.reliability[item.basis.value] for item in group)
        factors.append(Factor((sound,), np.array([[1 - r, r]])))
        by_node: dict[str, list[EvidenceItem]] = {}
        for item in group:
            by_node.setdefault(item.node.value, []).append(item)
        for node, same in by_node.items():
            likelihood = _likelihood(node, same, weights)
            variable = knowledge.variables[node]
            leaf = variable.kind == "sign" and node not in shared
            factors.append(_observed(variable, likelihood, sound, numbers, leaf=leaf))
    return factors


def _looked_at_twice(knowledge: Knowledge, items: Sequence[EvidenceItem]) -> tuple[str, ...]:
    """Signs with items of more than one common cause."""
    causes: dict[str, set[str]] = {}
    for item in items:
        causes.setdefault(item.node.value, set()).add(item.common_cause)
    return tuple(
        node
        for node, by in causes.items()
        if len(by) > 1 and knowledge.variables[node].kind == "sign"
    )


def states_of(name: str) -> tuple[str, ...]:
    """The states of a variable."""
    return INLET_STATES if name == INLET else ("no", "yes")


def _likelihood(
    node: str,
    items: Sequence[EvidenceItem],
    weights: Mapping[str, FloatArray] | None,
) -> FloatArray:
    """P(readings | state), (B, states); several items of one node and cause: the strongest."""
    rows = []
    for item in items:
        row = np.array([[item.likelihood[s] for s in states_of(node)]])
        row = row / row.max()
        w = weights.get(item.key) if weights is not None else None
        rows.append(row if w is None else row ** w[:, None])
    if len(rows) == 1:
        return np.asarray(rows[0])
    stacked = np.stack(np.broadcast_arrays(*rows))  # (items, B, states)
    strongest = np.argmax(np.max(-np.log(stacked), axis=2), axis=0)
    return np.asarray(stacked[strongest, np.arange(stacked.shape[1])])


def _observed(
    variable: Variable, likelihood: FloatArray, sound: str, numbers: Numbers, *, leaf: bool
) -> Factor:
    """An observation of a variable, void where its common cause is not sound.

    A sign nobody else looked at is a leaf and summed out here: the factor is over its parents.
    """
    # A void look says either thing at random: P'(E|H) = r P(E|H) + (1 - r) q with q the mean over
    # the states. Giving it more would let it win against many sound looks by their number alone.
    flat = np.ones_like(likelihood) * likelihood.mean(axis=1, keepdims=True)
    if not leaf:
        table = np.stack([flat, likelihood], axis=1)  # (B, sound, states)
        return Factor((sound, variable.name), table)
    names, absent = _noisy_or_absent(variable, numbers)
    shape = (-1, *(1 for _ in names))
    told = likelihood[:, 0].reshape(shape) * absent + likelihood[:, 1].reshape(shape) * (
        1.0 - absent
    )
    void = np.broadcast_to(flat[:, 0].reshape(shape), told.shape)
    return Factor((sound, *names), np.stack([void, told], axis=1))


def _noisy_or_absent(variable: Variable, numbers: Numbers) -> tuple[tuple[str, ...], FloatArray]:
    """Parents and P(state absent | parents): (1 - anyway) times (1 - leaves) of each present."""
    names = tuple(variable.leaves)
    assert variable.anyway is not None
    table = 1.0 - numbers.of(variable.name, "anyway", variable.anyway)
    table = table.reshape((-1, *(1 for _ in names)))
    for axis, (parent, number) in enumerate(variable.leaves.items()):
        p = numbers.of(variable.name, f"leaves {parent}", number)
        column = np.stack([np.ones_like(p), *[1.0 - p] * (len(states_of(parent)) - 1)], axis=1)
        shape = [column.shape[0]] + [1] * len(names)
        shape[axis + 1] = column.shape[1]
        table = table * column.reshape(shape)
    return names, table


def _cpt(variable: Variable, numbers: Numbers) -> Factor:
    name = variable.name
    if variable.given:
        rows = [numbers.of(name, f"given {s}", variable.given[s]) for s in INLET_STATES]
        yes = np.stack(np.broadcast_arrays(*rows), axis=1)
        return Factor((INLET, name), np.stack([1.0 - yes, yes], axis=2))
    if variable.needs:
        first, second = variable.needs
        order = ("none", "only_second", "only_first", "both")
        rows = [numbers.of(name, f"gate {g}", variable.gate[g]) for g in order]
        yes = np.stack(np.broadcast_arrays(*rows), axis=1).reshape(-1, 2, 2)
        return Factor((first, second, name), np.stack([1.0 - yes, yes], axis=3))
    names, absent = _noisy_or_absent(variable, numbers)
    present = 1.0 - absent
    if name == INLET:
        assert variable.worse is not None
        worse = numbers.of(name, "worse", variable.worse).reshape((-1, *(1 for _ in names)))
        table = np.stack(
            np.broadcast_arrays(absent, present * (1.0 - worse), present * worse), axis=-1
        )
    else:
        table = np.stack([absent, present], axis=-1)
    return Factor((*names, name), table)


def _failed(knowledge: Knowledge, numbers: Numbers) -> Factor:
    """P(the pump failed | what can fail it): noisy-OR over those that can."""
    able = [n for n, v in knowledge.variables.items() if v.explains_failure is not None]
    table = (1.0 - numbers.of("failure", "anyway", knowledge.failure)).reshape(
        (-1, *(1 for _ in able))
    )
    for axis, name in enumerate(able):
        number = knowledge.variables[name].explains_failure
        assert number is not None
        p = numbers.of(name, "explains", number)
        shape = [p.size] + [1] * len(able)
        shape[axis + 1] = 2
        table = table * np.stack([np.ones_like(p), 1.0 - p], axis=1).reshape(shape)
    return Factor(tuple(able), 1.0 - table)
