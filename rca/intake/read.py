"""A case folder to a typed case, and every problem at once."""

from dataclasses import dataclass, replace
from pathlib import Path

from rca.base.errors import CaseError, KnowledgeError, Problem, Severity
from rca.case.gaps import gaps_of
from rca.case.model import Case, EvidenceFile
from rca.intake.descriptor import Descriptor, read_descriptor
from rca.intake.evidence_tables import (
    read_actions,
    read_custody,
    read_findings,
    read_history,
)
from rca.intake.files import DESCRIPTOR, list_files
from rca.intake.photos import read_photos
from rca.verdict.knowledge import Knowledge, shipped_knowledge
from rca.verdict.overlay import overlaid

MOST_NOTES = 1_000_000  # characters


@dataclass(frozen=True, slots=True, kw_only=True)
class CaseReading:
    """The case, or None where the descriptor can't be read; and all problems."""

    case: Case | None
    problems: tuple[Problem, ...]

    @property
    def errors(self) -> tuple[Problem, ...]:
        """Problems that must be mended before the case can be used."""
        return tuple(p for p in self.problems if p.severity is Severity.ERROR)


def load_case(folder: Path) -> Case:
    """The case in a folder.

    Raises CaseError with every error where there is one; warnings don't stop it.
    """
    reading = read_case(folder)
    if reading.case is None or reading.errors:
        raise CaseError(reading.errors)
    return reading.case


def read_case(folder: Path) -> CaseReading:
    """Read everything a case folder holds, except the samples of its records."""
    descriptor_path = folder / DESCRIPTOR
    refused = _refused(folder, descriptor_path)
    if refused is not None:
        return CaseReading(case=None, problems=(refused,))
    files, problems = list_files(folder)
    by_name = {file.file: file for file in files}
    if DESCRIPTOR not in by_name:
        return CaseReading(case=None, problems=tuple(problems))
    descriptor, found = read_descriptor(descriptor_path.read_bytes(), by_name[DESCRIPTOR].sha256)
    problems += found
    if descriptor is None:
        return CaseReading(case=None, problems=tuple(problems))
    case = _case(folder, descriptor, by_name, problems)
    problems += _named_files(case, by_name)
    problems += _links_between(case)
    problems += _site_knowledge(folder, case)
    return CaseReading(case=replace(case, gaps=gaps_of(case)), problems=tuple(problems))


def _case(
    folder: Path,
    descriptor: Descriptor,
    by_name: dict[str, EvidenceFile],
    problems: list[Problem],
) -> Case:
    def sha256(name: str) -> str:
        return by_name[name].sha256 if name in by_name else ""

    return Case(
        header=descriptor.header,
        pump=descriptor.pump,
        reservoir=descriptor.reservoir,
        suction_line=descriptor.suction_line,
        fluid=descriptor.fluid,
        oil_reports=descriptor.oil_reports,
        records=descriptor.records,
        excluded=descriptor.excluded,
        commission=descriptor.commission,
        photos=read_photos(folder, by_name, problems),
        findings=read_findings(folder, sha256("teardown/findings.csv"), problems),
        notes=_notes(folder, problems),
        custody=read_custody(folder, sha256("custody.csv"), problems),
        history=read_history(folder, sha256("history.csv"), problems),
        actions=read_actions(folder, sha256("actions.csv"), problems),
        files=tuple(by_name.values()),
    )


def _refused(folder: Path, descriptor: Path) -> Problem | None:
    def problem(file: str, found: str, expected: str, mend: str) -> Problem:
        return Problem(
            severity=Severity.ERROR, file=file, place="", found=found, expected=expected, mend=mend
        )

    if not folder.exists():
        return problem(str(folder), "no such folder", "a case folder", "Make one with  rca new.")
    if not folder.is_dir():
        return problem(str(folder), "a file", "a case folder", "Name the folder itself.")
    if not descriptor.exists():
        return problem(
            DESCRIPTOR,
            "no such file",
            "the descriptor of the case",
            "Make a case with  rca new  and look at its case.toml.",
        )
    if not descriptor.is_file():
        return problem(DESCRIPTOR, "a folder", "a text file", "Rename the folder.")
    return None


def _notes(folder: Path, problems: list[Problem]) -> str:
    path = folder / "teardown" / "notes.md"
    if not path.is_file():
        return ""
    try:
        return path.read_text(encoding="utf-8-sig")[:MOST_NOTES]
    except UnicodeDecodeError:
        problems.append(
            Problem(
                severity=Severity.WARNING,
                file="teardown/notes.md",
                place="",
                found="text that is not UTF-8",
                expected="UTF-8",
                mend="Save it as UTF-8; letters it can't show are replaced in the report.",
            )
        )
        return path.read_text(encoding="utf-8", errors="replace")[:MOST_NOTES]


def site_knowledge(folder: Path, case: Case) -> Knowledge:
    """The shipped knowledge, with the site's changes where the case names a file of them.

    Raises KnowledgeError with file and line where that file is at fault.
    """
    name = case.header.knowledge
    if not name:
        return shipped_knowledge()
    if name not in {file.file for file in case.files}:
        raise KnowledgeError(f"{name}: no such file in the case folder")
    try:
        text = (folder / name).read_text(encoding="utf-8-sig")
    except UnicodeDecodeError as error:
        raise KnowledgeError(f"{name}: text that is not UTF-8") from error
    return overlaid(shipped_knowledge(), text, file=name)


def _site_knowledge(folder: Path, case: Case) -> list[Problem]:
    """What is wrong with the site's own knowledge."""
    try:
        site_knowledge(folder, case)
    except KnowledgeError as error:
        return [
            Problem(
                severity=Severity.ERROR,
                file=DESCRIPTOR,
                place="case.knowledge",
                found=str(error),
                expected="changes to the shipped knowledge, each with its reason",
                mend="Mend that line, or leave the key out to use the shipped knowledge.",
            )
        ]
    return []


def _named_files(case: Case, files: dict[str, EvidenceFile]) -> list[Problem]:
    """Every file the descriptor names must be in the folder."""
    named = [
        *((report.file, report.source.locator) for report in case.oil_reports),
        *((record.file, record.source.locator) for record in case.records),
        *((one.file, f"excluded, {one.where}") for one in case.excluded),
    ]
    near = sorted(files)
    return [
        Problem(
            severity=Severity.ERROR,
            file=DESCRIPTOR,
            place=place,
            found=f"{name!r}, which is not in the case folder",
            expected="a file of this case, with forward slashes",
            mend=f"The folder holds {', '.join(near[:12])}{' ...' if len(near) > 12 else ''}.",
        )
        for name, place in named
        if name and name not in files
    ]


def _links_between(case: Case) -> list[Problem]:
    """A finding that names a photograph must find it."""
    known = {photo.file for photo in case.photos} | {
        photo.file.removeprefix("photos/") for photo in case.photos
    }
    return [
        Problem(
            severity=Severity.WARNING,
            file=finding.source.file,
            place=f"{finding.source.locator}, column photo",
            found=f"{finding.photo!r}, which is not among the photographs",
            expected="the file name of a photograph",
            mend="Mend the name, or leave the cell empty.",
        )
        for finding in case.findings
        if finding.photo and finding.photo not in known
    ]
