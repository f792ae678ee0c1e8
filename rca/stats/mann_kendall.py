"""Mann and Kendall's test for a trend: exact in small samples, with ties, limits and groups."""

from collections import Counter
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from functools import cache
from math import factorial, prod, sqrt

import numpy as np
from scipy.stats import norm

from rca.base.errors import OutOfRangeError
from rca.stats.censored_order import checked, rises

MOST_STATES = 5000  # of the exact count; 12 different values need 4096
EXACT_WITHOUT_TIES = 30
PLAIN_ABOVE = 400  # points without limits from which the order is counted by sorting


@dataclass(frozen=True, slots=True, kw_only=True)
class MannKendall:
    """S, its variance with ties, and the two-sided probability of such a trend by chance."""

    n: int
    s: int
    variance: float
    z: float  # with continuity correction
    p_two_sided: float
    exact: bool


def mann_kendall(
    values: Sequence[float],
    *,
    ops: Sequence[str] = (),
    groups: Sequence[object] = (),
) -> MannKendall:
    """Test for a monotone trend; points stand in order of time, evenly spaced or not.

    ``ops`` marks values known only as "<" or ">" a limit. ``groups`` splits the points (by
    laboratory, say): only pairs inside a group are compared, and S and its variance are summed.
    Probabilities are exact (all orders equally likely) for about 12 points a group and fewer,
    normal with continuity correction above. A step counts as a trend, so known changes must be
    split off first; serial correlation makes p too small.

    Source: R. O. Gilbert, Statistical Methods for Environmental Pollution Monitoring, 1987,
    ch. 16; groups as G. van Belle and J. P. Hughes, Water Resour. Res. 20 (1984) 127.
    Raises OutOfRangeError for fewer than 3 points, NaN or an unknown operator.
    """
    x, marks = checked(values, ops)
    if x.size < 3:
        raise OutOfRangeError(f"mann_kendall needs at least 3 points; got {x.size}")
    labels = tuple(groups) if groups else (0,) * x.size
    if len(labels) != x.size:
        raise OutOfRangeError("one group a value is needed")
    s, variance = 0, 0.0
    chances: dict[int, float] | None = {0: 1.0}
    for label in dict.fromkeys(labels):
        inside = [k for k, one in enumerate(labels) if one == label]
        part = _one_group(x[inside], tuple(marks[k] for k in inside))
        s, variance = s + part[0], variance + part[1]
        chances = _sum_of(chances, part[2])
    z = (s - np.sign(s)) / sqrt(variance) if variance > 0 else 0.0
    p = float(2.0 * norm.sf(abs(z)))
    if chances is not None:
        p = sum(chance for value, chance in chances.items() if abs(value) >= abs(s))
    return MannKendall(
        n=int(x.size),
        s=s,
        variance=variance,
        z=float(z),
        p_two_sided=1.0 if s == 0 else min(1.0, p),
        exact=chances is not None,
    )


def upper_tail(n: int, s: int) -> float:
    """P(S >= s) for n points without ties, exactly.

    Counts orders by their number of inversions (recurrence of M. G. Kendall, Rank Correlation
    Methods, 1948). Raises OutOfRangeError outside 2 to 60 points.
    """
    if not 2 <= n <= 60:
        raise OutOfRangeError(f"upper_tail counts orders of 2 to 60 points; got {n}")
    pairs = n * (n - 1) // 2
    good = sum(c for k, c in enumerate(_inversions(n)) if pairs - 2 * k >= s)
    return good / factorial(n)


def _one_group(
    x: np.ndarray, marks: tuple[str, ...]
) -> tuple[int, float, Mapping[int, float] | None]:
    """S, variance and, where small enough, the whole distribution of S."""
    n = int(x.size)
    if n < 2:
        return 0, 0.0, {0: 1.0}
    plain = all(mark == "=" for mark in marks)
    if plain and n > PLAIN_ABOVE:
        return _s_by_sorting(x), _variance_of_ties(x), None
    up = rises(x, marks)
    s = int(np.triu(up, k=1).sum(dtype=np.int64))
    kinds = Counter(zip(x.tolist(), marks, strict=True))
    if len(kinds) == n and plain and n <= EXACT_WITHOUT_TIES:
        return s, _variance_of_ties(x), _distribution_without_ties(n)
    small = prod(count + 1 for count in kinds.values()) <= MOST_STATES
    return s, _permutation_variance(up), _distribution(kinds) if small else None


