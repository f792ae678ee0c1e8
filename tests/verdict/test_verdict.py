"""The verdict: exact inference, its traps, its honesty about what it does not know."""

from itertools import product

import numpy as np
import pytest

from rca.base.errors import KnowledgeError
from rca.base.source import Source
from rca.evidence.item import Basis, EvidenceItem, Group, Node
from rca.verdict.explain import chance, verbal
from rca.verdict.inference import Factor, joint
from rca.verdict.knowledge import parse_knowledge, shipped_knowledge
from rca.verdict.network import Numbers, evidence_factors, prior_factors, states_of
from rca.verdict.posterior import posterior
from rca.verdict.side import side_of
from rca.verdict.weigh import weigh

K = shipped_knowledge()
YES = {"no": 0.05, "yes": 0.9}
NO = {"no": 0.95, "yes": 0.1}
LOW = {"healthy": 0.03, "low": 0.95, "near vapour": 0.1}
HEALTHY = {"healthy": 0.95, "low": 0.03, "near vapour": 0.005}
_GROUPS = {Node.INLET_PRESSURE: Group.INLET, Node.SOOT: Group.OIL, Node.NITRATION: Group.OIL}


def item(
    node: Node, likelihood: dict[str, float], cause: str = "", *, basis: Basis = Basis.MEASURED
) -> EvidenceItem:
    return EvidenceItem(
        key=f"{node.name} {cause}",
        node=node,
        likelihood=likelihood,
        statement=node.value,
        sources=(Source(file="f", locator="l"),),
        group=_GROUPS.get(node, Group.DAMAGE),
        common_cause=cause or node.name,
        basis=basis,
    )


def verdict(*items: EvidenceItem):
    return weigh(items, (), K, seed=1, draws=64)


# --- inference


@pytest.mark.outside_value(source="brute-force sum over all states of random factors")
def test_elimination_agrees_with_brute_force() -> None:
    rng = np.random.default_rng(0)
    scopes = [("a", "b"), ("b", "c"), ("c", "d", "e"), ("a", "e"), ("d",), ("f", "b")]
    factors = [Factor(s, rng.random((1, *[2] * len(s))) + 0.1) for s in scopes]
    names = sorted({n for s in scopes for n in s})
    brute = np.zeros((2, 2))
    for values in product((0, 1), repeat=len(names)):
        at = dict(zip(names, values, strict=True))
        brute[at["a"], at["d"]] += np.prod(
            [f.table[(0, *(at[n] for n in f.names))] for f in factors]
        )
    ours = joint(factors, ("a", "d"))[0]
    assert ours / ours.sum() == pytest.approx(brute / brute.sum(), rel=1e-12)


@pytest.mark.outside_value(source="numpy.einsum contracting the same factors in one expression")
def test_posterior_agrees_with_a_general_tensor_contraction() -> None:
    items = [item(Node.INLET_PRESSURE, LOW), item(Node.SOOT, YES), item(Node.CHAR_DISCHARGE, YES)]
    factors = prior_factors(K, Numbers()) + evidence_factors(K, items, Numbers())
    letter = {n: k for k, n in enumerate(dict.fromkeys(n for f in factors for n in f.names))}
    operands = [x for f in factors for x in (f.table[0], [letter[n] for n in f.names])]
    ours = posterior(K, items)
    for name in ("micro-dieseling", "gaseous cavitation", "jet cavitation"):
        table = np.einsum(*operands, [letter[name]], optimize="greedy")
        assert ours.mechanisms[name][0] == pytest.approx(table[1] / table.sum(), rel=1e-9)


@pytest.mark.outside_value(source="Bayes' theorem by hand on one likelihood pair")
def test_a_single_item_moves_the_odds_of_its_own_cause_as_bayes_says() -> None:
    found = item(Node.STRAINER_FOUND_CLOGGED, {"no": 0.1, "yes": 0.9})
    factors = evidence_factors(K, [found], Numbers())
    sound = K.reliability["measured"]
    variable = K.variables[Node.STRAINER_FOUND_CLOGGED.value]
    flat = (0.1 / 0.9 + 1.0) / 2
    leak, leaves = variable.anyway.best, variable.leaves["suction strainer clogged"].best

    def told(present: bool) -> float:
        p = 1 - (1 - leak) * ((1 - leaves) if present else 1.0)
        return sound * (p + (1 - p) * 0.1 / 0.9) + (1 - sound) * flat

    table = joint(factors, ("suction strainer clogged",))[0]
    assert table[1] / table[0] == pytest.approx(told(True) / told(False), rel=1e-9)


