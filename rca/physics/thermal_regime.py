"""Does a compressed bubble keep its heat? The Peclet number and what follows from it."""

import numpy as np
import numpy.typing as npt

from rca.base.errors import OutOfRangeError
from rca.physics.compression import AIR_GAS_CONSTANT, AIR_MOLAR_MASS, air_heat_capacity
from rca.physics.small_oscillation import thermal_transfer

Floats = npt.NDArray[np.float64]

# Dilute-gas air, Lemmon and Jacobsen, Int. J. Thermophys. 25 (2004) 21-69, eqs. 2-5.
_SIGMA_NM, _EPSILON_K = 0.360, 103.3
_COLLISION = (0.431, -0.4623, 0.08406, 0.005341, -0.00331)
_T_REDUCING = 132.6312  # [K]

# Fraction of the adiabatic rise reached at the peak, against the Peclet number: homobaric air
# bubble, variable heat capacity and conductivity, linear ramp 1 -> 172 bar from 40 degC, oil wall.
# Made with the resolved model of rca.physics.bubble (quasi-static); between pressure cases the
# fractions move by less than 0.04.
_PECLET = np.array([0.1, 0.3, 1.0, 3.0, 10.0, 30.0, 100.0, 300.0, 1000.0, 1e4])
_CORE = np.array([0.111, 0.207, 0.369, 0.582, 0.901, 1.0, 1.0, 1.0, 1.0, 1.0])
_MEAN = np.array([0.047, 0.088, 0.161, 0.26, 0.418, 0.602, 0.759, 0.853, 0.917, 0.973])
SURROGATE_SPREAD = 0.04  # [-], largest shift of the fractions between pressure cases


def dilute_air_conductivity(temperature: Floats) -> Floats:
    """The equation of ``air_conductivity`` without its range check, for property tables [W/(m K)].

    Above 2000 K an extrapolation: only inertial collapse gets there, where the temperature is an
    upper bound for other reasons too. Source: Lemmon and Jacobsen 2004, eqs. 2-5.
    """
    log_star = np.log(temperature / _EPSILON_K)
    omega = np.exp(sum(b * log_star**i for i, b in enumerate(_COLLISION)))
    viscosity_upas = (
        0.0266958 * np.sqrt(AIR_MOLAR_MASS * 1e3 * temperature) / (_SIGMA_NM**2 * omega)
    )
    tau = _T_REDUCING / temperature
    return np.asarray(1e-3 * (1.308 * viscosity_upas + 1.405 * tau**-1.1 - 1.036 * tau**-0.3))


def air_conductivity(temperature: npt.ArrayLike) -> Floats:
    """Thermal conductivity of dilute air [W/(m K)], shape of ``temperature`` [K].

    Valid 70-2000 K; 2 % near room temperature, up to 5 % hot. Dense gas beside a cold wall at
    172 bar conducts 16-32 % better, so a bubble loses more heat than this says.
    Source: Lemmon and Jacobsen, Int. J. Thermophys. 25 (2004) 21-69, eq. 5.
    Raises OutOfRangeError outside the range or for NaN.
    """
    t = np.asarray(temperature, dtype=float)
    if not np.all((t >= 70.0) & (t <= 2000.0)):
        raise OutOfRangeError(
            f"air_conductivity holds from 70 K to 2000 K (Lemmon and Jacobsen 2004); "
            f"got {temperature!r}"
        )
    return dilute_air_conductivity(t)


def air_diffusivity(temperature: npt.ArrayLike, pressure: npt.ArrayLike) -> Floats:
    """Thermal diffusivity of air k/(rho cp) [m2/s]; ``temperature`` [K], ``pressure`` [Pa abs].

    Ideal gas; valid 200-2000 K and pressure > 0. Raises OutOfRangeError.
    """
    p = np.asarray(pressure, dtype=float)
    if not np.all(p > 0):
        raise OutOfRangeError(f"air_diffusivity needs pressure > 0 Pa absolute; got {pressure!r}")
    t = np.asarray(temperature, dtype=float)
    return np.asarray(air_conductivity(t) * AIR_GAS_CONSTANT * t / (p * air_heat_capacity(t)))


