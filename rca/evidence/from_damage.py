"""Evidence from the teardown: which sign in which zone speaks of which node of the network."""

from dataclasses import dataclass, replace

from rca.base.source import Source
from rca.case.vocabulary import Extent, Sign
from rca.damage.check import DamageCheck, Observation
from rca.evidence.item import Basis, EvidenceItem, Group, Node, NotAssessed

FILE = "teardown/findings.csv"
INLET = ("inlet port", "inlet kidney", "suction line")
BORES = ("cylinder bore", "cylinder block")
RISING = (
    "transition land",
    "discharge kidney",
    "valve plate",
    "side plate",
    "tooth flank",
    "cam ring",
    "vane tip",
)
PRESSURE = (
    "piston seal",
    "cylinder",
    "discharge kidney",
    "transition land",
    "valve plate",
)
VALVES = ("relief valve", "servo valve")
FILTERS = ("return filter", "pressure filter")
RUNNING = (
    "slipper",
    "swash plate",
    "valve plate",
    "cylinder block",
    "cylinder bore",
    "side plate",
    "cam ring",
    "vane tip",
    "bearing",
    "shaft",
    "tooth flank",
    "housing",
)
RUNNING_PARTS = tuple(zone for zone in RUNNING if zone != "housing")
EDGES = ("discharge kidney", "transition land", "valve plate", "cylinder block", "side plate")
PRESSED = ("housing", "cylinder", "shaft seal", "return filter", "pressure filter", "cooler")
EROSION = (Sign.PITTING, Sign.MATTE_EROSION)
CLOGGING = (Sign.SLUDGE, Sign.VARNISH, Sign.EMBEDDED_PARTICLE, Sign.CARBON_DEPOSIT)
CHARRED = (Sign.CARBON_DEPOSIT, Sign.CHARRED_SEAL)
BURNING = (Sign.BURN_MARK, Sign.CARBON_DEPOSIT, Sign.CHARRED_SEAL, Sign.MELTED_EDGE)


@dataclass(frozen=True, slots=True)
class _Rule:
    node: Node
    signs: tuple[Sign, ...]
    zones: tuple[str, ...]  # empty: any zone
    group: Group = Group.DAMAGE
    usual: bool = False  # a slight extent is normal in service and says next to nothing