# --- weighing


def test_an_empty_case_is_undetermined_and_says_what_to_collect() -> None:
    found = verdict()
    assert found.verdict.side == "undetermined"
    assert found.verdict.next_tests


def test_one_look_never_carries_a_side() -> None:
    assert verdict(item(Node.INLET_PRESSURE, LOW)).verdict.side == "undetermined"


def test_rich_evidence_on_both_sides() -> None:
    found = verdict(
        item(Node.INLET_PRESSURE, LOW),
        item(Node.RELEASED_AIR, {"no": 0.15, "yes": 0.85}),
        item(Node.PITTING_INLET, YES),
        item(Node.STRAINER_FOUND_CLOGGED, YES),
        item(Node.SOOT, YES, "bottle"),
        item(Node.NITRATION, YES, "bottle"),
        item(Node.CHAR_DISCHARGE, YES),
    )
    assert found.verdict.side == "both"
    assert found.causes[0].cause == "suction strainer clogged"
    assert found.causes[0].probability > 0.8


def test_water_glycol_holds_micro_dieseling_down_whatever_the_stains() -> None:
    fuel = item(Node.FUEL_PATH, {"no": 0.99, "yes": 0.01}, basis=Basis.COMPUTED)
    found = verdict(fuel, item(Node.CHAR_DISCHARGE, YES), item(Node.SOOT, YES))
    assert found.verdict.sides["discharge"] < 0.35
    assert found.verdict.side not in ("discharge", "both")


def test_groove_jet_erosion_with_a_healthy_inlet_is_neither() -> None:
    found = verdict(
        item(Node.INLET_PRESSURE, HEALTHY),
        item(Node.EDGE_EROSION, YES),
        item(Node.PITTING_TRANSITION, YES),
        item(Node.PITTING_INLET, NO),
        item(Node.CHAR_DISCHARGE, NO),
        item(Node.SOOT, NO),
        item(Node.AIR_LEAK_FOUND, NO),
        item(Node.FOAM, NO),
        item(Node.MILKY_CLEARS, NO),
    )
    assert found.verdict.side == "neither"
    assert found.verdict.mechanisms["jet cavitation"] > 0.5


def test_dark_oil_from_a_throttle_is_not_micro_dieseling() -> None:
    found = verdict(
        item(Node.OIL_DARK_FAST, YES, "bottle"),
        item(Node.OXIDATION_PRODUCTS, NO, "bottle"),
        item(Node.THROTTLE_HOT_FOUND, YES),
        item(Node.CHAR_DISCHARGE, NO),
        item(Node.INLET_PRESSURE, HEALTHY),
    )
    assert found.verdict.mechanisms["hot spot"] > found.verdict.mechanisms["micro-dieseling"]
    assert found.verdict.side not in ("discharge", "both")


def test_varnish_with_clean_oil_decides_nothing() -> None:
    found = verdict(item(Node.VARNISH_FILM, YES), item(Node.DIRT, NO))
    assert found.verdict.side == "undetermined"


def test_a_leak_with_a_normal_vacuum_is_aeration() -> None:
    found = verdict(
        item(Node.INLET_PRESSURE, HEALTHY),
        item(Node.AIR_LEAK_FOUND, YES),
        item(Node.MILKY_CLEARS, YES),
        item(Node.NOISE_ERRATIC, YES),
        item(Node.CHAR_DISCHARGE, NO),
        item(Node.SOOT, NO),
    )
    mechanisms = found.verdict.mechanisms
    assert found.verdict.side == "suction"
    assert mechanisms["aeration"] > 0.8
    assert mechanisms["vapour cavitation"] < 0.15


def test_items_of_one_bottle_weigh_less_than_items_of_two() -> None:
    one = posterior(K, [item(Node.SOOT, YES, "b"), item(Node.NITRATION, YES, "b")])
    two = posterior(K, [item(Node.SOOT, YES, "b"), item(Node.NITRATION, YES, "c")])
    assert one.discharge[0] < two.discharge[0]


def test_the_order_of_the_items_does_not_matter() -> None:
    a, b = item(Node.SOOT, YES), item(Node.INLET_PRESSURE, LOW)
    assert posterior(K, [a, b]).discharge[0] == pytest.approx(posterior(K, [b, a]).discharge[0])


