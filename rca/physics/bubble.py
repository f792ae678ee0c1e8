"""One air bubble under a pressure rise, with heat conduction resolved in gas and oil.

Model: spherical bubble of dry air; pressure uniform inside (homobaric); temperature resolved from
the centre to the wall and on into the oil; heat capacity and conductivity of the gas depend on
temperature; constant oil properties. The bubble either follows the line pressure (quasi-static)
or its radius obeys Keller and Miksis, J. Acoust. Soc. Am. 68 (1980) 628. Not in the model:
break-up, jets and swirl, dissolution (some 5 % of the gas per millisecond at 0.1 mm), evaporation,
reaction heat, real-gas terms. All but dissolution and reaction cool the core, so core
temperatures err high. Source of the thermal model: Prosperetti, Crum, Commander, J. Acoust. Soc.
Am. 83 (1988) 502-514.
"""

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from functools import cache
from itertools import pairwise

import numpy as np
import numpy.typing as npt

from rca.base.errors import OutOfRangeError, SolverError
from rca.physics.collapse import QUASI_STATIC_ABOVE, rayleigh_collapse_time
from rca.physics.compression import AIR_GAS_CONSTANT, T_MAX, air_heat_capacity
from rca.physics.delay_grid import DelayGrid, never_ignites
from rca.physics.thermal_regime import dilute_air_conductivity

Floats = npt.NDArray[np.float64]

_FAILURES = {
    1: "the step size fell below rounding",
    2: "the state became non-finite or left the physical range",
    3: "too many steps",
    4: f"the gas passed {T_MAX:g} K, the end of its property table",
}
_BEYOND = 4
CORE_GRID = (48, 24)  # gas and oil cells of a single history
BATCH_GRID = (24, 10)  # of a batch; within 0.5 % of the rise of the fine grid
THRESHOLDS = (800.0, 1000.0)  # [K], times above these are reported


@dataclass(frozen=True, slots=True, kw_only=True)
class OilSide:
    """Properties of the oil round the bubble, constant during the history.

    Defaults: mineral oil near 50 degC; heat capacity and conductivity after Cragoe, NBS Misc.
    Publ. 97 (1929), from memory; tension and speed of sound common practice, no source.
    """

    conductivity: float = 0.13  # [W/(m K)]
    density: float = 860.0  # [kg/m3]
    heat_capacity: float = 1950.0  # [J/(kg K)]
    viscosity: float = 0.03  # [Pa s]
    tension: float = 0.030  # [N/m]
    sound_speed: float = 1400.0  # [m/s]


@dataclass(frozen=True, slots=True, kw_only=True)
class BubblePeaks:
    """What one or many histories came to; every field has the shape of the inputs."""

    core: Floats  # peak temperature at the centre [K]
    mean: Floats  # peak of the mass-mean temperature [K]
    wall: Floats  # peak of the oil surface [K]
    pressure: Floats  # peak of the gas pressure [Pa]
    delay_integral: Floats  # Livengood-Wu integral of the core [-]
    above: tuple[Floats, Floats]  # time of the core above the two thresholds [s]
    core_time: Floats  # when the core peaked [s]
    core_at_ramp_end: Floats  # [K]
    radius_min: Floats  # [m]
    end_time: Floats  # time reached [s]
    steps: Floats  # accepted and rejected [-]
    inertial: npt.NDArray[np.bool_]
    beyond: npt.NDArray[np.bool_]  # stopped where the gas passed 6000 K; peaks are lower bounds


@dataclass(frozen=True, slots=True, kw_only=True)
class BubbleHistory:
    """One history in time; rows are accepted steps, thinned to at most 2000."""

    time: Floats  # [s]
    radius: Floats  # [m]
    pressure: Floats  # of the gas [Pa]
    core: Floats  # [K]
    mean: Floats  # [K]
    wall: Floats  # [K]
    peaks: BubblePeaks
    thresholds: tuple[float, float]


