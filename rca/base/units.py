"""Quantities with units, as people write them, to SI at the edge.

Units are Pint's, in a registry of our own in which a turn is a plain count: 1480 rpm is
24.67 turns a second and 100 cm3/rev is 100 cm3. A pressure says whether it is absolute, as in
"0.85 bar(a)", or gauge, as in "210 bar(g)"; a pressure difference needs neither.
"""

import math
import re
from dataclasses import dataclass
from functools import cache
from typing import Any

import pint

STANDARD_ATMOSPHERE = 101325.0  # [Pa], ISO 2533:1975

DIMENSIONS: dict[str, str] = {
    "length": "m",
    "area": "m**2",
    "volume": "m**3",
    "flow": "m**3/s",
    "speed": "1/s",
    "displacement": "m**3",
    "kinematic viscosity": "m**2/s",
    "density": "kg/m**3",
    "pressure": "Pa",
    "pressure difference": "Pa",
    "temperature": "K",
    "temperature difference": "K",
    "time": "s",
    "angle": "rad",
    "conductivity": "S/m",
    "ratio": "",
    "acceleration": "m/s**2",
    "mass": "kg",
}
EXAMPLES: dict[str, str] = {
    "length": "1.8 m",
    "volume": "630 L",
    "flow": "148 L/min",
    "speed": "1480 rpm",
    "displacement": "100 cm3/rev",
    "kinematic viscosity": "46 mm2/s",
    "density": "872 kg/m3",
    "pressure": "0.85 bar(a)",
    "pressure difference": "0.03 bar",
    "temperature": "55 degC",
    "temperature difference": "5 K",
    "time": "12 h",
    "angle": "12 deg",
    "conductivity": "150 pS/m",
    "ratio": "0.94",
    "acceleration": "9.8 m/s2",
}
QUANTITY_DIMENSIONS: dict[str, str] = {
    "inlet pressure": "pressure",
    "discharge pressure": "pressure",
    "case drain pressure": "pressure",
    "headspace pressure": "pressure",
    "return pressure": "pressure",
    "oil temperature": "temperature",
    "ambient temperature": "temperature",
    "shaft speed": "speed",
    "flow": "flow",
    "case drain flow": "flow",
    "reservoir level": "length",
    "valve command": "ratio",
    "vibration": "acceleration",
    "sound pressure": "pressure difference",
    "filter differential pressure": "pressure difference",
}

_NUMBER = r"[-+]?(?:\d+(?:\.\d*)?|\.\d+)(?:[eE][-+]?\d+)?"
_QUANTITY = re.compile(
    rf"(?P<value>{_NUMBER})\s*(?P<unit>[^\d\s+±][^+±]*?)?\s*"
    rf"(?:(?:\+/-|±)\s*(?P<u>{_NUMBER})\s*(?P<u_unit>.*?)\s*)?"
)
_UNIT = re.compile(r"[A-Za-z\u00b0\u00b5\u03bc%\u00b2\u00b30-9_/*^.\u00b7 ()-]*")
_REFERENCE = re.compile(r"\s*\((?P<which>a|g|abs|gauge)\)\s*$")


class UnitError(ValueError):
    """A quantity can't be read; ``found``, ``expected`` and ``mend`` say why and what to write."""

    def __init__(self, found: str, expected: str, mend: str) -> None:
        self.found, self.expected, self.mend = found, expected, mend
        super().__init__(f"found {found}; expected {expected}. {mend}")


@dataclass(frozen=True, slots=True, kw_only=True)
class Converted:
    """A quantity in SI; a gauge pressure is made absolute with the local atmosphere."""

    value: float
    u: float | None
    gauge: bool = False


@dataclass(frozen=True, slots=True, kw_only=True)
class Scale:
    """SI = value * factor + offset, and a gauge pressure needs the local atmosphere besides."""

    factor: float
    offset: float
    gauge: bool


@cache
def registry() -> pint.UnitRegistry[Any]:
    """Pint's registry with turns as plain counts and the trade's spellings."""
    units: pint.UnitRegistry[Any] = pint.UnitRegistry(
        preprocessors=[_spelling], autoconvert_offset_to_baseunit=True, cache_folder=None
    )
    for line in (
        "turn = [] = _ = rev = revolution = revolutions",
        "rpm = turn / minute = _ = U_min",
        "inHg = 3386.389 pascal",  # conventional inch of mercury at 0 degC, NIST SP 811
        "mmHg = 133.3224 pascal",  # NIST SP 811
        "inH2O = 249.0889 pascal",  # conventional, NIST SP 811
        "cSt = 1e-6 meter ** 2 / second",
        "gpm = gallon / minute",
        "lpm = liter / minute",
        "psig_ = psi",
    ):
        units.define(line)
    return units


