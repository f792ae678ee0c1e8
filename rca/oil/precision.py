"""How far two results of one oil may differ by chance: r and R of the methods.

r (repeatability: one operator, one day) and R (reproducibility: two laboratories) are the 95 %
limits of the absolute difference of two single results; R = 2.77 s_R. A change smaller than R is
no change. Every row carries its source and how well it is known; a row marked "common practice"
is wide on purpose.
"""

from collections.abc import Callable
from dataclasses import dataclass
from math import inf, isfinite, sqrt

from rca.base.errors import OutOfRangeError
from rca.case.oil import OilValue

PER_SD = 2.7718  # 1.96 sqrt 2, R over the standard deviation of one result
MEMORY = "from memory"
PRACTICE = "common practice, no source"
PUBLISHED = "published"


@dataclass(frozen=True, slots=True, kw_only=True)
class Precision:
    """r and R at one level, in the property's canonical unit."""

    r: float | None
    R: float
    source: str
    flag: str
    note: str = ""

    @property
    def sd(self) -> float:
        """Standard deviation of one result between laboratories."""
        return self.R / PER_SD


@dataclass(frozen=True, slots=True)
class _Method:
    r: Callable[[float], float] | None
    R: Callable[[float], float]
    low: float
    high: float
    source: str
    flag: str


def _power(r: tuple[float, float], R: tuple[float, float], low: float, high: float) -> _Method:
    """A row of the element method: r = a X^b, R = c X^d [mg/kg]."""
    return _Method(
        lambda x: r[0] * x ** r[1],
        lambda x: R[0] * x ** R[1],
        low,
        high,
        "ASTM D5185",
        MEMORY,
    )


def _share(r: float, R: float, source: str, flag: str) -> _Method:
    return _Method(lambda x: r * x, lambda x: R * x, 0.0, inf, source, flag)


def _fixed(r: float | None, R: float, source: str, flag: str) -> _Method:
    return _Method((lambda _: r) if r is not None else None, lambda _: R, 0.0, inf, source, flag)


def _practice(share: float, least: float) -> _Method:
    return _Method(None, lambda x: max(share * x, least), 0.0, inf, "wide on purpose", PRACTICE)


_METHODS = {
    "viscosity_40": _Method(
        lambda x: 0.000233 * x**1.722,
        lambda x: 0.000594 * x**1.722,
        25.0,
        150.0,
        "ASTM D445 (from 2017), formulated oils in service",
        MEMORY,
    ),
    "viscosity_100": _Method(
        lambda x: 0.001005 * x**1.4633,
        lambda x: 0.003361 * x**1.4633,
        4.0,
        20.0,
        "ASTM D445 (from 2017), formulated oils in service",
        MEMORY,
    ),
    "acid_number": _Method(
        lambda x: 0.117 * x,
        lambda x: 0.44 * x,
        0.05,
        10.0,
        "ASTM D664 before 2017, used oils, buffer end point",
        PUBLISHED,
    ),
    "water": _Method(
        lambda x: 0.08852 * x**0.7,
        lambda x: 0.5248 * x**0.7,
        20.0,
        25000.0,
        "ASTM D6304",
        MEMORY,
    ),
    "colour": _fixed(0.5, 1.0, "ASTM D1500", PUBLISHED),
    "oxidation_life": _share(0.12, 0.22, "ASTM D2272, digest", "secondary source"),
    "air_release": _Method(
        lambda x: 0.5 * sqrt(x),
        lambda x: 1.3 * sqrt(x),
        0.5,
        60.0,
        "ASTM D3427, unused turbine oils",
        PUBLISHED,
    ),
    "foam_tendency": _Method(
        lambda x: 10.0 + 0.22 * x,
        lambda x: 15.0 + 0.33 * x,
        0.0,
        inf,
        "ASTM D892, sequence I",
        MEMORY,
    ),
    "foam_stability": _practice(0.3, 15.0),
    "flash_point": _fixed(8.0, 18.0, "ASTM D92", MEMORY),
    "oxidation": _practice(0.25, 2.0),
    "nitration": _practice(0.25, 2.0),
    "sulfation": _practice(0.25, 2.0),
    "soot": _practice(0.25, 1.0),
    "patch_colour": _practice(0.25, 5.0),
    "antioxidant_remaining": _practice(0.0, 12.0),
    "ferrous_index": _practice(0.3, 8.0),
    "cleanliness_code": _fixed(None, 1.0, "one code either way is noise", PRACTICE),
    "cleanliness_14": _fixed(None, 1.0, "one code either way is noise", PRACTICE),
    "particles_4": _practice(1.0, 100.0),
    "particles_6": _practice(1.0, 40.0),
    "particles_14": _practice(1.0, 10.0),
    "conductivity": _practice(0.3, 10.0),
    "insolubles": _practice(0.3, 0.02),
    "Al": _power((0.71, 0.41), (3.8, 0.26), 6, 40),
    "Ba": _power((0.24, 0.66), (0.59, 0.92), 0.5, 4),
    "B": _power((0.26, 1.0), (13.0, 0.01), 4, 30),
    "Ca": _power((0.0020, 1.4), (0.015, 1.3), 40, 9000),
    "Cr": _power((0.17, 0.75), (0.81, 0.61), 1, 40),
    "Cu": _power((0.12, 0.91), (0.24, 1.0), 2, 160),
    "Fe": _power((0.13, 0.80), (0.52, 0.80), 2, 140),
    "Pb": _power((1.6, 0.32), (3.0, 0.36), 10, 160),
    "Mg": _power((0.16, 0.86), (0.72, 0.77), 5, 1700),
    "Mn": _power((0.010, 1.3), (0.13, 1.2), 5, 700),
    "Mo": _power((0.29, 0.70), (0.64, 0.71), 5, 200),
    "Ni": _power((0.52, 0.49), (1.5, 0.50), 5, 40),
    "P": _power((1.3, 0.58), (4.3, 0.50), 10, 1000),
    "K": _power((3.8, 0.33), (6.6, 0.29), 40, 1200),
    "Si": _power((1.3, 0.26), (2.9, 0.39), 8, 50),
    "Ag": _power((0.15, 0.83), (0.35, 1.0), 0.5, 50),
    "Na": _power((0.49, 0.66), (1.1, 0.71), 7, 70),
    "S": _power((0.49, 0.81), (1.2, 0.75), 900, 6000),
    "Sn": _power((2.4, 0.17), (2.1, 0.62), 10, 40),
    "Ti": _power((0.54, 0.37), (2.5, 0.47), 5, 40),
    "V": _power((0.061, 1.1), (0.28, 1.1), 1, 50),
    "Zn": _power((0.15, 0.88), (0.083, 1.1), 60, 1600),
}
_OTHER_ELEMENT = _practice(0.3, 2.0)
_BASE_OILS = _Method(
    lambda x: 0.0026 * x, lambda x: 0.0065 * x, 0.2, 300000.0, "ISO 3104:1994", PUBLISHED
)


