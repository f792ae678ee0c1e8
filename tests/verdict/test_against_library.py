"""The whole network against pyAgrum, built there from the knowledge file and not from our factors."""

import itertools
import warnings
from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from typing import Any

import numpy as np
import pytest

from rca.base.source import Source
from rca.evidence.item import Basis, EvidenceItem, Group, Node
from rca.verdict.knowledge import INLET, Variable, shipped_knowledge
from rca.verdict.posterior import marginals, posterior

with warnings.catch_warnings():
    # its extension module dies on an import under which warnings are errors
    warnings.simplefilter("ignore")
    import pyagrum as gum

K = shipped_knowledge()
ABSENT = ("no", "healthy")


def item(
    node: Node, cause: str, basis: Basis = Basis.TEARDOWN, **likelihood: float
) -> EvidenceItem:
    return EvidenceItem(
        key=f"{node.name} {cause}",
        node=node,
        likelihood={k.replace("_", " "): v for k, v in likelihood.items()},
        statement="x",
        sources=(Source(file="f", locator="l"),),
        group=Group.DAMAGE,
        common_cause=cause,
        basis=basis,
    )


ITEMS = (
    item(Node.INLET_PRESSURE, "sensor", Basis.MEASURED, healthy=0.02, low=0.9, near_vapour=0.2),
    item(Node.RELEASED_AIR, "sensor", Basis.MEASURED, no=0.3, yes=0.7),
    item(Node.HOT_BUBBLES, "pump", Basis.COMPUTED, no=0.25, yes=0.75),
    item(Node.FUEL_PATH, "fluid", Basis.COMPUTED, no=0.6, yes=0.4),
    item(Node.FAST_PRESSURE_RISE, "pump", Basis.STATED, no=0.2, yes=0.8),
    item(Node.SOOT, "bottle", Basis.LABORATORY, no=0.05, yes=0.9),
    item(Node.NITRATION, "bottle", Basis.LABORATORY, no=0.1, yes=0.8),
    item(Node.WEAR_METALS, "bottle", Basis.LABORATORY, no=0.4, yes=0.6),
    item(Node.CHAR_DISCHARGE, "observer", no=0.05, yes=0.8),
    item(Node.PITTING_INLET, "observer", no=0.05, yes=0.8),
    item(Node.FOAM, "observer", no=0.1, yes=0.7),
    item(Node.FOAM, "history", Basis.RECORD, no=0.2, yes=0.7),  # the same sign, looked at twice
    item(Node.STRAINER_FOUND_CLOGGED, "history 2", Basis.RECORD, no=0.05, yes=0.9),
)


@dataclass
class Network:
    """Tables for the library, from plain rules."""

    net: Any = field(default_factory=gum.BayesNet)
    states: dict[str, list[str]] = field(default_factory=dict)
    seen: dict[str, str] = field(default_factory=dict)

    def add(
        self,
        name: str,
        states: list[str],
        parents: list[str],
        rule: Callable[[Mapping[str, str]], list[float]],
    ) -> None:
        self.states[name] = states
        self.net.add(gum.LabelizedVariable(name, "", states))
        for parent in parents:
            self.net.addArc(parent, name)
        table = self.net.cpt(name)
        for values in itertools.product(*(self.states[p] for p in parents)):
            at = dict(zip(parents, values, strict=True))
            table[at] = rule(at) if parents else rule({})


def rule_of(
    v: Variable,
) -> tuple[list[str], list[str], Callable[[Mapping[str, str]], list[float]]]:
    """States, parents and the row of probabilities, as the knowledge file words them."""
    if v.given:
        return (
            ["no", "yes"],
            [INLET],
            lambda a: [1 - v.given[a[INLET]].best, v.given[a[INLET]].best],
        )
    if v.needs:
        first, second = v.needs
        gates = {(True, True): "both", (True, False): "only_first", (False, True): "only_second"}

        def gate(a: Mapping[str, str]) -> list[float]:
            key = gates.get((a[first] == "yes", a[second] == "yes"), "none")
            return [1 - v.gate[key].best, v.gate[key].best]

        return ["no", "yes"], [first, second], gate

    def noisy_or(a: Mapping[str, str]) -> list[float]:
        assert v.anyway is not None
        absent = 1 - v.anyway.best
        for parent, number in v.leaves.items():
            absent *= 1 - number.best if a[parent] not in ABSENT else 1.0
        if v.worse is None:
            return [absent, 1 - absent]
        return [absent, (1 - absent) * (1 - v.worse.best), (1 - absent) * v.worse.best]

    states = ["healthy", "low", "near vapour"] if v.name == INLET else ["no", "yes"]
    return states, list(v.leaves), noisy_or


def build() -> Network:
    net = Network()
    wanted = {i.node.value for i in ITEMS}
    for v in K.variables.values():
        if v.kind != "sign" or v.name in wanted:
            states, parents, rule = rule_of(v)
            net.add(v.name, states, parents, rule)
    able = [n for n, v in K.variables.items() if v.explains_failure is not None]

    def failed(a: Mapping[str, str]) -> list[float]:
        absent = 1 - K.failure.best
        for name in able:
            number = K.variables[name].explains_failure
            assert number is not None
            absent *= 1 - number.best if a[name] == "yes" else 1.0
        return [absent, 1 - absent]

    net.add("failed", ["no", "yes"], able, failed)
    net.seen["failed"] = "yes"
    for cause in dict.fromkeys(i.common_cause for i in ITEMS):
        mine = [i for i in ITEMS if i.common_cause == cause]
        r = min(K.reliability[i.basis.value] for i in mine)
        net.add(f"sound {cause}", ["no", "yes"], [], constant(1 - r, r))
        for one in mine:
            add_look(net, one, cause)
    return net


def constant(*row: float) -> Callable[[Mapping[str, str]], list[float]]:
    return lambda _: list(row)


def add_look(net: Network, one: EvidenceItem, cause: str) -> None:
    top = max(one.likelihood.values())
    void = float(np.mean([p / top for p in one.likelihood.values()]))

    def look(a: Mapping[str, str]) -> list[float]:
        p = one.likelihood[a[one.node.value]] / top if a[f"sound {cause}"] == "yes" else void
        return [1 - p, p]

    net.add(f"look {one.key}", ["no", "yes"], [f"sound {cause}", one.node.value], look)
    net.seen[f"look {one.key}"] = "yes"


@pytest.mark.outside_value(source="pyAgrum, lazy propagation over the same conditional tables")
def test_mechanisms_and_causes_agree_with_a_general_library() -> None:
    built = build()
    inference = gum.LazyPropagation(built.net)
    inference.setEvidence(built.seen)
    ours = {n: float(p[0]) for n, p in posterior(K, ITEMS).mechanisms.items()}
    ours |= {n: s["yes"] for n, s in marginals(K, ITEMS, K.names("cause")).items()}
    for name, mine in ours.items():
        theirs = float(inference.posterior(name)[{name: "yes"}])
        assert mine == pytest.approx(theirs, abs=1e-10), name
