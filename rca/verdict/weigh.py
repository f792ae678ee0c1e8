"""From items to a verdict: exact posterior, weight of every item, causes, robustness."""

from collections.abc import Mapping, Sequence

import numpy as np

from rca.case.vocabulary import MECHANISMS
from rca.discharge.model import DischargeCheck
from rca.evidence.item import EvidenceItem, NotAssessed
from rca.oil.check import OilCheck
from rca.suction.check import SuctionCheck
from rca.verdict.explain import DULL, GROUP_CAP, explain, verbal
from rca.verdict.knowledge import INLET, Knowledge
from rca.verdict.model import (
    GroupWeight,
    Link,
    RankedCause,
    Step,
    Verdict,
    VerdictCheck,
    WeighedItem,
)
from rca.verdict.next_test import next_tests
from rca.verdict.order import order_of
from rca.verdict.posterior import (
    SIDED,
    Posterior,
    held_back,
    leave_out,
    marginal,
    marginals,
    odds,
    posterior,
    prior_of,
    reported,
)
from rca.verdict.robust import DRAWS, robustness
from rca.verdict.without import without_causes

__all__ = ["marginal", "posterior", "reported", "weigh"]


def weigh(
    items: Sequence[EvidenceItem],
    not_assessed: Sequence[NotAssessed],
    knowledge: Knowledge,
    *,
    seed: int,
    draws: int = DRAWS,
    contradictions: Sequence[str] = (),
    suction: SuctionCheck | None = None,
    discharge: DischargeCheck | None = None,
    oil: OilCheck | None = None,
) -> VerdictCheck:
    """The verdict on a set of items, with every step shown.

    The checks are asked only for the order of the two sides and for what the inlet and the
    bubble would have been with one cause taken away; they carry no weight beside their items.
    """
    ids = {item.key: f"E{n:02d}" for n, item in enumerate(items, start=1)}
    prior = prior_of(knowledge)
    base = posterior(knowledge, items)
    shown = held_back(base, prior, knowledge.doubt)
    groups = len({item.group for item in items if item.basis.value != "stated"})
    side, rule = shown.side(groups)
    without = alone = None
    if items:
        one = [{item.key} for item in items]
        without = posterior(knowledge, items, weights=leave_out(items, one))
        rest = [{other.key for other in items} - out for out in one]
        alone = posterior(knowledge, items, weights=leave_out(items, rest))
    shown_without = held_back(without, prior, knowledge.doubt) if without is not None else None
    weighed = _weighed(items, ids, base, without, prior, alone)
    by_group = _groups(knowledge, items, ids, base)
    robust = robustness(
        knowledge, items, ids, shown, shown_without, weighed, groups, seed=seed, draws=draws
    )
    tests = next_tests(knowledge, items, shown, groups)
    hidden = marginals(knowledge, items, knowledge.names("cause") + knowledge.names("condition"))
    verdict = Verdict(
        side=side,
        sides=shown.sides(),
        mechanisms=shown.mechanism(),
        prior=prior.sides() | prior.mechanism(),
        conditions={name: hidden[name] for name in knowledge.names("condition")},
        groups=by_group,
        robustness=robust,
        next_tests=tests,
        sensitivity=_sensitivity(items, ids, shown_without, groups),
        words=explain(
            side,
            rule,
            shown.sides(),
            shown.mechanism(),
            weighed,
            not_assessed,
            robust,
            knowledge=knowledge,
            groups=by_group,
            tests=tests,
            network=base.sides(),
            prior=prior.sides(),
        ),
        contradictions=tuple(contradictions),
        order=order_of(suction, oil) if side == "both" else None,
        without=without_causes(suction, discharge),
        running=_running(knowledge, items, prior),
        links=_links(knowledge),
    )
    return VerdictCheck(
        verdict=verdict,
        causes=_causes(knowledge, items, ids, hidden),
        evidence=weighed,
        knowledge=knowledge.identity,
        changes=knowledge.changes,
    )


def _weighed(
    items: Sequence[EvidenceItem],
    ids: Mapping[str, str],
    base: Posterior,
    without: Posterior | None,
    prior: Posterior,
    alone: Posterior | None,
) -> tuple[WeighedItem, ...]:
    if without is None or alone is None:
        return ()
    out = []
    for n, item in enumerate(items):
        by = {
            name: float(odds(base.mechanisms[name][0]) / odds(without.mechanisms[name][n]))
            for name in MECHANISMS
        }
        suction = float(odds(base.suction[0]) / odds(without.suction[n]))
        discharge = float(odds(base.discharge[0]) / odds(without.discharge[n]))
        candidates = {"suction": suction, "discharge": discharge} | {
            name: by[name] for name in MECHANISMS if name not in SIDED
        }
        name = max(candidates, key=lambda k: abs(np.log(candidates[k])))
        ratio = candidates[name]
        if max(ratio, 1 / ratio) < DULL:
            favours, shown = "neither way", 1.0
        else:
            favours, shown = (name, ratio) if ratio >= 1 else (f"not {name}", 1.0 / ratio)
        out.append(
            WeighedItem(
                id=ids[item.key],
                key=item.key,
                node=item.node.value,
                statement=item.statement,
                source=item.sources[0],
                more_sources=item.sources[1:],
                group=item.group.value,
                common_cause=item.common_cause,
                basis=item.basis.value,
                absent=item.absent,
                likelihood_ratio=shown,
                favours=favours,
                words=verbal(shown),
                suction_ratio=suction,
                discharge_ratio=discharge,
                by_mechanism=by,
                suction_alone=float(odds(alone.suction[n]) / odds(prior.suction[0])),
                discharge_alone=float(odds(alone.discharge[n]) / odds(prior.discharge[0])),
                likelihood=dict(item.likelihood),
            )
        )
    return tuple(out)


