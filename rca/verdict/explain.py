"""The argument in words, made from the numbers; no word stronger than its number."""

from collections.abc import Mapping, Sequence

from rca.case.vocabulary import DISCHARGE_MECHANISMS, SUCTION_MECHANISMS
from rca.evidence.item import NotAssessed
from rca.verdict.knowledge import INLET, Knowledge
from rca.verdict.model import GroupWeight, NextTest, Robustness, WeighedItem, Words

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
NAMED = 0.5  # a mechanism this probable is named in the finding
BARELY = 1.2  # an item that moves the odds by less is not listed for or against
SPEAKS_AGAINST = 1.3  # ... and by less than this is no doubt worth a sentence
RIVAL = 0.05  # another explanation of the same signs this probable is worth a sentence, if it ...
LEAVES = 0.15  # ... leaves one of them this often
CONFIRMED = 1.5  # likelihood ratio from which a direct look confirms a condition
SURE = 0.98  # from here the network is held back, and that is said
# What judgement may claim (own rule): the ratio of one group, and of all together.
GROUP_CAP, TOTAL_CAP = 100.0, 10_000.0
_OF_SIDE = {"suction": SUCTION_MECHANISMS, "discharge": DISCHARGE_MECHANISMS}


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
    *,
    knowledge: Knowledge,
    groups: Sequence[GroupWeight] = (),
    tests: Sequence[NextTest] = (),
    network: Mapping[str, float] | None = None,
    prior: Mapping[str, float] | None = None,
) -> Words:
    """The finding, the strongest items for and against it, and why it could be wrong.

    ``network`` are the sides before they were held back, ``prior`` those before any evidence.
    """
    p = _probability(side, sides)
    finding = f"{_SIDES[side]}; this is {chance(p)} (probability {p:.2f})."
    if side == "undetermined":
        finding = (
            f"{_SIDES[side]}: suction {sides['suction']:.2f}, discharge {sides['discharge']:.2f}."
        )
    finding += _named(mechanisms)
    signed = [(i, _towards(side, i)) for i in items]
    up = sorted((x for x in signed if x[1] > BARELY), key=lambda x: -x[1])[:MOST]
    down = sorted((x for x in signed if x[1] < 1 / BARELY), key=lambda x: x[1])[:MOST]
    return Words(
        finding=finding,
        strength=chance(p),
        supports=tuple(f"{i.id}: {i.statement} (odds times {_times(r)})" for i, r in up),
        against=tuple(f"{i.id}: {i.statement} (odds divided by {_times(1 / r)})" for i, r in down),
        biggest_doubt=_doubt(
            side, sides, mechanisms, items, not_assessed, robust, tests, knowledge
        ),
        rule=rule,
        caps=_caps(groups, sides, network or sides, knowledge.doubt),
        together=_together(side, sides, prior, up),
    )


def _named(mechanisms: Mapping[str, float]) -> str:
    """Every mechanism more probable than not, most probable first."""
    leading = sorted(mechanisms.items(), key=lambda kv: -kv[1])
    named = [f"{name} ({q:.2f})" for name, q in leading if q >= NAMED]
    return f" Mechanisms that took part: {_listed(named)}." if named else ""


def _listed(parts: Sequence[str]) -> str:
    return parts[0] if len(parts) == 1 else f"{', '.join(parts[:-1])} and {parts[-1]}"


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
    stronger = max(item.suction_ratio, item.discharge_ratio, key=lambda r: max(r, 1 / r))
    return 1 / stronger if side == "neither" else stronger


def _together(
    side: str,
    sides: Mapping[str, float],
    prior: Mapping[str, float] | None,
    up: Sequence[tuple[WeighedItem, float]],
) -> str:
    """The weight of all items on the side found, beside that of the strongest one."""
    if prior is None or side not in ("suction", "discharge", "both", "neither") or not up:
        return ""
    p, q = sides[side], prior[side]
    ratio = (p / (1 - p)) / (q / (1 - q))
    strongest = up[0][1]
    held = min(ratio, TOTAL_CAP)
    return (
        f"All items together multiply the odds of {side!r} by {_times(held)} ({verbal(held)}); "
        f"the strongest one by itself, with all others in place, by {_times(strongest)} "
        f"({verbal(strongest)})."
    )


def _caps(
    groups: Sequence[GroupWeight],
    sides: Mapping[str, float],
    network: Mapping[str, float],
    doubt: float,
) -> str:
    """Where judgement was held back, and how far; empty where it was not."""
    words = [f"Group {g.group!r}: {g.capped}." for g in groups if g.capped]
    for name in ("suction", "discharge"):
        if max(network[name], 1.0 - network[name]) > SURE:
            words.append(
                f"The network alone gives {name} {_share(network[name])}; held back to "
                f"{_share(sides[name])}, since the network itself is taken to be wrong with a "
                f"chance of {100 * doubt:.0f} %."
            )
    return " ".join(words)


def _times(x: float) -> str:
    return f"{x:.2g}" if x < 100 else f"{x:.0f}"


def _share(p: float) -> str:
    return "above 0.99" if p > 0.995 else "below 0.01" if p < 0.005 else f"{p:.2f}"


