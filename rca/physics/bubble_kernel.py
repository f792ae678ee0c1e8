"""Compiled time integration of the resolved bubble: one history, or a batch of linear ramps.

Rosenbrock W-method with the conduction block factored as a tridiagonal and the couplings to
radius, wall speed and pressure rate eliminated as borders. No threads are started; the kernels
release the interpreter lock.
"""

import numpy as np
from numba import njit

from rca.physics.bubble_cells import (
    NOT_FINITE,
    O_CORE_RAMP_END,
    O_DELAY_INTEGRAL,
    O_REJECTED,
    O_STATUS,
    O_STEPS,
    O_TIME,
    OUTSIDE_TABLE,
    P_GAS_CONSTANT,
    P_OIL_DENSITY,
    P_OIL_VISCOSITY,
    P_RAMP_END,
    P_SOUND,
    P_STOP_AT_IGNITION,
    P_STOP_BELOW,
    P_TENSION,
    P_TOLERANCE,
    TABLE_START,
    TABLE_STEP,
    TOO_MANY_STEPS,
    TOO_SMALL_STEP,
    evaluate,
    start,
)
from rca.physics.bubble_notes import note, record
from rca.physics.rosenbrock import COUPLING, ERROR, GAMMA, NEW, NODES, STAGE

_SAFETY, _SHRINK, _GROW = 0.9, 0.2, 4.0
_MOST_STEPS = 400_000


@njit(cache=True, nogil=True)
def _factor(
    n_all: int,
    hg: float,
    own: np.ndarray,
    cap: np.ndarray,
    cond: np.ndarray,
    low: np.ndarray,
    diag: np.ndarray,
    up: np.ndarray,
) -> None:
    """LU of I - hg J for conduction, ``diag`` inverted; ``own`` is the compression term."""
    for i in range(n_all):
        left = cond[i - 1] if i > 0 else 0.0
        right = cond[i] if i < n_all - 1 else 0.0
        diag[i] = 1.0 + hg * ((left + right) / cap[i] - own[i])
        up[i] = -hg * right / cap[i]
        low[i] = -hg * left / cap[i]
        if i > 0:
            low[i] *= diag[i - 1]
            diag[i] -= low[i] * up[i - 1]
        diag[i] = 1.0 / diag[i]


@njit(cache=True, nogil=True)
def _solve(n_all: int, low: np.ndarray, diag: np.ndarray, up: np.ndarray, x: np.ndarray) -> None:
    """Solve in place; ``x`` starts at its temperature part."""
    for i in range(1, n_all):
        x[i] -= low[i] * x[i - 1]
    x[n_all - 1] *= diag[n_all - 1]
    for i in range(n_all - 2, -1, -1):
        x[i] = (x[i] - up[i] * x[i + 1]) * diag[i]


@njit(cache=True, nogil=True)
def _borders(
    n_gas: int,
    n_all: int,
    y: np.ndarray,
    side: np.ndarray,
    par: np.ndarray,
    mass: np.ndarray,
    cap: np.ndarray,
    cond: np.ndarray,
    rows: np.ndarray,
    edge: np.ndarray,
) -> None:
    """Couplings of R, U and dp/dt to the temperatures: rows a, b, f; edge e_U, F_R, F_U, F_pi."""
    rs, c, rho = par[P_GAS_CONSTANT], par[P_SOUND], par[P_OIL_DENSITY]
    r, u, p, spare = y[0], y[1], side[0], side[4]
    effective = (1.0 - u / c) * r + 4.0 * par[P_OIL_VISCOSITY] / (rho * c)
    by_p = (1.0 + u / c) / (rho * effective)
    for i in range(n_all):
        gas = i < n_gas
        here = rs * mass[i] / cap[i] if gas else 0.0
        before = rs * mass[i - 1] / cap[i - 1] if 0 < i <= n_gas else 0.0
        after = rs * mass[i + 1] / cap[i + 1] if i + 1 < n_gas else 0.0
        left = cond[i - 1] if i > 0 else 0.0
        right = cond[i] if i < n_all - 1 else 0.0
        rows[0, i] = here * y[2 + i] / p
        rows[1, i] = (left * (before - here) + right * (after - here)) / spare
        rows[2, i] = by_p * p * mass[i] / side[5] if gas else 0.0
    edge[0] = -3.0 * p * r * r / spare
    edge[1] = by_p * (-3.0 * p / r + 2.0 * par[P_TENSION] / (r * r))
    edge[2] = -by_p * 4.0 * par[P_OIL_VISCOSITY] / r - 3.0 * u / effective
    edge[3] = r / (rho * c * effective)


@njit(cache=True, nogil=True)
def _dot(n: int, a: np.ndarray, b: np.ndarray) -> float:
    total = 0.0
    for i in range(n):
        total += a[i] * b[i]
    return total


