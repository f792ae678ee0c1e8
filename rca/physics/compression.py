"""Compression heating of air with temperature-dependent heat capacity.

Dry air of fixed composition, ideal gas. Pressures are absolute [Pa], temperatures [K].
"""

import numpy as np
import numpy.typing as npt

from rca.base.errors import OutOfRangeError

Floats = npt.NDArray[np.float64]

UNIVERSAL_GAS_CONSTANT = 8.31446261815324  # [J/(mol K)], SI 2019, exact
# Dry air, mole fractions O2, N2, Ar; carbon dioxide counted with nitrogen (ISO 2533:1975).
AIR_MOLE_FRACTIONS = (0.2095, 0.7812, 0.0093)
# Molar masses of O2, N2, Ar [kg/mol], IUPAC 2021 abridged.
MOLAR_MASSES = (31.998e-3, 28.014e-3, 39.95e-3)
AIR_MOLAR_MASS = sum(x * m for x, m in zip(AIR_MOLE_FRACTIONS, MOLAR_MASSES, strict=True))
AIR_GAS_CONSTANT = UNIVERSAL_GAS_CONSTANT / AIR_MOLAR_MASS  # [J/(kg K)]

# NASA seven-coefficient polynomials a1..a5, a6 (enthalpy), a7 (entropy), 200-1000 K and
# 1000-6000 K: McBride, Gordon, Reno, "Coefficients for calculating thermodynamic and transport
# properties of individual species", NASA TM-4513, 1993.
_LOW = np.array([
    [3.78245636, -2.99673415e-3, 9.847302e-6, -9.68129508e-9, 3.24372836e-12, -1063.94356,
     3.65767573],
    [3.53100528, -1.23660987e-4, -5.02999437e-7, 2.43530612e-9, -1.40881235e-12, -1046.97628,
     2.96747468],
    [2.5, 0.0, 0.0, 0.0, 0.0, -745.375, 4.37967491],
])  # fmt: skip
_HIGH = np.array([
    [3.66096083, 6.56365523e-4, -1.41149485e-7, 2.05797658e-11, -1.29913248e-15, -1215.97725,
     3.41536184],
    [2.95257626, 1.39690057e-3, -4.92631691e-7, 7.86010367e-11, -4.60755321e-15, -923.948645,
     5.87189252],
    [2.5, 0.0, 0.0, 0.0, 0.0, -745.375, 4.37967491],
])  # fmt: skip
AIR_LOW: Floats = np.asarray(np.array(AIR_MOLE_FRACTIONS) @ _LOW)
AIR_HIGH: Floats = np.asarray(np.array(AIR_MOLE_FRACTIONS) @ _HIGH)
T_MIN, T_BREAK, T_MAX = 200.0, 1000.0, 6000.0

GAMMA_COLD_AIR = 1.4  # heat capacity ratio of air near 300 K [-]


def _checked(temperature: npt.ArrayLike, name: str) -> Floats:
    t = np.asarray(temperature, dtype=float)
    if not np.all((t >= T_MIN) & (t <= T_MAX)):
        raise OutOfRangeError(
            f"{name} needs {T_MIN:g} K <= T <= {T_MAX:g} K, the range of the NASA TM-4513 "
            f"polynomials; got {temperature!r}"
        )
    return t


def air_heat_capacity(temperature: npt.ArrayLike) -> Floats:
    """Heat capacity of air at constant pressure cp [J/(kg K)], shape of ``temperature`` [K].

    Valid 200-6000 K without dissociation (negligible below 2000 K). Ideal gas: at 172 bar and
    1245 K the real cp is about 1 % higher.
    Source: NASA TM-4513 (1993), cp/R = a1 + a2 T + a3 T^2 + a4 T^3 + a5 T^4.
    Raises OutOfRangeError outside the range or for NaN.
    """
    t = _checked(temperature, "air_heat_capacity")
    low, high = (((a[4] * t + a[3]) * t + a[2]) * t + a[1] for a in (AIR_LOW, AIR_HIGH))
    cp = np.where(t < T_BREAK, low * t + AIR_LOW[0], high * t + AIR_HIGH[0])
    return np.asarray(AIR_GAS_CONSTANT * cp)


def air_enthalpy(temperature: npt.ArrayLike) -> Floats:
    """Specific enthalpy of air [J/kg], shape of ``temperature`` [K]; zero near 298.15 K.

    Valid 200-6000 K. Source: NASA TM-4513 (1993).
    Raises OutOfRangeError outside the range or for NaN.
    """
    t = _checked(temperature, "air_enthalpy")
    parts = [
        ((((a[4] * t / 5 + a[3] / 4) * t + a[2] / 3) * t + a[1] / 2) * t + a[0]) * t + a[5]
        for a in (AIR_LOW, AIR_HIGH)
    ]
    return np.asarray(AIR_GAS_CONSTANT * np.where(t < T_BREAK, *parts))


def air_internal_energy(temperature: npt.ArrayLike) -> Floats:
    """Specific internal energy of air, h - R T [J/kg], shape of ``temperature`` [K].

    Valid 200-6000 K. Source: NASA TM-4513 (1993), ideal gas.
    Raises OutOfRangeError outside the range or for NaN.
    """
    return air_enthalpy(temperature) - AIR_GAS_CONSTANT * np.asarray(temperature, dtype=float)