def _doubt(
    side: str,
    sides: Mapping[str, float],
    mechanisms: Mapping[str, float],
    items: Sequence[WeighedItem],
    not_assessed: Sequence[NotAssessed],
    robust: Robustness,
    tests: Sequence[NextTest],
    knowledge: Knowledge,
) -> str:
    """The biggest reason the finding could be wrong, in terms of the machine."""
    if not items:
        return "Nothing was looked at; every statement here is the prior."
    gap = next((t.name for t in tests if t.could_change_side), "")
    if side == "undetermined":
        first = gap or (tests[0].name if tests else "")
        first = first or (not_assessed[0].missing if not_assessed else "more evidence")
        return f"Too little speaks either way; missing above all: {first}."
    weak = _weakest(side, sides)
    words = [_rests_on(weak, mechanisms, items, knowledge)]
    against = min(items, key=lambda i: _towards(weak, i))
    if _towards(weak, against) < 1 / SPEAKS_AGAINST and against.id not in words[0]:
        words.append(f"Strongest against it: {against.id}, {_in_short(against.statement)}.")
    if robust.flip_set:
        names = [f"{i.id} ({i.node})" for i in items if i.id in robust.flip_set]
        words.append(f"Were {_listed(names)} wrong, the side would be another.")
    elif 1 - robust.same_side >= 0.01:
        words.append(
            f"In {100 * (1 - robust.same_side):.0f} % of {robust.draws} draws of the knowledge's "
            "numbers the side is another."
        )
    if not robust.second_agrees:
        words.append(
            f"A second, simpler method gives {robust.second_method!r}; the two do not agree."
        )
    if gap:
        words.append(f"Not done, and able to change the side: {gap}.")
    return " ".join(w for w in words if w)


def _weakest(side: str, sides: Mapping[str, float]) -> str:
    """The part of the finding that is least sure."""
    if side == "both":
        return min(("suction", "discharge"), key=lambda s: sides[s])
    return side


def _rests_on(
    side: str,
    mechanisms: Mapping[str, float],
    items: Sequence[WeighedItem],
    knowledge: Knowledge,
) -> str:
    """What the least sure part rests on, and what else would leave the same signs."""
    if side == "neither":
        likeliest = max(("suction", "discharge"), key=lambda s: _best(s, mechanisms)[1])
        name, p = _best(likeliest, mechanisms)
        return f"Most probable of what this leaves out: {name} ({p:.2f})."
    name, _ = _best(side, mechanisms)
    ranked = sorted(
        (i for i in items if _towards(side, i) > BARELY), key=lambda i: -_towards(side, i)
    )
    if not ranked:
        return f"No single item carries {name}; it rests on many small ones."
    shown = ranked[:2]
    rests = _listed([f"{i.id} ({i.node})" for i in shown])
    text = f"{name.capitalize()} rests above all on {rests}"
    rival, p = _rival(name, shown, mechanisms, knowledge)
    text += f"; {rival} would leave the same ({p:.2f})." if p >= RIVAL else "."
    return text + _unconfirmed(name, items, knowledge)


def _unconfirmed(name: str, items: Sequence[WeighedItem], knowledge: Knowledge) -> str:
    """The condition the mechanism needs that a direct look did not confirm; the worst of them."""
    worst: tuple[float, str, str] | None = None
    for condition in _needed(name, knowledge):
        looks = [(_says_yes(i), i.id) for i in items if i.node == condition]
        if not looks:
            continue
        ratio, by = max(looks)
        if ratio < CONFIRMED and (worst is None or ratio < worst[0]):
            worst = (ratio, condition, by)
    if worst is None:
        return ""
    ratio, condition, by = worst
    how = "speaks against it" if ratio < 1 / DULL else "leaves it open"
    return f" It needs that {_as_clause(condition)}; {by} {how}."


def _needed(name: str, knowledge: Knowledge) -> list[str]:
    """The conditions above a mechanism, nearest first."""
    found: list[str] = []
    todo = [name]
    while todo:
        variable = knowledge.variables[todo.pop(0)]
        above = [*variable.needs, *((INLET,) if variable.given else ())]
        if len(variable.leaves) == 1:  # one of several ways is not needed
            above += variable.leaves
        for parent in above:
            if knowledge.variables[parent].kind == "condition" and parent not in found:
                found.append(parent)
                todo.append(parent)
    return found


def _says_yes(item: WeighedItem) -> float:
    """Likelihood ratio of a look for its condition being present."""
    states = item.likelihood
    absent = states.get("no", states.get("healthy", 1.0))
    return max(p for state, p in states.items() if state not in ("no", "healthy")) / absent


def _as_clause(condition: str) -> str:
    return "the inlet pressure is low" if condition == INLET else condition


def _best(side: str, mechanisms: Mapping[str, float]) -> tuple[str, float]:
    name = max(_OF_SIDE[side], key=lambda n: mechanisms[n])
    return name, mechanisms[name]


def _rival(
    name: str,
    shown: Sequence[WeighedItem],
    mechanisms: Mapping[str, float],
    knowledge: Knowledge,
) -> tuple[str, float]:
    """The most telling other mechanism that leaves the signs shown, and its probability."""
    own = next((side for side in _OF_SIDE.values() if name in side), (name,))
    scores = {
        other: number.best * mechanisms[other]
        for item in shown
        for other, number in knowledge.variables[item.node].leaves.items()
        if other in mechanisms and other not in own and number.best >= LEAVES
    }
    if not scores:
        return "", 0.0
    rival = max(scores, key=lambda k: scores[k])
    return rival, mechanisms[rival]


def _in_short(statement: str) -> str:
    """The first part of a statement, to stand within a sentence."""
    text = statement.split("; ", maxsplit=1)[0].split(". ", maxsplit=1)[0].rstrip(".")
    return text[:1].lower() + text[1:]
