"""How far the verdict depends on single items, on the numbers and on the method."""

from collections.abc import Mapping, Sequence
from concurrent.futures import ThreadPoolExecutor
from itertools import combinations

import numpy as np
import numpy.typing as npt
from scipy.special import ndtri
from scipy.stats import qmc

from rca.evidence.item import EvidenceItem
from rca.verdict.knowledge import Knowledge
from rca.verdict.model import Band, Robustness, WeighedItem
from rca.verdict.network import Numbers, number_keys
from rca.verdict.posterior import (
    Posterior,
    held_back,
    leave_out,
    odds,
    posterior,
    prior_of,
    reported,
)
from rca.verdict.side import HELD, side_of

FloatArray = npt.NDArray[np.float64]
DRAWS = 2048
THREADS = 2
CHUNK = 128  # draws a pass; tables of a pass stay in the processor's cache
MOST_REMOVED = 3  # items taken out together in the search for a flip, among the ...
HEAVIEST = 12  # ... items that move the odds most


def robustness(
    knowledge: Knowledge,
    items: Sequence[EvidenceItem],
    ids: Mapping[str, str],
    shown: Posterior,
    without: Posterior | None,
    weighed: Sequence[WeighedItem],
    groups: int,
    *,
    seed: int,
    draws: int,
) -> Robustness:
    """Draws of the numbers, smallest flip, prior at flip, second method.

    ``shown`` is the posterior as reported, ``without`` that with each item left out in turn.
    """
    side, _ = shown.side(groups)
    suction, discharge, same = _drawn(knowledge, items, side, groups, seed=seed, draws=draws)
    second = _second_method(knowledge, weighed)
    flip = _flip_set(knowledge, items, shown, without, groups)
    return Robustness(
        draws=suction.size,
        same_side=same,
        suction=_band(float(shown.suction[0]), suction),
        discharge=_band(float(shown.discharge[0]), discharge),
        flip_set=tuple(ids[k] for k in flip),
        prior_at_flip={
            "suction": float(odds(HELD) / odds(float(shown.suction[0]))),
            "discharge": float(odds(HELD) / odds(float(shown.discharge[0]))),
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
    count = 2 ** int(np.ceil(np.log2(max(draws, 2))))
    chunk = min(CHUNK, count)
    unit = qmc.LatinHypercube(d=len(keys), rng=np.random.default_rng(seed)).random(count)
    z = np.ascontiguousarray(ndtri(np.clip(unit, 1e-9, 1 - 1e-9)).T)

    prior = prior_of(knowledge)

    def block(start: int) -> tuple[FloatArray, FloatArray, int]:
        rows = {key: z[k, start : start + chunk] for k, key in enumerate(keys)}
        numbers = Numbers(chunk, rows)
        found = held_back(posterior(knowledge, items, numbers), prior, knowledge.doubt)
        same = sum(found.side(groups, n)[0] == side for n in range(chunk))
        return found.suction, found.discharge, same

    with ThreadPoolExecutor(THREADS) as pool:  # the kernel runs without the interpreter's lock
        blocks = list(pool.map(block, range(0, count, chunk)))
    suction = np.concatenate([s for s, _, _ in blocks])
    discharge = np.concatenate([d for _, d, _ in blocks])
    return suction, discharge, sum(n for _, _, n in blocks) / count


def _band(best: float, values: FloatArray) -> Band:
    low, high = np.quantile(values, [0.05, 0.95])
    return Band(best=best, p05=float(low), p95=float(high))


def _flip_set(
    knowledge: Knowledge,
    items: Sequence[EvidenceItem],
    shown: Posterior,
    without: Posterior | None,
    groups: int,
) -> tuple[str, ...]:
    """The smallest set of items whose removal changes the side, up to three; () where none.

    Sets are made of the heaviest items only: those whose own removal moves a side's odds most.
    Of the sets of one size, the one that moves the odds most is named.
    """
    if without is None:
        return ()
    side, _ = shown.side(groups)
    keys = [items[k].key for k in heaviest(shown, without)[:HEAVIEST]]
    for size in range(1, min(MOST_REMOVED, len(keys)) + 1):
        sets = [set(c) for c in combinations(keys, size)]
        found = reported(knowledge, items, leave_out(items, sets))
        flipped = [n for n in range(len(sets)) if found.side(groups, n)[0] != side]
        if flipped:
            moved = _moved(shown, found)
            return tuple(sorted(sets[max(flipped, key=lambda n: float(moved[n]))]))
    return ()


def heaviest(base: Posterior, without: Posterior) -> list[int]:
    """Places of the items, those whose own removal moves the odds of a side most first."""
    return [int(k) for k in np.argsort(-_moved(base, without), kind="stable")]


def _moved(base: Posterior, found: Posterior) -> FloatArray:
    """How far the odds of a side move, in natural logarithms, for each batch member."""
    return np.asarray(
        np.maximum(
            np.abs(np.log(odds(found.suction) / odds(base.suction))),
            np.abs(np.log(odds(found.discharge) / odds(base.discharge))),
        )
    )


def _second_method(knowledge: Knowledge, items: Sequence[WeighedItem]) -> str:
    """A second, simpler look: the strongest single item of each group, multiplied.

    Each item's ratio for a side is taken alone against the prior, so nothing of the network's
    joint structure enters but one item at a time. Source: reporting practice of taking the
    strongest single item of a dependent group.
    """
    prior = prior_of(knowledge)
    log_s, log_d = (float(np.log(odds(float(p[0])))) for p in (prior.suction, prior.discharge))
    best: dict[str, tuple[float, float]] = {}
    for item in items:
        s, d = float(np.log(item.suction_alone)), float(np.log(item.discharge_alone))
        old = best.get(item.group, (0.0, 0.0))
        best[item.group] = (max(old[0], s, key=abs), max(old[1], d, key=abs))
    p_s = 1 / (1 + np.exp(-(log_s + sum(s for s, _ in best.values()))))
    p_d = 1 / (1 + np.exp(-(log_d + sum(d for _, d in best.values()))))
    sides = {"suction": p_s, "discharge": p_d, "neither": (1 - p_s) * (1 - p_d)}
    return side_of(sides, {}, len(best))[0]
