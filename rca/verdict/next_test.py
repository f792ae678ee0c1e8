"""The next best test: what it would tell, what it costs, and what perishes first."""

from collections.abc import Mapping, Sequence

import numpy as np

from rca.base.source import Source
from rca.evidence.item import Basis, EvidenceItem, Group, Node
from rca.verdict.knowledge import INLET, Knowledge, PossibleTest
from rca.verdict.model import NextTest
from rca.verdict.posterior import Posterior, reported

PERISHABLE_DAYS = 14.0


def next_tests(
    knowledge: Knowledge, items: Sequence[EvidenceItem], shown: Posterior, groups: int
) -> tuple[NextTest, ...]:
    """Tests not done yet, perishable and harmless ones first, then by information per cost.

    Both outcomes of all tests are asked in one pass: every outcome is an item that counts in one
    member of the batch only.
    """
    seen = {item.node.value for item in items}
    tests = [test for test in knowledge.tests if test.looks_at not in seen]
    if not tests:
        return ()
    outcomes = [_supposed(test, found=found) for test in tests for found in (True, False)]
    weights = {item.key: np.ones(len(outcomes)) for item in items}
    weights |= {one.key: np.eye(len(outcomes))[n] for n, one in enumerate(outcomes)}
    after = reported(knowledge, [*items, *outcomes], weights)
    found = [_tested(test, shown, after, 2 * n, groups) for n, test in enumerate(tests)]
    return tuple(sorted(found, key=_order))


def _order(test: NextTest) -> tuple[bool, float]:
    first = test.perishes_days <= PERISHABLE_DAYS and not test.alters_evidence
    return not (first and test.information_bit > 0.002), -test.information_bit / (
        test.cost + 20.0 * test.hours**0.5 + 10.0
    )


def _tested(
    test: PossibleTest, shown: Posterior, after: Posterior, member: int, groups: int
) -> NextTest:
    now = _told(shown, 0)
    positive, negative = _told(after, member), _told(after, member + 1)
    p = _chance(now, positive, negative)
    gain = _entropy(now) - p * _entropy(positive) - (1 - p) * _entropy(negative)
    sides = {after.side(groups + 1, n)[0] for n in (member, member + 1)}
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
        could_change_side=sides != {shown.side(groups)[0]},
    )


def _told(found: Posterior, member: int) -> dict[str, float]:
    return found.sides(member) | found.mechanism(member)


def _supposed(test: PossibleTest, *, found: bool) -> EvidenceItem:
    hit, false = test.sensitivity, 1 - test.specificity
    yes, no = (hit, false) if found else (1 - hit, 1 - false)
    likelihood = {"no": no, "yes": yes}
    if test.looks_at == INLET:
        likelihood = {"healthy": no, "low": yes, "near vapour": yes}
    return EvidenceItem(
        key=f"supposed {test.name} {found}",
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
