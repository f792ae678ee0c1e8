"""What make-up oil does to a tank: levels that rise to a ceiling, and loss of antioxidant."""

from math import exp

from rca.base.errors import OutOfRangeError


def mixed_tank(
    hours: float, *, volume: float, make_up: float, generation: float, new: float
) -> float:
    """Concentration [mg/kg] of a well-mixed tank that is topped up steadily from full, new oil.

    dC/dt = g - (m/V)(C - C0); ``volume`` V [L], ``make_up`` m [L/h], ``generation`` g [mg/kg/h],
    ``new`` C0 [mg/kg]. Level oil never rises past C0 + gV/m, however worn the pump.
    Raises OutOfRangeError for a volume of 0 or less, or negative hours or make-up.
    """
    if volume <= 0.0 or make_up < 0.0 or hours < 0.0:
        raise OutOfRangeError(f"need V > 0, m >= 0, t >= 0; got {volume}, {make_up}, {hours}")
    if make_up == 0.0:
        return new + generation * hours
    ceiling = generation * volume / make_up
    return new + ceiling * (1.0 - exp(-make_up * hours / volume))


def severity(*, make_up: float, years: float, left: float) -> float:
    """Antioxidant used [% of new a year] where ``left`` [%] is left after ``years``.

    B = M (1 - X/100) / (1 - exp(-M t/100)), ``make_up`` M [% of the volume a year]. Source: ASTM
    D4378, annex (from memory); it follows from the balance of a mixed tank.
    Raises OutOfRangeError for years or make-up of 0 or less, or a share outside 0 to 100.
    """
    if years <= 0.0 or make_up <= 0.0 or not 0.0 <= left <= 100.0:
        raise OutOfRangeError(f"need M > 0, t > 0, X in 0..100; got {make_up}, {years}, {left}")
    return make_up * (1.0 - left / 100.0) / (1.0 - exp(-make_up * years / 100.0))
