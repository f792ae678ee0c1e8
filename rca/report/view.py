"""Stored results to what the pages say: dataclasses with final strings; templates only place."""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from rca.archive.store import Store
from rca.base.panel import Panel, Section
from rca.case.model import Case
from rca.figures.numbers import share
from rca.report import closing, front
from rca.report import exhibits as evidence_lists
from rca.report.catalogue import Reader
from rca.report.revisions import Revision
from rca.verdict.explain import CHANCE, SCALE

CAUTIONS = (
    "Local law, site permits, the maker's instructions and licensed people come first; this page "
    "is a reminder, not a procedure.",
    "Isolate and lock every energy: electrical, hydraulic, gravity, springs, heat. Relieve stored "
    "pressure and prove it gone by two means before a fitting is cracked.",
    "Accumulators stay charged after the pump stops. Lower or block suspended loads; a valve is "
    "not a lock.",
    "Never search for a leak by hand: oil under pressure goes through skin and gloves. Any "
    "suspected injection is a surgical emergency, even without pain.",
    "Oil and parts can be hot enough to burn. Oil mist burns; keep flame and hot surfaces away.",
    "Lift pump and motor with rated gear; stay out from under the load.",
    "Don't run a suspect unit to hear it without a risk assessment; that test also alters "
    "evidence.",
)
FIXED_LIMITS = (
    "The findings hold for the items examined only. The report may be copied in full only.",
    "The report assigns no blame and no liability.",
    "The verdict is an opinion with limits. Software output does not authorise a return to "
    "service; a competent person signs that.",
)
ORDER = ("intake", "damage", "oil", "records", "suction", "discharge", "overview")


CHAPTERS = (
    ("summary", "Summary"),
    ("commission", "Commission and limits"),
    ("equipment", "Equipment and duty"),
    ("events", "Sequence of events"),
    ("evidence", "Evidence"),
    ("findings", "Physical findings"),
    ("checks", "Checks"),
    ("weighing", "Explanations and weight of evidence"),
    ("causes", "Causes"),
    ("elsewhere", "Where else"),
    ("actions", "Actions"),
    ("open", "Open points and dissent"),
    ("signoff", "Sign-off and revisions"),
    ("annex", "Annex: scales, terms, run record"),
)
TERMS = (
    ("micro-dieseling", "oil vapour or mist ignites in an air bubble that is compressed fast"),
    ("vapour cavitation", "oil boils where its pressure falls to the vapour pressure"),
    ("gaseous cavitation", "dissolved air comes out where the pressure is low, and collapses"),
    ("aeration", "air is carried to the inlet from outside or from the reservoir"),
    ("jet cavitation", "vapour in a fast jet at a groove or edge, with a healthy inlet"),
    ("likelihood ratio", "how much more probable a finding is if the statement is true"),
    ("looked for, absent", "weighs against; what nobody looked at weighs nothing"),
    ("bar(a), bar(g)", "pressure against vacuum, pressure against the air outside"),
)


@dataclass(frozen=True, slots=True, kw_only=True)
class Page:
    """Everything the templates place."""

    language: str
    paper: str
    case_id: str
    title: str
    subtitle: str
    revision: int
    digest: str
    chapters: tuple[tuple[str, str], ...]
    facts: tuple[tuple[str, str], ...]
    finding: str
    strength: str
    side: str
    doubt: str
    supports: tuple[str, ...]
    against: tuple[str, ...]
    may_run: str
    top_actions: tuple[closing.TopAction, ...]
    elsewhere: str
    decision: str
    scope: tuple[tuple[str, str], ...]
    standards: tuple[tuple[str, str, str], ...]
    limits: tuple[str, ...]
    equipment: tuple[tuple[str, str, str], ...]
    overview: Mapping[str, Panel]
    exhibits: tuple[evidence_lists.Exhibit, ...]
    relied_upon: tuple[tuple[str, str], ...]
    not_relied_upon: tuple[tuple[str, str], ...]
    sought: tuple[tuple[str, str, str, str], ...]
    altering_tests: tuple[tuple[str, str, str, str, str, str], ...]
    plates: tuple[evidence_lists.Plate, ...]
    intake: Section | None
    damage: Section | None
    check_sections: tuple[Section, ...]
    verdict_panels: tuple[Panel, ...]
    causes_panel: Panel | None
    tests_panel: Panel | None
    actions_section: Section | None
    own_sections: tuple[Section, ...]
    stopped: str
    contradictions: tuple[str, ...]
    gaps: tuple[tuple[str, str], ...]
    dissent: tuple[str, ...]
    cautions: tuple[str, ...]
    signatures: tuple[closing.Signature, ...]
    revisions: tuple[Revision, ...]
    scale: tuple[tuple[str, str], ...]
    chances: tuple[tuple[str, str], ...]
    terms: tuple[tuple[str, str], ...]
    record: tuple[tuple[str, str], ...]
    notes: str
    author: str