def parse_quantity(
    text: str, dimension: str, *, atmosphere: float = STANDARD_ATMOSPHERE
) -> Converted:
    """A quantity with its unit, in SI.

    ``dimension`` is a key of ``DIMENSIONS``. ``atmosphere`` [Pa] turns gauge into absolute.
    Raises UnitError for a missing or unfit unit, or a pressure that says neither (a) nor (g).
    """
    plain = text.strip().replace("\u2212", "-").replace("\u00a0", " ")
    match = _QUANTITY.fullmatch(plain)
    example = EXAMPLES.get(dimension, "")
    if match is None:
        raise UnitError(repr(text), f"a number with a unit, such as {example!r}", "Write both.")
    value, unit = float(match["value"]), (match["unit"] or "").strip()
    if not math.isfinite(value):
        raise UnitError(repr(text), "a finite number with a unit", "Check the exponent.")
    if not unit and dimension != "ratio":
        raise UnitError(
            f"{text!r} without a unit",
            f"a {dimension} with its unit",
            f"Write for example {example!r}.",
        )
    scale = unit_scale(unit, dimension)
    si = value * scale.factor + scale.offset + (atmosphere if scale.gauge else 0.0)
    u = None
    if match["u"] is not None:
        u = abs(float(match["u"])) * _difference_factor(match["u_unit"] or unit, dimension)
    _check_physical(si, text, dimension)
    return Converted(value=si, u=u, gauge=scale.gauge)


def unit_scale(unit: str, dimension: str) -> Scale:
    """How values in ``unit`` become SI.

    Raises UnitError where the unit is unknown, of another dimension, or a pressure without
    (a) or (g).
    """
    bare, reference = _split_reference(unit)
    if not _UNIT.fullmatch(bare):
        raise UnitError(
            f"the unit {unit!r}",
            f"a unit of {dimension}",
            f"Write for example {EXAMPLES.get(dimension, '')!r}.",
        )
    if dimension == "pressure" and reference is None:
        raise UnitError(
            f"the pressure unit {unit!r}, which is neither absolute nor gauge",
            f"'{bare}(a)' for absolute or '{bare}(g)' for gauge",
            "Look at the gauge or the transducer's data sheet and say which it is.",
        )
    if dimension != "pressure" and reference is not None:
        raise UnitError(f"{unit!r}", f"a {dimension} without (a) or (g)", f"Write {bare!r}.")
    units = registry()
    try:
        zero = units.Quantity(0.0, bare or "dimensionless").to(DIMENSIONS[dimension]).magnitude
        one = units.Quantity(1.0, bare or "dimensionless").to(DIMENSIONS[dimension]).magnitude
    except pint.DimensionalityError as error:
        raise UnitError(
            f"the unit {unit!r}",
            f"a unit of {dimension}",
            f"Write for example {EXAMPLES.get(dimension, '')!r}.",
        ) from error
    except (
        pint.UndefinedUnitError,
        pint.errors.DefinitionSyntaxError,
        ValueError,
        AttributeError,
        TypeError,
        SyntaxError,
    ) as error:
        raise UnitError(
            f"the unknown unit {unit!r}",
            f"a unit of {dimension}",
            f"Write for example {EXAMPLES.get(dimension, '')!r}.",
        ) from error
    return Scale(factor=float(one - zero), offset=float(zero), gauge=reference == "g")


def channel_scale(quantity: str, unit: str) -> Scale:
    """How samples of a recorded quantity become SI; see ``unit_scale``."""
    return unit_scale(unit, QUANTITY_DIMENSIONS[quantity])


def _split_reference(unit: str) -> tuple[str, str | None]:
    match = _REFERENCE.search(unit)
    if match is None:
        return unit.strip(), None
    return unit[: match.start()].strip(), match["which"][0]


def _difference_factor(unit: str, dimension: str) -> float:
    """Factor of an uncertainty: a difference, so no offset and no (a) or (g) needed."""
    bare, _ = _split_reference(unit)
    if dimension in ("temperature", "temperature difference"):
        bare = {"degC": "K", "°C": "K", "degF": "delta_degF", "°F": "delta_degF"}.get(bare, bare)
    plain = {"pressure": "pressure difference", "temperature": "temperature difference"}
    return unit_scale(bare, plain.get(dimension, dimension)).factor


def _check_physical(value: float, text: str, dimension: str) -> None:
    positive = {
        "temperature": "a temperature above absolute zero",
        "density": "a positive density",
        "kinematic viscosity": "a positive viscosity",
        "displacement": "a positive displacement",
        "pressure": "an absolute pressure above zero",
    }
    if dimension in positive and not value > 0:
        raise UnitError(f"{text!r}", positive[dimension], "Check sign, unit and (a) or (g).")


def _spelling(text: str) -> str:
    """The trade's spellings of a unit: mm2/s, m³, µm, °C, L/min, 1/min."""
    text = text.replace("°C", "degC").replace("°F", "degF").replace("\u03bc", "\u00b5")
    text = text.replace("²", "**2").replace("³", "**3").replace("·", "*")
    text = re.sub(r"(?<=[A-Za-z\u00b5])([23])(?![\d*])", r"**\1", text)
    return re.sub(r"\bU/min\b", "rpm", text)
