"""Evidence from the oil reports.

How far a change stands out of the reproducibility of its method sets how probable the finding is
under "present" and "absent". A routine value without a change weighs little: soot by infrared and
metals by plasma miss much of what is there.
"""

from dataclasses import dataclass

import numpy as np

from rca.base.source import Reading
from rca.evidence.item import Basis, EvidenceItem, Group, Node, NotAssessed
from rca.oil.check import Judged, OilCheck

FAST_DAYS = 120.0  # a darkening within one usual sampling interval counts as fast
Items = list[EvidenceItem | NotAssessed]


@dataclass(frozen=True, slots=True)
class _Rule:
    """How one property speaks of one node."""

    node: Node
    properties: tuple[str, ...]
    direction: int  # +1 a rise, -1 a fall
    shown: float  # P(stands out | present)
    anyway: float  # P(stands out | absent), beyond chance: other causes of the same reading
    need: float = 1.0  # in units of R


# shown and anyway are judgement: how often a property shows what is there
_RULES = (
    _Rule(Node.SOOT, ("soot",), 1, 0.75, 0.04),
    _Rule(Node.NITRATION, ("nitration",), 1, 0.8, 0.05),
    _Rule(Node.OXIDATION_PRODUCTS, ("oxidation", "acid_number"), 1, 0.85, 0.05),
    _Rule(Node.VISCOSITY_UP, ("viscosity_40",), 1, 0.9, 0.03, 3.0),
    _Rule(Node.VISCOSITY_DOWN, ("viscosity_40",), -1, 0.9, 0.03, 3.0),
    _Rule(Node.FLASH_DOWN, ("flash_point",), -1, 0.8, 0.04),
    _Rule(Node.ANTIOXIDANT_LOSS, ("antioxidant_remaining",), -1, 0.85, 0.05, 2.0),
    _Rule(Node.VARNISH_PATCH, ("patch_colour",), 1, 0.85, 0.05, 2.0),
    _Rule(Node.DIRT, ("Si", "Al"), 1, 0.8, 0.06),
    _Rule(Node.WEAR_METALS, ("Fe", "Cu", "Pb", "Cr", "Sn"), 1, 0.8, 0.05),
    _Rule(Node.COARSE_IRON, ("ferrous_index",), 1, 0.8, 0.05),
    _Rule(Node.AIR_RELEASE_SLOW, ("air_release", "foam_tendency"), 1, 0.8, 0.05),
    _Rule(Node.WRONG_FLUID, ("Zn", "P", "Ca", "Mg"), 0, 0.85, 0.04, 2.0),
    _Rule(Node.CHLORINE, ("Cl",), 1, 0.8, 0.05),
)
_NEED_ALL = {Node.DIRT}  # dirt brings silicon and aluminium together


def from_oil(check: OilCheck | None) -> tuple[EvidenceItem | NotAssessed, ...]:
    """Items for the oil nodes; a node whose property was never tested is not assessed."""
    items: Items = []
    judged = check.judged if check is not None else {}
    for rule in _RULES:
        items.append(_by_rule(rule, judged))
    items += _colour(check)
    items.append(_water(judged))
    items.append(_conductivity(judged))
    return tuple(items)


def _by_rule(rule: _Rule, judged: dict[str, Judged]) -> EvidenceItem | NotAssessed:
    seen = [judged[p] for p in rule.properties if p in judged and judged[p].new is not None]
    if not seen:
        return NotAssessed(
            key=f"oil.{rule.node.name.lower()}",
            node=rule.node,
            missing=f"{' or '.join(rule.properties)} of used and new oil",
        )
    strengths = [_directed(rule, one) for one in seen]
    strength = min(strengths) if rule.node in _NEED_ALL else max(strengths)
    chosen = seen[strengths.index(strength)]
    return _item(rule, chosen, strength / rule.need)


def _directed(rule: _Rule, one: Judged) -> float:
    change = one.stands_out or 0.0
    return abs(change) if rule.direction == 0 else rule.direction * change


