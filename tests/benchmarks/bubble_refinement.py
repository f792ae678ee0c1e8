"""Grid and tolerance refinement of the resolved bubble: ``python -m tests.benchmarks.bubble_refinement``.

Prints, as a share of the adiabatic rise, how far the peaks are from a grid and a tolerance finer
than any in use, and how far they are from an independent computation of the same problem. With
``--figure FILE`` the refinement is drawn as well.
"""

import argparse
from pathlib import Path

import numpy as np

from rca.physics.bubble import BATCH_GRID, CORE_GRID, BubblePeaks, bubble_history
from rca.physics.compression import adiabatic_end_temperature
from rca.physics.thermal_regime import radius_at_peclet

T0, P1, P2, RISE = 313.15, 1e5, 172.25e5, 1e-3
IDEAL = float(adiabatic_end_temperature(T0, P1, P2)) - T0
NUMBERS = (0.1, 1.0, 10.0, 100.0)
GRIDS = ((6, 3), (12, 5), BATCH_GRID, CORE_GRID, (96, 48))
FINE = (192, 96)
TOLERANCES = (1e-2, 3e-3, 1e-3, 5e-4, 1e-4, 1e-5)
# core, mean, wall [K] of an independent computation (method of lines, air of Cantera)
OTHER = {
    0.1: (418, 357, 318), 0.3: (507, 396, 323), 1: (659, 464, 337), 3: (856, 557, 358),
    10: (1150, 704, 378), 30: (1245, 875, 389), 100: (1245, 1021, 395), 1000: (1245, 1168, 400),
}  # fmt: skip


def peaks(
    number: float, grid: tuple[int, int], tolerance: float, *, inertial: bool
) -> BubblePeaks:
    """Peaks of one bubble at a Peclet number."""
    return bubble_history(
        radius_at_peclet(number, RISE, T0, P1), T0, [0.0, RISE, 2 * RISE], [P1, P2, P2],
        inertial=inertial, grid=grid, tolerance=tolerance,
    ).peaks  # fmt: skip


def apart(one: BubblePeaks, other: BubblePeaks) -> tuple[float, float, float]:
    """Core, mean and wall apart, as shares of the adiabatic rise."""
    pairs = ((one.core, other.core), (one.mean, other.mean), (one.wall, other.wall))
    return tuple(float(abs(a[0] - b[0])) / IDEAL for a, b in pairs)  # type: ignore[return-value]


def by_grid(*, inertial: bool) -> dict[float, list[float]]:
    """Largest of the three errors, per Peclet number, over the grids."""
    found = {}
    for number in NUMBERS:
        exact = peaks(number, FINE, 1e-6, inertial=inertial)
        found[number] = [
            max(apart(peaks(number, grid, 1e-6, inertial=inertial), exact)) for grid in GRIDS
        ]
    return found


def by_tolerance(*, inertial: bool) -> dict[float, list[float]]:
    """Largest of the three errors, per Peclet number, over the tolerances, on the usual grid."""
    found = {}
    for number in NUMBERS:
        exact = peaks(number, CORE_GRID, 1e-7, inertial=inertial)
        found[number] = [
            max(apart(peaks(number, CORE_GRID, tol, inertial=inertial), exact))
            for tol in TOLERANCES
        ]
    return found


def show(title: str, heads: tuple[object, ...], rows: dict[float, list[float]]) -> None:
    """A table of errors in per cent of the rise."""
    print(title)
    print("  Pe      " + "".join(f"{h!s:>12}" for h in heads))
    for number, errors in rows.items():
        print(f"  {number:<8g}" + "".join(f"{100 * e:>11.3f}%" for e in errors))


def against_other() -> None:
    """Errors against the independent computation."""
    print("against an independent computation, usual grid, tolerance 1e-5 (per cent of the rise)")
    print("  Pe              core        mean        wall")
    for number, expected in OTHER.items():
        found = peaks(number, CORE_GRID, 1e-5, inertial=False)
        values = (found.core[0], found.mean[0], found.wall[0])
        shares = [100 * (a - b) / IDEAL for a, b in zip(values, expected, strict=True)]
        print(f"  {number:<8g}" + "".join(f"{s:>+11.2f}%" for s in shares))


def draw(
    path: Path, grids: dict[float, list[float]], tolerances: dict[float, list[float]]
) -> None:
    """Error against cells and against tolerance."""
    from matplotlib.figure import Figure

    figure = Figure(figsize=(6.3, 2.8), layout="constrained")
    left, right = figure.subplots(1, 2, sharey=True)
    cells = [g[0] for g in GRIDS]
    for (number, one), mark in zip(grids.items(), "os^D", strict=True):
        left.loglog(cells, np.maximum(one, 1e-6), marker=mark, label=f"Pe {number:g}")
        right.loglog(TOLERANCES, np.maximum(tolerances[number], 1e-6), marker=mark)
    left.loglog(cells, 0.3 * (cells[0] / np.array(cells)) ** 2, "k:", label="second order")
    left.set(xlabel="gas cells", ylabel="error over the adiabatic rise")
    right.set(xlabel="tolerance")
    left.legend(fontsize=7)
    figure.savefig(path, dpi=120)


def main() -> None:
    """Print the tables; draw them where asked."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--figure", type=Path)
    where = parser.parse_args().figure
    for inertial in (False, True):
        words = "with inertia" if inertial else "following the line pressure"
        grids, tolerances = by_grid(inertial=inertial), by_tolerance(inertial=inertial)
        show(f"grids (gas, oil cells), {words}, tolerance 1e-6", GRIDS, grids)
        show(f"tolerances, {words}, grid {CORE_GRID}", TOLERANCES, tolerances)
        if where is not None and not inertial:
            draw(where, grids, tolerances)
    against_other()


if __name__ == "__main__":
    main()
