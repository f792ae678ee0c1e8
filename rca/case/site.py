"""The air at the site of a case."""

from rca.case.model import Case
from rca.physics.atmosphere import standard_atmosphere


def local_atmosphere(case: Case) -> float:
    """Air pressure at the site [Pa]: as given, else by its altitude, else sea level."""
    if case.header.ambient_pressure is not None:
        return case.header.ambient_pressure.value
    altitude = case.header.altitude.value if case.header.altitude is not None else 0.0
    return float(standard_atmosphere(altitude))
