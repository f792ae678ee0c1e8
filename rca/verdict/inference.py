"""Exact inference by variable elimination, many evidence settings or number sets at once.

A factor is an array over its variables with a leading batch axis of length 1 or B, so that one
pass answers B questions of the same structure. The order of elimination depends on the structure
alone and is kept. Inside, the batch runs along the last axis: products then work on long rows.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache

import numpy as np
import numpy.typing as npt

FloatArray = npt.NDArray[np.float64]
Scopes = tuple[tuple[str, ...], ...]
Sizes = tuple[tuple[str, int], ...]
SMALL = 1e-30  # tables whose largest entry is below are scaled up


@dataclass(frozen=True, slots=True)
class Factor:
    """A table over ``names``; axis 0 is the batch, axis k + 1 belongs to ``names[k]``."""

    names: tuple[str, ...]
    table: FloatArray


def joint(factors: Sequence[Factor], wanted: Sequence[str], *, scaled: bool = True) -> FloatArray:
    """Unnormalised joint of the wanted variables, in their order; axis 0 is the batch.

    Eliminates every other variable, cheapest next (smallest resulting table). Exact. ``scaled``:
    members of the batch may be scaled by themselves, so only ratios within one member have a
    meaning; without it all members share one scale.
    """
    sizes = {n: f.table.shape[i + 1] for f in factors for i, n in enumerate(f.names)}
    pool = [Factor(f.names, np.ascontiguousarray(np.moveaxis(f.table, 0, -1))) for f in factors]
    order = elimination_order(
        tuple(f.names for f in factors), tuple(sorted(sizes.items())), tuple(wanted)
    )
    for name in order:
        mine = [f for f in pool if name in f.names]
        pool = [f for f in pool if name not in f.names]
        product = _multiply(mine)
        axis = product.names.index(name)
        rest = tuple(n for n in product.names if n != name)
        pool.append(Factor(rest, _rescaled(product.table.sum(axis=axis), each=scaled)))
    product = _multiply(pool, tuple(wanted))
    shape = (*(sizes[n] for n in wanted), product.table.shape[-1])
    return np.moveaxis(np.broadcast_to(product.table, shape), -1, 0)


@lru_cache(maxsize=256)
def elimination_order(scopes: Scopes, sizes: Sizes, wanted: tuple[str, ...]) -> tuple[str, ...]:
    """The hidden variables, cheapest next; ties by name."""
    size = dict(sizes)
    pool = [frozenset(s) for s in scopes]
    hidden = set(size) - set(wanted)
    order = []
    while hidden:
        best = min(sorted(hidden), key=lambda n: _cost(pool, n, size))
        joined = frozenset().union(*(s for s in pool if best in s)) - {best}
        pool = [s for s in pool if best not in s]
        pool.append(joined)
        hidden.remove(best)
        order.append(best)
    return tuple(order)


def _cost(pool: Sequence[frozenset[str]], name: str, size: dict[str, int]) -> int:
    cost = 1
    for n in frozenset().union(*(s for s in pool if name in s)) - {name}:
        cost *= size[n]
    return cost


def _multiply(factors: Sequence[Factor], names: tuple[str, ...] = ()) -> Factor:
    """The product over the union of the variables; the batch is the last axis.

    Small tables first, so that most products are taken while the table is still small.
    """
    names = names or tuple(dict.fromkeys(n for f in factors for n in f.names))
    tables = sorted((_spread(f, names) for f in factors), key=lambda t: t.size)
    total = np.ones((*(1 for _ in names), 1)) if not tables else tables[0]
    for table in tables[1:]:
        total = total * table
    return Factor(names, total)


def _spread(factor: Factor, names: tuple[str, ...]) -> FloatArray:
    """A factor's table with its axes in the order of ``names`` and length 1 for the others."""
    if not factor.names:
        return factor.table.reshape((*(1 for _ in names), -1))
    present = [n for n in names if n in factor.names]
    axes = [*(factor.names.index(n) for n in present), len(factor.names)]
    table = np.transpose(factor.table, axes)
    lengths = iter(table.shape)
    shape = [*(next(lengths) if n in factor.names else 1 for n in names), table.shape[-1]]
    return table.reshape(shape)


def _rescaled(table: FloatArray, *, each: bool) -> FloatArray:
    """Divided by the largest entry where that is small, so that no product underflows.

    ``each``: every batch member by its own. Scales cancel in every normalised answer.
    """
    top = table.max(axis=tuple(range(table.ndim - 1)) if each else None, keepdims=True)
    if float(top.min()) > SMALL:
        return table
    return np.asarray(table / np.where(top > 0, top, 1.0))
