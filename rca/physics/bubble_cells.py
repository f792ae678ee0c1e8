"""Compiled grids and right-hand side of the resolved bubble.

Volumes are written as r^3 and areas as 3 r^2 throughout (the factor 4 pi/3 cancels). The state is
y = [R, U, T_1 .. T_gas, T_gas+1 .. T_all]: radius, wall speed, cells of fixed gas mass from the
centre to the wall, cells of fixed oil volume from the wall outwards. Nothing here checks its
input or raises: ``rca.physics.bubble`` does both.

The compiled callers in ``bubble_kernel`` are cached on disk by that file's date: after a change
here, touch it too.
"""

import numpy as np
from numba import njit

OK, TOO_SMALL_STEP, NOT_FINITE, TOO_MANY_STEPS, OUTSIDE_TABLE = 0, 1, 2, 3, 4

# Places in the parameter row.
(
    P_RADIUS,  # at the inlet [m]
    P_TEMPERATURE,  # [K]
    P_OIL_CONDUCTIVITY,  # [W/(m K)]
    P_OIL_CAPACITY,  # rho cp [J/(m3 K)]
    P_OIL_DENSITY,  # [kg/m3]
    P_OIL_VISCOSITY,  # [Pa s]
    P_TENSION,  # [N/m]
    P_SOUND,  # [m/s] in the oil
    P_CONDUCTION_FACTOR,  # multiplies the gas conductivity [-]
    P_GAS_CONSTANT,  # [J/(kg K)]
    P_DELAY_FACTOR,  # multiplies the ignition delay [-]
    P_STOP_BELOW,  # after the ramp, stop when the core is below this [K]
    P_TOLERANCE,  # relative, per step
    P_RAMP_END,  # time from which stopping is allowed [s]
    P_STOP_AT_IGNITION,  # 1: stop when the delay integral passes 1
) = range(15)

# Places in the result row.
(
    O_STATUS,
    O_CORE,  # peak [K]
    O_MEAN,  # peak of the mass mean [K]
    O_WALL,  # peak [K]
    O_PRESSURE,  # peak of the gas pressure [Pa]
    O_DELAY_INTEGRAL,  # Livengood-Wu [-]
    O_ABOVE_1,  # time of the core above the first threshold [s]
    O_ABOVE_2,
    O_TIME,  # reached [s]
    O_STEPS,
    O_CORE_TIME,  # of the peak [s]
    O_CORE_RAMP_END,  # core temperature at the end of the ramp [K]
    O_RADIUS_MIN,  # [m]
    O_REJECTED,
) = range(14)

# Sums may be reordered and divisions shared; NaN and infinity keep their meaning.
FAST = {"reassoc", "contract", "arcp"}
TABLE_START, TABLE_STEP = 200.0, 5.0  # gas properties: rows cp, k at every 5 K from 200 K


@njit(cache=True, nogil=True)
def _gas_grid(n_gas: int, radius: float, mass: np.ndarray, gas_factor: float) -> None:
    """Masses of the cells (times R_s/p so that mass T = r^3); thin cells at the wall."""
    before = 0.0
    for i in range(n_gas):
        x = 1.0 - (1.0 - (i + 1.0) / n_gas) ** 1.7
        mass[i] = (x**3 - before**3) * radius**3 * gas_factor
        before = x


@njit(cache=True, nogil=True)
def _oil_grid(n_oil: int, first: float, extent: float, radius: float, faces: np.ndarray) -> None:
    """Volumes r^3 - R^3 of the cell faces, laid out for the compressed radius."""
    low, high = 1.0 + 1e-9, 4.0
    for _ in range(60):
        ratio = 0.5 * (low + high)
        if first * (ratio**n_oil - 1.0) / (ratio - 1.0) > extent:
            high = ratio
        else:
            low = ratio
    depth, thick = 0.0, first
    for j in range(n_oil):
        depth += thick
        thick *= low
        faces[j] = (radius + depth) ** 3 - radius**3


