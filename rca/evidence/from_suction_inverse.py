"""Evidence from the resistances of the suction line, as its own record gives them."""

from rca.base.source import Origin, Reading, Source
from rca.case.series import AlignedRecord
from rca.evidence.item import Basis, EvidenceItem, Group, Node, NotAssessed
from rca.suction.check import SuctionCheck
from rca.suction.explanations import Explanation, Explanations, Share
from rca.suction.inverse import Inverse, Track

# share of such estimates that are wrong in a way their intervals do not show: a thermometer far
# from the strainer, a loss between the two laws; judgement
MISREAD = 0.10
MOST_UNSEEN = 3.0  # the same for a level nobody recorded; judgement
MOST = 200.0  # largest odds one record may give before MISREAD is mixed in
SHUT_SEEN = 0.95  # probability of a depression where the tank is seen not to breathe; judgement
LEVEL_SEEN = 0.03e5  # [Pa], about a third of a metre of oil
NODES = {
    Explanation.CLOGGED_STRAINER: ("inlet.viscous", Node.STRAINER_RESISTANCE),
    Explanation.PINCHED_LINE: ("inlet.quadratic", Node.LINE_RESISTANCE),
    Explanation.PLUGGED_BREATHER: ("inlet.depression", Node.TANK_DEPRESSION),
    Explanation.SAGGING_LEVEL: ("inlet.level", Node.LEVEL_LOW),
}
Items = list[EvidenceItem | NotAssessed]


def from_inverse(check: SuctionCheck, aligned: AlignedRecord | None) -> Items:
    """One item each on viscous loss, quadratic loss, tank depression and level.

    The likelihoods are the odds after the record over the odds before it, so a record that tells
    nothing weighs nothing.
    """
    inverse, found = check.inverse, check.explanations
    if inverse is None or found is None:
        return [
            NotAssessed(key=key, node=node, missing=check.inverse_missing)
            for key, node in NODES.values()
        ]
    if inverse.contradicted:
        missing = (
            "a record that fits the line: it asks for a negative "
            f"{' and '.join(inverse.contradicted)}"
        )
        return [
            NotAssessed(key=k, node=n, missing=missing, kind="lost") for k, n in NODES.values()
        ]
    series = aligned.series.get("inlet pressure") if aligned is not None else None
    sources = (series.source,) if series is not None else (Source(file="case.toml", locator=""),)
    shares = {s.explanation: s for s in found.shares}
    items: Items = [
        _item(kind, shares[kind], inverse, found, sources)
        for kind in (
            Explanation.CLOGGED_STRAINER,
            Explanation.PINCHED_LINE,
            Explanation.PLUGGED_BREATHER,
        )
    ]
    items.append(_level(shares[Explanation.SAGGING_LEVEL], inverse, sources))
    return items


def weighed(after: float, before: float, most: float = MOST) -> dict[str, float]:
    """P(finding | no), P(finding | yes) from the probability before and after the record."""
    low, high = 1e-4, 1.0 - 1e-4
    p, q = min(max(after, low), high), min(max(before, low), high)
    ratio = min(max(p / (1 - p) * (1 - q) / q, 1.0 / most), most)
    yes = ratio / (1.0 + ratio)
    return {
        "no": (1 - MISREAD) * (1.0 - yes) + 0.5 * MISREAD,
        "yes": (1 - MISREAD) * yes + 0.5 * MISREAD,
    }


def _item(
    kind: Explanation,
    share: Share,
    inverse: Inverse,
    found: Explanations,
    sources: tuple[Source, ...],
) -> EvidenceItem:
    key, node = NODES[kind]
    track, name, clean = {
        Explanation.CLOGGED_STRAINER: (
            inverse.viscous,
            "the loss that follows viscosity",
            found.clean.viscous if found.clean else None,
        ),
        Explanation.PINCHED_LINE: (
            inverse.quadratic,
            "the loss that follows the square of the flow",
            found.clean.quadratic if found.clean else None,
        ),
        Explanation.PLUGGED_BREATHER: (
            inverse.depression,
            "the depression of the reservoir",
            found.clean.depression if found.clean else None,
        ),
    }[kind]
    raised, breath = share.raised, ""
    if kind is Explanation.PLUGGED_BREATHER:
        raised, breath = _breath(inverse, raised)
    return EvidenceItem(
        key=key,
        node=node,
        likelihood=weighed(raised, share.raised_before),
        statement=_words(name, track, clean, share) + breath,
        sources=sources,
        group=Group.INLET,
        common_cause="sensor of the inlet pressure",
        basis=Basis.MEASURED,
        reading=Reading(
            value=track.p50[-1],
            unit="Pa",
            u=(track.p95[-1] - track.p05[-1]) / 3.29,
            origin=Origin.CALCULATED,
        ),
        absent=raised < 0.5,
    )


def _breath(inverse: Inverse, raised: float) -> tuple[float, str]:
    """Probability of a depression once the level's swing is looked at, and that look in words."""
    found = inverse.breathing
    if found is None or found.verdict == "not told":
        return raised, ""
    words = (
        f" {found.level_swing * 1e3:.0f} mm of level swing move the tank's pressure by "
        f"{abs(found.tank_swing.p50) / 1e5:.3f} bar; without a breather about "
        f"{found.shut_swing / 1e5:.2f} bar."
    )
    if found.verdict == "shut":
        return max(raised, SHUT_SEEN), words
    return min(raised, 1.0 - SHUT_SEEN), words


def _words(name: str, track: Track, clean: float | None, share: Share) -> str:
    words = (
        f"From the record, at warm, full flow, {name} is {track.p50[-1] / 1e5:.3f} bar at its end "
        f"(90 % between {track.p05[-1] / 1e5:.3f} and {track.p95[-1] / 1e5:.3f} bar)"
    )
    words += (
        f", {clean / 1e5:.3f} bar in the clean line."
        if clean is not None
        else f", {track.p50[0] / 1e5:.3f} bar at its beginning."
    )
    if not share.identified:
        words += " The record does not tell it from the other losses."
    return words


def _level(share: Share, inverse: Inverse, sources: tuple[Source, ...]) -> EvidenceItem:
    sunk = share.amount.p50
    if inverse.level_known:
        seen = min(max(sunk / LEVEL_SEEN, 0.0), 1.0)
        likelihood = {"no": 0.9 - 0.85 * seen, "yes": 0.25 + 0.65 * seen}
        words = f"The recorded level takes {abs(max(sunk, 0.0)) / 1e5:.3f} bar from the inlet."
    else:
        likelihood = weighed(share.raised, share.raised_before, MOST_UNSEEN)
        words = (
            f"Without a level record, a sunken level could take up to "
            f"{max(share.amount.p95, 0.0) / 1e5:.3f} bar of what the inlet lacks."
        )
    return EvidenceItem(
        key="inlet.level",
        node=Node.LEVEL_LOW,
        likelihood=likelihood,
        statement=words,
        sources=sources,
        group=Group.INLET,
        common_cause="sensor of the reservoir level"
        if inverse.level_known
        else "sensor of the inlet pressure",
        basis=Basis.MEASURED,
        absent=share.raised < 0.5,
    )
