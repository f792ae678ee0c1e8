"""How far two results of one oil may differ by chance: reproducibility R of the methods.

R is the 95 % limit of the absolute difference of two single results of two laboratories. A
change smaller than R is no change. Where a standard's R was not at hand the value is marked as
common practice and is wide on purpose.
"""

from rca.case.oil import OilValue

_ELEMENTS = {  # ASTM D5185-18, R = c X^d [mg/kg], from memory; within its ranges
    "Al": (3.8, 0.26),
    "B": (13.0, 0.01),
    "Ca": (0.015, 1.3),
    "Cr": (0.81, 0.61),
    "Cu": (0.24, 1.0),
    "Fe": (0.52, 0.80),
    "Pb": (3.0, 0.36),
    "Mg": (0.72, 0.77),
    "Mo": (0.64, 0.71),
    "Ni": (1.5, 0.50),
    "P": (4.3, 0.50),
    "K": (6.6, 0.29),
    "Si": (2.9, 0.39),
    "Na": (1.1, 0.71),
    "S": (1.2, 0.75),
    "Sn": (2.1, 0.62),
    "Zn": (0.083, 1.1),
}


def reproducibility(name: str, level: float) -> float:
    """R at a level, in the property's canonical unit.

    Viscosity ISO 3104:1994 (0.65 % base oils) widened to 1 % for oils in service (from memory);
    acid number ASTM D664 before 2017 (0.44 X); colour ASTM D1500 (1.0); air release ASTM D3427
    (1.3 sqrt X); elements ASTM D5185 (from memory); flash point ASTM D92 (18 degC, from memory);
    the rest common practice, no source.
    """
    x = abs(level)
    if name in _ELEMENTS:
        factor, power = _ELEMENTS[name]
        return max(factor * x**power, 1.0)
    return {
        "viscosity_40": 0.012 * x,
        "viscosity_100": 0.014 * x,
        "acid_number": max(0.44 * x, 0.05),
        "water": max(0.3 * x, 30.0),
        "oxidation": max(0.2 * x, 1.0),
        "nitration": max(0.2 * x, 1.0),
        "sulfation": max(0.2 * x, 1.0),
        "soot": max(0.2 * x, 0.5),
        "colour": 1.0,
        "patch_colour": max(0.3 * x, 5.0),
        "antioxidant_remaining": 15.0,
        "oxidation_life": 0.22 * x,
        "ferrous_index": max(0.3 * x, 10.0),
        "cleanliness_code": 1.0,
        "air_release": 1.3 * x**0.5,
        "flash_point": 18.0,
        "conductivity": 0.3 * x,
        "insolubles": max(0.3 * x, 0.02),
    }.get(name, 0.3 * x)


def certain(value: OilValue | None) -> float | None:
    """The number of an uncensored result."""
    return value.value if value is not None and value.op in ("=", "~") else None