@njit(cache=True, nogil=True)
def _solve_bordered(
    n_all: int,
    hg: float,
    rows: np.ndarray,
    edge: np.ndarray,
    z: np.ndarray,
    x: np.ndarray,
) -> None:
    """Finish a solve whose temperature part is done: eliminate dp/dt, U and R."""
    bz = 1.0 - _dot(n_all, rows[1], z)
    fz = _dot(n_all, rows[2], z) + edge[3]
    by, fy = _dot(n_all, rows[1], x[2:]), _dot(n_all, rows[2], x[2:])
    full = 1.0 - hg * edge[2] - hg * hg * edge[1] - hg * fz * edge[0] / bz
    x[1] = (x[1] + hg * (edge[1] * x[0] + fy + fz * by / bz)) / full
    x[0] += hg * x[1]
    rate = (by + edge[0] * x[1]) / bz
    for i in range(n_all):
        x[2 + i] += rate * z[i]


@njit(cache=True, nogil=True)
def _norm(inertial: bool, n_all: int, y: np.ndarray, new: np.ndarray, err: np.ndarray,
          p: float, par: np.ndarray) -> float:  # fmt: skip
    """Weighted root mean square of the error estimate; 1 is the tolerance."""
    tol = par[P_TOLERANCE]
    total, worst = 0.0, 0.0
    for i in range(2, n_all + 2):
        e = err[i] / (tol * max(y[i], new[i]))
        total += e * e
    total /= n_all
    if inertial:
        e = err[0] / (0.3 * tol * max(y[0], new[0]))
        worst = e * e
        speed = np.sqrt(p / par[P_OIL_DENSITY])
        e = err[1] / (tol * (max(abs(y[1]), abs(new[1])) + speed))
        worst = max(worst, e * e)
    return float(np.sqrt(max(total, worst)))


@njit(cache=True, nogil=True)
def _one_step(
    inertial: bool,
    n_gas: int,
    n_all: int,
    h: float,
    p_line: float,
    slope: float,
    y: np.ndarray,
    par: np.ndarray,
    mass: np.ndarray,
    oil: np.ndarray,
    table: np.ndarray,
    cells: np.ndarray,
    scratch: np.ndarray,
    rows: np.ndarray,
    stages: np.ndarray,
    side: np.ndarray,
    edge: np.ndarray,
    first: np.ndarray,
) -> None:
    """Stages 0..3 of one step; stage vectors in ``stages``; ``first`` is dy at the start.

    ``cells`` rows: 0 cap, 1 cond at the start of the step; 2 low, 3 diag, 4 up, 5 own, 6 z;
    7, 8 scratch.
    """
    hg = h * GAMMA
    p, dp, rs = side[0], side[1], par[P_GAS_CONSTANT]
    cap, cond, own = cells[0], cells[1], cells[5]
    for i in range(n_all):
        own[i] = rs * mass[i] * dp / (p * cap[i]) if i < n_gas else 0.0
    _factor(n_all, hg, own, cap, cond, cells[2], cells[3], cells[4])
    if inertial:
        _borders(n_gas, n_all, y, side, par, mass, cap, cond, rows, edge)
        for i in range(n_all):
            cells[6, i] = hg * rows[0, i]
        _solve(n_all, cells[2], cells[3], cells[4], cells[6])
    trial, rate, aside = stages[4], stages[5], stages[6]
    n = n_all + 2
    for s in range(4):
        if s == 0:
            rate[:n] = first[:n]
        else:
            trial[:n] = y
            for j in range(s):
                a, done = STAGE[s, j], stages[j]
                for i in range(n):
                    trial[i] += a * done[i]
            dt = NODES[s] * h
            evaluate(inertial, n_gas, n_all, trial, p_line + slope * dt, slope, par, mass, oil,
                     table, cells[7], cells[8], scratch, rate, aside)  # fmt: skip
        x = stages[s]
        for i in range(n):
            x[i] = hg * rate[i]
        for j in range(s):
            a, done = GAMMA * COUPLING[s, j], stages[j]
            for i in range(n):
                x[i] += a * done[i]
        _solve(n_all, cells[2], cells[3], cells[4], x[2:])
        if inertial:
            _solve_bordered(n_all, hg, rows, edge, cells[6], x)
        else:
            x[0], x[1] = 0.0, 0.0


