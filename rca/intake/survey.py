"""Everything ``rca check`` says of a case folder, as data."""

from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass, replace
from datetime import UTC, date, datetime
from pathlib import Path
from typing import Any

from rca.actions.proof import Proof
from rca.actions.review import review_actions
from rca.base.errors import Problem, Severity
from rca.base.units import QUANTITY_DIMENSIONS, parse_quantity
from rca.case.model import Case
from rca.case.site import local_atmosphere
from rca.case.vocabulary import ZONE_SIDES, Extent
from rca.damage.check import check_damage
from rca.intake.oil_reports import OilReading, read_oil_reports
from rca.intake.read import read_case
from rca.intake.record_files import FileSummary, RecordReading, read_records
from rca.records.check import check_records, usable


@dataclass(frozen=True, slots=True, kw_only=True)
class Part:
    """One part of the case that can be used: what it is, and how much of it there is."""

    part: str
    detail: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Survey:
    """What is usable, wrong, contradictory and missing."""

    usable: tuple[Part, ...]
    problems: tuple[Problem, ...]
    contradictions: tuple[str, ...]
    gaps: tuple[tuple[str, str], ...]  # (missing, cost)
    proposals: tuple[str, ...]  # lines for case.toml
    unusable: bool  # there is no case to speak of

    @property
    def errors(self) -> int:
        """How many problems are errors."""
        return sum(p.severity is Severity.ERROR for p in self.problems)

    def plain(self) -> dict[str, Any]:
        """The survey as JSON."""
        return {
            "usable": [{"part": p.part, "detail": p.detail} for p in self.usable],
            "problems": [
                {
                    "severity": p.severity.value,
                    "file": p.file,
                    "place": p.place,
                    "found": p.found,
                    "expected": p.expected,
                    "mend": p.mend,
                }
                for p in self.problems
            ],
            "contradictions": list(self.contradictions),
            "gaps": [{"missing": m, "cost": c} for m, c in self.gaps],
            "proposals": list(self.proposals),
            "errors": self.errors,
        }


def survey(folder: Path) -> Survey:
    """Read the whole case, its oil reports and its records, and say what came of it."""
    reading = read_case(folder)
    case = reading.case
    if case is None:
        return Survey(
            usable=(),
            problems=reading.problems,
            contradictions=(),
            gaps=(),
            proposals=(),
            unusable=not folder.is_dir(),
        )
    sound = _sound(case, reading.problems)
    oil = read_oil_reports(folder, sound)
    records = read_records(folder, sound, atmosphere=local_atmosphere(case))
    found = (
        *reading.problems,
        *oil.problems,
        *_unread(oil),
        *records.problems,
        *_actions(case, records),
    )
    return Survey(
        usable=(*_of_the_folder(case), *_of_the_oil(case, oil), *map(_of_a_record, records.files)),
        problems=tuple(dict.fromkeys(found)),
        contradictions=(*check_damage(case).contradictions, *_disowned(case, records)),
        gaps=tuple((g.missing, g.cost) for g in case.gaps),
        proposals=tuple(oil.proposals),
        unusable=False,
    )


def counted(number: int, thing: str, things: str = "") -> str:
    """A number with the noun that fits it."""
    return f"{number} {thing if number == 1 else things or thing + 's'}"


def _sound(case: Case, problems: Sequence[Problem]) -> Case:
    """The case with the reports and records that are there; one bad file costs itself only."""
    there = {f.file for f in case.files} - {
        p.file for p in problems if p.severity is Severity.ERROR
    }
    return replace(
        case,
        records=tuple(r for r in case.records if r.file in there),
        oil_reports=tuple(r for r in case.oil_reports if r.file in there),
    )


def _actions(case: Case, records: RecordReading) -> list[Problem]:
    """Guards an action breaks, and conditions nobody can check."""

    def convert(text: str, quantity: str) -> float:
        dimension = QUANTITY_DIMENSIONS[quantity]
        return parse_quantity(text, dimension, atmosphere=local_atmosphere(case)).value

    check = review_actions(case.actions, records.aligned, convert=convert, as_of=None)
    found = []
    for action, review in zip(case.actions, check.actions, strict=True):
        unclear = review.proof is Proof.UNCHECKABLE and bool(action.verify.strip())
        words = [*review.objections, *([f"verify: {review.reason}"] if unclear else [])]
        if words:
            found.append(
                Problem(
                    severity=Severity.WARNING,
                    file=action.source.file,
                    place=f"{action.source.locator}, action {action.id}",
                    found="; ".join(words),
                    expected="an action somebody else can prove",
                    mend="Mend the row, or leave it: it is shown as such and counts as unproved.",
                )
            )
    return found


