"""Speed of the bubble models against SciPy on the same compiled equations; ratios in one run.

Run with ``python -m tests.benchmarks.bubble_speed`` from the checkout. Wall time is printed for
orientation; only ratios are worth comparing between machines. SciPy gets a compiled right-hand
side and, for the resolved model, its banded structure is left to BDF as a user would.
"""

import time

import numpy as np
from scipy.integrate import solve_ivp

from rca.physics import bubble_cells
from rca.physics.bubble import BATCH_GRID, OilSide, bubble_batch, gas_table, parameter_rows
from rca.physics.compression import AIR_GAS_CONSTANT
from rca.physics.lumped import lumped_batch

T0, P1, P2 = 323.15, 0.9e5, 211e5
HOLD = 0.1  # of the rise


def sample(n):
    """Radii 50 um to 1 mm and rises 0.5 to 10 ms, log-uniform."""
    rng = np.random.default_rng(1)
    radius = np.exp(rng.uniform(np.log(5e-5), np.log(1e-3), n))
    return radius, np.exp(rng.uniform(np.log(5e-4), np.log(1e-2), n))


def timed(function, *, repeat=3):
    """Best of some runs [s] and the last result."""
    best, result = np.inf, None
    for _ in range(repeat):
        start = time.perf_counter()
        result = function()
        best = min(best, time.perf_counter() - start)
    return best, result


def row_of(radius, rise):
    return parameter_rows(radius, T0, OilSide(), conduction_factor=1.0, delay_factor=1.0, stop_below=0.0, tolerance=1e-4, ramp_end=rise, stop_at_ignition=False)  # fmt: skip


def pieces(rise):
    """(start, end, pressure at start, slope) of ramp and hold."""
    return ((0.0, rise, P1, (P2 - P1) / rise), (rise, (1 + HOLD) * rise, P2, 0.0))


def scipy_lumped(radius, rise, *, method, rtol):
    from rca.physics.lumped_kernel import lumped_rate

    oil, par, table = OilSide(), row_of(radius, rise), gas_table()
    mass = (P1 + 2 * oil.tension / radius) * radius**3 / (AIR_GAS_CONSTANT * T0)
    y, peak, dy = np.array([radius, 0.0, T0]), T0, np.empty(3)
    for begin, end, p, slope in pieces(rise):

        def rate(t, state, p=p, slope=slope, begin=begin):
            lumped_rate(state, p + slope * (t - begin), slope, par, mass, table, dy)
            return dy.copy()

        atol = [rtol * 1e-2 * radius, rtol * 10.0, rtol * T0]
        found = solve_ivp(rate, (begin, end), y, method=method, rtol=rtol, atol=atol)
        y, peak = found.y[:, -1], max(peak, found.y[2].max())
    return peak


def scipy_resolved(radius, rise, *, inertial, method="BDF", rtol=1e-4):
    n_gas, n_oil = BATCH_GRID
    n_all = n_gas + n_oil
    par, table = row_of(radius, rise), gas_table()
    mass, oil, y, out = np.zeros(n_all), np.empty(n_oil), np.empty(n_all + 2), np.empty(14)
    nodes, line = np.array([0.0, rise, (1 + HOLD) * rise]), np.array([P1, P2, P2])
    bubble_cells.start(inertial, n_gas, n_oil, nodes, line, par, mass, oil, y, out)
    scratch = np.zeros((3, n_all))
    cap, cond, dy, side, peak = (
        np.empty(n_all),
        np.empty(n_all),
        np.empty(n_all + 2),
        np.empty(6),
        T0,
    )
    for begin, end, p, slope in pieces(rise):

        def rate(t, state, p=p, slope=slope, begin=begin):
            bubble_cells.evaluate(inertial, n_gas, n_all, state, p + slope * (t - begin), slope, par, mass, oil, table, cap, cond, scratch, dy, side)  # fmt: skip
            return dy.copy()

        found = solve_ivp(rate, (begin, end), y, method=method, rtol=rtol, atol=rtol * 1e-2)
        y, peak = found.y[:, -1], max(peak, found.y[2].max())
    return peak


