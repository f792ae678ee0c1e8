"""Inertia of a collapsing bubble: when its own pressure overtakes the line pressure."""

from enum import StrEnum

import numpy as np
import numpy.typing as npt

from rca.base.errors import OutOfRangeError

Floats = npt.NDArray[np.float64]

RAYLEIGH_FACTOR = 0.914681  # sqrt(pi/6) Gamma(5/6)/Gamma(4/3), exact to the digits shown
QUASI_STATIC_ABOVE = 8.0  # rise time over collapse time; see ``inertia``
INERTIAL_BELOW = 4.0


class Inertia(StrEnum):
    """How the bubble follows the line pressure."""

    QUASI_STATIC = "follows the line pressure"
    BETWEEN = "overshoots a little"
    INERTIAL = "collapses by inertia"


def rayleigh_collapse_time(
    radius: npt.ArrayLike, pressure_difference: npt.ArrayLike, density: npt.ArrayLike
) -> Floats:
    """Time an empty spherical cavity takes to collapse [s]; inputs broadcast.

    t_c = 0.91468 R sqrt(rho/dp); ``radius`` [m], constant ``pressure_difference`` [Pa],
    liquid ``density`` [kg/m3]. Inviscid, incompressible, no gas inside: a gas bubble takes a
    little longer. Source: Rayleigh, Phil. Mag. 34 (1917) 94-98.
    Raises OutOfRangeError unless all inputs are positive.
    """
    r, dp, rho = (np.asarray(x, dtype=float) for x in (radius, pressure_difference, density))
    if not np.all((r > 0) & (dp > 0) & (rho > 0)):
        raise OutOfRangeError(
            "rayleigh_collapse_time needs positive radius [m], pressure difference [Pa] and "
            f"density [kg/m3]; got {radius=}, {pressure_difference=}, {density=}"
        )
    return np.asarray(RAYLEIGH_FACTOR * r * np.sqrt(rho / dp))


def inertia(rise_time: float, collapse_time: float) -> Inertia:
    """How a bubble follows a ramp of that rise time [s], by the collapse time at the inlet [s].

    Above 8 the gas pressure follows the line within about 5 %; below 4 it overshoots severalfold
    and "adiabatic at line pressure" is no upper bound any more. The bounds come from
    Keller-Miksis runs over a ramp 1 -> 172 bar, spherical, 0.1-2 mm (calculated, no experiment).
    Raises OutOfRangeError unless both times are positive.
    """
    if not (rise_time > 0 and collapse_time > 0):
        raise OutOfRangeError(
            f"inertia needs positive times [s]; got {rise_time=}, {collapse_time=}"
        )
    ratio = rise_time / collapse_time
    if ratio > QUASI_STATIC_ABOVE:
        return Inertia.QUASI_STATIC
    return Inertia.BETWEEN if ratio >= INERTIAL_BELOW else Inertia.INERTIAL


def blake_threshold(
    radius: npt.ArrayLike,
    *,
    surface_tension: float,
    pressure: float,
    vapour_pressure: float = 0.0,
) -> tuple[Floats, Floats]:
    """Liquid pressure below which a gas nucleus grows without limit [Pa], and its radius then [m].

    ``radius`` at rest [m] under ``pressure`` [Pa abs]; isothermal gas, no diffusion. Nuclei above
    5 um need about zero absolute pressure: above that oil foams with air, it does not boil.
    Source: Blake 1949; Brennen, Cavitation and Bubble Dynamics, OUP 1995, ch. 2 (from memory).
    Raises OutOfRangeError unless radius > 0, surface_tension > 0 and pressure > vapour_pressure.
    """
    r = np.asarray(radius, dtype=float)
    if not (np.all(r > 0) and surface_tension > 0 and pressure > vapour_pressure):
        raise OutOfRangeError(
            "blake_threshold needs radius > 0, surface_tension > 0 and pressure > "
            f"vapour_pressure; got {radius=}, {surface_tension=}, {pressure=}, {vapour_pressure=}"
        )
    laplace = 2 * surface_tension / r
    gas = pressure - vapour_pressure + laplace
    critical = vapour_pressure - (2 / 3) * laplace * np.sqrt(laplace / (3 * gas))
    return np.asarray(critical), np.asarray(r * np.sqrt(3 * gas / laplace))


def ramp_time(angle: npt.ArrayLike, speed: npt.ArrayLike) -> Floats:
    """Time a chamber takes over a shaft angle [s]; ``angle`` [rad], ``speed`` [turns/s].

    Exact geometry. It takes the pressure to rise evenly over the whole angle; a jet from a relief
    groove can raise it faster locally, so the time is an upper estimate.
    Raises OutOfRangeError unless both are positive.
    """
    a, n = np.asarray(angle, dtype=float), np.asarray(speed, dtype=float)
    if not np.all((a > 0) & (n > 0)):
        raise OutOfRangeError(
            f"ramp_time needs angle > 0 rad and speed > 0 turns/s; got {angle=}, {speed=}"
        )
    return np.asarray(a / (2 * np.pi * n))