def _unread(oil: OilReading) -> list[Problem]:
    return [
        Problem(
            severity=Severity.NOTE,
            file=u.source.file,
            place=u.source.locator,
            found=repr(u.text),
            expected="a result, or a header this program knows",
            mend=f"Not used: {u.reason}.",
        )
        for u in oil.unread
    ]


def _of_the_folder(case: Case) -> list[Part]:
    """The descriptor and the tables beside it."""
    parts = [Part(part="case", detail=f"{case.header.id}: {case.header.title}")]
    days = sorted(p.taken for p in case.photos if p.taken is not None)
    actions = Counter(a.status for a in case.actions)
    lines = (
        (case.suction_line, "suction line", counted(len(case.suction_line), "part")),
        (
            case.photos,
            "photographs",
            f"{len(case.photos)}, "
            + (f"taken {_span(days[0], days[-1])}" if days else "no day of taking known"),
        ),
        (case.findings, "teardown", _findings(case)),
        (case.history, "history", counted(len(case.history), "entry", "entries")),
        (case.custody, "custody", counted(len(case.custody), "hand-over")),
        (
            case.actions,
            "actions",
            f"{len(case.actions)}: " + ", ".join(f"{n} {s}" for s, n in sorted(actions.items())),
        ),
        (case.files, "files", f"{len(case.files)}, each with its SHA-256"),
    )
    return parts + [Part(part=part, detail=detail) for there, part, detail in lines if there]


def _findings(case: Case) -> str:
    sides = Counter(ZONE_SIDES[f.zone].value for f in case.findings if f.zone in ZONE_SIDES)
    absent = sum(f.extent is Extent.NONE for f in case.findings)
    by_side = ", ".join(f"{sides[s]} {s}" for s in ("inlet", "discharge", "neither") if sides[s])
    return (
        f"{counted(len(case.findings), 'finding')}"
        + (f" ({by_side} side)" if by_side else "")
        + (f", {absent} looked for and absent" if absent else "")
    )


def _of_the_oil(case: Case, oil: OilReading) -> list[Part]:
    if not oil.samples:
        return []
    days = sorted(s.sampled for s in oil.samples if s.sampled is not None)
    names = sorted({s.laboratory for s in oil.samples if s.laboratory})
    aside = sum(bool(s.excluded) for s in oil.samples)
    results = sum(len(s.values) for s in oil.samples)
    return [
        Part(
            part="oil",
            detail=(
                f"{counted(len(oil.samples), 'sample')}"
                + (f", drawn {_span(days[0], days[-1])}" if days else ", none with a day")
                + f", {counted(results, 'result')} from "
                + (counted(len(names), "laboratory", "laboratories") if names else "")
                + (" in " if names else "")
                + counted(len(case.oil_reports), "file")
                + (f"; {aside} set aside by case.toml" if aside else "")
            ),
        )
    ]


def _of_a_record(one: FileSummary) -> Part:
    start = datetime.fromtimestamp(one.start_s, UTC).date()
    end = datetime.fromtimestamp(one.end_s, UTC).date()
    unread = sum(one.bad_cells.values())
    rate = f"{1.0 / one.interval_s:,.0f} a second" if one.fast else _every(one.interval_s)
    return Part(
        part=one.file,
        detail=(
            f"{one.rows:,} rows, {rate}, {_span(start, end)}, "
            f"{', '.join(one.channels)}; {counted(len(one.gaps), 'gap')}"
            + (f", {counted(unread, 'cell')} unread" if unread else "")
            + (f", {counted(one.bad_stamps, 'stamp')} unread" if one.bad_stamps else "")
        ),
    )


def _every(interval: float) -> str:
    if interval >= 120.0:
        return f"every {interval / 60.0:.3g} min"
    return f"every {interval:.3g} s" if interval > 0 else "at one time"


def _span(first: date, last: date) -> str:
    a, b = f"{first:%Y-%m-%d}", f"{last:%Y-%m-%d}"
    return f"on {a}" if a == b else f"{a} to {b}"


def _disowned(case: Case, records: RecordReading) -> list[str]:
    """What a channel's own samples say against it."""
    if records.aligned is None:
        return []
    check = check_records(case, usable(case, records.aligned), (), limit=None)
    return [
        f"{r.quantity}: {r.finding}" + ("; the channel is set aside" if r.set_aside else "")
        for r in check.sensors
    ]
