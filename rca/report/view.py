"""Stored results to what the pages say: dataclasses with final strings; templates only place."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from datetime import datetime
from typing import Any

from rca.archive.store import Store
from rca.base.panel import Panel, Section
from rca.case.model import Case
from rca.figures.numbers import share

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
ORDER = ("intake", "damage", "oil", "records", "suction", "discharge")


@dataclass(frozen=True, slots=True, kw_only=True)
class Event:
    """One row of the sequence of events."""

    when: str
    kind: str
    text: str
    source: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Plate:
    """One photograph as it is printed."""

    file: str
    caption: str
    details: str
    alt: str


@dataclass(frozen=True, slots=True, kw_only=True)
class TopAction:
    """One action on the first page."""

    id: str
    text: str
    owner: str
    due: str
    state: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Page:
    """Everything the templates place."""

    language: str
    paper: str
    case_id: str
    title: str
    subtitle: str
    revision: str
    digest: str
    facts: tuple[tuple[str, str], ...]
    question: str
    finding: str
    strength: str
    side: str
    doubt: str
    supports: tuple[str, ...]
    against: tuple[str, ...]
    may_run: str
    top_actions: tuple[TopAction, ...]
    elsewhere: str
    decision: str
    scope: tuple[tuple[str, str], ...]
    limits: tuple[str, ...]
    equipment: tuple[tuple[str, str], ...]
    line: tuple[tuple[str, str], ...]
    events: tuple[Event, ...]
    plates: tuple[Plate, ...]
    facts_sections: tuple[Section, ...]
    check_sections: tuple[Section, ...]
    verdict_panels: tuple[Panel, ...]
    causes_panel: Panel | None
    tests_panel: Panel | None
    actions_section: Section | None
    own_sections: tuple[Section, ...]
    gaps: tuple[tuple[str, str], ...]
    cautions: tuple[str, ...]
    signatures: tuple[tuple[str, str], ...]
    record: tuple[tuple[str, str], ...]
    notes: str


def build_page(
    case: Case,
    store: Store,
    results: Mapping[str, Any],
    digest: str,
    plates: Mapping[str, str],
    *,
    paper: str,
    language: str,
) -> Page:
    """The page of a finished run."""
    sections = {s.stage: s for name in store.stages() for s in store.read(name).sections}
    words = results["verdict"]["words"]
    panels = {p.key: p for p in sections["verdict"].panels}
    kept = ("verdict.explanations", "verdict.weight", "verdict.robustness")
    known = {*ORDER, "verdict", "actions"}
    return Page(
        language=language,
        paper=paper,
        case_id=case.header.id,
        title=case.header.title,
        subtitle=", ".join(x for x in (case.header.asset, case.header.site) if x),
        revision="0",
        digest=digest[:12],
        facts=_facts(case),
        question=case.header.question
        or "Which mechanism damaged the pump, and what let it start?",
        finding=words["finding"],
        strength=words["strength"],
        side=results["verdict"]["side"],
        doubt=words["biggest_doubt"],
        supports=tuple(words["supports"]),
        against=tuple(words["against"]),
        may_run=case.header.may_run
        or "Not stated by the investigator; a competent person must decide before any run.",
        top_actions=_top_actions(results["actions"]),
        elsewhere=_elsewhere(results["actions"]),
        decision=_decision(results),
        scope=_scope(case),
        limits=FIXED_LIMITS,
        equipment=_equipment(case),
        line=_line(case),
        events=_events(case),
        plates=_plates(case, plates),
        facts_sections=tuple(sections[s] for s in ("intake", "damage") if s in sections),
        check_sections=tuple(
            sections[s] for s in ("oil", "records", "suction", "discharge") if s in sections
        ),
        verdict_panels=tuple(panels[k] for k in kept if k in panels),
        causes_panel=panels.get("verdict.causes"),
        tests_panel=panels.get("verdict.tests"),
        actions_section=sections.get("actions"),
        own_sections=tuple(s for name, s in sorted(sections.items()) if name not in known),
        gaps=tuple((g["missing"], g["cost"]) for g in results["gaps"]),
        cautions=CAUTIONS,
        signatures=(
            ("Investigator", case.header.investigator),
            ("Reviewer", case.header.reviewer),
            ("Approved for issue", ""),
        ),
        record=_record(results),
        notes=case.notes,
    )


def _facts(case: Case) -> tuple[tuple[str, str], ...]:
    header = case.header
    hours = f"{header.downtime.value / 3600:.0f} h" if header.downtime is not None else ""
    rows = (
        ("Failed", header.occurred.strftime("%Y-%m-%d %H:%M %z") if header.occurred else ""),
        ("Unit", header.asset),
        ("Site", header.site),
        ("Downtime", hours),
        ("Cost", header.cost),
        ("Severity", header.severity),
    )
    return tuple((k, v or "not recorded") for k, v in rows)


def _scope(case: Case) -> tuple[tuple[str, str], ...]:
    header = case.header
    return (
        ("Asked by", header.client or "not recorded"),
        ("Question", header.question or "not recorded"),
        ("Not part of it", ", ".join(header.out_of_scope) or "nothing stated"),
        ("Investigator", header.investigator or "not recorded"),
        ("Reviewer", header.reviewer or "not recorded"),
        ("Standards claimed", "none; no deviation recorded"),
    )


def _equipment(case: Case) -> tuple[tuple[str, str], ...]:
    pump, tank, fluid = case.pump, case.reservoir, case.fluid

    def text(reading: Any) -> str:
        return reading.text if reading is not None else ""

    rows = (
        ("Pump", pump.kind.value if pump.kind else ""),
        ("Maker and model", " ".join(x for x in (pump.maker, pump.model) if x)),
        ("Displacement", text(pump.displacement)),
        ("Speed", text(pump.speed)),
        ("Pistons, vanes or teeth", str(pump.elements or "")),
        ("Discharge pressure", text(pump.discharge_pressure)),
        ("Relief pressure", text(pump.relief_pressure)),
        ("Lowest inlet pressure allowed", text(pump.inlet_pressure_min)),
        ("Transition angle", text(pump.transition_angle)),
        ("Oil in the reservoir", text(tank.oil_volume)),
        ("Level above the inlet", text(tank.level_above_inlet)),
        (
            "Fluid",
            " ".join(
                str(x)
                for x in (
                    fluid.fluid_class.value if fluid.fluid_class else "",
                    f"ISO VG {fluid.iso_vg}" if fluid.iso_vg else "",
                    fluid.name,
                )
                if x
            ),
        ),
        (
            "Viscosity at 40 and 100 °C",
            " and ".join(t for t in (text(fluid.viscosity_40), text(fluid.viscosity_100)) if t),
        ),
        ("Normal oil temperature", text(fluid.temperature)),
        ("Altitude", text(case.header.altitude)),
    )
    return tuple((k, v or "not recorded") for k, v in rows)


def _line(case: Case) -> tuple[tuple[str, str], ...]:
    rows = []
    for part in case.suction_line:
        sizes = (part.bore, part.length, part.rated_flow, part.rated_loss)
        details = ", ".join(r.text for r in sizes if r is not None)
        many = f" (×{part.count})" if part.count > 1 else ""
        rows.append((f"{part.index + 1} {part.form or part.part.value}{many}", details))
    return tuple(rows)


def _events(case: Case) -> tuple[Event, ...]:
    rows = []
    for event in case.history:
        exact = isinstance(event.when, datetime)
        rows.append(
            (
                event.when.isoformat()[:10],
                Event(
                    when=event.when.strftime("%Y-%m-%d %H:%M")
                    if exact
                    else event.when.isoformat(),
                    kind=event.kind,
                    text=event.text,
                    source=f"{event.source.file}, {event.source.locator}",
                ),
            )
        )
    if case.header.occurred is not None:
        when = case.header.occurred
        rows.append(
            (
                when.isoformat()[:10],
                Event(
                    when=when.strftime("%Y-%m-%d %H:%M %z"),
                    kind="failure reported",
                    text=case.header.title,
                    source="case.toml, case.occurred",
                ),
            )
        )
    return tuple(event for _, event in sorted(rows, key=lambda r: r[0]))


def _plates(case: Case, names: Mapping[str, str]) -> tuple[Plate, ...]:
    plates = []
    for photo in case.photos:
        taken = photo.taken.strftime("%Y-%m-%d %H:%M %z") if photo.taken else "time not recorded"
        details = ", ".join(
            x
            for x in (
                photo.exhibit,
                photo.view,
                photo.zone,
                f"scale: {photo.scale or 'none stated'}",
                f"taken {taken}",
                f"by {photo.by}" if photo.by else "photographer not recorded",
            )
            if x
        )
        caption = photo.caption or photo.file
        plates.append(
            Plate(
                file=f"photos/{names[photo.file]}",
                caption=caption,
                details=details,
                alt=f"{caption}; {photo.zone or 'zone not stated'}",
            )
        )
    return tuple(plates)


def _top_actions(actions: Sequence[Mapping[str, Any]]) -> tuple[TopAction, ...]:
    rank = {"containment": 0, "corrective": 1, "correction": 2, "preventive": 3}
    chosen = sorted(actions, key=lambda a: (rank.get(a["kind"], 4), a["due"] or "9999"))[:3]
    return tuple(
        TopAction(
            id=a["id"],
            text=a["text"],
            owner=a["owner"] or "no owner",
            due=a["due"] or "no date",
            state=f"{a['status'] or 'no status'}; {a['proof']}",
        )
        for a in chosen
    )


def _elsewhere(actions: Sequence[Mapping[str, Any]]) -> str:
    named = [a for a in actions if a["kind"] == "preventive"]
    if named:
        return f"See action {', '.join(a['id'] for a in named)}: {named[0]['text']}"
    return "Not looked into: no action in the register names another unit."


def _decision(results: Mapping[str, Any]) -> str:
    waiting = [a for a in results["actions"] if a["status"] in ("proposed", "planned")]
    if waiting:
        first = min(waiting, key=lambda a: a["due"] or "9999")
        return (
            f"Release the {len(waiting)} actions still proposed or planned; the first, "
            f"{first['id']}, is due {first['due'] or 'without a date'}."
        )
    tests = results["verdict"]["next_tests"]
    useful = [t for t in tests if t["could_change_side"]]
    if useful:
        return f"Decide on the next test: {useful[0]['name']}."
    return "Name owners and dates for corrective actions; none is waiting for release."


def _record(results: Mapping[str, Any]) -> tuple[tuple[str, str], ...]:
    record = results["record"]
    rows = [
        ("Knowledge", record["knowledge"]),
        ("Seed", str(record["seed"])),
        ("Program code, SHA-256", record["code"][:32]),
    ]
    rows += [(name, number) for name, number in sorted(record["versions"].items())]
    return tuple(rows)


def side_words(results: Mapping[str, Any]) -> str:
    """The sides with their probabilities, for the log and the command line."""
    sides = results["verdict"]["sides"]
    return (
        f"{results['verdict']['side']} (suction {share(sides['suction'])}, "
        f"discharge {share(sides['discharge'])})"
    )