def precision(name: str, level: float) -> Precision:
    """R and R of a property's method at the mean level of the two results.

    Raises OutOfRangeError where the published range of the method does not hold the level, and
    for NaN.
    """
    method = _METHODS.get(name, _OTHER_ELEMENT)
    if not isfinite(level):
        raise OutOfRangeError(f"precision of {name} needs a finite level; got {level}")
    if not method.low <= abs(level) <= method.high:
        raise OutOfRangeError(
            f"{method.source} gives its precision for {name} from {method.low:g} to "
            f"{method.high:g}; got {level:g}"
        )
    return _at(method, abs(level))


def glass_capillary_precision(viscosity: float) -> Precision:
    """R of formulated and R of base oils by glass capillary, ISO 3104:1994 [mm2/s]."""
    return _at(_BASE_OILS, viscosity)


def noise_floor(name: str, level: float) -> Precision:
    """As ``precision``; outside the method's range the precision at its end, and says so.

    Below the range that is wider than the truth (a real change may be called none); above it the
    published curve is drawn on.
    """
    method = _METHODS.get(name, _OTHER_ELEMENT)
    if not isfinite(level):
        raise OutOfRangeError(f"precision of {name} needs a finite level; got {level}")
    x = abs(level)
    if x < method.low:
        note = f"below the method's range, R at its lower end {method.low:g} is taken"
        return _at(method, method.low, note)
    note = "" if x <= method.high else "above the method's range, its curve is drawn on"
    return _at(method, x, note)


def site_precision(pairs: list[tuple[float, float]]) -> float | None:
    """R' of a site from re-tests of the same oil: 2.77 times their standard deviation.

    Source: ASTM D6299 (definition). None for fewer than 5 pairs.
    """
    if len(pairs) < 5:
        return None
    return PER_SD * sqrt(sum((a - b) ** 2 for a, b in pairs) / (2.0 * len(pairs)))


def critical_difference(r: float, R: float, results: tuple[int, int]) -> float:
    """95 % limit of the difference of two means from two laboratories.

    sqrt(R^2 - r^2 (1 - 1/(2 n1) - 1/(2 n2))), ISO 5725-6 (from memory); n1 = n2 = 1 gives R.
    Raises OutOfRangeError for fewer than one result a laboratory or r above R.
    """
    first, second = results
    if min(results) < 1 or not 0.0 <= r <= R:
        raise OutOfRangeError(f"need 0 <= r <= R and a result or more each; got {r}, {R}")
    return sqrt(R**2 - r**2 * (1.0 - 1.0 / (2 * first) - 1.0 / (2 * second)))


def certain(value: OilValue | None) -> float | None:
    """The number of an uncensored result."""
    return value.value if value is not None and value.op in ("=", "~") else None


def _at(method: _Method, level: float, note: str = "") -> Precision:
    return Precision(
        r=method.r(level) if method.r is not None else None,
        R=method.R(level),
        source=method.source,
        flag=method.flag,
        note=note,
    )
