"""Compiled kernel of the lumped bubble: Keller-Miksis with one gas temperature.

State y = [R, U, T]; volumes as r^3 (the factor 4 pi/3 cancels). Heat flows through a layer of
thickness min(sqrt(R alpha/|U|), R/pi). Nothing here checks its input; no threads are started.
Cached on disk by this file's date: after a change in ``bubble_cells`` touch this file too.
"""

import numpy as np
from numba import njit

from rca.physics.bubble_cells import (
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
from rca.physics.rosenbrock import COUPLING, ERROR, GAMMA, NEW, NODES, STAGE

L_STATUS, L_MEAN, L_PRESSURE, L_RADIUS_MIN, L_STEPS, L_TIME = range(6)
_MOST_STEPS = 200_000


@njit(cache=True, nogil=True)
def lumped_rate(
    y: np.ndarray,
    p_line: float,
    dp_line: float,
    par: np.ndarray,
    mass: float,
    table: np.ndarray,
    dy: np.ndarray,
    side: np.ndarray,
) -> float:
    """Right-hand side; returns the gas pressure, leaves ``side`` for the Jacobian."""
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
    side[0], side[1] = 3.0 * r * r * k / layer, mass * (cp - rs)
    heat = side[0] * (par[P_TEMPERATURE] - t)
    dt = (heat - 3.0 * p * r * r * u) / side[1]
    dp = p * (dt / t - 3.0 * u / r)
    dy[0], dy[2] = u, dt
    dy[1] = wall_acceleration(r, u, p, dp, p_line, dp_line, par)
    return float(p)


@njit(cache=True, nogil=True)
def _jacobian(y: np.ndarray, p: float, side: np.ndarray, par: np.ndarray, jac: np.ndarray) -> None:
    """The stiff couplings, by hand; the integrator keeps its order for any Jacobian.

    ``side`` = heat loss per kelvin and heat capacity at constant volume, of the last rate.
    """
    r, u, t = y[0], y[1], y[2]
    c, rho, mu = par[P_SOUND], par[P_OIL_DENSITY], par[P_OIL_VISCOSITY]
    heavy = rho * ((1.0 - u / c) * r + 4.0 * mu / (rho * c))
    by_p = (1.0 + u / c) / heavy
    jac[0, 0], jac[0, 1], jac[0, 2] = 0.0, 1.0, 0.0
    jac[2, 0] = 0.0
    jac[2, 1] = -3.0 * p * r * r / side[1]
    jac[2, 2] = -(side[0] + 3.0 * p * r * r * u / t) / side[1]
    jac[1, 0] = by_p * (-3.0 * p / r + 2.0 * par[P_TENSION] / (r * r))
    rate = r / (c * heavy)
    jac[1, 1] = -4.0 * mu * by_p / r - 3.0 * u * rho / heavy
    jac[1, 1] += rate * p * (jac[2, 1] / t - 3.0 / r)
    jac[1, 2] = by_p * p / t + rate * p * jac[2, 2] / t


@njit(cache=True, nogil=True)
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


@njit(cache=True, nogil=True)
def _step(
    h: float,
    p_line: float,
    slope: float,
    y: np.ndarray,
    first: np.ndarray,
    par: np.ndarray,
    mass: float,
    table: np.ndarray,
    work: np.ndarray,
    inv: np.ndarray,
) -> None:
    """The four stages of one step, in rows 0 to 3 of ``work``; rows 4 to 7 are scratch."""
    hg = h * GAMMA
    trial, rate, right = work[4], work[5], work[6]
    for s in range(4):
        for i in range(3):
            trial[i] = y[i]
            right[i] = 0.0
            for j in range(s):
                trial[i] += STAGE[s, j] * work[j, i]
                right[i] += COUPLING[s, j] * work[j, i]
        if s == 0:
            for i in range(3):
                rate[i] = first[i]
        else:
            lumped_rate(
                trial, p_line + slope * NODES[s] * h, slope, par, mass, table, rate, work[7]
            )
        for i in range(3):
            right[i] = hg * rate[i] + GAMMA * right[i]
        for i in range(3):
            work[s, i] = inv[i, 0] * right[0] + inv[i, 1] * right[1] + inv[i, 2] * right[2]


@njit(cache=True, nogil=True)
def _size(y: np.ndarray, new: np.ndarray, work: np.ndarray, p: float, par: np.ndarray) -> float:
    """Root mean square of the weighted error of the step; also writes the new state."""
    square = 0.0
    for i in range(3):
        total, error = y[i], 0.0
        for s in range(4):
            total += NEW[s] * work[s, i]
            error += ERROR[s] * work[s, i]
        new[i] = total
        scale = max(abs(y[i]), abs(total))
        if i == 1:
            scale += np.sqrt(p / par[P_OIL_DENSITY])
        square += (error / scale) ** 2
    if not np.isfinite(square):
        return 1e30
    return float(np.sqrt(square / 3.0) / par[P_TOLERANCE])


@njit(cache=True, nogil=True)
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
    side = np.empty(2)
    work, jac, inv = np.empty((8, 3)), np.empty((3, 3)), np.empty((3, 3))
    for n in range(begin, end):
        par, out = pars[n], outs[n]
        p1, p2, rise, last = ramps[n, 0], ramps[n, 1], ramps[n, 2], ramps[n, 3]
        gas = p1 + 2.0 * par[P_TENSION] / par[P_RADIUS]
        mass = gas * par[P_RADIUS] ** 3 / (par[P_GAS_CONSTANT] * par[P_TEMPERATURE])
        y[0], y[1], y[2] = par[P_RADIUS], 0.0, par[P_TEMPERATURE]
        out[:] = 0.0
        out[L_MEAN], out[L_PRESSURE], out[L_RADIUS_MIN] = y[2], gas, y[0]
        t, h, corner, slope = 0.0, 1e-4 * rise, rise, (p2 - p1) / rise
        p = lumped_rate(y, p1, slope, par, mass, table, first, side)
        while True:
            lands = h >= corner - t
            step = corner - t if lands else h
            out[L_STEPS] += 1.0
            if out[L_STEPS] > _MOST_STEPS:
                out[L_STATUS] = TOO_MANY_STEPS
                break
            line = p1 + slope * t if corner == rise else p2
            _jacobian(y, p, side, par, jac)
            _invert(step * GAMMA, jac, inv)
            _step(step, line, slope, y, first, par, mass, table, work, inv)
            size = _size(y, new, work, p, par)
            if new[0] <= 0.0 or new[2] < TABLE_START:
                size = 1e30
            if size > 1.0:
                h = step * max(0.2, 0.9 * (size + 1e-12) ** (-1.0 / 3.0))
                if h < 1e-12 * rise:
                    out[L_STATUS] = NOT_FINITE
                    break
                continue
            grown = step * min(4.0, 0.9 * (size + 1e-12) ** (-1.0 / 3.0))
            t = corner if lands else t + step
            h = max(h, grown) if lands else grown
            y[0], y[1], y[2] = new[0], new[1], new[2]
            if lands and corner == last:
                slope = 0.0
            elif lands:
                corner, slope = last, 0.0
            line = p1 + slope * t if corner == rise else p2
            p = lumped_rate(y, line, slope, par, mass, table, first, side)
            out[L_MEAN] = max(out[L_MEAN], y[2])
            out[L_PRESSURE] = max(out[L_PRESSURE], p)
            out[L_RADIUS_MIN] = min(out[L_RADIUS_MIN], y[0])
            out[L_TIME] = t
            if lands and t >= last:
                break