def _item(rule: _Rule, one: Judged, strength: float) -> EvidenceItem:
    """``strength`` 1 is the edge of chance; the weight grows smoothly over 0.5 to 2."""
    share = float(1.0 / (1.0 + np.exp(-4.0 * (strength - 1.0))))
    yes = share * rule.shown + (1 - share) * (1 - rule.shown)
    no = share * rule.anyway + (1 - share) * (1 - rule.anyway)
    change = f"{one.change:+.3g}" if one.change is not None else "not known"
    return EvidenceItem(
        key=f"oil.{rule.node.name.lower()}",
        node=rule.node,
        likelihood={"no": no, "yes": yes},
        statement=(
            f"{_name(one.property)} is {one.text} {one.unit} in sample {one.sample}; new oil "
            f"{one.new:.4g}, change {change}, reproducibility R {one.noise:.2g}."
        ),
        sources=(one.source,),
        group=Group.OIL,
        common_cause=f"bottle {one.sample}",
        basis=Basis.LABORATORY,
        reading=Reading(value=one.value, unit=one.unit, u=one.noise / 2.77),
        absent=strength < 1.0,
    )


def _colour(check: OilCheck | None) -> Items:
    judged = check.judged.get("colour") if check is not None else None
    if check is None or judged is None or judged.change is None:
        missing = "colour of used and new oil (ASTM D1500)"
        return [
            NotAssessed(key="oil.dark", node=Node.OIL_DARK_FAST, missing=missing),
            NotAssessed(key="oil.routine", node=Node.ROUTINE_NORMAL_DARK, missing=missing),
        ]
    dark = judged.change >= 2.0
    days = (
        (check.latest_date - check.previous_date).days
        if check.latest_date and check.previous_date
        else None
    )
    fast = dark and (judged.last_step or 0.0) >= 1.0 and days is not None and days <= FAST_DAYS
    statement = (
        f"Colour is {judged.text} in sample {judged.sample}, new oil {judged.new:g} "
        f"(ASTM D1500); {days if days is not None else 'unknown'} days since the sample before."
    )

    def item(key: str, node: Node, present: bool, yes: float, no: float) -> EvidenceItem:
        return EvidenceItem(
            key=key,
            node=node,
            likelihood={"no": no if present else 1 - no, "yes": yes if present else 1 - yes},
            statement=statement,
            sources=(judged.source,),
            group=Group.OIL,
            common_cause=f"bottle {judged.sample}",
            basis=Basis.LABORATORY,
            absent=not present,
        )

    items: Items = [
        item("oil.dark_fast", Node.OIL_DARK_FAST, fast, 0.85, 0.08),
        item("oil.dark_slow", Node.OIL_DARK_SLOW, dark and not fast, 0.7, 0.15),
    ]
    routine = [check.judged.get(p) for p in ("viscosity_40", "acid_number")]
    known = [one for one in routine if one is not None and one.stands_out is not None]
    if dark and len(known) == len(routine):
        flat = all(abs(one.stands_out or 0.0) < 1.5 for one in known)
        items.append(item("oil.routine", Node.ROUTINE_NORMAL_DARK, flat, 0.85, 0.2))
    return items


def _water(judged: dict[str, Judged]) -> EvidenceItem | NotAssessed:
    one = judged.get("water")
    if one is None:
        return NotAssessed(key="oil.water", node=Node.WATER, missing="water content")
    level = one.value if one.op != "<" else one.value / 4.0
    share = float(1.0 / (1.0 + np.exp(-3.0 * np.log(max(level, 1.0) / 500.0))))
    return EvidenceItem(
        key="oil.water",
        node=Node.WATER,
        likelihood={
            "no": share * 0.03 + (1 - share) * 0.97,
            "yes": share * 0.95 + (1 - share) * 0.1,
        },
        statement=f"Water is {one.text} mg/kg in sample {one.sample}.",
        sources=(one.source,),
        group=Group.OIL,
        common_cause=f"bottle {one.sample}",
        basis=Basis.LABORATORY,
        reading=Reading(value=one.value, unit="mg/kg", u=one.noise / 2.77),
        absent=share < 0.5,
    )


def _conductivity(judged: dict[str, Judged]) -> EvidenceItem | NotAssessed:
    one = judged.get("conductivity")
    if one is None:
        return NotAssessed(
            key="oil.conductivity", node=Node.LOW_CONDUCTIVITY, missing="conductivity of the oil"
        )
    low = one.value < 50.0
    return EvidenceItem(
        key="oil.conductivity",
        node=Node.LOW_CONDUCTIVITY,
        likelihood={"no": 0.1, "yes": 0.9} if low else {"no": 0.9, "yes": 0.1},
        statement=f"Conductivity is {one.text} pS/m in sample {one.sample}.",
        sources=(one.source,),
        group=Group.OIL,
        common_cause=f"bottle {one.sample}",
        basis=Basis.LABORATORY,
        absent=not low,
    )


def _name(name: str) -> str:
    return name.replace("_", " ").capitalize() if len(name) > 2 else name