@cache
def gas_table() -> Floats:
    """Rows cp [J/(kg K)] and k [W/(m K)] of air at every 5 K from 200 K to 6000 K."""
    t = np.arange(200.0, T_MAX + 1e-6, 5.0)
    return np.ascontiguousarray(np.vstack([air_heat_capacity(t), dilute_air_conductivity(t)]))


def needs_inertia(
    radius: npt.ArrayLike,
    rise_time: npt.ArrayLike,
    p_start: npt.ArrayLike,
    density: npt.ArrayLike,
) -> npt.NDArray[np.bool_]:
    """Whether the rise is too fast for the bubble to follow the line pressure.

    True where the rise time is under eight Rayleigh collapse times at the inlet pressure; then the
    gas pressure ends above the line's. Where it is False the core is right within 2.5 % of the
    adiabatic rise, but a ramp that starts abruptly (1 bar up by 172 bar/ms) still overtakes the
    line two- to fivefold for some 30 us at its very start, which warms the mean, not the core, by
    up to 130 K over the quasi-static value.
    Raises OutOfRangeError for inputs that are not positive.
    """
    collapse = rayleigh_collapse_time(radius, p_start, density)
    return np.asarray(np.asarray(rise_time, dtype=float) < QUASI_STATIC_ABOVE * collapse)


def _check(values: dict[str, npt.ArrayLike]) -> None:
    for name, value in values.items():
        if not np.all(np.isfinite(value) & (np.asarray(value) > 0)):
            raise OutOfRangeError(f"the bubble model needs {name} finite and > 0; got {value!r}")


def parameter_rows(
    radius: npt.ArrayLike,
    temperature: npt.ArrayLike,
    oil: OilSide,
    *,
    conduction_factor: npt.ArrayLike,
    delay_factor: npt.ArrayLike,
    stop_below: float,
    tolerance: float,
    ramp_end: npt.ArrayLike,
    stop_at_ignition: bool,
) -> Floats:
    """Parameter rows in the kernel's order, shape (n, 15); refuses what the model can't take."""
    _check({
        "radius [m]": radius, "oil conductivity": oil.conductivity, "oil density": oil.density,
        "oil heat capacity": oil.heat_capacity, "oil viscosity": oil.viscosity,
        "surface tension": oil.tension, "speed of sound": oil.sound_speed,
        "conduction factor": conduction_factor, "delay factor": delay_factor,
        "tolerance": tolerance, "end of the ramp [s]": ramp_end,
    })  # fmt: skip
    if not np.all((np.asarray(temperature) >= 210.0) & (np.asarray(temperature) <= 1000.0)):
        raise OutOfRangeError(
            f"the bubble model needs a start between 210 K and 1000 K; got {temperature!r} K"
        )
    row = (
        radius, temperature, oil.conductivity, oil.density * oil.heat_capacity, oil.density,
        oil.viscosity, oil.tension, oil.sound_speed, conduction_factor, AIR_GAS_CONSTANT,
        delay_factor, stop_below, tolerance, ramp_end, float(stop_at_ignition),
    )  # fmt: skip
    return np.ascontiguousarray(
        np.stack(np.broadcast_arrays(*(np.asarray(v, dtype=float) for v in row)), axis=-1)
    )


def _peaks(outs: Floats, inertial: npt.NDArray[np.bool_]) -> BubblePeaks:
    column = outs.T
    return BubblePeaks(
        core=column[1], mean=column[2], wall=column[3], pressure=column[4],
        delay_integral=column[5], above=(column[6], column[7]), end_time=column[8],
        steps=column[9] + column[13], core_time=column[10], core_at_ramp_end=column[11],
        radius_min=column[12], inertial=inertial, beyond=column[0] == _BEYOND,
    )  # fmt: skip