_RULES = (
    _Rule(Node.PITTING_INLET, EROSION, INLET),
    _Rule(Node.PITTING_BORES, EROSION, BORES),
    _Rule(Node.PITTING_TRANSITION, EROSION, RISING),
    _Rule(Node.EDGE_EROSION, (Sign.JET_EROSION,), EDGES),
    _Rule(Node.METERING_EDGE_EROSION, (Sign.JET_EROSION, *EROSION), VALVES),
    _Rule(Node.CHAR_DISCHARGE, BURNING, PRESSURE),
    _Rule(Node.CHAR_DISCHARGE, CHARRED, VALVES),
    _Rule(Node.CHAR_INLET, BURNING, INLET),
    _Rule(Node.VALVE_HEAT, (Sign.HEAT_TINT, Sign.BURN_MARK, Sign.MELTED_EDGE), VALVES),
    _Rule(Node.SEAL_HARDENED, (Sign.HARDENED_SEAL,), ()),
    _Rule(Node.SPARK_MARKS, (Sign.SPARK_MARK,), ()),
    _Rule(Node.FILTER_SCORCHED, (Sign.BURN_MARK, Sign.MELTED_EDGE, Sign.SPARK_MARK), FILTERS),
    _Rule(Node.SCRATCHES, (Sign.SCORING, Sign.EMBEDDED_PARTICLE), ()),
    _Rule(Node.SMEARED, (Sign.SMEARED_METAL, Sign.SCUFFING, Sign.HEAT_TINT), RUNNING),
    _Rule(Node.HOUSING_TRACK, (Sign.HOUSING_WEAR_TRACK,), ()),
    _Rule(Node.CORROSION_PITS, (Sign.CORROSION,), ()),
    _Rule(Node.FRACTURED, (Sign.FRACTURE,), RUNNING_PARTS),
    _Rule(Node.HOUSING_CRACKED, (Sign.FRACTURE,), PRESSED),
    _Rule(Node.STRAINER_FOUND_CLOGGED, CLOGGING, ("strainer",), Group.OPERATION, usual=True),
    _Rule(Node.BREATHER_FOUND_PLUGGED, CLOGGING, ("breather",), Group.OPERATION, usual=True),
    _Rule(Node.AIR_LEAK_FOUND, (Sign.FRACTURE,), ("suction line", "inlet port"), Group.OPERATION),
    _Rule(Node.VARNISH_FILM, (Sign.VARNISH,), ()),
    _Rule(Node.FOAM, (Sign.FOAM,), (), Group.SOUND),
)
_BY_NODE = {
    node: tuple(rule for rule in _RULES if rule.node is node)
    for node in dict.fromkeys(rule.node for rule in _RULES)
}
# P(reported | present) and P(reported | absent) by extent; judgement: slight signs are doubtful
_PRESENT = {
    Extent.NONE: (0.75, 0.05),  # of "no damage" alone, which people grade either way
    Extent.SLIGHT: (0.45, 0.10),
    Extent.MODERATE: (0.75, 0.05),
    Extent.SEVERE: (0.90, 0.02),
}
_ABSENT_IF_ABSENT = 0.92
# P(reported absent | present) by the number of the rule's zones looked at: one zone looked at
# says little about the others; judgement
_MISSED = (0.50, 0.35, 0.25)
# where a sign shows first: a look there misses as little as three looks elsewhere; common
# practice, no source
_TELLING: dict[Node, tuple[str, ...]] = {
    Node.PITTING_TRANSITION: ("transition land",),
    Node.EDGE_EROSION: ("transition land", "discharge kidney", "valve plate"),
    Node.CHAR_DISCHARGE: ("piston seal",),
    Node.SPARK_MARKS: FILTERS,
    Node.FILTER_SCORCHED: FILTERS,
    Node.FOAM: ("reservoir",),
    Node.MILKY: ("reservoir",),
    Node.VALVE_HEAT: VALVES,
    Node.METERING_EDGE_EROSION: ("servo valve",),
    Node.HOUSING_CRACKED: ("housing",),
    Node.STRAINER_FOUND_CLOGGED: ("strainer",),
    Node.BREATHER_FOUND_PLUGGED: ("breather",),
}
_WHOLE = {"valve plate", "cylinder block", "housing"}  # a part named as a whole does not say where
_PLACED = (Node.PITTING_TRANSITION, Node.CHAR_DISCHARGE)  # nodes that ask where
_USUAL_SLIGHT = (0.40, 0.30)  # P(slight reported | clogged), P(... | not); judgement


def from_damage(check: DamageCheck) -> tuple[EvidenceItem | NotAssessed, ...]:
    """One item a node: the strongest finding; looked and absent weighs, not looked does not."""
    items: list[EvidenceItem | NotAssessed] = []
    for rules in _BY_NODE.values():
        rule = rules[0]
        seen = [o for o in check.observations if any(_speaks(r, o) for r in rules)]
        found = [o for o in seen if _is_found(o)]
        if not seen and rule.group is Group.DAMAGE:
            items.append(_unseen(rule))
        elif seen:
            items.append(_item(rule, found or seen, absent=not found))
    items.append(_milky(check))
    items.append(_nothing(check))
    return tuple(items)


def _speaks(rule: _Rule, one: Observation) -> bool:
    """A zone called undamaged was looked at for every sign a rule asks of that zone."""
    if one.sign is Sign.NO_DAMAGE:
        return one.zone in rule.zones and rule.group is Group.DAMAGE
    return one.sign in rule.signs and (not rule.zones or one.zone in rule.zones)


