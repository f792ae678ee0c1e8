"""Everything ``rca check`` says of a case folder, as data."""

from dataclasses import dataclass
from pathlib import Path
from typing import Any

from rca.base.errors import Problem, Severity
from rca.base.units import STANDARD_ATMOSPHERE
from rca.case.model import Case
from rca.intake.oil_reports import read_oil_reports
from rca.intake.read import read_case
from rca.intake.record_files import read_records


@dataclass(frozen=True, slots=True, kw_only=True)
class Survey:
    """What is usable, wrong and missing."""

    usable: tuple[str, ...]
    problems: tuple[Problem, ...]
    gaps: tuple[tuple[str, str], ...]
    proposals: tuple[str, ...]
    unusable: bool  # there is no case to speak of

    def plain(self) -> dict[str, Any]:
        """The survey as JSON."""
        return {
            "usable": list(self.usable),
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
            "gaps": [{"missing": m, "cost": c} for m, c in self.gaps],
            "proposals": list(self.proposals),
        }


def survey(folder: Path) -> Survey:
    """Read the whole case, its oil reports and its records, and say what came of it."""
    reading = read_case(folder)
    if reading.case is None:
        missing = not folder.is_dir()
        return Survey(
            usable=(), problems=reading.problems, gaps=(), proposals=(), unusable=missing
        )
    case, problems = reading.case, list(reading.problems)
    usable = _parts(case)
    oil = read_oil_reports(folder, case)
    problems += oil.problems
    if oil.samples:
        usable.append(f"{len(oil.samples)} oil samples in {len(case.oil_reports)} reports")
    problems += [
        Problem(
            severity=Severity.NOTE,
            file=u.source.file,
            place=u.source.locator,
            found=repr(u.text),
            expected="a result",
            mend=f"Not used: {u.reason}.",
        )
        for u in oil.unread
    ]
    named = {p.file for p in problems if p.severity is Severity.ERROR}
    if not named.intersection(r.file for r in case.records):
        records = read_records(folder, case, atmosphere=STANDARD_ATMOSPHERE)
        problems += records.problems
        usable += [
            f"{f.file}: {f.rows} samples, {len(f.gaps)} gaps"
            + (f", {sum(f.bad_cells.values())} cells unread" if f.bad_cells else "")
            for f in records.files
        ]
    return Survey(
        usable=tuple(usable),
        problems=tuple(problems),
        gaps=tuple((g.missing, g.cost) for g in case.gaps),
        proposals=tuple(oil.proposals),
        unusable=False,
    )


def _parts(case: Case) -> list[str]:
    counts = (
        (len(case.suction_line), "parts of the suction line"),
        (len(case.photos), "photographs"),
        (len(case.findings), "findings"),
        (len(case.history), "history entries"),
        (len(case.custody), "custody rows"),
        (len(case.actions), "actions"),
        (len(case.files), "files hashed"),
    )
    return [f"case {case.header.id}: {case.header.title}"] + [
        f"{n} {words}" for n, words in counts if n
    ]