def _refuse_failures(outs: Floats, pars: Floats, *, keep_beyond: bool = False) -> None:
    failed = outs[:, 0] != 0
    if keep_beyond:
        failed &= outs[:, 0] != _BEYOND
    bad = np.flatnonzero(failed)
    if bad.size:
        i = int(bad[0])
        raise SolverError(
            f"the bubble model failed in {bad.size} of {len(outs)} histories; first: "
            f"{_FAILURES[int(outs[i, 0])]} at t = {outs[i, 8]:.4g} s with core peak "
            f"{outs[i, 1]:.4g} K, gas pressure peak {outs[i, 4]:.4g} Pa, after {outs[i, 9]:.0f} "
            f"steps; radius {pars[i, 0]:.4g} m, start {pars[i, 1]:.4g} K, "
            f"tolerance {pars[i, 12]:.1g}"
        )


def bubble_history(
    radius: float,
    temperature: float,
    time: Sequence[float] | Floats,
    pressure: Sequence[float] | Floats,
    *,
    oil: OilSide | None = None,
    inertial: bool | None = None,
    ramp_end: float | None = None,
    grid: tuple[int, int] = CORE_GRID,
    tolerance: float = 1e-4,
    conduction_factor: float = 1.0,
    delays: DelayGrid | None = None,
    delay_factor: float = 1.0,
    thresholds: tuple[float, float] = THRESHOLDS,
    stop_below: float = 0.0,
) -> BubbleHistory:
    """History of one bubble through a line pressure given at points and linear between them.

    ``radius`` [m] and ``temperature`` [K] at rest under the first pressure; ``time`` [s] starts at
    0 and rises; ``pressure`` [Pa abs]. ``ramp_end`` [s] (default: where the pressure is highest)
    sets the oil grid and the earliest stop; ``stop_below`` [K] ends the run once the core has
    cooled that far. ``inertial`` None decides by the Rayleigh time against ``ramp_end``.
    Raises OutOfRangeError for bad input, SolverError (with the state) when integration fails.
    """
    from rca.physics import bubble_kernel  # noqa: PLC0415 - compiled code is loaded on first use

    t, p = np.array(time, dtype=float), np.array(pressure, dtype=float)
    if t.ndim != 1 or t.shape != p.shape or t.size < 2 or t[0] != 0 or not np.all(np.diff(t) > 0):
        raise OutOfRangeError(
            "bubble_history needs time and pressure of one length >= 2, time rising from 0 s"
        )
    _check({"line pressure [Pa abs]": p})
    liquid = oil or OilSide()
    end = ramp_end if ramp_end is not None else float(t[max(int(np.argmax(p)), 1)])
    pars = parameter_rows(
        radius, temperature, liquid, conduction_factor=conduction_factor,
        delay_factor=delay_factor, stop_below=stop_below, tolerance=tolerance, ramp_end=end,
        stop_at_ignition=False,
    )  # fmt: skip
    with_inertia = (
        bool(needs_inertia(radius, end, p[0], liquid.density)) if inertial is None else inertial
    )
    outs, rows = np.zeros((1, 14)), np.empty((2000, 6))
    chart = delays or never_ignites()
    count = bubble_kernel.run(
        with_inertia, grid[0], grid[1], t, p, pars, gas_table(), np.array(thresholds),
        chart.log_delay, chart.frame, outs[0], rows, np.empty(sum(grid) + 2),
    )  # fmt: skip
    _refuse_failures(outs, pars[None, :])
    column = rows[:count].T.copy()
    return BubbleHistory(
        radius=column[0], pressure=column[1], core=column[2], mean=column[3], wall=column[4],
        time=column[5], peaks=_peaks(outs, np.array([with_inertia])), thresholds=thresholds,
    )  # fmt: skip