def _groups(
    knowledge: Knowledge, items: Sequence[EvidenceItem], ids: Mapping[str, str], base: Posterior
) -> tuple[GroupWeight, ...]:
    names = sorted({item.group.value for item in items})
    if not names:
        return ()
    sets = [{i.key for i in items if i.group.value == name} for name in names]
    without = posterior(knowledge, items, weights=leave_out(items, sets))
    return tuple(
        _group(
            name,
            tuple(ids[i.key] for i in items if i.group.value == name),
            float(odds(base.suction[0]) / odds(without.suction[n])),
            float(odds(base.discharge[0]) / odds(without.discharge[n])),
        )
        for n, name in enumerate(names)
    )


def _group(name: str, items: tuple[str, ...], suction: float, discharge: float) -> GroupWeight:
    """A group with its ratios held to what judgement may claim, and that said."""
    told = [
        f"the odds of the {side} side would change by {max(r, 1 / r):.2g}, held to {GROUP_CAP:g}"
        for side, r in (("suction", suction), ("discharge", discharge))
        if max(r, 1 / r) > GROUP_CAP
    ]
    return GroupWeight(
        group=name,
        items=items,
        suction_ratio=float(np.clip(suction, 1 / GROUP_CAP, GROUP_CAP)),
        discharge_ratio=float(np.clip(discharge, 1 / GROUP_CAP, GROUP_CAP)),
        capped="; ".join(told),
    )


def _running(
    knowledge: Knowledge, items: Sequence[EvidenceItem], prior: Posterior
) -> tuple[Step, ...]:
    """The sides as one group after the other is let in, in the order of their names."""
    steps = [Step(group="", suction=float(prior.suction[0]), discharge=float(prior.discharge[0]))]
    names = sorted({item.group.value for item in items})
    if not names:
        return tuple(steps)
    later = [{i.key for i in items if i.group.value in names[n + 1 :]} for n in range(len(names))]
    found = reported(knowledge, items, leave_out(items, later))
    steps += [
        Step(group=name, suction=float(found.suction[n]), discharge=float(found.discharge[n]))
        for n, name in enumerate(names)
    ]
    return tuple(steps)


def _links(knowledge: Knowledge) -> tuple[Link, ...]:
    """The arrows between causes, conditions and mechanisms; signs are left out."""
    found = []
    for name, v in knowledge.variables.items():
        if v.kind == "sign":
            continue
        found += [Link(parent=p, child=name, strength=n.best) for p, n in v.leaves.items()]
        if v.needs:
            found += [Link(parent=p, child=name, strength=v.gate["both"].best) for p in v.needs]
        if v.given:
            found.append(Link(parent=INLET, child=name, strength=v.given["near vapour"].best))
    return tuple(found)


def _sensitivity(
    items: Sequence[EvidenceItem],
    ids: Mapping[str, str],
    found: Posterior | None,
    groups: int,
) -> tuple[dict[str, str | float], ...]:
    if found is None:
        return ()
    return tuple(
        {
            "without": ids[item.key],
            "suction": float(found.suction[n]),
            "discharge": float(found.discharge[n]),
            "side": found.side(groups, n)[0],
        }
        for n, item in enumerate(items)
    )


def _causes(
    knowledge: Knowledge,
    items: Sequence[EvidenceItem],
    ids: Mapping[str, str],
    hidden: Mapping[str, Mapping[str, float]],
) -> tuple[RankedCause, ...]:
    """Causes by probability; "unknown" is that none of the listed ones was present."""
    ranked = []
    absent = 1.0
    for name in knowledge.names("cause"):
        p = hidden[name]["yes"]
        absent *= 1.0 - p
        down = _descendants(knowledge, name)
        near = [i for i in items if i.node.value in down]
        ranked.append(
            RankedCause(
                cause=name,
                probability=p,
                evidence=tuple(ids[i.key] for i in near if not i.absent),
                against=tuple(ids[i.key] for i in near if i.absent),
            )
        )
    ranked.append(RankedCause(cause="unknown", probability=absent, evidence=(), against=()))
    return tuple(sorted(ranked, key=lambda c: -c.probability))


def _descendants(knowledge: Knowledge, cause: str) -> set[str]:
    """The conditions, mechanisms and signs that the cause brings about directly."""
    return {n for n, v in knowledge.variables.items() if cause in v.leaves}
