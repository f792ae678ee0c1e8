"""Weigh the evidence of old results again with the knowledge of today.

Only what a report keeps with its likelihoods can be weighed again; a case entered by hand, or
written before likelihoods were kept, or with a sign today's knowledge does not know, stays as it
was, with its own version, and is named.
"""

from collections.abc import Mapping, Sequence
from dataclasses import replace
from pathlib import Path
from typing import Any

from rca.base.errors import ArchiveError
from rca.base.source import Source
from rca.case.vocabulary import DISCHARGE_MECHANISMS, MECHANISMS, SUCTION_MECHANISMS
from rca.compare.gather import Found, Gathered, load
from rca.compare.incident import Incident
from rca.evidence.item import Basis, EvidenceItem, Group, Node
from rca.verdict.knowledge import Knowledge, shipped_knowledge
from rca.verdict.network import states_of
from rca.verdict.side import side_of
from rca.verdict.weigh import marginal, posterior, reported


def reweighed(gathered: Gathered) -> Gathered:
    """The same cases, those that can be weighed again with today's knowledge."""
    knowledge = shipped_knowledge()
    done, left = [], []
    for one in gathered.incidents:
        if one.knowledge == knowledge.identity:
            done.append(one)
            continue
        try:
            done.append(_again(one, knowledge))
        except ArchiveError as error:
            done.append(one)
            left.append(f"{one.source}: {error}")
    return replace(gathered, incidents=tuple(done), not_reweighed=tuple(left))


def _again(one: Incident, knowledge: Knowledge) -> Incident:
    path = Path(one.source)
    plain, _, _ = load(Found(path, bundle=path.suffix == ".zip"))
    items = items_of(plain["evidence"])
    found = reported(knowledge, items)
    prior = posterior(knowledge, [])
    mechanisms = {name: float(found.mechanisms[name][0]) for name in MECHANISMS}
    sided = {*SUCTION_MECHANISMS, *DISCHARGE_MECHANISMS}
    side, _ = side_of(
        found.sides(),
        {n: p for n, p in mechanisms.items() if n not in sided},
        len({i.group for i in items if i.basis is not Basis.STATED}),
    )
    return replace(
        one,
        side=side,
        mechanisms=mechanisms,
        prior={name: float(prior.mechanisms[name][0]) for name in MECHANISMS},
        causes={
            name: marginal(knowledge, items, name)["yes"] for name in knowledge.names("cause")
        },
        knowledge=knowledge.identity,
    )


def items_of(rows: Sequence[Mapping[str, Any]]) -> tuple[EvidenceItem, ...]:
    """The items of stored results, typed.

    Raises ArchiveError where one has no likelihoods, or a node or states not known today.
    """
    if not rows:
        raise ArchiveError("it holds no evidence to weigh")
    return tuple(_item(row) for row in rows)


def _item(row: Mapping[str, Any]) -> EvidenceItem:
    name, likelihood = row.get("node"), row.get("likelihood")
    if not isinstance(likelihood, dict) or not likelihood:
        raise ArchiveError("its items keep no likelihoods")
    try:
        node = Node(str(name))
        known = set(states_of(node.value))
        if set(likelihood) != known:
            raise ArchiveError(f"{name}: states {sorted(likelihood)}, today {sorted(known)}")
        source = row["source"]
        return EvidenceItem(
            key=str(row["key"]),
            node=node,
            likelihood={str(k): float(v) for k, v in likelihood.items()},
            statement=str(row["statement"]),
            sources=(Source(file=str(source["file"]), locator=str(source["locator"])),),
            group=Group(row["group"]),
            common_cause=str(row["common_cause"]),
            basis=Basis(row["basis"]),
            absent=bool(row.get("absent", False)),
        )
    except (KeyError, TypeError, ValueError) as error:
        raise ArchiveError(
            f"the item {row.get('id')!r} can't be weighed today: {error}"
        ) from error