def bubble_batch(
    radius: npt.ArrayLike,
    temperature: npt.ArrayLike,
    p_start: npt.ArrayLike,
    p_end: npt.ArrayLike,
    rise_time: npt.ArrayLike,
    *,
    hold: npt.ArrayLike = 0.05,
    oil: OilSide | None = None,
    inertial: npt.ArrayLike | None = None,
    grid: tuple[int, int] = BATCH_GRID,
    tolerance: float = 5e-4,
    conduction_factor: npt.ArrayLike = 1.0,
    delays: DelayGrid | None = None,
    delay_factor: npt.ArrayLike = 1.0,
    thresholds: tuple[float, float] = THRESHOLDS,
    stop_below: float = 600.0,
    stop_at_ignition: bool = False,
    keep_beyond: bool = False,
    workers: int = 1,
) -> BubblePeaks:
    """Peaks of many bubbles, each under a linear rise from ``p_start`` to ``p_end`` [Pa abs].

    Inputs broadcast to one dimension: ``radius`` [m], ``temperature`` [K], ``rise_time`` [s],
    ``hold`` [s] at ``p_end`` after it (a history ends earlier once its core is below
    ``stop_below`` [K]). A violent collapse may pass 6000 K, the end of the gas properties: that
    is a failure, unless ``keep_beyond`` keeps such histories, marked in ``beyond``. ``workers``
    threads share the rows; the default starts none.
    Raises OutOfRangeError for bad input, SolverError (with the state) when a history fails.
    """
    from rca.physics import bubble_kernel  # noqa: PLC0415 - compiled code is loaded on first use

    r, t0, p1, p2, rise, keep, factor, delay = (
        np.array(a, dtype=float)
        for a in np.broadcast_arrays(
            *np.atleast_1d(
                radius, temperature, p_start, p_end, rise_time, hold, conduction_factor,
                delay_factor,
            )
        )
    )  # fmt: skip
    _check({"p_start [Pa abs]": p1, "rise_time [s]": rise, "hold [s]": keep})
    if not np.all(np.isfinite(p2) & (p2 >= p1)):
        raise OutOfRangeError(f"bubble_batch needs finite p_end >= p_start; got {p_end=}")
    liquid = oil or OilSide()
    pars = parameter_rows(
        r, t0, liquid, conduction_factor=factor, delay_factor=delay, stop_below=stop_below,
        tolerance=tolerance, ramp_end=rise, stop_at_ignition=stop_at_ignition,
    )  # fmt: skip
    fast = needs_inertia(r, rise, p1, liquid.density)
    if inertial is not None:
        fast = np.array(np.broadcast_to(np.asarray(inertial, dtype=bool), r.shape))
    ramps = np.ascontiguousarray(np.stack([p1, p2, rise, rise + keep], axis=-1))
    outs = np.zeros((r.size, 14))
    chart = delays or never_ignites()

    def part(begin: int, end: int) -> None:
        bubble_kernel.run_batch(
            fast, grid[0], grid[1], ramps, pars, gas_table(), np.array(thresholds),
            chart.log_delay, chart.frame, outs, begin, end,
        )  # fmt: skip

    share(part, r.size, workers)
    _refuse_failures(outs, pars, keep_beyond=keep_beyond)
    return _peaks(outs, fast)


def load_kernels() -> None:
    """Load the compiled kernel (compile it, the first time on a machine): no later call waits."""
    bubble_batch(1e-4, 313.15, 1e5, 2e6, 1e-3, hold=1e-6)


def share(part: Callable[[int, int], None], size: int, workers: int) -> None:
    """Run ``part(begin, end)`` over the rows, here or in ``workers`` short-lived threads."""
    if workers <= 1 or size < 64:
        part(0, size)
        return
    from concurrent.futures import ThreadPoolExecutor  # noqa: PLC0415 - only when asked for

    edges = np.linspace(0, size, 8 * workers + 1).astype(int)
    with ThreadPoolExecutor(workers) as pool:
        for job in [pool.submit(part, int(a), int(b)) for a, b in pairwise(edges)]:
            job.result()
