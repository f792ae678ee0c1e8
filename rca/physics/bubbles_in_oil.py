"""Small bubbles in oil outside the pump: rise, dissolution, nuclei, air release test and dwell."""

import numpy as np
import numpy.typing as npt

from rca.base.errors import OutOfRangeError
from rca.physics.compression import UNIVERSAL_GAS_CONSTANT

Floats = npt.NDArray[np.float64]

GRAVITY = 9.80665  # [m/s2], ISO 80000-3, exact
ICE_POINT = 273.15  # [K]
# Diffusivity of air in hydraulic oil [m2/s], 5 and 95 %: Hiss and Cussler, AIChE J. 19 (1973) 698,
# D ~ mu^(-2/3) (from memory); Wilke-Chang underpredicts in viscous oil.
AIR_DIFFUSIVITY = (1e-10, 1e-9)
FINAL_AIR_D3427 = 0.002  # air by volume at which the air release test ends [-]


def _positive(name: str, **values: npt.ArrayLike) -> list[Floats]:
    arrays = {key: np.asarray(v, dtype=float) for key, v in values.items()}
    for key, array in arrays.items():
        if not np.all((array > 0) & np.isfinite(array)):
            raise OutOfRangeError(f"{name} needs {key} finite and > 0; got {values[key]!r}")
    return list(arrays.values())


def ostwald_from_bunsen(bunsen: npt.ArrayLike, temperature: npt.ArrayLike) -> Floats:
    """Ostwald coefficient L = alpha T/273.15 [-]; ``temperature`` [K]; ideal gas, exact.

    Raises OutOfRangeError unless both are positive and finite.
    """
    alpha, t = _positive("ostwald_from_bunsen", bunsen=bunsen, temperature=temperature)
    return np.asarray(alpha * t / ICE_POINT)


def dissolved_air_mass(bunsen: npt.ArrayLike, pressure: npt.ArrayLike) -> Floats:
    """Mass of air dissolved at saturation [kg per m3 of oil]: alpha 1.2929 kg/m3 p/101325.

    ``bunsen`` [-], ``pressure`` of the air [Pa abs]; Henry's law, linear: not verified above some
    100 bar. Exact by definition (dry air 1.2929 kg/m3 at 0 degC, 101325 Pa, ideal gas).
    Raises OutOfRangeError unless both are positive and finite.
    """
    alpha, p = _positive("dissolved_air_mass", bunsen=bunsen, pressure=pressure)
    return np.asarray(alpha * p * 28.9647e-3 / (UNIVERSAL_GAS_CONSTANT * ICE_POINT))


def clean_rise(diameter: npt.ArrayLike, nu: npt.ArrayLike) -> Floats:
    """Rise speed [m/s] of a small bubble whose surface moves freely: g d^2/(12 nu).

    ``diameter`` [m], ``nu`` [m2/s]; Re < 1. An upper bound in oil with additives, where the
    surface stiffens towards g d^2/(18 nu) (``stokes_rise``). Source: Hadamard 1911, Rybczynski
    1911, gas of negligible viscosity. Raises OutOfRangeError above Re 1 or for NaN.
    """
    d, v = _positive("clean_rise", diameter=diameter, nu=nu)
    speed = GRAVITY * d**2 / (12.0 * v)
    if np.any(speed * d / v > 1.0):
        raise OutOfRangeError(
            f"clean_rise holds for a Reynolds number up to 1 (Hadamard, Rybczynski); got diameter "
            f"{diameter!r} m, nu {nu!r} m2/s"
        )
    return np.asarray(speed)


def dissolution_time(
    radius: npt.ArrayLike,
    *,
    diffusivity: npt.ArrayLike,
    ostwald: npt.ArrayLike,
    saturation: npt.ArrayLike = 0.0,
) -> Floats:
    """Time in which a bubble at rest dissolves [s]: R^2/(2 D L (1 - f)); inputs broadcast.

    ``radius`` [m] at the pressure it dissolves under, ``diffusivity`` [m2/s] (oils 1e-10 to 1e-9),
    ``ostwald`` L [-], ``saturation`` f of the oil at that pressure [-], 0 to below 1.
    Quasi-steady, no surface tension, no flow: an upper bound where oil moves past the bubble.
    Source: Epstein and Plesset, J. Chem. Phys. 18 (1950) 1505 (limit without tension and history).
    Raises OutOfRangeError outside the range or for NaN.
    """
    r, d, lo = _positive("dissolution_time", radius=radius, diffusivity=diffusivity,
                         ostwald=ostwald)  # fmt: skip
    f = np.asarray(saturation, dtype=float)
    if not np.all((f >= 0) & (f < 1)):
        raise OutOfRangeError(f"dissolution_time needs 0 <= saturation < 1; got {saturation!r}")
    return np.asarray(r**2 / (2.0 * d * lo * (1.0 - f)))


