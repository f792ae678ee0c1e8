"""The controlled words of a case: kinds, signs, zones and their sides.

The words are the trade's own, in the manner of ASTM G40 (wear and erosion terms) and ISO 14224
(failure data). A word outside the vocabulary is kept and answered with the nearest known words.
"""

from enum import StrEnum


class Side(StrEnum):
    """The side of the machine a zone belongs to."""

    INLET = "inlet"
    DISCHARGE = "discharge"
    NEITHER = "neither"


class PumpKind(StrEnum):
    """Kinds of positive-displacement pump."""

    GEAR = "gear"
    VANE = "vane"
    AXIAL_PISTON = "axial piston"
    RADIAL_PISTON = "radial piston"
    SCREW = "screw"


class FluidClass(StrEnum):
    """Classes of hydraulic fluid with properties of their own."""

    MINERAL = "mineral"
    PAO = "PAO"
    ESTER = "ester"
    PHOSPHATE_ESTER = "phosphate ester"
    WATER_GLYCOL = "water glycol"


class PartKind(StrEnum):
    """Parts of a suction line."""

    STRAINER = "strainer"
    PIPE = "pipe"
    HOSE = "hose"
    FITTING = "fitting"
    VALVE = "valve"


FITTING_FORMS = (
    "long-radius bend",
    "short-radius bend",
    "45 degree bend",
    "tee through",
    "tee branch",
    "ball valve",
    "butterfly valve",
    "gate valve",
    "check valve",
    "sharp entrance",
    "rounded entrance",
    "bellmouth",
    "reducer",
)


class Extent(StrEnum):
    """How much of a sign was seen; ``none`` means looked for and absent."""

    NONE = "none"
    SLIGHT = "slight"
    MODERATE = "moderate"
    SEVERE = "severe"


class Sign(StrEnum):
    """What a finding may be."""

    PITTING = "pitting"
    MATTE_EROSION = "matte erosion"
    JET_EROSION = "jet erosion"
    BURN_MARK = "burn mark"
    CARBON_DEPOSIT = "carbon deposit"
    CHARRED_SEAL = "charred seal"
    HARDENED_SEAL = "hardened seal"
    MELTED_EDGE = "melted edge"
    HEAT_TINT = "heat tint"
    SCORING = "scoring"
    SCUFFING = "scuffing"
    POLISHING = "polishing"
    EMBEDDED_PARTICLE = "embedded particle"
    VARNISH = "varnish"
    SLUDGE = "sludge"
    FATIGUE_SPALLING = "fatigue spalling"
    CORROSION = "corrosion"
    SPARK_MARK = "spark mark"
    SMEARED_METAL = "smeared metal"
    FRACTURE = "fracture"
    HOUSING_WEAR_TRACK = "housing wear track"
    FOAM = "foam"
    MILKY_OIL = "milky oil"
    NO_DAMAGE = "no damage"


ZONE_SIDES: dict[str, Side] = {
    "inlet port": Side.INLET,
    "inlet kidney": Side.INLET,
    "transition land": Side.NEITHER,
    "discharge kidney": Side.DISCHARGE,
    "valve plate": Side.NEITHER,
    "cylinder block": Side.NEITHER,
    "cylinder bore": Side.NEITHER,
    "slipper": Side.NEITHER,
    "swash plate": Side.NEITHER,
    "vane tip": Side.NEITHER,
    "cam ring": Side.NEITHER,
    "tooth flank": Side.NEITHER,
    "side plate": Side.NEITHER,
    "housing": Side.NEITHER,
    "bearing": Side.NEITHER,
    "shaft": Side.NEITHER,
    "shaft seal": Side.NEITHER,
    "piston seal": Side.DISCHARGE,
    "cylinder": Side.DISCHARGE,
    "relief valve": Side.DISCHARGE,
    "servo valve": Side.DISCHARGE,
    "return filter": Side.NEITHER,
    "pressure filter": Side.DISCHARGE,
    "strainer": Side.INLET,
    "breather": Side.INLET,
    "suction line": Side.INLET,
    "reservoir": Side.NEITHER,
    "cooler": Side.NEITHER,
}
ZONES = tuple(ZONE_SIDES)

QUANTITIES = (
    "inlet pressure",
    "discharge pressure",
    "case drain pressure",
    "headspace pressure",
    "return pressure",
    "oil temperature",
    "ambient temperature",
    "shaft speed",
    "flow",
    "case drain flow",
    "reservoir level",
    "valve command",
    "vibration",
    "sound pressure",
    "filter differential pressure",
)


class ActionKind(StrEnum):
    """Kinds of action, after the ISO 9000 family; containment after common 8D practice."""

    CONTAINMENT = "containment"
    CORRECTION = "correction"
    CORRECTIVE = "corrective"
    PREVENTIVE = "preventive"


MECHANISMS = (
    "vapour cavitation",
    "gaseous cavitation",
    "aeration",
    "micro-dieseling",
    "jet cavitation",
    "electrostatic discharge",
    "hot spot",
    "oxidation",
    "abrasive wear",
    "water contamination",
    "lubrication starvation",
    "electrochemical erosion",
    "over-pressure",
)
SUCTION_MECHANISMS = ("vapour cavitation", "gaseous cavitation", "aeration")
DISCHARGE_MECHANISMS = ("micro-dieseling",)

CAUSES = (
    "suction strainer clogged",
    "breather plugged",
    "suction line restricted",
    "suction line undersized",
    "air leak on the suction side",
    "low oil level",
    "return flow aerates the reservoir",
    "poor air release",
    "cold or too viscous oil",
    "pump overspeed",
    "high altitude",
    "dirt ingress",
    "water ingress",
    "wrong or mixed oil",
    "cooler failure",
    "filter charging",
    "throttling hot spot",
    "relief valve set or stuck",
    "drive or coupling failure",
    "unknown",
)
