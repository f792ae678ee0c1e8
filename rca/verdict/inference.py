"""Exact inference by variable elimination, many evidence settings or number sets at once.

A factor is an array over its variables with a leading batch axis of length 1 or B, so that one
pass answers B questions of the same structure. The plan (order of elimination, which tables are
multiplied first, where each entry goes) depends on the structure alone and is kept.
"""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from functools import lru_cache
from math import prod

import numpy as np
import numpy.typing as npt

from rca.verdict.kernel import WIDTH, run_steps

FloatArray = npt.NDArray[np.float64]
IntArray = npt.NDArray[np.int64]
PlaceArray = npt.NDArray[np.int32]
Scopes = tuple[tuple[str, ...], ...]
Sizes = tuple[tuple[str, int], ...]
Table = tuple[tuple[str, ...], int]  # scope and offset
WORTH = 0.5  # two tables are multiplied first where their product is at most this share of all


@dataclass(frozen=True, slots=True)
class Factor:
    """A table over ``names``; axis 0 is the batch, axis k + 1 belongs to ``names[k]``."""

    names: tuple[str, ...]
    table: FloatArray


@dataclass(frozen=True, slots=True)
class Plan:
    """Steps for the kernel; see ``run_steps`` for the rows."""

    entries: int  # of all tables together
    given: tuple[int, ...]  # offsets of the given tables
    result: int  # offset of the last table
    shape: tuple[int, ...]
    steps: IntArray
    inputs: IntArray
    maps: PlaceArray


def joint(factors: Sequence[Factor], wanted: Sequence[str], *, scaled: bool = True) -> FloatArray:
    """Unnormalised joint of the wanted variables, in their order; axis 0 is the batch.

    Eliminates every other variable, cheapest next. Exact. ``scaled``: members of the batch may be
    scaled by themselves, so only ratios within one member have a meaning; without it all members
    share one scale.
    """
    sizes = {n: f.table.shape[i + 1] for f in factors for i, n in enumerate(f.names)}
    plan = plan_of(tuple(f.names for f in factors), tuple(sorted(sizes.items())), tuple(wanted))
    batch = max((f.table.shape[0] for f in factors), default=1)
    columns = [f.table.reshape(f.table.shape[0], -1).T for f in factors]
    out = np.empty((batch, prod(plan.shape)))
    logs = np.empty(batch)
    buffer = np.ones((plan.entries, WIDTH))
    for start in range(0, batch, WIDTH):
        members = slice(start, min(start + WIDTH, batch))
        width = members.stop - members.start
        for offset, table in zip(plan.given, columns, strict=True):
            part = table if table.shape[1] == 1 else table[:, members]
            buffer[offset : offset + table.shape[0], :width] = part
        logs[members] = run_steps(buffer, plan.steps, plan.inputs, plan.maps)[:width]
        out[members] = buffer[plan.result : plan.result + out.shape[1], :width].T
    if not scaled:
        out *= np.exp(logs - logs.max())[:, None]
    return out.reshape(batch, *plan.shape)


@lru_cache(maxsize=128)
def plan_of(scopes: Scopes, sizes: Sizes, wanted: tuple[str, ...]) -> Plan:
    """The plan of one structure."""
    return _Planner(scopes, dict(sizes)).plan(wanted)


class _Planner:
    """Builds the steps; a table is its scope and its offset."""

    def __init__(self, scopes: Scopes, size: dict[str, int]) -> None:
        self.size = size
        self.entries = 0
        self.pool = [(scope, self._room(scope)) for scope in scopes]
        self.given = tuple(offset for _, offset in self.pool)
        self.steps: list[tuple[int, int, int, int, int]] = []
        self.inputs: list[tuple[int, int]] = []
        self.maps: list[PlaceArray] = []
        self.mapped = 0

    def plan(self, wanted: tuple[str, ...]) -> Plan:
        """Eliminate all but the wanted variables, then multiply what is left."""
        for name in self._order(wanted):
            mine = [t for t in self.pool if name in t[0]]
            self.pool = [t for t in self.pool if name not in t[0]]
            rest = tuple(sorted(set().union(*(t[0] for t in mine)) - {name}))
            self.pool.append(self._step(self._merged(mine), rest, name))
        _, result = self._step(self._merged(self.pool), wanted, None)
        return Plan(
            entries=self.entries,
            given=self.given,
            result=result,
            shape=tuple(self.size[n] for n in wanted),
            steps=np.array(self.steps, dtype=np.int64),
            inputs=np.array(self.inputs, dtype=np.int64),
            maps=np.concatenate(self.maps),
        )

    def _room(self, scope: Sequence[str]) -> int:
        offset = self.entries
        self.entries += prod(self.size[n] for n in scope)
        return offset

    def _order(self, wanted: tuple[str, ...]) -> Iterator[str]:
        """The hidden variables, that with the smallest resulting table next; ties by name."""
        near: dict[str, set[str]] = {n: set() for n in self.size}
        for scope, _ in self.pool:
            for name in scope:
                near[name].update(scope)
        hidden = sorted(set(self.size) - set(wanted))
        cost = {n: prod(self.size[m] for m in near[n] if m != n) for n in hidden}
        while hidden:
            name = min(hidden, key=cost.__getitem__)
            hidden.remove(name)
            yield name
            around = near.pop(name) - {name}
            for other in around:
                near[other] = (near[other] | around) - {name}
                if other in cost:
                    cost[other] = prod(self.size[m] for m in near[other] if m != other)

    def _merged(self, tables: list[Table]) -> list[Table]:
        """Small tables multiplied first, where that saves work in the step that follows."""
        left = list(tables)
        whole = prod(self.size[n] for n in set().union(*(t[0] for t in left)))
        while len(left) > 2:
            pairs = [
                (prod(self.size[n] for n in set(a[0]) | set(b[0])), i, j)
                for i, a in enumerate(left)
                for j, b in enumerate(left)
                if i < j
            ]
            cost, i, j = min(pairs)
            if cost > WORTH * whole:
                break
            second, first = left.pop(j), left.pop(i)
            scope = tuple(sorted(set(first[0]) | set(second[0])))
            left.append(self._step([first, second], scope, None))
        return left

    def _step(
        self,
        tables: list[Table],
        scope: tuple[str, ...],
        summed: str | None,
    ) -> Table:
        """One step of the kernel: a product over ``scope``, with one variable summed out."""
        axes = (*scope, *((summed,) if summed is not None else ()))
        shape = [self.size[n] for n in axes]
        first = len(self.inputs)
        for names, offset in tables:
            self.inputs.append((offset, self.mapped))
            places = self._places(names, axes, shape)
            self.maps.append(places)
            self.mapped += places.size
        states = self.size[summed] if summed is not None else 1
        start = self._room(scope)
        entries = prod(self.size[n] for n in scope)
        self.steps.append((start, entries, states, first, len(tables)))
        return scope, start

    def _places(
        self, names: tuple[str, ...], axes: tuple[str, ...], shape: list[int]
    ) -> PlaceArray:
        """For each entry over ``axes`` the place in a table over ``names``."""
        total = np.zeros(shape, dtype=np.int32)
        stride = 1
        for name in reversed(names):
            along = [1] * len(axes)
            along[axes.index(name)] = self.size[name]
            total = total + np.int32(stride) * np.arange(self.size[name], dtype=np.int32).reshape(
                along
            )
            stride *= self.size[name]
        return total.ravel()
