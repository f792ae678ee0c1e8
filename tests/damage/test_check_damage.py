"""Findings by side, absences kept, contradictions listed, words that carry no weight."""

from dataclasses import replace

import pytest

from rca.base.source import Source
from rca.case.model import Case, Excluded, Finding, Photo
from rca.case.vocabulary import ZONE_SIDES, Extent, PumpKind, Side, Sign
from rca.damage.check import check_damage
from rca.evidence.from_damage import from_damage
from rca.evidence.item import EvidenceItem, Node, NotAssessed
from rca.figures.damage import figures_damage
from rca.figures.panels_damage import panels_damage


def finding(
    key: str, zone: str, sign: str, extent: str | None = "moderate", **more: str
) -> Finding:
    known = {s.value: s for s in Sign}
    return Finding(
        id=key,
        source=Source(file="teardown/findings.csv", locator=f"row {key}", sha256="ab"),
        component=more.get("component", zone),
        zone=zone,
        sign=known.get(sign),
        sign_text=sign,
        extent=Extent(extent) if extent else None,
        side=ZONE_SIDES.get(zone.casefold()),
        photo=more.get("photo", ""),
        note=more.get("note", ""),
        by="C. Example",
    )


def photo(name: str, zone: str, digest: str) -> Photo:
    return Photo(file=name, source=Source(file=name, locator="", sha256=digest), zone=zone)


def items(case: Case) -> dict[Node, EvidenceItem | NotAssessed]:
    return {one.node: one for one in from_damage(check_damage(case))}


def ratio(one: EvidenceItem | NotAssessed) -> float:
    assert isinstance(one, EvidenceItem)
    return one.likelihood["yes"] / one.likelihood["no"]


def with_findings(case: Case, *findings: Finding) -> Case:
    return replace(case, findings=findings)


def test_side_comes_from_the_zone(small_case: Case) -> None:
    case = with_findings(
        small_case,
        finding("1", "Inlet kidney", "pitting"),
        finding("2", "piston seal", "charred seal"),
        finding("3", "housing", "housing wear track"),
    )
    sides = [o.side for o in check_damage(case).observations]
    assert sides == [Side.INLET, Side.DISCHARGE, Side.NEITHER]


def test_unknown_words_are_kept_and_answered_with_the_nearest(small_case: Case) -> None:
    case = with_findings(
        small_case,
        finding("1", "inlet kidny", "pitting"),
        finding("2", "inlet kidney", "piting"),
        finding("3", "inlet kidney", "pitting", None),
    )
    check = check_damage(case)
    assert check.observations == ()
    reasons = [u.reason for u in check.unweighed]
    assert "inlet kidney" in reasons[0]
    assert "pitting" in reasons[1]
    assert "extent" in reasons[2]
    assert all(isinstance(one, NotAssessed) for one in from_damage(check))


def test_excluded_finding_is_shown_with_its_reason(small_case: Case) -> None:
    case = replace(
        with_findings(small_case, finding("1", "inlet kidney", "pitting")),
        excluded=(Excluded(file="teardown/findings.csv", where="1", reason="wrong pump"),),
    )
    check = check_damage(case)
    assert (check.observations, check.unweighed[0].reason) == ((), "wrong pump")


def test_contradictions_are_listed(small_case: Case) -> None:
    case = replace(
        with_findings(
            small_case,
            finding("1", "inlet kidney", "pitting", "severe", photo="a.jpg"),
            finding("2", "inlet kidney", "pitting", "none"),
            finding("3", "piston seal", "charred seal", photo="lost.jpg"),
        ),
        photos=(
            photo("photos/a.jpg", "swash plate", "d1"),
            photo("photos/b.jpg", "inlet kidney", "d1"),
        ),
    )
    words = "\n".join(check_damage(case).contradictions)
    assert "both found and looked for" in words
    assert "a.jpg is of swash plate" in words
    assert "lost.jpg is not in the case folder" in words
    assert "same picture byte for byte" in words


def test_words_of_notes_carry_no_weight(small_case: Case) -> None:
    plain = with_findings(small_case, finding("1", "inlet kidney", "pitting"))
    loud = with_findings(
        small_case, finding("1", "inlet kidney", "pitting", note="dieseling, cavitation, burnt")
    )
    loud = replace(loud, notes="classic cavitation job")
    assert from_damage(check_damage(plain)) == from_damage(check_damage(loud))


def test_absent_weighs_and_unlooked_does_not(small_case: Case) -> None:
    by_node = items(with_findings(small_case, finding("1", "piston seal", "charred seal", "none")))
    assert ratio(by_node[Node.CHAR_DISCHARGE]) < 1
    assert isinstance(by_node[Node.PITTING_INLET], NotAssessed)


def test_more_extent_weighs_more_and_more_looks_miss_less(small_case: Case) -> None:
    grades = [
        ratio(
            items(with_findings(small_case, finding("1", "inlet kidney", "pitting", extent)))[
                Node.PITTING_INLET
            ]
        )
        for extent in ("none", "slight", "moderate", "severe")
    ]
    assert grades == sorted(grades)
    one = with_findings(small_case, finding("1", "servo valve", "carbon deposit", "none"))
    three = with_findings(
        small_case,
        finding("1", "servo valve", "carbon deposit", "none"),
        finding("2", "relief valve", "charred seal", "none"),
        finding("3", "discharge kidney", "burn mark", "none"),
    )
    assert ratio(items(three)[Node.CHAR_DISCHARGE]) < ratio(items(one)[Node.CHAR_DISCHARGE]) < 1