def _is_found(one: Observation) -> bool:
    return one.sign is not Sign.NO_DAMAGE and one.extent is not Extent.NONE


def _unseen(rule: _Rule) -> NotAssessed:
    where = f" at {' or '.join(rule.zones[:4])}" if rule.zones else ""
    signs = " or ".join(s.value for s in rule.signs)
    return NotAssessed(
        key=f"damage.{rule.node.name.lower()}",
        node=rule.node,
        missing=f"a finding on {signs}{where}, present or looked for and absent",
    )


def _item(rule: _Rule, observations: list[Observation], *, absent: bool) -> EvidenceItem:
    order = [Extent.NONE, Extent.SLIGHT, Extent.MODERATE, Extent.SEVERE]
    strongest = max(observations, key=lambda o: order.index(o.extent))
    if absent:
        zones = {o.zone for o in observations}
        told = bool(zones & set(_TELLING.get(rule.node, ())))
        yes, no = _MISSED[2 if told else min(len(zones), 3) - 1], _ABSENT_IF_ABSENT
    else:
        yes, no = _PRESENT[strongest.extent]
        if rule.usual and strongest.extent is Extent.SLIGHT:
            yes, no = _USUAL_SLIGHT
        if rule.node in _PLACED and all(o.zone in _WHOLE for o in observations):
            no = max(no, yes / 3)
    listed = "; ".join(
        f"{o.id}: {o.sign.value}, {o.zone}"
        if absent
        else f"{o.id}: {o.sign.value}, {o.extent.value}, {o.zone}"
        for o in observations[:4]
    )
    words = "Looked for and absent" if absent else "Found"
    return EvidenceItem(
        key=f"damage.{rule.node.name.lower()}",
        node=rule.node,
        likelihood={"no": no, "yes": yes},
        statement=f"{words}: {listed}.",
        sources=tuple(
            Source(file=FILE, locator=o.locator, sha256=o.sha256) for o in observations[:4]
        ),
        group=rule.group,
        common_cause=f"observer {strongest.by or 'not named'}, {strongest.component}",
        basis=Basis.TEARDOWN,
        absent=absent,
    )


def _milky(check: DamageCheck) -> EvidenceItem | NotAssessed:
    """Milky is air or water; the sign alone does not say whether it clears."""
    seen = [o for o in check.observations if o.sign is Sign.MILKY_OIL]
    if not seen:
        return NotAssessed(
            key="damage.milky", node=Node.MILKY, missing="a look at the oil for milkiness"
        )
    found = [o for o in seen if o.extent is not Extent.NONE]
    rule = _Rule(Node.MILKY, (Sign.MILKY_OIL,), (), Group.SOUND)
    return _item(rule, found or seen, absent=not found)


def _nothing(check: DamageCheck) -> EvidenceItem | NotAssessed:
    hurt = [
        o
        for o in check.observations
        if o.sign is not Sign.NO_DAMAGE
        and o.extent is not Extent.NONE
        and o.sign not in (Sign.FOAM, Sign.MILKY_OIL)
    ]
    clean = [o for o in check.observations if o.sign is Sign.NO_DAMAGE]
    if not hurt and not clean:
        return NotAssessed(
            key="damage.no_damage", node=Node.NO_DAMAGE, missing="a teardown of the pump"
        )
    rule = _Rule(Node.NO_DAMAGE, (Sign.NO_DAMAGE,), ())
    if not hurt:
        return _item(rule, clean, absent=False)
    # the found signs weigh by themselves; this only says that "nothing was found" does not hold
    clear = any(o.extent is not Extent.SLIGHT for o in hurt)
    item = _item(rule, hurt, absent=False)
    likelihood = {"no": _ABSENT_IF_ABSENT, "yes": _MISSED[2] if clear else _MISSED[0]}
    return replace(item, likelihood=likelihood, absent=True)