@njit(cache=True, nogil=True, fastmath=FAST)
def _roots(n: int, volumes: np.ndarray, faces: np.ndarray) -> None:
    """Cube roots by two Halley steps from the last values; exact roots where those fail."""
    worst = 0.0
    for i in range(n):
        v, x = volumes[i], faces[i]
        c = x * x * x
        x *= (c + 2.0 * v) / (2.0 * c + v)
        c = x * x * x
        x *= (c + 2.0 * v) / (2.0 * c + v)
        faces[i] = x
        worst = max(worst, abs(x * x * x - v) / v)
    if not worst <= 1e-13:
        for i in range(n):
            faces[i] = np.cbrt(volumes[i])


@njit(cache=True, nogil=True, fastmath=FAST)
def _properties(
    n_gas: int,
    y: np.ndarray,
    p: float,
    par: np.ndarray,
    mass: np.ndarray,
    table: np.ndarray,
    cap: np.ndarray,
    scratch: np.ndarray,
) -> float:
    """Heat capacities, conductivities (row 2) and face volumes (row 0) of the gas; r^3."""
    by = par[P_GAS_CONSTANT] / p
    factor = par[P_CONDUCTION_FACTOR]
    volume = 0.0
    top = table.shape[1] - 2
    for i in range(n_gas):
        t = y[2 + i]
        place = (t - TABLE_START) / TABLE_STEP
        j = min(max(int(place), 0), top)
        f = place - j
        scratch[2, i] = (table[1, j] + f * (table[1, j + 1] - table[1, j])) * factor
        cap[i] = mass[i] * (table[0, j] + f * (table[0, j + 1] - table[0, j]))
        volume += by * mass[i] * t
        scratch[0, i] = volume
    return float(volume)


@njit(cache=True, nogil=True, fastmath=FAST)
def _conductances(
    n_gas: int,
    n_all: int,
    par: np.ndarray,
    oil: np.ndarray,
    cap: np.ndarray,
    cond: np.ndarray,
    scratch: np.ndarray,
) -> float:
    """Conductances of all faces from their radii (row 1); the gas side's weight at the wall."""
    faces, k = scratch[1], scratch[2]
    k_oil, capacity = par[P_OIL_CONDUCTIVITY], par[P_OIL_CAPACITY]
    for i in range(n_gas - 1):
        inner = faces[i - 1] if i > 0 else 0.0
        cond[i] = 3.0 * (k[i] + k[i + 1]) * faces[i] * faces[i] / (faces[i + 1] - inner)
    for i in range(n_gas, n_all):
        before = oil[i - n_gas - 1] if i > n_gas else 0.0
        cap[i] = capacity * (oil[i - n_gas] - before)
        if i < n_all - 1:
            cond[i] = 6.0 * k_oil * faces[i] * faces[i] / (faces[i + 1] - faces[i - 1])
    radius = faces[n_gas - 1]
    square = 6.0 * radius * radius
    inside = square * k[n_gas - 1] / (radius - faces[n_gas - 2])
    outside = square * k_oil / (faces[n_gas] - radius)
    cond[n_gas - 1] = inside * outside / (inside + outside)
    return float(inside / (inside + outside))