def test_a_part_named_as_a_whole_says_less_than_a_place(small_case: Case) -> None:
    whole = items(with_findings(small_case, finding("1", "valve plate", "pitting", "severe")))
    place = items(with_findings(small_case, finding("1", "transition land", "pitting", "severe")))
    assert 1 < ratio(whole[Node.PITTING_TRANSITION]) < 4
    assert ratio(place[Node.PITTING_TRANSITION]) > 10


def test_milky_speaks_of_a_node_that_water_and_air_share(small_case: Case) -> None:
    seen = items(with_findings(small_case, finding("1", "reservoir", "milky oil", "severe")))
    assert ratio(seen[Node.MILKY]) > 1
    assert Node.MILKY_CLEARS not in seen


def test_a_zone_called_undamaged_was_looked_at_for_its_signs(small_case: Case) -> None:
    for extent in ("none", "severe"):
        clean = items(with_findings(small_case, finding("1", "inlet kidney", "no damage", extent)))
        assert ratio(clean[Node.PITTING_INLET]) < 1
        assert ratio(clean[Node.NO_DAMAGE]) > 1


def test_heat_at_a_valve_is_not_burning_on_the_pump(small_case: Case) -> None:
    seen = items(with_findings(small_case, finding("1", "relief valve", "heat tint", "severe")))
    assert ratio(seen[Node.VALVE_HEAT]) > 10
    assert isinstance(seen[Node.CHAR_DISCHARGE], NotAssessed)


def test_a_strainer_full_of_sludge_is_a_clogged_strainer(small_case: Case) -> None:
    full = items(with_findings(small_case, finding("1", "strainer", "sludge", "severe")))
    some = items(with_findings(small_case, finding("1", "strainer", "sludge", "slight")))
    clean = items(with_findings(small_case, finding("1", "strainer", "sludge", "none")))
    node = Node.STRAINER_FOUND_CLOGGED
    assert ratio(full[node]) > 10
    assert 2 > ratio(some[node]) > 1 > ratio(clean[node])


@pytest.mark.parametrize("sign", list(Sign))
@pytest.mark.parametrize("extent", list(Extent))
def test_every_sign_gives_proper_likelihoods(small_case: Case, sign: Sign, extent: Extent) -> None:
    for zone in ZONE_SIDES:
        case = with_findings(small_case, finding("1", zone, sign.value, extent.value))
        for one in from_damage(check_damage(case)):
            if isinstance(one, EvidenceItem):
                assert all(0 < p < 1 for p in one.likelihood.values())
                assert one.sources


@pytest.mark.parametrize("kind", [*PumpKind, None])
def test_every_pump_kind_is_drawn_and_every_finding_is_in_the_table(
    small_case: Case, kind: PumpKind | None
) -> None:
    findings = [finding(str(n), zone, "pitting", "slight") for n, zone in enumerate(ZONE_SIDES)]
    case = replace(with_findings(small_case, *findings), pump=replace(small_case.pump, kind=kind))
    check = check_damage(case)
    figures = figures_damage(case, check)
    assert set(figures) == {f.name for p in panels_damage(check).panels for f in p.figures}
    rows = panels_damage(check).panels[0].tables[0].rows
    assert [r[0] for r in rows] == [f.id for f in findings]


def test_a_look_where_the_sign_shows_first_misses_less(small_case: Case) -> None:
    seal = items(with_findings(small_case, finding("1", "piston seal", "charred seal", "none")))
    valve = items(with_findings(small_case, finding("1", "servo valve", "carbon deposit", "none")))
    assert ratio(seal[Node.CHAR_DISCHARGE]) < ratio(valve[Node.CHAR_DISCHARGE]) < 1


def test_found_damage_is_said_as_found(small_case: Case) -> None:
    one = items(with_findings(small_case, finding("1", "inlet kidney", "pitting", "severe")))
    nothing = one[Node.NO_DAMAGE]
    assert isinstance(nothing, EvidenceItem)
    assert nothing.statement.startswith("Found: 1: pitting, severe")
    assert ratio(nothing) < 1
    clean = items(with_findings(small_case, finding("1", "valve plate", "no damage", "severe")))
    assert ratio(clean[Node.NO_DAMAGE]) > 1


def test_a_picture_of_the_plate_may_show_its_kidney(small_case: Case) -> None:
    case = replace(
        with_findings(small_case, finding("1", "inlet kidney", "pitting", photo="a.jpg")),
        photos=(photo("photos/a.jpg", "valve plate", "d1"),),
    )
    assert check_damage(case).contradictions == ()


def test_no_findings_is_said(small_case: Case) -> None:
    check = check_damage(small_case)
    assert figures_damage(small_case, check) == {}
    assert "No finding" in panels_damage(check).panels[0].answer
