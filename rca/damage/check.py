"""Teardown findings as typed observations by side; contradictions listed, absences kept."""

from collections.abc import Sequence
from dataclasses import dataclass
from difflib import get_close_matches

from rca.case.model import Case, Finding
from rca.case.vocabulary import ZONES, Extent, Side, Sign

# zones that one picture can show at once
SEEN_TOGETHER = (
    {"valve plate", "inlet kidney", "transition land", "discharge kidney"},
    {"cylinder block", "cylinder bore"},
    {"cylinder", "piston seal"},
    {"slipper", "swash plate"},
    {"cam ring", "vane tip"},
)


@dataclass(frozen=True, slots=True, kw_only=True)
class Observation:
    """One finding that carries weight: a known sign in a known zone with a stated extent."""

    id: str
    component: str
    zone: str
    side: Side
    sign: Sign
    extent: Extent
    photo: str
    by: str
    locator: str
    sha256: str
    note: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Unweighed:
    """A finding that is shown and carries no weight, and why."""

    id: str
    words: str
    reason: str


@dataclass(frozen=True, slots=True, kw_only=True)
class DamageCheck:
    """The damage of a case."""

    observations: tuple[Observation, ...]
    unweighed: tuple[Unweighed, ...]
    contradictions: tuple[str, ...]
    zones_looked_at: tuple[str, ...]


def check_damage(case: Case) -> DamageCheck:
    """Sort the findings; the words of a note or a photograph's caption carry no weight."""
    observations, unweighed = [], []
    excluded = {one.where: one.reason for one in case.excluded if "findings" in one.file}
    for finding in case.findings:
        reason = excluded.get(finding.id) or _reason(finding)
        if reason:
            words = f"{finding.sign_text} at {finding.zone}"
            unweighed.append(Unweighed(id=finding.id, words=words, reason=reason))
        else:
            observations.append(_observation(finding))
    kept = tuple(observations)
    return DamageCheck(
        observations=kept,
        unweighed=tuple(unweighed),
        contradictions=(*_against_each_other(kept), *_against_photos(case, kept)),
        zones_looked_at=tuple(sorted({o.zone for o in kept})),
    )


def _reason(finding: Finding) -> str:
    if finding.sign is None:
        near = _nearest(finding.sign_text, [s.value for s in Sign])
        return f"the sign {finding.sign_text!r} is not in the vocabulary{near}"
    if finding.side is None:
        near = _nearest(finding.zone, ZONES)
        return f"the zone {finding.zone!r} is not in the vocabulary{near}"
    if finding.extent is None:
        return "no extent is stated"
    return ""


def _nearest(word: str, known: Sequence[str]) -> str:
    close = get_close_matches(word.casefold().strip(), known, n=3, cutoff=0.5)
    return f"; nearest known: {', '.join(close)}" if close else ""


def _observation(finding: Finding) -> Observation:
    assert finding.sign is not None and finding.side is not None  # noqa: PT018
    assert finding.extent is not None
    return Observation(
        id=finding.id,
        component=finding.component,
        zone=finding.zone.casefold(),
        side=finding.side,
        sign=finding.sign,
        extent=finding.extent,
        photo=finding.photo,
        by=finding.by,
        locator=finding.source.locator,
        sha256=finding.source.sha256,
        note=finding.note,
    )


def _against_each_other(observations: tuple[Observation, ...]) -> list[str]:
    words = []
    for n, one in enumerate(observations):
        for other in observations[n + 1 :]:
            same_place = one.zone == other.zone and one.component == other.component
            if not same_place:
                continue
            if one.sign is other.sign and (one.extent is Extent.NONE) != (
                other.extent is Extent.NONE
            ):
                words.append(
                    f"{one.id} and {other.id}: {one.sign.value} at {one.zone} is both found "
                    "and looked for without being found"
                )
            nothing = Sign.NO_DAMAGE in (one.sign, other.sign)
            real = one.extent is not Extent.NONE and other.extent is not Extent.NONE
            if nothing and real and one.sign is not other.sign:
                words.append(f"{one.id} and {other.id}: damage and no damage at {one.zone}")
    return words


def _against_photos(case: Case, observations: tuple[Observation, ...]) -> list[str]:
    zones = {p.file.removeprefix("photos/"): p.zone.casefold() for p in case.photos}
    words = _same_picture(case)
    for one in observations:
        name = one.photo.removeprefix("photos/")
        shown = zones.get(name, "")
        if name and name not in zones:
            words.append(f"{one.id}: its photograph {one.photo} is not in the case folder")
        together = any(shown in group and one.zone in group for group in SEEN_TOGETHER)
        if shown and shown != one.zone and not together:
            words.append(
                f"{one.id}: found at {one.zone}, its photograph {one.photo} is of {shown}"
            )
    return words


def _same_picture(case: Case) -> list[str]:
    """Photographs with the same bytes under two names: one picture is one look, not two."""
    first: dict[str, str] = {}
    words = []
    for photo in case.photos:
        digest = photo.source.sha256
        if digest and digest in first:
            words.append(f"{photo.file} and {first[digest]} are the same picture byte for byte")
        if digest:
            first.setdefault(digest, photo.file)
    return words