@njit(cache=True, nogil=True)
def run(
    inertial: bool,
    n_gas: int,
    n_oil: int,
    t_nodes: np.ndarray,
    p_nodes: np.ndarray,
    par: np.ndarray,
    table: np.ndarray,
    limits: np.ndarray,
    delays: np.ndarray,
    frame: np.ndarray,
    out: np.ndarray,
    history: np.ndarray,
    y: np.ndarray,
) -> int:
    """One history through the piecewise linear line pressure; returns the rows of ``history``."""
    n_all = n_gas + n_oil
    mass, oil = np.zeros(n_all), np.empty(n_oil)
    cells, rows, scratch = np.empty((9, n_all)), np.empty((3, n_all)), np.zeros((3, n_all))
    stages, side, edge, before = np.empty((7, n_all + 2)), np.empty(6), np.empty(4), np.zeros(2)
    first, new, err = np.empty(n_all + 2), np.empty(n_all + 2), np.empty(n_all + 2)
    start(inertial, n_gas, n_oil, t_nodes, p_nodes, par, mass, oil, y, out)
    before[0] = y[2]
    t, count, segment, last = 0.0, 0, 0, t_nodes.size - 1
    h = 1e-4 * par[P_RAMP_END]
    slope = (p_nodes[1] - p_nodes[0]) / (t_nodes[1] - t_nodes[0])
    evaluate(inertial, n_gas, n_all, y, p_nodes[0], slope, par, mass, oil, table, cells[0],
             cells[1], scratch, first, side)  # fmt: skip
    count = record(t, n_gas, y, side, mass, history, count)
    while True:
        step = min(h, t_nodes[segment + 1] - t)
        lands = step >= t_nodes[segment + 1] - t
        if step < 1e-13 * t_nodes[last] and not lands:
            out[O_STATUS] = TOO_SMALL_STEP
            break
        out[O_STEPS] += 1.0
        if out[O_STEPS] > _MOST_STEPS:
            out[O_STATUS] = TOO_MANY_STEPS
            break
        p_line = p_nodes[segment] + slope * (t - t_nodes[segment])
        _one_step(inertial, n_gas, n_all, step, p_line, slope, y, par, mass, oil, table, cells,
                  scratch, rows, stages, side, edge, first)  # fmt: skip
        new[:], err[:] = y, 0.0
        for s in range(4):
            a, b, done = NEW[s], ERROR[s], stages[s]
            for i in range(n_all + 2):
                new[i] += a * done[i]
                err[i] += b * done[i]
        size = _norm(inertial, n_all, y, new, err, side[0], par)
        if not np.isfinite(size) or new[2] < TABLE_START or (inertial and new[0] <= 0.0):
            size = 1e3
            if step < 1e-9 * par[P_RAMP_END]:
                out[O_STATUS] = NOT_FINITE
                break
        factor = min(_GROW, max(_SHRINK, _SAFETY * (size + 1e-12) ** (-1.0 / 3.0)))
        if size > 1.0:
            out[O_REJECTED] += 1.0
            h = step * factor
            continue
        t = t_nodes[segment + 1] if lands else t + step
        h = max(h, step * factor) if lands else step * factor
        y[:] = new
        if lands:
            segment += 1
            done = segment == last
            if not done:
                slope = (p_nodes[segment + 1] - p_nodes[segment]) / (
                    t_nodes[segment + 1] - t_nodes[segment]
                )
        p_line = (
            p_nodes[segment] + slope * (t - t_nodes[segment]) if segment < last else p_nodes[last]
        )
        evaluate(inertial, n_gas, n_all, y, p_line, slope, par, mass, oil, table, cells[0],
                 cells[1], scratch, first, side)  # fmt: skip
        y[0] = side[2]
        note(t, step, n_gas, y, side, before, mass, par, limits, delays, frame, out)
        count = record(t, n_gas, y, side, mass, history, count)
        out[O_TIME] = t
        if lands and t >= par[P_RAMP_END] and out[O_CORE_RAMP_END] == 0.0:
            out[O_CORE_RAMP_END] = y[2]
        if y[2] > TABLE_START + TABLE_STEP * (table.shape[1] - 2):
            out[O_STATUS] = OUTSIDE_TABLE
            break
        ignited = par[P_STOP_AT_IGNITION] > 0.0 and out[O_DELAY_INTEGRAL] >= 1.0
        if segment == last or ignited or (t >= par[P_RAMP_END] and y[2] < par[P_STOP_BELOW]):
            break
    return count


@njit(cache=True, nogil=True)
def run_batch(
    inertial: np.ndarray,
    n_gas: int,
    n_oil: int,
    ramps: np.ndarray,
    pars: np.ndarray,
    table: np.ndarray,
    limits: np.ndarray,
    delays: np.ndarray,
    frame: np.ndarray,
    outs: np.ndarray,
    begin: int,
    end: int,
) -> None:
    """Linear ramps with a hold, rows ``begin`` to ``end``; a ramp row = p1, p2, rise, end time."""
    history = np.empty((0, 6))
    y = np.empty(n_gas + n_oil + 2)
    t_nodes, p_nodes = np.empty(3), np.empty(3)
    for i in range(begin, end):
        t_nodes[0], t_nodes[1], t_nodes[2] = 0.0, ramps[i, 2], ramps[i, 3]
        p_nodes[0], p_nodes[1], p_nodes[2] = ramps[i, 0], ramps[i, 1], ramps[i, 1]
        run(inertial[i], n_gas, n_oil, t_nodes, p_nodes, pars[i], table, limits, delays, frame,
            outs[i], history, y)  # fmt: skip
