"""How long a verdict takes: python -m tests.benchmarks.verdict.

A rich simulated case: one exact posterior, all causes, 2,048 draws of the numbers, everything.
The first call compiles, or loads what was compiled; it is shown apart.
"""

import time

import numpy as np

from rca.verdict.knowledge import shipped_knowledge
from rca.verdict.posterior import marginals, posterior
from rca.verdict.weigh import weigh
from rca.workshop.simulated_signs import draw_items
from rca.workshop.simulated_truth import draw_truth


def timed(words, call):
    """Print wall and processor time of a call."""
    wall, cpu = time.perf_counter(), time.process_time()
    out = call()
    print(
        f"{words:>34} {time.perf_counter() - wall:8.3f} s, processor "
        f"{time.process_time() - cpu:7.3f} s"
    )
    return out


def main():
    """Time each part once."""
    known = shipped_knowledge()
    drawn = [draw_items(np.random.default_rng(k), draw_truth(np.random.default_rng(k)), "rich")
             for k in range(12)]  # fmt: skip
    items, missing = max(drawn, key=lambda d: len(d[0]))
    print(f"{len(items)} items, {len({i.common_cause for i in items})} common causes")
    timed("first posterior", lambda: posterior(known, items))
    timed("posterior", lambda: posterior(known, items))
    timed("all causes", lambda: marginals(known, items, known.names("cause")))
    timed("whole verdict, 2,048 draws", lambda: weigh(items, missing, known, seed=1, draws=2048))


if __name__ == "__main__":
    main()
