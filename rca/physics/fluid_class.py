"""Class values of hydraulic fluids, for where a case gives none of its own."""

from dataclasses import dataclass
from typing import Final

from rca.base.errors import OutOfRangeError


@dataclass(frozen=True, slots=True, kw_only=True)
class ClassValues:
    """Typical values of a class of fluid; each with its relative standard uncertainty beside."""

    density_15: float  # [kg/m3]
    expansion: float  # [1/K], of volume about 15 degC
    bunsen: float  # [-], air
    bunsen_u: float  # relative
    flash_point: float  # [K], open cup
    autoignition: float  # [K], ASTM E659, one atmosphere, minutes long
    bulk_modulus: float  # [Pa], isentropic tangent, low pressure, 50 degC
    surface_tension: float  # [N/m]
    flammable_vapour: bool  # whether its vapour can feed an ignition at all
    heat_capacity: float | None = None  # [J/(kg K)] near 50 degC; None: as petroleum oil
    conductivity: float | None = None  # [W/(m K)] near 50 degC; None: as petroleum oil


# Bunsen: Backe, Grundlagen der Oelhydraulik, RWTH Aachen 1974 (mineral 8-10, phosphate ester 8-9,
# polyglycol-water 3-4 volume per cent; the water glycol interval is kept wide, 1-4); PAO by
# ASTM D2779 at its density; ester common practice, no source. Flash and autoignition: typical
# safety data, common practice, no source. Density and expansion: common practice, no source.
# Bulk modulus: Hayward 1970 (mineral, from memory), others common practice, no source. Heat
# capacity and conductivity where given: common practice, no source.
CLASSES: Final[dict[str, ClassValues]] = {
    "mineral": ClassValues(
        density_15=872.0,
        expansion=7.2e-4,
        bunsen=0.09,
        bunsen_u=0.10,
        flash_point=488.0,
        autoignition=618.0,
        bulk_modulus=1.7e9,
        surface_tension=0.030,
        flammable_vapour=True,
    ),
    "PAO": ClassValues(
        density_15=830.0,
        expansion=8.0e-4,
        bunsen=0.10,
        bunsen_u=0.12,
        flash_point=493.0,
        autoignition=623.0,
        bulk_modulus=1.6e9,
        surface_tension=0.029,
        flammable_vapour=True,
    ),
    "ester": ClassValues(
        density_15=920.0,
        expansion=7.5e-4,
        bunsen=0.08,
        bunsen_u=0.12,
        flash_point=553.0,
        autoignition=698.0,
        bulk_modulus=1.9e9,
        surface_tension=0.029,
        flammable_vapour=True,
        heat_capacity=2000.0,
        conductivity=0.145,
    ),
    "phosphate ester": ClassValues(
        density_15=1130.0,
        expansion=7.0e-4,
        bunsen=0.085,
        bunsen_u=0.10,
        flash_point=523.0,
        autoignition=803.0,
        bulk_modulus=2.3e9,
        surface_tension=0.032,
        flammable_vapour=True,
        heat_capacity=1700.0,
        conductivity=0.13,
    ),
    "water glycol": ClassValues(
        density_15=1075.0,
        expansion=6.5e-4,
        bunsen=0.025,
        bunsen_u=0.30,
        flash_point=573.0,
        autoignition=693.0,
        bulk_modulus=3.4e9,
        surface_tension=0.045,
        flammable_vapour=False,
        heat_capacity=3300.0,
        conductivity=0.42,
    ),
}


def class_values(name: str) -> ClassValues:
    """Typical values of a class.

    Raises OutOfRangeError for a class without values.
    """
    if name not in CLASSES:
        raise OutOfRangeError(f"no class values for {name!r}; known are {', '.join(CLASSES)}")
    return CLASSES[name]


def density(temperature: float, density_15: float, expansion: float) -> float:
    """Density [kg/m3] at a temperature [K]: rho15 / (1 + beta (T - 288.15 K)).

    ``density_15`` [kg/m3] 600-1500, ``expansion`` beta [1/K] 2e-4 to 1.5e-3. Linear expansion;
    within 0.5 % from 250 K to 400 K for mineral oil. Pressure: see ``bulk_modulus``.
    Source: definition of the coefficient of cubic expansion.
    Raises OutOfRangeError outside 200 K to 500 K or the ranges above, or for NaN.
    """
    if not 200.0 <= temperature <= 500.0:
        raise OutOfRangeError(f"density is used from 200 K to 500 K; got {temperature:g} K")
    if not (600.0 <= density_15 <= 1500.0 and 2e-4 <= expansion <= 1.5e-3):
        raise OutOfRangeError(
            "density needs 600-1500 kg/m3 at 15 degC and an expansion of 2e-4 to 1.5e-3 1/K; got "
            f"{density_15!r}, {expansion!r}"
        )
    return density_15 / (1.0 + expansion * (temperature - 288.15))
