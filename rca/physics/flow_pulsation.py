"""Pulsation of the flow a positive-displacement pump draws, and what it costs at the inlet."""

import numpy as np

from rca.base.errors import OutOfRangeError

# Coefficient C of the acceleration head of single-acting reciprocating pumps by number of
# plungers: Hydraulic Institute and API 674 practice (from memory)
PLUNGER_COEFFICIENT = {3: 0.066, 5: 0.040, 7: 0.028, 9: 0.022}
# Coefficient K of the same form: liquids from deaerated water to hot oil
STIFF_LIQUID, MOST_LIQUIDS, HYDROCARBON, HOT_OIL = 1.4, 1.5, 2.0, 2.5


def acceleration_head(
    length: float, velocity: float, speed: float, plungers: int, liquid: float = HYDROCARBON
) -> float:
    """Acceleration head [m] of a reciprocating pump's suction line: L V n C / (K g).

    ``length`` [m], ``velocity`` [m/s], ``speed`` [1/s]. For slow pumps with short, stiff pipes;
    for a swash-plate pump at working speed a gross upper bound, as waves and the elasticity of
    hose and oil take most of it up. Source: Hydraulic Institute and API 674
    practice (from memory).
    Raises OutOfRangeError for a number of plungers without a coefficient.
    """
    if plungers not in PLUNGER_COEFFICIENT:
        known = ", ".join(str(n) for n in PLUNGER_COEFFICIENT)
        raise OutOfRangeError(f"acceleration_head has coefficients for {known}; got {plungers}")
    return length * velocity * speed * 60.0 * PLUNGER_COEFFICIENT[plungers] / (liquid * 9.80665)


def kinematic_unevenness(pistons: int) -> float:
    """Peak to peak of the ideal flow over its mean [-] of an axial piston pump.

    (pi/2z) tan(pi/4z) for an odd number of pistons, (pi/z) tan(pi/2z) for an even one; exact for
    sinusoidal strokes without leakage and compression, which make the true ripple larger.
    Raises OutOfRangeError for fewer than three.
    """
    if pistons < 3:
        raise OutOfRangeError(f"kinematic_unevenness needs three pistons or more; got {pistons}")
    z = pistons * (2.0 if pistons % 2 else 1.0)
    return float(np.pi / z * np.tan(np.pi / (2.0 * z)))


def steepest_flow_change(flow: float, speed: float, pistons: int) -> float:
    """Largest dQ/dt of the ideal piston flow [m3/s2]: at the cusps of the sum of half sines.

    pi^2 n Q/z for an odd number of pistons, twice that for an even one; exact for sinusoidal
    strokes. ``flow`` [m3/s] is the mean, ``speed`` [1/s].
    Raises OutOfRangeError for fewer than three.
    """
    if pistons < 3:
        raise OutOfRangeError(f"steepest_flow_change needs three pistons or more; got {pistons}")
    return float(np.pi**2 * speed * flow / pistons * (1.0 if pistons % 2 else 2.0))


def rigid_column_dip(
    density: float, length_over_area: float, flow: float, speed: float, pistons: int
) -> float:
    """Dip of the inlet pressure [Pa] if the oil column were rigid: rho (L/A) dQ/dt.

    An upper bound, often several times the true dip: oil, hose and released air give way. ``L/A``
    [1/m] summed over the line. Source: Newton's second law.
    """
    return density * length_over_area * steepest_flow_change(flow, speed, pistons)
