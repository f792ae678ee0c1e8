"""What a check hands to the verdict: an item of evidence, or the fact that there is none.

An item never says "the explanation is likely"; it says what was found, and for each state of the
thing looked at, how probable that finding is. The verdict's knowledge file says which mechanisms
and causes bring those states about.
"""

from collections.abc import Mapping
from dataclasses import dataclass
from enum import StrEnum

from rca.base.source import Reading, Source


class Basis(StrEnum):
    """What kind of look the item rests on."""

    MEASURED = "measured"
    LABORATORY = "laboratory"
    TEARDOWN = "teardown"
    PHOTO = "photo"
    RECORD = "plant record"
    COMPUTED = "computed"
    STATED = "stated"


class Group(StrEnum):
    """Groups printed together; items of one group usually share a common cause."""

    INLET = "inlet pressure"
    AIR = "air in the oil"
    COMPRESSION = "compression of bubbles"
    OIL = "oil analysis"
    DAMAGE = "damage"
    OPERATION = "operation and history"
    SOUND = "sound and sight"


class Node(StrEnum):
    """What an item may speak about: the observable nodes of the diagnostic network.

    States are given in the docstring of each block; every node has at least two states. The
    knowledge file defines each node's states and parents; a test holds the two together.
    """

    # Physical conditions, states "no", "yes" unless said otherwise (from the checks' physics).
    INLET_PRESSURE = "inlet pressure"  # healthy, low, near vapour
    RELEASED_AIR = "air released at the inlet"  # no, yes
    CARRIED_AIR = "air carried to the inlet"  # no, yes (leak, vortex, plunging return)
    HOT_BUBBLES = "bubbles stay hot"  # no, yes (fast compression of coarse enough bubbles)
    FUEL_PATH = "fuel reaches the hot gas"  # no, yes
    COLD_OIL = "oil too viscous at start"  # no, yes
    INLET_SHORTFALL = "inlet below the clean line"  # no, yes (whatever lowers it)
    STRAINER_RESISTANCE = "strainer resistance raised"  # no, yes
    TANK_DEPRESSION = "reservoir depression"  # no, yes
    LINE_RESISTANCE = "line resistance raised"  # no, yes
    LINE_TOO_SMALL = "line too small as built"  # no, yes (clean, warm, at nominal flow)
    THIN_AIR = "thin air decides"  # no, yes (holds at sea level, not at the site)
    LEVEL_LOW = "oil level low"  # no, yes
    OVERSPEED = "pump runs too fast"  # no, yes
    OVERPRESSURE = "pressure above rating"  # no, yes
    # Oil, states "no", "yes".
    OIL_DARK_FAST = "oil darkened within days or weeks"
    OIL_DARK_SLOW = "oil darkened slowly"
    SOOT = "soot in the oil"
    NITRATION = "nitration"
    OXIDATION_PRODUCTS = "oxidation or acid number up"
    VISCOSITY_DOWN = "viscosity down"
    VISCOSITY_UP = "viscosity up"
    FLASH_DOWN = "flash point down"
    ANTIOXIDANT_LOSS = "antioxidant lost"
    VARNISH_PATCH = "varnish potential high"
    DIRT = "dirt in the oil"
    WEAR_METALS = "wear metals up"
    COARSE_IRON = "coarse iron debris"
    WATER = "water in the oil"
    AIR_RELEASE_SLOW = "air release slow or foam high"
    WRONG_FLUID = "additive or viscosity step"
    LOW_CONDUCTIVITY = "oil conductivity low"
    CHLORINE = "chlorine in the oil"
    FLUID_ETCHES = "fluid known for electrochemical erosion"  # phosphate ester
    # Damage, states "no", "yes".
    PITTING_INLET = "pitting on inlet-side zones"
    PITTING_TRANSITION = "pitting where pressure rises"  # transition land, start of discharge
    PITTING_BORES = "pitting in cylinder bores"
    EDGE_EROSION = "jet erosion at edges"
    METERING_EDGE_EROSION = "erosion of metering edges"  # of servo and relief valves
    CHAR_DISCHARGE = "burning on discharge-side parts"
    CHAR_INLET = "burning on inlet-side parts"
    VALVE_HEAT = "heat marks at a throttling valve"
    SEAL_HARDENED = "hardened seal"
    SPARK_MARKS = "spark marks"
    FILTER_SCORCHED = "scorched filter medium"
    SCRATCHES = "scratches or embedded particles"
    SMEARED = "smeared or scuffed running surfaces"
    HOUSING_TRACK = "housing wear track"
    CORROSION_PITS = "corrosion"
    FRACTURED = "fracture"  # of running parts: pistons, shaft, plates, bearings
    HOUSING_CRACKED = "housing cracked or burst"
    VARNISH_FILM = "varnish film on parts"
    NO_DAMAGE = "no damage found"
    # Sound and sight, states "no", "yes".
    MILKY = "oil seen milky"  # air or water: the sign alone does not say which
    MILKY_CLEARS = "milky oil that clears"
    MILKY_STAYS = "milky oil that stays"
    FOAM = "foam on the reservoir"
    NOISE_STEADY = "steady whine or gravel noise"
    NOISE_ERRATIC = "erratic crackle"
    CLICKS_AT_FILTER = "clicks at the filter"
    # Operation and history, states "no", "yes".
    WORSE_COLD = "worse when cold"
    WORSE_HOT = "worse when hot"
    FAST_PRESSURE_RISE = "fast, high pressure rise"
    BULK_HOT = "bulk oil hot"
    FLOW_LOSS = "flow or efficiency lost"
    RECENT_FLUID_CHANGE = "recent change of fluid or flush"
    AIR_LEAK_FOUND = "air leak found on the suction side"
    RETURN_ABOVE_LEVEL = "return enters above the level"
    STRAINER_FOUND_CLOGGED = "strainer found clogged"
    BREATHER_FOUND_PLUGGED = "breather found plugged"
    LINE_FOUND_RESTRICTED = "suction line found collapsed or pinched"
    RELIEF_FAULT_FOUND = "relief valve fault found"
    COOLER_FAULT_FOUND = "cooler fault found"
    DRIVE_FAULT_FOUND = "drive or coupling fault found"
    THROTTLE_HOT_FOUND = "hot throttling point found"