def diffusive_release_time(
    radius: npt.ArrayLike, void: npt.ArrayLike, *, diffusivity: npt.ArrayLike
) -> Floats:
    """Time constant of release into bubbles already there [s]: 1/(4 pi R D N) = R^2/(3 D void).

    ``radius`` [m] and ``void`` share of gas by volume [-] in bubbles of one size; ``diffusivity``
    [m2/s]. Oil at rest: shear in a line is faster by an order or more, so it errs high there.
    Source: steady diffusion to spheres (Smoluchowski). Raises OutOfRangeError for void above 0.1,
    where bubbles crowd, inputs that are not positive, or NaN.
    """
    r, a, d = _positive(
        "diffusive_release_time", radius=radius, void=void, diffusivity=diffusivity
    )
    if np.any(a > 0.1):
        raise OutOfRangeError(f"diffusive_release_time needs void <= 0.1; got {void!r}")
    return np.asarray(r**2 / (3.0 * d * a))


def nucleus_radius(
    surface_tension: npt.ArrayLike, saturation: npt.ArrayLike, pressure: npt.ArrayLike
) -> Floats:
    """Smallest gas nucleus that grows in supersaturated oil [m]: 2 sigma/(p_sat - p).

    ``surface_tension`` [N/m], ``saturation`` pressure the oil is saturated at and ``pressure``
    [Pa abs]. Infinite where the oil is not supersaturated. Source: Laplace pressure against
    Henry's law; crevices with negative curvature release earlier, so it errs high.
    Raises OutOfRangeError unless all are positive and finite.
    """
    s, sat, p = _positive("nucleus_radius", surface_tension=surface_tension,
                          saturation=saturation, pressure=pressure)  # fmt: skip
    deficit = sat - p
    return np.asarray(np.where(deficit > 0, 2.0 * s / np.where(deficit > 0, deficit, 1.0), np.inf))


def carried_air_after_dwell(
    entering: npt.ArrayLike,
    dwell: npt.ArrayLike,
    release_time: npt.ArrayLike,
    *,
    start: float = 0.10,
) -> Floats:
    """Air by volume that is still in the oil after a dwell [-], by its air release time.

    ``entering`` air by volume at the return [-]; ``dwell`` mean time in the reservoir [s];
    ``release_time`` of the test [s] at the same temperature (it ends at 0.2 %; ``start`` is the
    air then blown in, 5-15 %). Exponential decay between the two ends of the test:
    entering exp(-dwell ln(start/0.002)/release_time). The test's bubbles are coarse and its column
    still, so this errs low (too little carried air) for fine bubbles and short dwells.
    Source: ASTM D3427-19, ISO 9120:1997 (end point); the decay law is judgement.
    Raises OutOfRangeError unless 0 <= entering <= 0.5, times > 0, 0.02 <= start <= 0.3.
    """
    dwells, release = _positive("carried_air_after_dwell", dwell=dwell, release_time=release_time)
    air = np.asarray(entering, dtype=float)
    if not (np.all((air >= 0) & (air <= 0.5)) and 0.02 <= start <= 0.3):
        raise OutOfRangeError(
            f"carried_air_after_dwell needs 0 <= entering <= 0.5 and 0.02 <= start <= 0.3; got "
            f"{entering!r}, {start}"
        )
    return np.asarray(air * np.exp(-dwells * np.log(start / FINAL_AIR_D3427) / release))


def release_time_at(
    release_time_50: npt.ArrayLike, nu: npt.ArrayLike, nu_50: npt.ArrayLike
) -> Floats:
    """Air release time at another temperature [s]: in proportion to the viscosity.

    ``release_time_50`` [s] at 50 degC; ``nu`` and ``nu_50`` [m2/s] at the temperature asked for
    and at 50 degC. Stokes' rise is proportional to 1/nu; coalescence is not in it. Valid within a
    factor of eight of viscosity. Source: Stokes; common practice.
    Raises OutOfRangeError outside the range or for NaN.
    """
    time, there, here = _positive("release_time_at", release_time_50=release_time_50, nu=nu,
                                  nu_50=nu_50)  # fmt: skip
    ratio = there / here
    if np.any((ratio > 8.0) | (ratio < 0.125)):
        raise OutOfRangeError(
            f"release_time_at is used within a factor of 8 of viscosity; got {nu!r} over {nu_50!r}"
        )
    return np.asarray(time * ratio)
