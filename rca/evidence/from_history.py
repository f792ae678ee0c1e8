"""Evidence from the history: only events of a kind this program knows; their text never weighs."""

from rca.case.model import Case, HistoryEvent
from rca.evidence.item import Basis, EvidenceItem, Group, Node, NotAssessed

# kind of event -> (node, P(event on record | no), P(event on record | yes)); judgement
KINDS: dict[str, tuple[Node, float, float]] = {
    "strainer found clogged": (Node.STRAINER_FOUND_CLOGGED, 0.02, 0.9),
    "strainer found clean": (Node.STRAINER_FOUND_CLOGGED, 0.9, 0.03),
    "breather found plugged": (Node.BREATHER_FOUND_PLUGGED, 0.02, 0.9),
    "breather found free": (Node.BREATHER_FOUND_PLUGGED, 0.9, 0.03),
    "suction line found pinched": (Node.LINE_FOUND_RESTRICTED, 0.02, 0.9),
    "air leak found": (Node.AIR_LEAK_FOUND, 0.03, 0.9),
    "no air leak found": (Node.AIR_LEAK_FOUND, 0.85, 0.25),
    "low oil level": (Node.LEVEL_LOW, 0.05, 0.85),
    "oil level checked": (Node.LEVEL_LOW, 0.9, 0.2),
    "return found above level": (Node.RETURN_ABOVE_LEVEL, 0.03, 0.9),
    "relief valve fault": (Node.RELIEF_FAULT_FOUND, 0.03, 0.85),
    "cooler fault": (Node.COOLER_FAULT_FOUND, 0.03, 0.85),
    "coupling fault": (Node.DRIVE_FAULT_FOUND, 0.03, 0.85),
    "throttle found hot": (Node.THROTTLE_HOT_FOUND, 0.03, 0.85),
    "steady noise": (Node.NOISE_STEADY, 0.3, 0.8),
    "erratic noise": (Node.NOISE_ERRATIC, 0.15, 0.7),
    "clicks at the filter": (Node.CLICKS_AT_FILTER, 0.05, 0.8),
    "loss of flow": (Node.FLOW_LOSS, 0.3, 0.8),
    "milky oil": (Node.MILKY, 0.1, 0.7),
    "foam": (Node.FOAM, 0.1, 0.7),
    "oil change": (Node.RECENT_FLUID_CHANGE, 0.3, 0.9),
    "flush": (Node.RECENT_FLUID_CHANGE, 0.2, 0.9),
}
LOOKED_FOR = tuple(dict.fromkeys(node for node, _, _ in KINDS.values()))
RECENT_DAYS = 60


def from_history(case: Case) -> tuple[EvidenceItem | NotAssessed, ...]:
    """The last event of each known kind; nodes without one are not assessed."""
    last: dict[Node, tuple[HistoryEvent, float, float]] = {}
    for event in case.history:
        known = KINDS.get(event.kind.casefold().strip())
        if known is None or (known[0] is Node.RECENT_FLUID_CHANGE and not _recent(case, event)):
            continue
        node, no, yes = known
        last[node] = (event, no, yes)
    items: list[EvidenceItem | NotAssessed] = []
    for node in LOOKED_FOR:
        if node in last:
            event, no, yes = last[node]
            items.append(_item(node, event, no, yes))
        elif node not in (Node.MILKY, Node.FOAM):
            items.append(
                NotAssessed(
                    key=f"history.{node.name.lower()}",
                    node=node,
                    missing=f"a history entry of a known kind on: {node.value}",
                )
            )
    return tuple(items)


def _recent(case: Case, event: HistoryEvent) -> bool:
    if case.header.occurred is None:
        return False
    day = case.header.occurred.date().toordinal() - event.when.toordinal()
    return 0 <= day <= RECENT_DAYS


def _item(node: Node, event: HistoryEvent, no: float, yes: float) -> EvidenceItem:
    return EvidenceItem(
        key=f"history.{node.name.lower()}",
        node=node,
        likelihood={"no": no, "yes": yes},
        statement=f"History, {event.when.isoformat()[:10]}: {event.kind}.",
        sources=(event.source,),
        group=Group.OPERATION,
        common_cause=f"history {event.source.locator}",
        basis=Basis.RECORD,
        absent=no > yes,
    )
