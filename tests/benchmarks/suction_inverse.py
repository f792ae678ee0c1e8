"""How often the intervals hold, and which cause is taken for which, on invented records.

Run by hand: python -m tests.benchmarks.suction_inverse [replicates]. Every record is made by
tests/suction/synthetic.py; nothing is measured.
"""

import sys
import time
from collections import Counter
from dataclasses import replace

import numpy as np

from rca.suction.explanations import explain
from rca.suction.inverse import estimate_resistances
from tests.conftest import small_case
from tests.suction.synthetic import SCENARIOS, Truth, record

BAR = 1e5
CASE = small_case._fixture_function  # the plain function behind the fixture
EXCITATIONS = {
    "two speeds, warm-ups, rests": {},
    "one speed": {"two_speeds": False},
    "one temperature": {"one_temperature": True},
    "never at rest": {"rest": False},
    "one speed, one temperature, never at rest": {
        "two_speeds": False,
        "one_temperature": True,
        "rest": False,
    },
}


def drawn(rng: np.random.Generator, **excitation: bool) -> Truth:
    """A truth nobody has seen: each of three may grow."""

    def end(start: float, most: float) -> float:
        return start + float(rng.choice([0.0, rng.uniform(0.03, most)]))

    viscous = 0.036 * float(np.exp(0.25 * rng.normal()))
    quadratic = 0.02 * float(np.exp(0.15 * rng.normal()))
    return Truth(
        "drawn",
        viscous=(viscous, end(viscous, 0.3)),
        quadratic=(quadratic, end(quadratic, 0.2)),
        depression=(0.003, end(0.003, 0.15)),
        step_at=float(rng.uniform(0.2, 0.8)) if rng.random() < 0.3 else None,
        step_s=600.0,
        **excitation,
    )


def coverage(replicates: int) -> None:
    """Share of 90 % intervals that hold the truth, at start and end, by excitation."""
    case = CASE()
    print("coverage of the 90 % intervals (start and end together)")
    print(f"{'':44s}{'viscous':>9s}{'quadratic':>11s}{'depression':>12s}{'identified':>12s}")
    for name, excitation in EXCITATIONS.items():
        hits, identified = np.zeros(3), np.zeros(3)
        for seed in range(replicates):
            truth = drawn(np.random.default_rng(seed), **excitation)
            found = estimate_resistances(case, record(case, truth, seed=seed), seed=seed)
            assert not isinstance(found, str)
            inverse, _ = found
            tracks = (inverse.viscous, inverse.quadratic, inverse.depression)
            values = (truth.viscous, truth.quadratic, truth.depression)
            for j, (track, value) in enumerate(zip(tracks, values, strict=True)):
                for place in (0, -1):
                    hits[j] += track.p05[place] <= value[place] * BAR <= track.p95[place]
                identified[j] += track.identified_at_end
        share, known = hits / (2 * replicates), identified / replicates
        print(
            f"{name:44s}{share[0]:9.2f}{share[1]:11.2f}{share[2]:12.2f}"
            f"   {known[0]:.2f}/{known[1]:.2f}/{known[2]:.2f}"
        )


def confusion(replicates: int) -> None:
    """What is said of each truth, by excitation."""
    case = CASE()
    for name, excitation in EXCITATIONS.items():
        print(f"\n{name}")
        for scenario in SCENARIOS[1:]:
            said: Counter[str] = Counter()
            for seed in range(replicates):
                truth = replace(scenario, step_s=600.0, **excitation)
                found = estimate_resistances(case, record(case, truth, seed=seed), seed=seed)
                assert not isinstance(found, str)
                said[explain(case, *found, seed=seed).leading] += 1
            words = ", ".join(f"{word} {count}" for word, count in said.most_common())
            print(f"  {scenario.name:36s}{words}")


def main() -> None:
    """Both tables."""
    replicates = int(sys.argv[1]) if len(sys.argv) > 1 else 10
    start = time.perf_counter()
    coverage(3 * replicates)
    confusion(replicates)
    print(f"\n{replicates} replicates, {time.perf_counter() - start:.0f} s")


if __name__ == "__main__":
    main()