def reduced_entropy(temperature: npt.ArrayLike) -> Floats:
    """Standard entropy of air over its gas constant, s0/R [-], shape of ``temperature`` [K].

    exp(s0/R) is the relative pressure p_r of the air tables up to a factor. Valid 200-6000 K.
    Source: NASA TM-4513 (1993). Raises OutOfRangeError outside the range or for NaN.
    """
    t = _checked(temperature, "reduced_entropy")
    log_t = np.log(t)
    parts = [
        a[0] * log_t + (((a[4] * t / 4 + a[3] / 3) * t + a[2] / 2) * t + a[1]) * t + a[6]
        for a in (AIR_LOW, AIR_HIGH)
    ]
    return np.asarray(np.where(t < T_BREAK, *parts))


def adiabatic_end_temperature(
    t_start: npt.ArrayLike, p_start: npt.ArrayLike, p_end: npt.ArrayLike
) -> Floats:
    """Temperature of air compressed without heat loss to ``p_end`` [K]; inputs broadcast.

    Solves s0(T2) - s0(T1) = R ln(p2/p1). An upper bound for a bubble that reaches ``p_end`` and
    no more: heat loss and evaporating fuel cool, inertial overshoot of the bubble's own pressure
    heats. Against the real-gas equation of state it is 2-3 K low at 170 atm.
    Valid for 200 K <= T <= 6000 K and 0 < p_start <= p_end.
    Source: isentropic ideal gas with NASA TM-4513 heat capacity. Raises OutOfRangeError.
    """
    t1, p1, p2 = np.broadcast_arrays(
        *(np.asarray(x, dtype=float) for x in (t_start, p_start, p_end))
    )
    if not np.all((p1 > 0) & (p2 >= p1) & np.isfinite(p2)):
        raise OutOfRangeError(
            "adiabatic_end_temperature needs 0 < p_start <= p_end in absolute Pa; "
            f"got {p_start=}, {p_end=}"
        )
    target = reduced_entropy(t1) + np.log(p2 / p1)
    if np.any(target > reduced_entropy(T_MAX)):
        raise OutOfRangeError(
            f"adiabatic_end_temperature would pass {T_MAX:g} K, the end of NASA TM-4513; "
            f"got {t_start=}, {p_start=}, {p_end=}"
        )
    t = np.minimum(t1 * (p2 / p1) ** 0.25, T_MAX)
    for _ in range(50):  # Newton on ln T: d(s0/R)/d(ln T) = cp/R
        residual = reduced_entropy(t) - target
        t = np.clip(t * np.exp(-residual * AIR_GAS_CONSTANT / air_heat_capacity(t)), T_MIN, T_MAX)
        if np.all(np.abs(residual) < 1e-13 * np.abs(target)):
            break
    return np.asarray(t)


def pressure_for_end_temperature(
    t_start: npt.ArrayLike, p_start: npt.ArrayLike, t_end: npt.ArrayLike
) -> Floats:
    """Pressure at which air compressed without heat loss reaches ``t_end`` [Pa abs]; broadcasts.

    The inverse of ``adiabatic_end_temperature``: a lower bound on the pressure that makes a bubble
    so hot, as heat loss only asks for more. Valid for 200 K <= t_start <= t_end <= 6000 K,
    p_start > 0. Source: isentropic ideal gas with NASA TM-4513. Raises OutOfRangeError.
    """
    t1, p1, t2 = np.broadcast_arrays(
        *(np.asarray(x, dtype=float) for x in (t_start, p_start, t_end))
    )
    if not np.all((p1 > 0) & np.isfinite(p1) & (t2 >= t1)):
        raise OutOfRangeError(
            "pressure_for_end_temperature needs p_start > 0 Pa absolute and t_end >= t_start; got "
            f"{p_start=}, {t_start=}, {t_end=}"
        )
    return np.asarray(p1 * np.exp(reduced_entropy(t2) - reduced_entropy(t1)))


def constant_gamma_end_temperature(
    t_start: npt.ArrayLike,
    p_start: npt.ArrayLike,
    p_end: npt.ArrayLike,
    *,
    gamma: float = GAMMA_COLD_AIR,
) -> Floats:
    """Adiabatic end temperature with constant heat capacities [K]: a trap, kept to show it.

    Too hot by 118 K at 170 atm from 1 bar and 40 degC; tables of "micro-diesel temperatures" in
    trade texts come from this arithmetic. Never used for a judgement here.
    Source: perfect-gas isentropic relation. Raises OutOfRangeError unless 0 < p_start <= p_end,
    T > 0 and gamma > 1.
    """
    t1, p1, p2 = (np.asarray(x, dtype=float) for x in (t_start, p_start, p_end))
    if not (np.all((t1 > 0) & (p1 > 0) & (p2 >= p1)) and gamma > 1):
        raise OutOfRangeError(
            "constant_gamma_end_temperature needs t_start > 0, 0 < p_start <= p_end (absolute Pa) "
            f"and gamma > 1; got {t_start=}, {p_start=}, {p_end=}, {gamma=}"
        )
    return np.asarray(t1 * (p2 / p1) ** ((gamma - 1) / gamma))


def effective_exponent(t_start: float, t_end: float, pressure_ratio: float) -> float:
    """Polytropic exponent n that joins two states: T2/T1 = (p2/p1)^((n-1)/n) [-].

    Identity; valid for any T > 0 and pressure_ratio > 1. Raises OutOfRangeError otherwise.
    """
    if not (t_start > 0 and t_end > 0 and pressure_ratio > 1):
        raise OutOfRangeError(
            f"effective_exponent needs T > 0 and pressure_ratio > 1; got {t_start=}, {t_end=}, "
            f"{pressure_ratio=}"
        )
    return float(1.0 / (1.0 - np.log(t_end / t_start) / np.log(pressure_ratio)))
