"""The argument in words, made from the numbers; no word stronger than its number."""

from collections.abc import Mapping, Sequence

from rca.evidence.item import NotAssessed
from rca.verdict.model import Robustness, WeighedItem, Words

# Verbal scale of likelihood ratios as forensic guidance on evaluative reporting prints it
# (ENFSI 2015, from memory; read in secondary sources, some of which begin "weak" at 2). Edge
# values belong to the lower band; below DULL an item favours neither way.
DULL = 1.05
SCALE = (
    (DULL, "no support either way"),
    (10.0, "weak support"),
    (100.0, "moderate support"),
    (1_000.0, "moderately strong support"),
    (10_000.0, "strong support"),
    (1_000_000.0, "very strong support"),
)
# Words for a probability; own table, printed in every report.
CHANCE = (
    (0.05, "very unlikely"),
    (0.25, "unlikely"),
    (0.40, "less likely than not"),
    (0.60, "about as likely as not"),
    (0.75, "more likely than not"),
    (0.90, "likely"),
    (0.975, "very likely"),
    (1.01, "almost certain"),
)
_SIDES = {
    "suction": "The pump was damaged from the suction side",
    "discharge": "The pump was damaged from the discharge side, by micro-dieseling",
    "both": "Both sides took part: the suction side and micro-dieseling on the discharge side",
    "neither": "Neither side: the damage has another mechanism",
    "undetermined": "The evidence does not carry a side",
}
MOST = 3


def verbal(ratio: float) -> str:
    """The word for a likelihood ratio of 1 or more."""
    for top, words in SCALE:
        if ratio <= top:
            return words
    return "extremely strong support"


def chance(p: float) -> str:
    """The word for a probability."""
    return next(words for top, words in CHANCE if p < top)


def explain(
    side: str,
    rule: str,
    sides: Mapping[str, float],
    mechanisms: Mapping[str, float],
    items: Sequence[WeighedItem],
    not_assessed: Sequence[NotAssessed],
    robust: Robustness,
) -> Words:
    """The finding, the strongest items for and against it, and why it could be wrong."""
    p = _probability(side, sides)
    leading = sorted(mechanisms.items(), key=lambda kv: -kv[1])[:2]
    named = " and ".join(f"{name} ({q:.2f})" for name, q in leading if q >= 0.5)
    finding = f"{_SIDES[side]}; this is {chance(p)} (probability {p:.2f})."
    if side == "undetermined":
        finding = (
            f"{_SIDES[side]}: suction {sides['suction']:.2f}, discharge {sides['discharge']:.2f}."
        )
    if named:
        finding += f" Mechanisms that took part: {named}."
    signed = [(i, _towards(side, i)) for i in items]
    up = sorted((x for x in signed if x[1] > 1.05), key=lambda x: -x[1])[:MOST]
    down = sorted((x for x in signed if x[1] < 1 / 1.05), key=lambda x: x[1])[:MOST]
    return Words(
        finding=finding,
        strength=chance(p),
        supports=tuple(f"{i.id}: {i.statement} (times {r:.1f})" for i, r in up),
        against=tuple(f"{i.id}: {i.statement} (divided by {1 / r:.1f})" for i, r in down),
        biggest_doubt=_doubt(side, robust, items, not_assessed),
        rule=rule,
    )


def _probability(side: str, sides: Mapping[str, float]) -> float:
    if side in ("suction", "discharge", "both", "neither"):
        return sides[side]
    return max(sides["suction"], sides["discharge"])


def _towards(side: str, item: WeighedItem) -> float:
    """How far an item raised (above 1) or lowered the odds of the side found."""
    if side == "suction":
        return item.suction_ratio
    if side == "discharge":
        return item.discharge_ratio
    if side == "both":
        return max(item.suction_ratio, item.discharge_ratio, key=lambda r: max(r, 1 / r))
    if side == "neither":
        return 1 / max(item.suction_ratio, item.discharge_ratio, key=lambda r: max(r, 1 / r))
    return max(item.suction_ratio, item.discharge_ratio, key=lambda r: max(r, 1 / r))


def _doubt(
    side: str,
    robust: Robustness,
    items: Sequence[WeighedItem],
    not_assessed: Sequence[NotAssessed],
) -> str:
    if not items:
        return "Nothing was looked at; every statement here is the prior."
    if side == "undetermined":
        first = not_assessed[0].missing if not_assessed else "more evidence"
        return f"Too little speaks either way; missing above all: {first}."
    if robust.flip_set:
        names = " and ".join(robust.flip_set)
        named = [i for i in items if i.id in robust.flip_set]
        what = "; ".join(f"{i.id} rests on {i.common_cause}" for i in named)
        return f"Without {names} the side would be another; {what}."
    if not robust.second_agrees:
        return f"A second, simpler method gives {robust.second_method!r}; the two do not agree."
    share = 100 * (1 - robust.same_side)
    return (
        f"The numbers of the knowledge are judgement: in {share:.0f} % of {robust.draws} draws "
        "within their bounds the side was another. No set of up to three items changes it."
    )