def peclet(
    radius: npt.ArrayLike,
    rise_time: npt.ArrayLike,
    temperature: npt.ArrayLike,
    pressure: npt.ArrayLike,
) -> Floats:
    """Peclet number R0^2/(alpha0 t_r) of a bubble compressed by a ramp [-]; inputs broadcast.

    ``radius`` at the inlet state [m], ``rise_time`` of the whole ramp [s], inlet ``temperature``
    [K] and ``pressure`` [Pa abs]. Below about 0.1 even the core stays near the wall temperature;
    above about 10 the core loses less than a tenth of the rise; the mean needs several hundred.
    Source: scaling of the homobaric heat equation (Prosperetti, Crum, Commander, J. Acoust. Soc.
    Am. 83 (1988) 502). Raises OutOfRangeError unless radius > 0 and rise_time > 0.
    """
    r, t = np.asarray(radius, dtype=float), np.asarray(rise_time, dtype=float)
    if not np.all((r > 0) & (t > 0)):
        raise OutOfRangeError(
            f"peclet needs radius > 0 m and rise_time > 0 s; got {radius=}, {rise_time=}"
        )
    return np.asarray(r**2 / (air_diffusivity(temperature, pressure) * t))


def radius_at_peclet(
    number: float, rise_time: float, temperature: float, pressure: float
) -> float:
    """Radius at the inlet state with that Peclet number [m]; the inverse of ``peclet``.

    Raises OutOfRangeError unless number > 0 and rise_time > 0.
    """
    if not (number > 0 and rise_time > 0):
        raise OutOfRangeError(
            f"radius_at_peclet needs number > 0 and rise_time > 0 s; got {number=}, {rise_time=}"
        )
    return float(np.sqrt(number * air_diffusivity(temperature, pressure) * rise_time))


def _fraction(number: npt.ArrayLike, table: Floats) -> Floats:
    pe = np.asarray(number, dtype=float)
    if not np.all(pe > 0):
        raise OutOfRangeError(f"the fraction of the adiabatic rise needs Pe > 0; got {number!r}")
    inside = np.interp(np.log(pe), np.log(_PECLET), table)
    # Below the table the core fraction falls as sqrt(Pe) or faster: an upper bound there.
    low = table[0] * np.sqrt(pe / _PECLET[0])
    # Above it the mean misses a boundary layer that thins as 1/sqrt(Pe).
    high = 1.0 - (1.0 - table[-1]) * np.sqrt(_PECLET[-1] / np.maximum(pe, _PECLET[-1]))
    return np.asarray(np.where(pe < _PECLET[0], low, np.where(pe > _PECLET[-1], high, inside)))


def core_fraction(number: npt.ArrayLike) -> Floats:
    """Share of the adiabatic rise that the bubble's centre reaches [-], against Pe.

    A surrogate of the conduction model for linear ramps near 1 -> 172 bar, good to 0.04; no
    inertia, spherical. It bounds heat retention from above (deformation and break-up only cool),
    so it may rule a hot bubble out and never prove one.
    Raises OutOfRangeError unless Pe > 0.
    """
    return _fraction(number, _CORE)


def mean_fraction(number: npt.ArrayLike) -> Floats:
    """Share of the adiabatic rise that the bubble's mass-mean temperature reaches [-].

    Same range and direction as ``core_fraction``. Raises OutOfRangeError unless Pe > 0.
    """
    return _fraction(number, _MEAN)


def small_amplitude_exponent(chi: npt.ArrayLike, *, gamma: float = 1.4) -> Floats:
    """Effective polytropic exponent of a bubble under small oscillations [-].

    ``chi`` = alpha/(omega R^2) [-]: large is isothermal (1), small adiabatic (gamma).
    Re(Phi)/3 of ``thermal_transfer``, which has the damping too.
    Source: Prosperetti, J. Acoust. Soc. Am. 61 (1977) 17-27.
    Raises OutOfRangeError unless chi > 0 and gamma > 1.
    """
    return np.asarray(thermal_transfer(chi, gamma=gamma).real / 3)


def contact_temperature(
    t_gas: float, t_liquid: float, *, gas_effusivity: float, liquid_effusivity: float
) -> float:
    """Temperature where hot gas touches cool liquid, both half-spaces at rest [K].

    Effusivities sqrt(k rho cp) [W s^0.5/(m2 K)]. Upper limit of a bubble's wall temperature,
    since the gas next to the wall has cooled already. Source: Carslaw and Jaeger, Conduction of
    Heat in Solids, 2nd ed., 1959, sec. 2.15 (from memory). Raises OutOfRangeError.
    """
    if not (min(t_gas, t_liquid) > 0 and min(gas_effusivity, liquid_effusivity) > 0):
        raise OutOfRangeError(
            "contact_temperature needs positive temperatures and effusivities; got "
            f"{t_gas=}, {t_liquid=}, {gas_effusivity=}, {liquid_effusivity=}"
        )
    total = gas_effusivity + liquid_effusivity
    return float((gas_effusivity * t_gas + liquid_effusivity * t_liquid) / total)
