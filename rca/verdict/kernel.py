"""Sums of products over tables, compiled: the inner loop of exact inference."""

import numba
import numpy as np
import numpy.typing as npt

FloatArray = npt.NDArray[np.float64]
IntArray = npt.NDArray[np.int64]
PlaceArray = npt.NDArray[np.int32]
SMALL, LARGE = 1e-30, 1e30  # tables beyond are scaled
WIDTH = 8  # batch members run together; a constant, so that the compiler unrolls the loops over it


@numba.njit(cache=True, nogil=True)
def run_steps(
    buffer: FloatArray, steps: IntArray, inputs: IntArray, maps: PlaceArray
) -> FloatArray:
    """Fill the buffer step by step; returns the logarithm of the scale of each batch member.

    ``buffer`` (entries, WIDTH) holds all tables one after another, the given ones filled in. A row
    of ``steps`` is (offset of the result, its entries, states summed, first row of ``inputs``,
    rows): result[o] = sum over v of the product of input[map[o * states + v]]. A row of ``inputs``
    is (offset of a table, first place of its map in ``maps``).
    """
    logs = np.zeros(WIDTH)
    product = np.empty(WIDTH)
    total = np.empty(WIDTH)
    for s in range(steps.shape[0]):
        start, entries, states, first, count = steps[s]
        for o in range(entries):
            for d in range(WIDTH):
                total[d] = 0.0
            for v in range(states):
                place = o * states + v
                a = inputs[first, 0] + maps[inputs[first, 1] + place]
                for d in range(WIDTH):
                    product[d] = buffer[a, d]
                for k in range(first + 1, first + count):
                    b = inputs[k, 0] + maps[inputs[k, 1] + place]
                    for d in range(WIDTH):
                        product[d] *= buffer[b, d]
                for d in range(WIDTH):
                    total[d] += product[d]
            for d in range(WIDTH):
                buffer[start + o, d] = total[d]
        _scale(buffer[start : start + entries], logs)
    return logs


@numba.njit(cache=True, nogil=True)
def _scale(table: FloatArray, logs: FloatArray) -> None:
    """Divide each batch member by its largest entry where that is very small or large."""
    for d in range(WIDTH):
        top = 0.0
        for o in range(table.shape[0]):
            top = max(top, table[o, d])
        if top > 0.0 and (top < SMALL or top > LARGE):
            logs[d] += np.log(top)
            for o in range(table.shape[0]):
                table[o, d] /= top
