"""From the weighed network to a causal tree: what stood behind the failure, and behind that.

Proximate: a mechanism that took part and can destroy a pump. Root: a named cause present behind
it. Contributing: a condition between them. What is not shown to have been present stands in the
tree as a hypothesis. After the definitions of proximate, root and contributing cause in NASA
NPR 8621.1 (wording from memory).
"""

from dataclasses import dataclass
from enum import StrEnum

from rca.verdict.knowledge import INLET, Knowledge, Variable
from rca.verdict.model import Verdict, VerdictCheck

PRESENT = 0.5
LEAST_SHOWN = 0.10  # below it a cause is in the table of causes only
MOST_CAUSES = 6


class Role(StrEnum):
    """What a node is to the failure."""

    ROOT = "root cause"
    CONDITION = "contributing condition"
    MECHANISM = "proximate cause"
    OUTCOME = "failure"


@dataclass(frozen=True, slots=True, kw_only=True)
class TreeNode:
    """One box of the tree; ``shown`` is False for a hypothesis."""

    name: str
    role: Role
    probability: float
    shown: bool
    leads_to: tuple[str, ...]


def causal_tree(check: VerdictCheck, knowledge: Knowledge, failure: str) -> tuple[TreeNode, ...]:
    """The nodes that lead to ``failure``, causes first; empty where no mechanism took part."""
    verdict = check.verdict
    chances = _conditions(verdict)
    mechanisms = [n for n, p in verdict.mechanisms.items() if p >= PRESENT]
    conditions = [
        n for n, p in chances.items() if p >= PRESENT and _children(n, mechanisms, knowledge)
    ]
    # A condition may act through another one, so those that lead to a kept one are kept too.
    conditions += [
        n
        for n, p in chances.items()
        if p >= PRESENT and n not in conditions and _children(n, conditions, knowledge)
    ]
    later = [*conditions, *mechanisms]
    causes = sorted(check.causes, key=lambda c: -c.probability)
    kept = [
        c
        for c in causes
        if c.cause in knowledge.variables
        and c.probability >= LEAST_SHOWN
        and _children(c.cause, later, knowledge)
    ][:MOST_CAUSES]
    nodes = [
        TreeNode(
            name=c.cause,
            role=Role.ROOT,
            probability=c.probability,
            shown=c.probability >= PRESENT,
            leads_to=_children(c.cause, later, knowledge),
        )
        for c in kept
    ]
    nodes += [
        TreeNode(
            name=name,
            role=Role.CONDITION,
            probability=chances[name],
            shown=True,
            leads_to=_children(name, [n for n in later if n != name], knowledge),
        )
        for name in conditions
    ]
    nodes += [
        TreeNode(
            name=name,
            role=Role.MECHANISM,
            probability=verdict.mechanisms[name],
            shown=True,
            leads_to=(failure,),
        )
        for name in mechanisms
    ]
    if not mechanisms:
        return ()
    outcome = TreeNode(name=failure, role=Role.OUTCOME, probability=1.0, shown=True, leads_to=())
    return (*nodes, outcome)


def _conditions(verdict: Verdict) -> dict[str, float]:
    """Probability that each condition was there; of the inlet, that it was not healthy."""
    return {
        name: 1.0 - states["healthy"] if name == INLET else states.get("yes", 0.0)
        for name, states in verdict.conditions.items()
    }


def _children(name: str, among: list[str], knowledge: Knowledge) -> tuple[str, ...]:
    return tuple(
        child
        for child in among
        if child in knowledge.variables and name in _parents(knowledge.variables[child])
    )


def _parents(variable: Variable) -> set[str]:
    return {*variable.leaves, *variable.needs, *((INLET,) if variable.given else ())}
