"""A year of inlet samples, one a second: time and memory of the whole evaluation.

Run by hand: python -m tests.benchmarks.suction_year [days]. The record is generated block by
block and never held whole; nothing is measured.
"""

import resource
import sys
import time
from collections.abc import Iterator

import numpy as np

from rca.base.source import Source
from rca.suction.inverse import estimate_resistances
from rca.suction.measured import measure_inlet
from rca.suction.stream import Block, evaluate_blocks
from tests.conftest import small_case

BLOCK = 1 << 20
START = 1.75e9


def blocks(days: float, clock: list[float]) -> Iterator[Block]:
    """Blocks of a pump that runs 18 h a day and whose strainer clogs; time spent here is kept."""
    rng = np.random.default_rng(1)
    noise = rng.normal(0.0, 300.0, BLOCK)
    total = int(days * 86400)
    for begin in range(0, total, BLOCK):
        tick = time.perf_counter()
        n = min(BLOCK, total - begin)
        second = np.arange(begin, begin + n, dtype=float)
        hour = second / 3600.0 % 24.0
        run = hour >= 6.0
        warm = np.where(run, 323.0 - 25.0 * np.exp(-(hour - 6.0) / 1.2), 298.0)
        speed = np.where(run, 24.67, 0.0)
        grown = 3.6e3 + 2.2e4 * second / total
        pressure = 1.0e5 - np.where(run, grown * np.exp(-0.04 * (warm - 323.0)) + 2.0e3, 0.0)
        block = Block(
            time=START + second, pressure=pressure + noise[:n], speed=speed, temperature=warm
        )
        clock[0] += time.perf_counter() - tick
        yield block


def peak() -> float:
    """Most memory this process has held [MB]."""
    return resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024.0


def main() -> None:
    """Once through."""
    days = float(sys.argv[1]) if len(sys.argv) > 1 else 365.0
    case = small_case._fixture_function()
    before = peak()
    making = [0.0]
    begin = time.perf_counter()
    stats, pooled = evaluate_blocks(
        case,
        blocks(days, making),
        start=START,
        end=START + days * 86400.0,
        source=Source(file="made", locator="benchmark"),
    )
    middle = time.perf_counter()
    measured = measure_inlet(case, pooled, limit=0.8e5)
    after = time.perf_counter()
    found = estimate_resistances(case, pooled, seed=1)
    end = time.perf_counter()
    assert measured is not None
    assert not isinstance(found, str)
    viscous = found[0].viscous
    print(
        f"{stats.samples / 1e6:.1f} million samples, blocks of {BLOCK / 1e6:.1f} million: "
        f"every sample against the clean line and pooled {middle - begin - making[0]:.1f} s "
        f"(making them {making[0]:.1f} s), states of the machine {after - middle:.1f} s, "
        f"resistances {end - after:.1f} s"
    )
    print(f"memory before {before:.0f} MB, at most {peak():.0f} MB")
    print(
        f"viscous loss {viscous.p50[0] / 1e5:.3f} to {viscous.p50[-1] / 1e5:.3f} bar; below the "
        f"limit {stats.below_limit} samples; residual {stats.p05:.0f} to {stats.p95:.0f} Pa"
    )


if __name__ == "__main__":
    main()
