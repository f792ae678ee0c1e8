"""Time and heat for ignition: the delay integral, the temperature a time asks for, the radius."""

import numpy as np
import numpy.typing as npt

from rca.base.errors import OutOfRangeError
from rca.discharge.delay import T_RANGE, delays, ignition_delay
from rca.physics.bubble import OilSide, bubble_batch

Floats = npt.NDArray[np.float64]

SMALLEST, LARGEST = 0.005e-3, 10e-3  # [m], radii that are looked at


def delay_integral(
    time: npt.ArrayLike,
    temperature: npt.ArrayLike,
    pressure: npt.ArrayLike,
    *,
    phi: float = 1.0,
    oxygen: float = 0.2095,
) -> Floats:
    """Livengood-Wu integral of dt/tau up to each time [-]; it ignites where this passes 1.

    ``time`` [s] rising, ``temperature`` [K] and ``pressure`` [Pa abs] of the gas, one length.
    Below 600 K and 10 bar the mixture is taken as inert (delays above 0.1 s there). Trapezoid in
    time: steps should resolve the history. One-stage: cool flames are inside the tabulated delay.
    Source: Livengood and Wu, Proc. Combust. Inst. 5 (1955) 347. Chemistry only, so it errs early.
    Raises OutOfRangeError for unlike lengths, a time that does not rise, above the table, or NaN.
    """
    t, temp, p = (np.asarray(x, dtype=float) for x in (time, temperature, pressure))
    if not (t.ndim == 1 and t.shape == temp.shape == p.shape and t.size > 1):
        raise OutOfRangeError("delay_integral needs time, temperature and pressure of one length")
    if not (np.all(np.diff(t) > 0) and np.all(np.isfinite(temp)) and np.all(p > 0)):
        raise OutOfRangeError(
            "delay_integral needs rising times, finite temperatures, positive pressures"
        )
    live = (temp >= T_RANGE[0]) & (p >= 10e5)
    rate = np.zeros(t.shape)
    if live.any():
        rate[live] = 1.0 / ignition_delay(temp[live], p[live], phi=phi, oxygen=oxygen)
    steps = 0.5 * (rate[1:] + rate[:-1]) * np.diff(t)
    return np.concatenate([[0.0], np.cumsum(steps)])


def temperature_for_delay(
    available: float, pressure: float, *, phi: float = 1.0, oxygen: float = 0.2095
) -> float:
    """Lowest temperature at which vapour ignites within a time [K]: an autoignition temperature.

    ``available`` [s], ``pressure`` [Pa abs] 10-450 bar. The flask value of a data sheet (minutes,
    1 atm) does not transfer to a bubble; this does, for homogeneous vapour. Resolution 0.5 K.
    Range, direction and source as ``ignition_delay``. Raises OutOfRangeError where no temperature
    of 600-1500 K gives that delay, or even 600 K is sooner.
    """
    if not 0 < available < np.inf:
        raise OutOfRangeError(f"temperature_for_delay needs a time > 0 s; got {available!r}")
    grid = np.arange(T_RANGE[0], T_RANGE[1] + 0.25, 0.5)
    soon = ignition_delay(grid, pressure, phi=phi, oxygen=oxygen) <= available
    if soon[0] or not soon.any():
        raise OutOfRangeError(
            f"temperature_for_delay: no temperature from {T_RANGE[0]:g} to {T_RANGE[1]:g} K "
            f"parts delays above from below {available:g} s at {pressure / 1e5:g} bar"
        )
    return float(grid[int(np.argmax(soon))])


def critical_radius(
    rise_time: npt.ArrayLike,
    *,
    inlet: npt.ArrayLike,
    temperature: npt.ArrayLike,
    discharge: npt.ArrayLike,
    hold: float = 0.05,
    oil: OilSide | None = None,
    conduction_factor: npt.ArrayLike = 1.0,
    delay_factor: npt.ArrayLike = 1.0,
) -> Floats:
    """Radius at the inlet from which the core stays hot beyond the ignition delay [m]; broadcasts.

    ``rise_time`` [s], ``inlet`` and ``discharge`` [Pa abs], ``temperature`` at the inlet [K],
    ``hold`` [s] at the discharge pressure. Inf where no radius up to 10 mm does, 0 where 5 um
    already does. Stoichiometric vapour is taken to be there and inertia and evaporation to be
    absent: a lower bound on the radius. Kinetics of +/-50 % move it 10-15 %; the band is 0.5 to
    1.5 times. A lower inlet pressure needs a larger radius, though its ideal end is hotter.
    Source: ``bubble_batch`` with the delays of ``ignition_delay``; bisection to 0.05 %.
    Raises OutOfRangeError for bad input, SolverError when a history fails.
    """
    rise, p1, t0, p2, k, d = (
        np.array(x, dtype=float)
        for x in np.broadcast_arrays(
            *np.atleast_1d(
                rise_time, inlet, temperature, discharge, conduction_factor, delay_factor
            )
        )
    )

    def ignites(radius: Floats) -> npt.NDArray[np.bool_]:
        peaks = bubble_batch(
            radius, t0, p1, p2, rise, hold=hold, oil=oil, inertial=False, conduction_factor=k,
            delays=delays(), delay_factor=d, stop_at_ignition=True,
        )  # fmt: skip
        return np.asarray(peaks.delay_integral >= 1.0)

    low, high = np.full(rise.shape, np.log(SMALLEST)), np.full(rise.shape, np.log(LARGEST))
    never, always = ~ignites(np.exp(high)), ignites(np.exp(low))
    for _ in range(14):
        middle = 0.5 * (low + high)
        hot = ignites(np.exp(middle))
        high, low = np.where(hot, middle, high), np.where(hot, low, middle)
    return np.where(never, np.inf, np.where(always, 0.0, np.exp(0.5 * (low + high))))
