"""Compiled kernel of the lumped bubble: Keller-Miksis with one gas temperature.

State y = [R, U, T]; volumes as r^3 (the factor 4 pi/3 cancels). Heat flows through a layer of
thickness min(sqrt(R alpha/|U|), R/pi). Nothing here checks its input; no threads are started.
Cached on disk by this file's date: after a change in ``bubble_cells`` touch this file too.
"""

import numpy as np
from numba import njit

from rca.physics.bubble_cells import (
    FAST,
    NOT_FINITE,
    P_CONDUCTION_FACTOR,
    P_GAS_CONSTANT,
    P_OIL_DENSITY,
    P_OIL_VISCOSITY,
    P_RADIUS,
    P_SOUND,
    P_TEMPERATURE,
    P_TENSION,
    P_TOLERANCE,
    TABLE_START,
    TABLE_STEP,
    TOO_MANY_STEPS,
    wall_acceleration,
)
from rca.physics.rosenbrock import (
    RODAS_COUPLING,
    RODAS_GAMMA,
    RODAS_NODES,
    RODAS_STAGE,
    RODAS_TIME,
)

L_STATUS, L_MEAN, L_PRESSURE, L_RADIUS_MIN, L_STEPS, L_TIME = range(6)
_MOST_STEPS = 200_000


@njit(cache=True, nogil=True, fastmath=FAST)
def lumped_rate(
    y: np.ndarray,
    p_line: float,
    dp_line: float,
    par: np.ndarray,
    mass: float,
    table: np.ndarray,
    dy: np.ndarray,
) -> float:
    """Right-hand side; returns the gas pressure."""
    r, u, t = y[0], y[1], y[2]
    rs = par[P_GAS_CONSTANT]
    place = (t - TABLE_START) / TABLE_STEP
    j = min(max(int(place), 0), table.shape[1] - 2)
    f = place - j
    cp = table[0, j] + f * (table[0, j + 1] - table[0, j])
    k = (table[1, j] + f * (table[1, j + 1] - table[1, j])) * par[P_CONDUCTION_FACTOR]
    p = rs * mass * t / r**3
    diffusivity = k * rs * t / (p * cp)
    layer = r / np.pi
    if abs(u) * layer * layer > r * diffusivity:
        layer = np.sqrt(r * diffusivity / abs(u))
    heat = 3.0 * r * r * k * (par[P_TEMPERATURE] - t) / layer
    dt = (heat - 3.0 * p * r * r * u) / (mass * (cp - rs))
    dp = p * (dt / t - 3.0 * u / r)
    dy[0], dy[2] = u, dt
    dy[1] = wall_acceleration(r, u, p, dp, p_line, dp_line, par)
    return float(p)


@njit(cache=True, nogil=True, fastmath=FAST)
def _jacobian(
    y: np.ndarray,
    p_line: float,
    dp_line: float,
    par: np.ndarray,
    mass: float,
    table: np.ndarray,
    base: np.ndarray,
    work: np.ndarray,
    jac: np.ndarray,
) -> float:
    """Jacobian by forward differences; returns the time derivative of the acceleration."""
    moved, rate = work[6], work[7]
    for j in range(3):
        for i in range(3):
            moved[i] = y[i]
        step = 1e-7 * (abs(y[j]) + (1e-3 if j == 1 else 0.0))
        moved[j] += step
        lumped_rate(moved, p_line, dp_line, par, mass, table, rate)
        for i in range(3):
            jac[i, j] = (rate[i] - base[i]) / step
    r, u, c = y[0], y[1], par[P_SOUND]
    heavy = (1.0 - u / c) * r * par[P_OIL_DENSITY] + 4.0 * par[P_OIL_VISCOSITY] / c
    return float(-dp_line * (1.0 + u / c) / heavy)


@njit(cache=True, nogil=True, fastmath=FAST)
def _invert(hg: float, jac: np.ndarray, inv: np.ndarray) -> None:
    """Inverse of I - hg J, three by three."""
    a, b, c = 1.0 - hg * jac[0, 0], -hg * jac[0, 1], -hg * jac[0, 2]
    d, e, f = -hg * jac[1, 0], 1.0 - hg * jac[1, 1], -hg * jac[1, 2]
    g, h, i = -hg * jac[2, 0], -hg * jac[2, 1], 1.0 - hg * jac[2, 2]
    det = a * (e * i - f * h) - b * (d * i - f * g) + c * (d * h - e * g)
    inv[0, 0], inv[0, 1], inv[0, 2] = (
        (e * i - f * h) / det,
        (c * h - b * i) / det,
        (b * f - c * e) / det,
    )
    inv[1, 0], inv[1, 1], inv[1, 2] = (
        (f * g - d * i) / det,
        (a * i - c * g) / det,
        (c * d - a * f) / det,
    )
    inv[2, 0], inv[2, 1], inv[2, 2] = (
        (d * h - e * g) / det,
        (b * g - a * h) / det,
        (a * e - b * d) / det,
    )