@dataclass(frozen=True, slots=True, kw_only=True)
class EvidenceItem:
    """One finding about one node of the network.

    ``likelihood`` maps each state of the node to P(this finding | that state); only ratios
    matter, none may be 0 or 1 exactly unless the state set makes it certain by definition.
    A hard observation with a good look is e.g. {"no": 0.05, "yes": 0.95}; a look that would often
    miss is {"no": 0.95, "yes": 0.4}. ``common_cause`` names what the item shares with others: the
    bottle, the sensor, the observer. ``statement`` is a fact, with no word of inference.
    """

    key: str  # stable, e.g. "oil.soot"
    node: Node
    likelihood: Mapping[str, float]
    statement: str
    sources: tuple[Source, ...]
    group: Group
    common_cause: str
    basis: Basis
    reading: Reading | None = None
    limit: Reading | None = None
    absent: bool = False  # looked for and not found

    def __post_init__(self) -> None:
        if not self.sources:
            raise ValueError(f"evidence item {self.key!r} names no source")
        if not all(0.0 < p <= 1.0 for p in self.likelihood.values()):
            raise ValueError(f"evidence item {self.key!r} has a likelihood outside (0, 1]")


@dataclass(frozen=True, slots=True, kw_only=True)
class NotAssessed:
    """A node nobody could look at, and what is missing; carries no weight."""

    key: str
    node: Node
    missing: str
    kind: str = "not looked"  # or "lost"
