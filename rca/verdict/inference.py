"""Exact inference by variable elimination, many evidence settings or number sets at once.

A factor is an array over its variables with a leading batch axis of length 1 or B, so that one
pass answers B questions of the same structure.
"""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

FloatArray = npt.NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Factor:
    """A table over ``names``; axis 0 is the batch, axis k + 1 belongs to ``names[k]``."""

    names: tuple[str, ...]
    table: FloatArray


def joint(factors: Sequence[Factor], wanted: Sequence[str]) -> FloatArray:
    """Unnormalised joint of the wanted variables, in their order; axis 0 is the batch.

    Eliminates every other variable, cheapest next (smallest resulting table). Exact.
    """
    pool = list(factors)
    sizes = {n: f.table.shape[i + 1] for f in pool for i, n in enumerate(f.names)}
    hidden = set(sizes) - set(wanted)
    while hidden:
        name = min(sorted(hidden), key=lambda n: _cost(pool, n, sizes))
        mine = [f for f in pool if name in f.names]
        pool = [f for f in pool if name not in f.names]
        product = multiply(mine, sizes)
        axis = product.names.index(name) + 1
        pool.append(
            _rescaled(
                Factor(tuple(n for n in product.names if n != name), product.table.sum(axis=axis))
            )
        )
        hidden.remove(name)
    product = multiply(pool, sizes, order=tuple(wanted))
    return product.table


def multiply(
    factors: Sequence[Factor], sizes: Mapping[str, int], order: tuple[str, ...] = ()
) -> Factor:
    """The product of factors over the union of their variables."""
    names = order or tuple(dict.fromkeys(n for f in factors for n in f.names))
    total = np.ones((1, *(1 for _ in names)))
    for factor in sorted(factors, key=lambda f: f.table.size):
        total = total * _spread(factor, names)
    shape = (total.shape[0], *(sizes[n] for n in names))
    return Factor(names, np.broadcast_to(total, shape))


def _spread(factor: Factor, names: tuple[str, ...]) -> FloatArray:
    """A factor's table with its axes in the order of ``names`` and length 1 for the others."""
    present = [n for n in names if n in factor.names]
    axes = [0, *(factor.names.index(n) + 1 for n in present)]
    table = np.transpose(factor.table, axes)
    lengths = iter(table.shape[1:])
    shape = [table.shape[0], *(next(lengths) if n in factor.names else 1 for n in names)]
    return table.reshape(shape)


def _cost(pool: Sequence[Factor], name: str, sizes: Mapping[str, int]) -> int:
    union = {n for f in pool if name in f.names for n in f.names} - {name}
    cost = 1
    for n in union:
        cost *= sizes[n]
    return cost


def _rescaled(factor: Factor) -> Factor:
    """Each batch member divided by its largest entry, so that long products never underflow.

    Scales cancel in every normalised answer; they differ between members, which never mix.
    """
    axes = tuple(range(1, factor.table.ndim))
    top = factor.table.max(axis=axes, keepdims=True)
    return Factor(factor.names, factor.table / np.where(top > 0, top, 1.0))