def variance_of_s(values: Sequence[float], groups: Sequence[int] = ()) -> float:
    """Variance of S with ties, summed over groups, without the test."""
    x, _ = checked(values, ())
    labels = np.asarray(groups) if groups else np.zeros(x.size)
    return sum(_variance_of_ties(x[labels == one]) for one in np.unique(labels))


def _s_by_sorting(x: np.ndarray) -> int:
    """Rises minus falls by merging, n log n."""
    _, ranks = np.unique(x, return_inverse=True)
    tree = np.zeros(int(ranks.max()) + 2, dtype=np.int64)
    s = 0
    for placed, rank in enumerate(ranks.tolist()):
        below, upto = _prefix(tree, rank), _prefix(tree, rank + 1)
        s += below - (placed - upto)
        k = rank + 1
        while k < tree.size:
            tree[k] += 1
            k += k & -k
    return int(s)


def _prefix(tree: np.ndarray, k: int) -> int:
    total = 0
    while k > 0:
        total += int(tree[k])
        k -= k & -k
    return total


def _variance_of_ties(x: np.ndarray) -> float:
    n = x.size
    _, counts = np.unique(x, return_counts=True)
    ties = int(sum(int(t) * (int(t) - 1) * (2 * int(t) + 5) for t in counts))
    return float(n * (n - 1) * (2 * n + 5) - ties) / 18.0


def _permutation_variance(up: np.ndarray) -> float:
    """Variance of S over all orders, for any antisymmetric scores.

    H. E. Daniels, Biometrika 33 (1944) 129; with untied times the second factor is n-only.
    """
    n = up.shape[0]
    if n < 3:
        return float(np.square(up, dtype=float).sum()) / 2.0
    a_rows = float(np.square(up.sum(axis=1, dtype=float)).sum())
    a_all = float(np.square(up, dtype=float).sum())
    b_rows = sum((n - 1 - 2 * k) ** 2 for k in range(n))
    b_all = n * (n - 1)
    gamma = 4.0 / (n * (n - 1) * (n - 2)) * (a_rows - a_all) * (b_rows - b_all)
    gamma += 2.0 / (n * (n - 1)) * a_all * b_all
    return float(gamma / 4.0)


def _distribution(kinds: Counter[tuple[float, str]]) -> dict[int, float]:
    """P(S) over all orders of a set with ties and limits, by filling places one by one."""
    values = np.array([value for value, _ in kinds])
    up = rises(values, tuple(mark for _, mark in kinds)).astype(int).tolist()
    full = tuple(kinds.values())
    layer: dict[tuple[int, ...], dict[int, int]] = {(0,) * len(full): {0: 1}}
    for _ in range(sum(full)):
        following: dict[tuple[int, ...], dict[int, int]] = {}
        for placed, sums in layer.items():
            for k, count in enumerate(placed):
                if count == full[k]:
                    continue
                gain = sum(up[i][k] * c for i, c in enumerate(placed))
                state = (*placed[:k], count + 1, *placed[k + 1 :])
                target = following.setdefault(state, {})
                for s, ways in sums.items():
                    target[s + gain] = target.get(s + gain, 0) + ways
        layer = following
    (sums,) = layer.values()
    total = sum(sums.values())
    return {s: ways / total for s, ways in sums.items()}


@cache
def _distribution_without_ties(n: int) -> Mapping[int, float]:
    pairs, total = n * (n - 1) // 2, factorial(n)
    return {pairs - 2 * k: c / total for k, c in enumerate(_inversions(n))}


def _sum_of(
    one: Mapping[int, float] | None, other: Mapping[int, float] | None
) -> dict[int, float] | None:
    if one is None or other is None:
        return None
    out: dict[int, float] = {}
    for a, p in one.items():
        for b, q in other.items():
            out[a + b] = out.get(a + b, 0.0) + p * q
    return out


@cache
def _inversions(n: int) -> tuple[int, ...]:
    counts = [1]
    for m in range(2, n + 1):
        grown = [0] * (len(counts) + m - 1)
        for k, c in enumerate(counts):
            for shift in range(m):
                grown[k + shift] += c
        counts = grown
    return tuple(counts)
