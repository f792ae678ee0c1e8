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
    "relief valve",
    "servo valve",
    "discharge kidney",
    "transition land",
    "valve plate",
)
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
EDGES = ("servo valve", "relief valve", "discharge kidney", "transition land", "valve plate")
EROSION = (Sign.PITTING, Sign.MATTE_EROSION)
BURNING = (Sign.BURN_MARK, Sign.CARBON_DEPOSIT, Sign.CHARRED_SEAL, Sign.MELTED_EDGE)


@dataclass(frozen=True, slots=True)
class _Rule:
    node: Node
    signs: tuple[Sign, ...]
    zones: tuple[str, ...]  # empty: any zone
    group: Group = Group.DAMAGE


_RULES = (
    _Rule(Node.PITTING_INLET, EROSION, INLET),
    _Rule(Node.PITTING_BORES, EROSION, BORES),
    _Rule(Node.PITTING_TRANSITION, EROSION, RISING),
    _Rule(Node.EDGE_EROSION, (Sign.JET_EROSION,), EDGES),
    _Rule(Node.CHAR_DISCHARGE, BURNING, PRESSURE),
    _Rule(Node.CHAR_INLET, BURNING, INLET),
    _Rule(Node.SEAL_HARDENED, (Sign.HARDENED_SEAL,), ()),
    _Rule(Node.SPARK_MARKS, (Sign.SPARK_MARK,), ()),
    _Rule(Node.FILTER_SCORCHED, (Sign.BURN_MARK, Sign.MELTED_EDGE, Sign.SPARK_MARK), FILTERS),
    _Rule(Node.SCRATCHES, (Sign.SCORING, Sign.EMBEDDED_PARTICLE), ()),
    _Rule(Node.SMEARED, (Sign.SMEARED_METAL, Sign.SCUFFING, Sign.HEAT_TINT), RUNNING),
    _Rule(Node.HOUSING_TRACK, (Sign.HOUSING_WEAR_TRACK,), ()),
    _Rule(Node.CORROSION_PITS, (Sign.CORROSION,), ()),
    _Rule(Node.FRACTURED, (Sign.FRACTURE,), ()),
    _Rule(Node.VARNISH_FILM, (Sign.VARNISH,), ()),
    _Rule(Node.FOAM, (Sign.FOAM,), (), Group.SOUND),
)
# P(reported | present) and P(reported | absent) by extent; judgement: slight signs are doubtful
_PRESENT = {
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
    Node.MILKY_CLEARS: ("reservoir",),
}
_WHOLE = {"valve plate", "cylinder block", "housing"}  # a part named as a whole does not say where
_PLACED = (Node.PITTING_TRANSITION, Node.CHAR_DISCHARGE)  # nodes that ask where
# milky is air or water; the sign alone does not say whether it clears, so an emulsion (or not
# milky for long) reports the same; judgement
_MILKY_OTHERWISE = 0.20


def from_damage(check: DamageCheck) -> tuple[EvidenceItem | NotAssessed, ...]:
    """One item a node: the strongest finding; looked and absent weighs, not looked does not."""
    items: list[EvidenceItem | NotAssessed] = []
    for rule in _RULES:
        seen = [o for o in check.observations if _speaks(rule, o)]
        found = [o for o in seen if o.extent is not Extent.NONE]
        if not seen:
            items.append(_unseen(rule))
        else:
            items.append(_item(rule, found or seen, absent=not found))
    items.append(_milky(check))
    items.append(_nothing(check))
    return tuple(items)


def _speaks(rule: _Rule, one: Observation) -> bool:
    return one.sign in rule.signs and (not rule.zones or one.zone in rule.zones)


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
    seen = [o for o in check.observations if o.sign is Sign.MILKY_OIL]
    if not seen:
        return NotAssessed(
            key="damage.milky", node=Node.MILKY_CLEARS, missing="a look at the oil for milkiness"
        )
    rule = _Rule(Node.MILKY_CLEARS, (Sign.MILKY_OIL,), (), Group.SOUND)
    found = [o for o in seen if o.extent is not Extent.NONE]
    item = _item(rule, found or seen, absent=not found)
    if not found:
        return item
    otherwise = max(item.likelihood["no"], _MILKY_OTHERWISE)
    return replace(item, likelihood={**item.likelihood, "no": otherwise})


def _nothing(check: DamageCheck) -> EvidenceItem | NotAssessed:
    hurt = [
        o
        for o in check.observations
        if o.sign is not Sign.NO_DAMAGE
        and o.extent is not Extent.NONE
        and o.sign not in (Sign.FOAM, Sign.MILKY_OIL)
    ]
    clean = [
        o for o in check.observations if o.sign is Sign.NO_DAMAGE and o.extent is not Extent.NONE
    ]
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