def build_page(
    case: Case,
    store: Store,
    results: Mapping[str, Any],
    digest: str,
    plates: Mapping[str, str],
    *,
    paper: str,
    reader: Reader,
    revisions: tuple[Revision, ...],
) -> Page:
    """The page of a finished run."""
    t = reader.frame
    sections = {s.stage: s for name in store.stages() for s in store.read(name).sections}
    words = results["verdict"]["words"]
    panels = {p.key: p for p in sections["verdict"].panels}
    overview = {p.key: p for p in sections["overview"].panels} if "overview" in sections else {}
    kept = ("verdict.explanations", "verdict.weight", "verdict.robustness")
    known = {*ORDER, "verdict", "actions"}
    return Page(
        language=reader.language,
        paper=paper,
        case_id=case.header.id,
        title=case.header.title,
        subtitle=", ".join(x for x in (case.header.asset, case.header.site) if x),
        revision=revisions[-1].number,
        digest=digest[:12],
        chapters=tuple((key, t(name)) for key, name in CHAPTERS),
        facts=front.title_facts(case, reader),
        finding=words["finding"],
        strength=words["strength"],
        side=results["verdict"]["side"],
        doubt=words["biggest_doubt"],
        supports=tuple(words["supports"]),
        against=tuple(words["against"]),
        may_run=case.header.may_run
        or t("Not stated by the investigator; a competent person must decide before any run."),
        top_actions=closing.top_actions(results["actions"], reader),
        elsewhere=closing.elsewhere(case, results["actions"], reader),
        decision=closing.decision(results, reader),
        scope=front.scope(case, reader),
        standards=front.standards(case, reader),
        limits=tuple(map(t, FIXED_LIMITS)),
        equipment=front.equipment(case, reader),
        overview=overview,
        exhibits=evidence_lists.exhibits(case, reader),
        relied_upon=evidence_lists.relied_upon(case, results),
        not_relied_upon=evidence_lists.not_relied_upon(case, results, reader),
        sought=tuple(
            (s.what, s.asked or t("not stated"), s.outcome or t("not obtained"), s.effect)
            for s in case.commission.sought
        ),
        altering_tests=_altering(case, reader),
        plates=evidence_lists.plates(case, plates, reader),
        intake=sections.get("intake"),
        damage=sections.get("damage"),
        check_sections=tuple(
            sections[s] for s in ("oil", "records", "suction", "discharge") if s in sections
        ),
        verdict_panels=tuple(panels[k] for k in kept if k in panels),
        causes_panel=panels.get("verdict.causes"),
        tests_panel=panels.get("verdict.tests"),
        actions_section=sections.get("actions"),
        own_sections=tuple(s for name, s in sorted(sections.items()) if name not in known),
        stopped=case.commission.stopped
        or t(
            "Not stated. The program names technical causes only; why they could arise is for "
            "people to ask."
        ),
        contradictions=tuple(results["verdict"].get("contradictions", ())),
        gaps=tuple((g["missing"], g["cost"]) for g in results["gaps"]),
        dissent=closing.dissent(case, reader),
        cautions=tuple(map(t, CAUTIONS)),
        signatures=closing.signatures(case, reader),
        revisions=revisions,
        scale=(*_bands(SCALE, SCALE[-1][0]), ("above", "extremely strong support")),
        chances=_bands(CHANCE, 1.0),
        terms=tuple((t(name), t(meaning)) for name, meaning in TERMS),
        record=closing.run_record(results, reader),
        notes=case.notes,
        author=case.header.investigator,
    )


def _bands(scale: tuple[tuple[float, str], ...], most: float) -> tuple[tuple[str, str], ...]:
    """A verbal scale as it is printed, so that no word floats free of its number."""
    rows, low = [], 0.0
    for top, words in scale:
        rows.append((f"{low:,g} \u2013 {min(top, most):,g}".replace(",", " "), words))
        low = top
    return tuple(rows)


def _altering(case: Case, reader: Reader) -> tuple[tuple[str, str, str, str, str, str], ...]:
    missing = reader.frame("not recorded")
    return tuple(
        (
            test.test,
            test.exhibit or missing,
            reader.day(test.when),
            test.state_before or missing,
            test.notified or missing,
            test.retained or missing,
        )
        for test in case.commission.altering_tests
    )


def side_words(results: Mapping[str, Any]) -> str:
    """The sides with their probabilities, for the log and the command line."""
    sides = results["verdict"]["sides"]
    return (
        f"{results['verdict']['side']} (suction {share(sides['suction'])}, "
        f"discharge {share(sides['discharge'])})"
    )