def _show(name, rate, unit="histories/s"):
    print(f"  {name:<58}{rate:>12,.0f} {unit}")


def lumped():
    print("Lumped bubble (Keller-Miksis, one temperature)")
    radius, rise = sample(2000)
    few = slice(0, 12)
    exact = lumped_batch(radius, T0, P1, P2, rise, tolerance=1e-6).mean
    rates = {}
    for tolerance in (8e-4, 1e-4):
        for workers in (1, 2):
            spent, peaks = timed(lambda tol=tolerance, w=workers: lumped_batch(radius, T0, P1, P2, rise, tolerance=tol, workers=w))  # fmt: skip
            rates[tolerance, workers] = radius.size / spent
            error = np.max(np.abs(peaks.mean - exact) / (exact - T0))
            _show(f"compiled, tolerance {tolerance:g}, {workers} thread(s), error {error:.2%} of rise", radius.size / spent)  # fmt: skip
    for method in ("LSODA", "Radau", "BDF"):
        spent, peaks = timed(lambda m=method: np.array([scipy_lumped(r, t, method=m, rtol=1e-4) for r, t in zip(radius[few], rise[few], strict=True)]), repeat=1)  # fmt: skip
        error = np.max(np.abs(peaks - exact[few]) / (exact[few] - T0))
        rate = peaks.size / spent
        _show(f"solve_ivp {method}, rtol 1e-4, compiled rate, error {error:.2%}", rate)
        print(f"    ratio per core at default tolerance {rates[8e-4, 1] / rate:,.0f}, at 1e-4 {rates[1e-4, 1] / rate:,.0f}")  # fmt: skip


def resolved():
    radius, rise = sample(400)
    few = slice(0, 4)
    for inertial, count in ((False, 400), (True, 40)):
        print(f"Resolved bubble, {'with' if inertial else 'without'} inertia")
        r, t = radius[:count], rise[:count]
        spent, peaks = timed(lambda i=inertial, r=r, t=t: bubble_batch(r, T0, P1, P2, t, hold=HOLD * t, stop_below=0.0, inertial=i))  # fmt: skip
        ours = count / spent
        _show("compiled, default tolerance, 1 thread", ours)
        for method in ("BDF", "LSODA"):
            begun = time.perf_counter()
            other = np.array([scipy_resolved(a, b, inertial=inertial, method=method) for a, b in zip(radius[few], rise[few], strict=True)])  # fmt: skip
            rate = other.size / (time.perf_counter() - begun)
            apart = np.max(np.abs(other - peaks.core[few]))
            _show(f"solve_ivp {method}, rtol 1e-4, same compiled rate ({apart:.1f} K apart)", rate)
            print(f"    ratio {ours / rate:,.0f}")


def uncertainty():
    from rca.discharge.check import check_discharge
    from tests.benchmarks._machine import machine

    print("Discharge check, 10,000 samples a kind of bubble (2^14 points each)")
    for workers in (1, 2):
        begun = time.perf_counter()
        check_discharge(machine(), (0.85e5, 0.03e5), 0.01, None, seed=1, samples=10_000, workers=workers)  # fmt: skip
        print(f"  {workers} thread(s): {time.perf_counter() - begun:.1f} s")


def main():
    begun = time.perf_counter()
    bubble_batch(1e-4, T0, P1, P2, 1e-3)
    bubble_batch(1e-4, T0, P1, P2, 1e-3, inertial=True)
    lumped_batch(1e-4, T0, P1, P2, 1e-3)
    print(
        f"Kernels ready after {time.perf_counter() - begun:.1f} s (compiled once, then read from disk)"
    )
    lumped()
    resolved()
    uncertainty()


if __name__ == "__main__":
    main()