@njit(cache=True, nogil=True, fastmath=FAST)
def _step(
    h: float,
    p_line: float,
    slope: float,
    by_time: float,
    y: np.ndarray,
    first: np.ndarray,
    par: np.ndarray,
    mass: float,
    table: np.ndarray,
    work: np.ndarray,
    inv: np.ndarray,
) -> None:
    """The six stages of one step, in rows 0 to 5 of ``work``; rows 6 to 8 are scratch."""
    hg = h * RODAS_GAMMA
    trial, rate, right = work[6], work[7], work[8]
    for s in range(6):
        for i in range(3):
            trial[i] = y[i]
            right[i] = 0.0
            for j in range(s):
                trial[i] += RODAS_STAGE[s, j] * work[j, i]
                right[i] += RODAS_COUPLING[s, j] * work[j, i]
        if s == 0:
            for i in range(3):
                rate[i] = first[i]
        else:
            lumped_rate(trial, p_line + slope * RODAS_NODES[s] * h, slope, par, mass, table, rate)
        rate[1] += h * RODAS_TIME[s] * by_time
        for i in range(3):
            right[i] = hg * rate[i] + RODAS_GAMMA * right[i]
        for i in range(3):
            work[s, i] = inv[i, 0] * right[0] + inv[i, 1] * right[1] + inv[i, 2] * right[2]


@njit(cache=True, nogil=True, fastmath=FAST)
def _size(y: np.ndarray, new: np.ndarray, work: np.ndarray, p: float, par: np.ndarray) -> float:
    """Root mean square of the weighted error of the step; also writes the new state."""
    square = 0.0
    for i in range(3):
        error = work[5, i]
        total = y[i] + error
        for j in range(5):
            total += RODAS_STAGE[5, j] * work[j, i]
        new[i] = total
        scale = max(abs(y[i]), abs(total))
        if i == 1:
            scale += np.sqrt(p / par[P_OIL_DENSITY])
        square += (error / scale) ** 2
    if not np.isfinite(square):
        return 1e30
    return float(np.sqrt(square / 3.0) / par[P_TOLERANCE])


@njit(cache=True, nogil=True, fastmath=FAST)
def _crest(a: float, b: float, slope_a: float, slope_b: float, h: float) -> float:
    """Largest value of the cubic through two points with their slopes, a step ``h`` apart."""
    best = max(a, b)
    if slope_a <= 0.0 or slope_b >= 0.0:
        return best
    c, d = h * slope_a, h * slope_b
    # derivative of the Hermite cubic: q2 x^2 + q1 x + c
    q2, q1 = 6.0 * (a - b) + 3.0 * (c + d), 6.0 * (b - a) - 4.0 * c - 2.0 * d
    x = 2.0 * c / (np.sqrt(max(q1 * q1 - 4.0 * q2 * c, 0.0)) - q1)
    value = a + x * (c + x * (0.5 * q1 + x * q2 / 3.0))
    return max(best, value) if 0.0 <= x <= 1.0 else best


@njit(cache=True, nogil=True, fastmath=FAST)
def run_lumped(
    ramps: np.ndarray,
    pars: np.ndarray,
    table: np.ndarray,
    outs: np.ndarray,
    begin: int,
    end: int,
) -> None:
    """Linear ramps with a hold; a ramp row = p1, p2, rise, end time."""
    y, new, first = np.empty(3), np.empty(3), np.empty(3)
    work, jac, inv = np.empty((9, 3)), np.empty((3, 3)), np.empty((3, 3))
    for n in range(begin, end):
        par, out = pars[n], outs[n]
        p1, p2, rise, last = ramps[n, 0], ramps[n, 1], ramps[n, 2], ramps[n, 3]
        gas = p1 + 2.0 * par[P_TENSION] / par[P_RADIUS]
        mass = gas * par[P_RADIUS] ** 3 / (par[P_GAS_CONSTANT] * par[P_TEMPERATURE])
        y[0], y[1], y[2] = par[P_RADIUS], 0.0, par[P_TEMPERATURE]
        out[:] = 0.0
        out[L_MEAN], out[L_PRESSURE], out[L_RADIUS_MIN] = y[2], gas, y[0]
        t, h, corner, slope = 0.0, 1e-4 * rise, rise, (p2 - p1) / rise
        p = lumped_rate(y, p1, slope, par, mass, table, first)
        while True:
            lands = h >= corner - t
            step = corner - t if lands else h
            out[L_STEPS] += 1.0
            if out[L_STEPS] > _MOST_STEPS:
                out[L_STATUS] = TOO_MANY_STEPS
                break
            line = p1 + slope * t if corner == rise else p2
            by_time = _jacobian(y, line, slope, par, mass, table, first, work, jac)
            _invert(step * RODAS_GAMMA, jac, inv)
            _step(step, line, slope, by_time, y, first, par, mass, table, work, inv)
            size = _size(y, new, work, p, par)
            if new[0] <= 0.0 or new[2] < TABLE_START:
                size = 1e30
            if size > 1.0:
                h = step * max(0.2, 0.9 * (size + 1e-12) ** (-0.25))
                if h < 1e-12 * rise:
                    out[L_STATUS] = NOT_FINITE
                    break
                continue
            grown = step * min(4.0, 0.9 * (size + 1e-12) ** (-0.25))
            t = corner if lands else t + step
            h = max(h, grown) if lands else grown
            before, rate_before = y[2], first[2]
            y[0], y[1], y[2] = new[0], new[1], new[2]
            if lands and corner == last:
                slope = 0.0
            elif lands:
                corner, slope = last, 0.0
            line = p1 + slope * t if corner == rise else p2
            p = lumped_rate(y, line, slope, par, mass, table, first)
            crest = _crest(before, y[2], rate_before, first[2], step)
            out[L_MEAN] = max(out[L_MEAN], crest)
            out[L_PRESSURE] = max(out[L_PRESSURE], p)
            out[L_RADIUS_MIN] = min(out[L_RADIUS_MIN], y[0])
            out[L_TIME] = t
            if lands and t >= last:
                break