@njit(cache=True, nogil=True, fastmath=FAST)
def evaluate(
    inertial: bool,
    n_gas: int,
    n_all: int,
    y: np.ndarray,
    p_line: float,
    dp_line: float,
    par: np.ndarray,
    mass: np.ndarray,
    oil: np.ndarray,
    table: np.ndarray,
    cap: np.ndarray,
    cond: np.ndarray,
    scratch: np.ndarray,
    dy: np.ndarray,
    side: np.ndarray,
) -> None:
    """Right-hand side dy; ``side`` = p, dp/dt, R, wall weight, D, sum(mass T).

    ``scratch`` has three rows; row 1 keeps the face radii as first guesses for the next call.
    """
    rs = par[P_GAS_CONSTANT]
    heat = 0.0
    for i in range(n_gas):
        heat += mass[i] * y[2 + i]
    p = rs * heat / y[0] ** 3 if inertial else p_line
    cube = _properties(n_gas, y, p, par, mass, table, cap, scratch)
    for i in range(n_gas, n_all):
        scratch[0, i] = cube + oil[i - n_gas]
    _roots(n_all, scratch[0], scratch[1])
    weight = _conductances(n_gas, n_all, par, oil, cap, cond, scratch)
    radius = scratch[1, n_gas - 1]
    dy[2] = -cond[0] * (y[2] - y[3]) / cap[0]
    last = n_all - 1
    for i in range(1, last):
        gain = cond[i - 1] * (y[1 + i] - y[2 + i])
        dy[2 + i] = (gain - cond[i] * (y[2 + i] - y[3 + i])) / cap[i]
    dy[2 + last] = cond[last - 1] * (y[1 + last] - y[2 + last]) / cap[last]
    heating, give = 0.0, 0.0
    for i in range(n_gas):
        part = rs * mass[i]
        own = part * y[2 + i] / (p * cap[i])
        scratch[2, i] = own
        heating += part * dy[2 + i]
        give += part * own
    spare = cube - give
    dp = dp_line
    if inertial:
        dp = (heating - 3.0 * p * radius * radius * y[1]) / spare
    for i in range(n_gas):
        dy[2 + i] += scratch[2, i] * dp
    side[0], side[1], side[2], side[3], side[4], side[5] = p, dp, radius, weight, spare, heat
    dy[0], dy[1] = 0.0, 0.0
    if inertial:
        dy[0] = y[1]
        dy[1] = wall_acceleration(y[0], y[1], p, dp, p_line, dp_line, par)


@njit(cache=True, nogil=True)
def wall_acceleration(
    r: float, u: float, p: float, dp: float, p_line: float, dp_line: float, par: np.ndarray
) -> float:
    """Keller-Miksis: (1-u/c) r u' + 1.5 (1-u/3c) u^2 = (1 + u/c + r/c d/dt)(p_w - p_line)/rho."""
    c, rho, mu, tension = par[P_SOUND], par[P_OIL_DENSITY], par[P_OIL_VISCOSITY], par[P_TENSION]
    excess = p - 2.0 * tension / r - 4.0 * mu * u / r - p_line
    rate = dp + 2.0 * tension * u / (r * r) + 4.0 * mu * u * u / (r * r) - dp_line
    push = (
        (1.0 + u / c) * excess / rho + r * rate / (rho * c) - 1.5 * (1.0 - u / (3.0 * c)) * u * u
    )
    return float(push / ((1.0 - u / c) * r + 4.0 * mu / (rho * c)))


@njit(cache=True, nogil=True)
def start(
    inertial: bool,
    n_gas: int,
    n_oil: int,
    t_nodes: np.ndarray,
    p_nodes: np.ndarray,
    par: np.ndarray,
    mass: np.ndarray,
    oil: np.ndarray,
    y: np.ndarray,
    out: np.ndarray,
) -> None:
    """Grids and the state at rest: gas in equilibrium with the first line pressure."""
    radius, temperature = par[P_RADIUS], par[P_TEMPERATURE]
    gas_pressure = p_nodes[0] + (2.0 * par[P_TENSION] / radius if inertial else 0.0)
    _gas_grid(n_gas, radius, mass, gas_pressure / (par[P_GAS_CONSTANT] * temperature))
    highest = p_nodes[0]
    for value in p_nodes:
        highest = max(highest, value)
    small = radius * (p_nodes[0] / highest) ** 0.28
    diffusivity = par[P_OIL_CONDUCTIVITY] / par[P_OIL_CAPACITY]
    first = 0.1 * np.sqrt(diffusivity * par[P_RAMP_END])
    extent = max(6.0 * np.sqrt(diffusivity * t_nodes[-1]), 2.0 * n_oil * first)
    _oil_grid(n_oil, first, extent, small, oil)
    y[0], y[1] = radius, 0.0
    for i in range(n_gas + n_oil):
        y[2 + i] = temperature
    out[:] = 0.0
    out[O_CORE], out[O_MEAN], out[O_WALL] = temperature, temperature, temperature
    out[O_PRESSURE], out[O_RADIUS_MIN] = gas_pressure, radius