def test_contradictory_evidence_does_not_crash_and_stays_between() -> None:
    found = verdict(
        item(Node.CHAR_DISCHARGE, YES, "one"),
        item(Node.CHAR_DISCHARGE, NO, "other"),
        item(Node.SOOT, NO),
    )
    sides = found.verdict.sides["discharge"]
    assert (
        0.0
        < sides
        < verdict(item(Node.CHAR_DISCHARGE, YES), item(Node.SOOT, NO)).verdict.sides["discharge"]
    )


def test_the_same_seed_gives_the_same_verdict() -> None:
    items = (item(Node.INLET_PRESSURE, LOW), item(Node.SOOT, YES))
    assert verdict(*items) == verdict(*items)


# --- rules and words


def test_decision_rules_at_their_edges() -> None:
    def sides(s: float, d: float) -> dict[str, float]:
        return {"suction": s, "discharge": d, "both": 0.0, "neither": (1 - s) * (1 - d)}

    assert side_of(sides(0.75, 0.59), {}, 3)[0] == "suction"
    assert side_of(sides(0.75, 0.60), {}, 3)[0] == "both"
    assert side_of(sides(0.10, 0.80), {}, 3)[0] == "discharge"
    assert side_of(sides(0.20, 0.10), {"abrasive wear": 0.6}, 3)[0] == "neither"
    assert side_of(sides(0.50, 0.50), {"abrasive wear": 0.6}, 3)[0] == "undetermined"
    assert side_of(sides(0.99, 0.99), {}, 1)[0] == "undetermined"


@pytest.mark.outside_value(
    source="verbal scale of forensic evaluative reporting (ENFSI 2015, read in secondary sources)"
)
def test_words_of_the_scale() -> None:
    assert [verbal(r) for r in (1.0, 9.0, 50.0, 500.0, 5000.0, 5e5, 5e7)] == [
        "no support either way",
        "weak support",
        "moderate support",
        "moderately strong support",
        "strong support",
        "very strong support",
        "extremely strong support",
    ]


def test_no_word_is_stronger_than_its_number() -> None:
    assert chance(0.5) == "about as likely as not"
    assert chance(0.96) == "very likely"
    assert chance(0.999) == "almost certain"


# --- knowledge


@pytest.mark.parametrize(
    ("old", "new", "words"),
    [
        ("prior = 0.2\n", "prior = 1.0\n", "above 0 and below 1"),
        ("prior = 0.2\n", "prior = 0\n", "above 0 and below 1"),
        ('"aeration" = 0.65', '"aerration" = 0.65', "unknown parent"),
        ("[failure]", "[failure", "not TOML"),
        ('[sign."nitration"]', '[sign."nitrate"]', "no numbers for the observable nodes"),
        ('[mechanism."jet cavitation"]', '[mechanism."jets"]', "mechanisms differ"),
        ('[cause."high altitude"]', '[cause."altitude"]', "causes differ"),
    ],
)
def test_broken_knowledge_is_refused(old: str, new: str, words: str) -> None:
    from importlib.resources import files

    text = files("rca.verdict").joinpath("knowledge.toml").read_text(encoding="utf-8")
    assert old in text
    with pytest.raises(KnowledgeError, match=words):
        parse_knowledge(text.replace(old, new, 1))


def test_every_node_an_item_may_speak_of_has_the_same_states_everywhere() -> None:
    for node in Node:
        assert node.value in K.variables
        assert len(states_of(node.value)) >= 2


def test_oil_alone_never_decides_for_micro_dieseling() -> None:
    """Four looks at one state, products of burning in the oil, have another way to come about."""
    nodes = (Node.SOOT, Node.NITRATION, Node.OIL_DARK_FAST)
    sharp = {"no": 0.001, "yes": 0.999}
    all_in = posterior(K, [item(n, sharp, "one bottle") for n in nodes]).discharge[0]
    prior = posterior(K, []).discharge[0]
    factor = (all_in / (1 - all_in)) / (prior / (1 - prior))
    assert 3.0 < factor < 30.0


def test_many_dull_looks_do_not_void_a_sharp_one() -> None:
    sharp = item(Node.SOOT, YES, "b")
    dull = [
        item(n, {"no": 0.7, "yes": 0.5}, "b")
        for n in (
            Node.WATER,
            Node.FLASH_DOWN,
            Node.VISCOSITY_UP,
            Node.VISCOSITY_DOWN,
            Node.DIRT,
            Node.WEAR_METALS,
            Node.COARSE_IRON,
            Node.AIR_RELEASE_SLOW,
            Node.WRONG_FLUID,
        )
    ]
    alone = posterior(K, [sharp]).discharge[0]
    among = posterior(K, [sharp, *dull]).discharge[0]
    assert among == pytest.approx(alone, rel=0.35)
