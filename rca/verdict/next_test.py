"""The next best test: what it would tell, what it costs, and what perishes first."""

from collections.abc import Callable, Mapping, Sequence

import numpy as np

from rca.base.source import Source
from rca.evidence.item import Basis, EvidenceItem, Group, Node, NotAssessed
from rca.verdict.knowledge import INLET, Knowledge, PossibleTest
from rca.verdict.model import NextTest
from rca.verdict.side import side_of

Ask = Callable[[Knowledge, Sequence[EvidenceItem]], dict[str, float]]
PERISHABLE_DAYS = 14.0
SIDED = ("vapour cavitation", "gaseous cavitation", "aeration", "micro-dieseling")


def next_tests(
    knowledge: Knowledge,
    items: Sequence[EvidenceItem],
    not_assessed: Sequence[NotAssessed],
    side: str,
    groups: int,
    ask: Ask,
) -> tuple[NextTest, ...]:
    """Tests not done yet, perishable and harmless ones first, then by information per cost."""
    del not_assessed
    seen = {item.node.value for item in items}
    now = ask(knowledge, items)
    found = [
        _tested(knowledge, items, test, now, side, groups, ask)
        for test in knowledge.tests
        if test.looks_at not in seen
    ]
    return tuple(sorted(found, key=_order))


def _order(test: NextTest) -> tuple[bool, float]:
    first = test.perishes_days <= PERISHABLE_DAYS and not test.alters_evidence
    return not (first and test.information_bit > 0.002), -test.information_bit / (
        test.cost + 20.0 * test.hours**0.5 + 10.0
    )


def _tested(
    knowledge: Knowledge,
    items: Sequence[EvidenceItem],
    test: PossibleTest,
    now: Mapping[str, float],
    side: str,
    groups: int,
    ask: Ask,
) -> NextTest:
    positive = ask(knowledge, [*items, _supposed(test, found=True)])
    negative = ask(knowledge, [*items, _supposed(test, found=False)])
    p = _chance(now, positive, negative)
    gain = _entropy(now) - p * _entropy(positive) - (1 - p) * _entropy(negative)
    sides = {_side(positive, groups + 1), _side(negative, groups + 1)}
    return NextTest(
        name=test.name,
        looks_at=test.looks_at,
        information_bit=max(float(gain), 0.0),
        cost=test.cost,
        hours=test.hours,
        alters_evidence=test.alters_evidence,
        perishes_days=test.perishes_days,
        if_found={k: positive[k] for k in ("suction", "discharge")},
        if_absent={k: negative[k] for k in ("suction", "discharge")},
        could_change_side=sides != {side},
    )


def _supposed(test: PossibleTest, *, found: bool) -> EvidenceItem:
    hit, false = test.sensitivity, 1 - test.specificity
    yes, no = (hit, false) if found else (1 - hit, 1 - false)
    likelihood = {"no": no, "yes": yes}
    if test.looks_at == INLET:
        likelihood = {"healthy": no, "low": yes, "near vapour": yes}
    return EvidenceItem(
        key=f"supposed {test.name}",
        node=Node(test.looks_at),
        likelihood=likelihood,
        statement="supposed",
        sources=(Source(file="", locator=""),),
        group=Group.OPERATION,
        common_cause=f"supposed {test.name}",
        basis=Basis.MEASURED,
    )


def _chance(
    now: Mapping[str, float], positive: Mapping[str, float], negative: Mapping[str, float]
) -> float:
    """P(found) from the law of total probability on the quantity that moves most."""
    key = max(positive, key=lambda k: abs(positive[k] - negative[k]))
    spread = positive[key] - negative[key]
    if abs(spread) < 1e-9:
        return 0.5
    return float(np.clip((now[key] - negative[key]) / spread, 0.001, 0.999))


def _entropy(p: Mapping[str, float]) -> float:
    """Entropy of the two sides [bit], each by itself, with the leading other mechanisms."""
    total = 0.0
    for key in ("suction", "discharge"):
        x = float(np.clip(p[key], 1e-9, 1 - 1e-9))
        total -= x * np.log2(x) + (1 - x) * np.log2(1 - x)
    return total


def _side(p: Mapping[str, float], groups: int) -> str:
    others = {
        k: v for k, v in p.items() if k not in {"suction", "discharge", "both", "neither", *SIDED}
    }
    return side_of(p, others, groups)[0]
