"""From items to a verdict: exact posterior, weight of every item, robustness."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from itertools import combinations

import numpy as np
import numpy.typing as npt
from scipy.stats import norm, qmc

from rca.case.vocabulary import DISCHARGE_MECHANISMS, MECHANISMS, SUCTION_MECHANISMS
from rca.evidence.item import EvidenceItem, NotAssessed
from rca.verdict.explain import DULL, explain, verbal
from rca.verdict.inference import joint
from rca.verdict.knowledge import Knowledge
from rca.verdict.model import (
    Band,
    GroupWeight,
    RankedCause,
    Robustness,
    Verdict,
    VerdictCheck,
    WeighedItem,
)
from rca.verdict.network import (
    Numbers,
    evidence_factors,
    number_keys,
    prior_factors,
    states_of,
)
from rca.verdict.next_test import next_tests
from rca.verdict.side import side_of

FloatArray = npt.NDArray[np.float64]
DRAWS = 2048
CHUNK = 64
MOST_REMOVED = 3  # items taken out together in the search for a flip, among the ...
HEAVIEST = 12  # ... items that move the odds most


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


def posterior(
    knowledge: Knowledge,
    items: Sequence[EvidenceItem],
    numbers: Numbers | None = None,
    weights: Mapping[str, FloatArray] | None = None,
) -> Posterior:
    """Exact posterior of mechanisms and sides."""
    chosen = numbers or Numbers()
    factors = prior_factors(knowledge, chosen) + evidence_factors(
        knowledge, items, chosen, weights
    )
    names = knowledge.names("mechanism")
    table = joint(factors, names)
    axes = tuple(range(1, table.ndim))
    table = table / table.sum(axis=axes, keepdims=True)
    mechanisms = {
        name: np.take(table, 1, axis=k + 1).sum(axis=tuple(range(1, table.ndim - 1)))
        for k, name in enumerate(names)
    }
    no_suction = _none_of(table, names, SUCTION_MECHANISMS)
    no_discharge = _none_of(table, names, DISCHARGE_MECHANISMS)
    neither = _none_of(table, names, (*SUCTION_MECHANISMS, *DISCHARGE_MECHANISMS))
    return Posterior(
        mechanisms=mechanisms,
        suction=1.0 - no_suction,
        discharge=1.0 - no_discharge,
        both=np.maximum(1.0 - no_suction - no_discharge + neither, 0.0),
        neither=neither,
    )


def marginal(knowledge: Knowledge, items: Sequence[EvidenceItem], name: str) -> dict[str, float]:
    """Exact posterior of one variable that is no sign, by state."""
    numbers = Numbers()
    table = joint(
        prior_factors(knowledge, numbers) + evidence_factors(knowledge, items, numbers), (name,)
    )[0]
    table = table / table.sum()
    return {state: float(p) for state, p in zip(states_of(name), table, strict=True)}


def weigh(
    items: Sequence[EvidenceItem],
    not_assessed: Sequence[NotAssessed],
    knowledge: Knowledge,
    *,
    seed: int,
    draws: int = DRAWS,
    contradictions: Sequence[str] = (),
) -> VerdictCheck:
    """The verdict on a set of items, with every step shown."""
    ids = {item.key: f"E{n:02d}" for n, item in enumerate(items, start=1)}
    base = posterior(knowledge, items)
    sides = base.sides()
    mechanisms = {name: float(base.mechanisms[name][0]) for name in MECHANISMS}
    groups = len({item.group for item in items if item.basis.value != "stated"})
    side, rule = side_of(sides, _others(mechanisms), groups)
    weighed = _weighed(knowledge, items, ids, base)
    prior = posterior(knowledge, [])
    robust = _robustness(knowledge, items, ids, base, side, groups, seed=seed, draws=draws)
    verdict = Verdict(
        side=side,
        sides=sides,
        mechanisms=mechanisms,
        prior=prior.sides() | {n: float(prior.mechanisms[n][0]) for n in MECHANISMS},
        conditions={
            name: marginal(knowledge, items, name) for name in knowledge.names("condition")
        },
        groups=_groups(knowledge, items, ids, base),
        robustness=robust,
        next_tests=next_tests(knowledge, items, not_assessed, side, groups, _ask),
        sensitivity=_sensitivity(knowledge, items, ids, groups),
        words=explain(side, rule, sides, mechanisms, weighed, not_assessed, robust),
        contradictions=tuple(contradictions),
    )
    return VerdictCheck(
        verdict=verdict,
        causes=_causes(knowledge, items, ids),
        evidence=weighed,
        knowledge=knowledge.identity,
    )


def _ask(knowledge: Knowledge, items: Sequence[EvidenceItem]) -> dict[str, float]:
    found = posterior(knowledge, items)
    return found.sides() | {n: float(found.mechanisms[n][0]) for n in MECHANISMS}


def _none_of(table: FloatArray, names: Sequence[str], which: Sequence[str]) -> FloatArray:
    index: list[slice | int] = [slice(None)] * table.ndim
    for name in which:
        index[names.index(name) + 1] = 0
    cut = table[tuple(index)]
    return np.asarray(cut.reshape(cut.shape[0], -1).sum(axis=1))


def _others(mechanisms: Mapping[str, float]) -> dict[str, float]:
    sided = {*SUCTION_MECHANISMS, *DISCHARGE_MECHANISMS}
    return {n: p for n, p in mechanisms.items() if n not in sided}


def _odds(p: FloatArray | float) -> FloatArray:
    clipped = np.clip(p, 1e-9, 1 - 1e-9)
    return np.asarray(clipped / (1 - clipped))


def _leave_out(items: Sequence[EvidenceItem], sets: Sequence[set[str]]) -> dict[str, FloatArray]:
    return {i.key: np.array([0.0 if i.key in out else 1.0 for out in sets]) for i in items}


def _weighed(
    knowledge: Knowledge, items: Sequence[EvidenceItem], ids: Mapping[str, str], base: Posterior
) -> tuple[WeighedItem, ...]:
    if not items:
        return ()
    without = posterior(
        knowledge, items, weights=_leave_out(items, [{item.key} for item in items])
    )
    out = []
    for n, item in enumerate(items):
        by = {
            name: float(_odds(base.mechanisms[name][0]) / _odds(without.mechanisms[name][n]))
            for name in MECHANISMS
        }
        suction = float(_odds(base.suction[0]) / _odds(without.suction[n]))
        discharge = float(_odds(base.discharge[0]) / _odds(without.discharge[n]))
        candidates = {"suction": suction, "discharge": discharge} | {
            name: by[name]
            for name in MECHANISMS
            if name not in {*SUCTION_MECHANISMS, *DISCHARGE_MECHANISMS}
        }
        name = max(candidates, key=lambda k: abs(np.log(candidates[k])))
        ratio = candidates[name]
        if max(ratio, 1 / ratio) < DULL:
            favours, shown = "neither way", 1.0
        else:
            favours, shown = (name, ratio) if ratio >= 1 else (f"not {name}", 1.0 / ratio)
        out.append(
            WeighedItem(
                id=ids[item.key],
                key=item.key,
                node=item.node.value,
                statement=item.statement,
                source=item.sources[0],
                more_sources=item.sources[1:],
                group=item.group.value,
                common_cause=item.common_cause,
                basis=item.basis.value,
                absent=item.absent,
                likelihood_ratio=shown,
                favours=favours,
                words=verbal(shown),
                suction_ratio=suction,
                discharge_ratio=discharge,
                by_mechanism=by,
                likelihood=dict(item.likelihood),
            )
        )
    return tuple(out)


def _groups(
    knowledge: Knowledge, items: Sequence[EvidenceItem], ids: Mapping[str, str], base: Posterior
) -> tuple[GroupWeight, ...]:
    names = sorted({item.group.value for item in items})
    if not names:
        return ()
    sets = [{i.key for i in items if i.group.value == name} for name in names]
    without = posterior(knowledge, items, weights=_leave_out(items, sets))
    return tuple(
        GroupWeight(
            group=name,
            items=tuple(ids[i.key] for i in items if i.group.value == name),
            suction_ratio=float(_odds(base.suction[0]) / _odds(without.suction[n])),
            discharge_ratio=float(_odds(base.discharge[0]) / _odds(without.discharge[n])),
        )
        for n, name in enumerate(names)
    )


def _sensitivity(
    knowledge: Knowledge, items: Sequence[EvidenceItem], ids: Mapping[str, str], groups: int
) -> tuple[dict[str, str | float], ...]:
    if not items:
        return ()
    found = posterior(knowledge, items, weights=_leave_out(items, [{i.key} for i in items]))
    return tuple(
        {
            "without": ids[item.key],
            "suction": float(found.suction[n]),
            "discharge": float(found.discharge[n]),
            "side": _side(found, n, groups),
        }
        for n, item in enumerate(items)
    )


def _side(found: Posterior, member: int, groups: int) -> str:
    mechanisms = {name: float(p[member]) for name, p in found.mechanisms.items()}
    return side_of(found.sides(member), _others(mechanisms), groups)[0]


def _causes(
    knowledge: Knowledge, items: Sequence[EvidenceItem], ids: Mapping[str, str]
) -> tuple[RankedCause, ...]:
    """Causes by probability; "unknown" is that none of the listed ones was present."""
    ranked = []
    absent = 1.0
    for name in knowledge.names("cause"):
        p = marginal(knowledge, items, name)["yes"]
        absent *= 1.0 - p
        down = _descendants(knowledge, name)
        near = [i for i in items if i.node.value in down]
        ranked.append(
            RankedCause(
                cause=name,
                probability=p,
                evidence=tuple(ids[i.key] for i in near if not i.absent),
                against=tuple(ids[i.key] for i in near if i.absent),
            )
        )
    ranked.append(RankedCause(cause="unknown", probability=absent, evidence=(), against=()))
    return tuple(sorted(ranked, key=lambda c: -c.probability))


def _descendants(knowledge: Knowledge, cause: str) -> set[str]:
    """The conditions, mechanisms and signs that the cause brings about directly."""
    return {n for n, v in knowledge.variables.items() if cause in v.leaves}


def _robustness(
    knowledge: Knowledge,
    items: Sequence[EvidenceItem],
    ids: Mapping[str, str],
    base: Posterior,
    side: str,
    groups: int,
    *,
    seed: int,
    draws: int,
) -> Robustness:
    suction, discharge, same = _drawn(knowledge, items, side, groups, seed=seed, draws=draws)
    second = _second_method(knowledge, items)
    return Robustness(
        draws=suction.size,
        same_side=same,
        suction=_band(float(base.suction[0]), suction),
        discharge=_band(float(base.discharge[0]), discharge),
        flip_set=tuple(ids[k] for k in _flip_set(knowledge, items, side, groups)),
        prior_at_flip={
            "suction": float(3.0 / _odds(float(base.suction[0]))),
            "discharge": float(3.0 / _odds(float(base.discharge[0]))),
        },
        second_method=second,
        second_agrees=second == side or "undetermined" in (second, side),
    )


def _drawn(
    knowledge: Knowledge,
    items: Sequence[EvidenceItem],
    side: str,
    groups: int,
    *,
    seed: int,
    draws: int,
) -> tuple[FloatArray, FloatArray, float]:
    keys = number_keys(knowledge)
    count = 2 ** int(np.ceil(np.log2(max(draws, CHUNK))))
    unit = qmc.LatinHypercube(d=len(keys), rng=np.random.default_rng(seed)).random(count)
    z = norm.ppf(np.clip(unit, 1e-9, 1 - 1e-9))
    suction, discharge, same = [], [], 0
    for start in range(0, count, CHUNK):
        block = slice(start, start + CHUNK)
        numbers = Numbers(CHUNK, {key: z[block, k] for k, key in enumerate(keys)})
        found = posterior(knowledge, items, numbers)
        suction.append(np.broadcast_to(found.suction, (CHUNK,)))
        discharge.append(np.broadcast_to(found.discharge, (CHUNK,)))
        same += sum(_side(found, n, groups) == side for n in range(CHUNK))
    return np.concatenate(suction), np.concatenate(discharge), same / count


def _band(best: float, values: FloatArray) -> Band:
    low, high = np.quantile(values, [0.05, 0.95])
    return Band(best=best, p05=float(low), p95=float(high))


def _flip_set(
    knowledge: Knowledge, items: Sequence[EvidenceItem], side: str, groups: int
) -> tuple[str, ...]:
    """The smallest set of items whose removal changes the side, up to three; () where none.

    Sets are made of the heaviest items only: those whose own removal moves a side's odds most.
    """
    keys = _heaviest(knowledge, items)
    for size in range(1, min(MOST_REMOVED, len(keys)) + 1):
        sets = [set(c) for c in combinations(keys, size)]
        found = posterior(knowledge, items, weights=_leave_out(items, sets))
        for n, removed in enumerate(sets):
            if _side(found, n, groups) != side:
                return tuple(sorted(removed))
    return ()


def _heaviest(knowledge: Knowledge, items: Sequence[EvidenceItem]) -> list[str]:
    """Keys of the items whose own removal moves the odds of a side most."""
    if not items:
        return []
    base = posterior(knowledge, items)
    without = posterior(knowledge, items, weights=_leave_out(items, [{i.key} for i in items]))
    moved = np.maximum(
        np.abs(np.log(_odds(without.suction) / _odds(base.suction))),
        np.abs(np.log(_odds(without.discharge) / _odds(base.discharge))),
    )
    return [items[k].key for k in np.argsort(-moved, kind="stable")[:HEAVIEST]]


def _second_method(knowledge: Knowledge, items: Sequence[EvidenceItem]) -> str:
    """A second, simpler look: the strongest single item of each group, multiplied.

    Each item's ratio for a side is taken alone against the prior, so nothing of the network's
    joint structure enters but one item at a time. Source: reporting practice of taking the
    strongest single item of a dependent group.
    """
    prior = posterior(knowledge, [])
    log_s, log_d = float(np.log(_odds(prior.suction[0]))), float(np.log(_odds(prior.discharge[0])))
    best: dict[str, tuple[float, float]] = {}
    for item in items:
        alone = posterior(knowledge, [item])
        s = float(np.log(_odds(alone.suction[0]) / _odds(prior.suction[0])))
        d = float(np.log(_odds(alone.discharge[0]) / _odds(prior.discharge[0])))
        old = best.get(item.group.value, (0.0, 0.0))
        best[item.group.value] = (max(old[0], s, key=abs), max(old[1], d, key=abs))
    p_s = 1 / (1 + np.exp(-(log_s + sum(s for s, _ in best.values()))))
    p_d = 1 / (1 + np.exp(-(log_d + sum(d for _, d in best.values()))))
    sides = {"suction": p_s, "discharge": p_d, "neither": (1 - p_s) * (1 - p_d)}
    return side_of(sides, {}, len(best))[0]
