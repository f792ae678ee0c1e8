"""All laboratory reports of a case: samples in order, what could not be read, what to confirm."""

import re
from collections.abc import Sequence
from dataclasses import dataclass, replace
from datetime import date
from pathlib import Path

from rca.base.errors import KnowledgeError, Problem, Severity
from rca.base.source import Source
from rca.case.model import Case, Excluded, OilReportFile
from rca.case.oil import OilSample, UnreadCell
from rca.intake.oil_cells import decimal_mark
from rca.intake.oil_layout import Layout, layout_of
from rca.intake.oil_properties import fold, heading_of, known_names, property_of
from rca.intake.oil_samples import Kept, SampleReader
from rca.intake.tables import TableError, read_table
from rca.intake.words import nearest
from rca.oil.limits import Limit, read_limits

SITE_LIMITS = "oil/limits.toml"
_PROPERTIES = tuple(name for name in known_names() if len(name) > 2 and heading_of(name))


@dataclass(frozen=True, slots=True, kw_only=True)
class OilReading:
    """All samples of a case, what could not be read, and lines a person should confirm."""

    samples: tuple[OilSample, ...]
    unread: tuple[UnreadCell, ...]
    problems: tuple[Problem, ...]
    proposals: tuple[str, ...]  # for case.toml
    limits: tuple[Limit, ...] = ()  # the site's own, from oil/limits.toml


def read_oil_reports(folder: Path, case: Case) -> OilReading:
    """Read every report named in case.toml; samples in order of sampling, new oil first."""
    kept = Kept()
    samples: list[OilSample] = []
    proposals: list[str] = []
    hashes = {file.file: file.sha256 for file in case.files}
    for report in case.oil_reports:
        if Path(report.file).suffix.lower() == ".pdf":
            kept.problems.append(_pdf(report))
            kept.unread.append(_whole_file(report, hashes, "a PDF, kept as an exhibit"))
            continue
        try:
            table = read_table(folder / report.file, report.file, sheet=report.sheet)
        except TableError as error:
            kept.problems.append(error.problem)
            continue
        layout = layout_of(table.rows, report.columns)
        if layout is None:
            kept.problems.append(_no_heading(report))
            kept.unread.append(_whole_file(report, hashes, "no heading this program can read"))
            continue
        texts = [c.text for row in layout.body for c in row if c.typed != "number"]
        reader = SampleReader(
            report=report,
            sha256=hashes.get(report.file, ""),
            decimal=report.decimal or decimal_mark(texts),
            density=case.fluid.density_15.value / 1000.0 if case.fluid.density_15 else None,
            kept=kept,
        )
        samples += reader.samples(layout)
        kept.unread += _unknown_columns(report, layout, reader.sha256)
        proposals += _proposals(report, layout)
    limits = _site_limits(folder, kept)
    settled = _settled(samples, kept)
    marked = [one for sample in settled if (one := _marked(sample, case, kept)) is not None]
    marked.sort(key=lambda s: (s.sampled or date.min, s.id, s.revision, s.retest))
    return OilReading(
        samples=tuple(marked),
        unread=tuple(kept.unread),
        problems=tuple(kept.problems),
        proposals=tuple(proposals),
        limits=limits,
    )


def _settled(samples: Sequence[OilSample], kept: Kept) -> list[OilSample]:
    """Duplicates once, corrected reports in place of the first, re-tests numbered and kept."""
    groups: dict[tuple[str, date | None, str], list[OilSample]] = {}
    for sample in samples:
        groups.setdefault((_plain_id(sample.id), sample.sampled, sample.point), []).append(sample)
    out: list[OilSample] = []
    for same in groups.values():
        newest = max(one.revision for one in same)
        for old in (one for one in same if one.revision < newest):
            kept.unread.append(
                UnreadCell(
                    source=old.source,
                    text=f"sample {old.id}",
                    reason=f"replaced by the corrected report, revision {newest}",
                )
            )
        current: list[OilSample] = []
        for one in (one for one in same if one.revision == newest):
            if any(_numbers(one) == _numbers(other) for other in current):
                kept.problems.append(_twice(one, Severity.NOTE, "the same results again", "once"))
            else:
                current.append(one)
        current.sort(key=lambda s: s.reported or date.min)
        if len(current) > 1:
            words = "different results for one bottle"
            kept.problems.append(_twice(current[-1], Severity.WARNING, words, "a re-test"))
        out += [replace(one, retest=k) for k, one in enumerate(current)]
    return out


def _plain_id(text: str) -> str:
    return re.sub(r"\b0+(?=\d)", "", text.strip().casefold())


def _numbers(sample: OilSample) -> dict[str, tuple[str, float]]:
    return {name: (value.op, value.value) for name, value in sample.values.items()}


def _marked(sample: OilSample, case: Case, kept: Kept) -> OilSample | None:
    """The sample with what case.toml sets aside: the whole of it or single results."""
    for one in case.excluded:
        if one.file != sample.source.file or not _meant(one, sample):
            continue
        names = [
            name
            for part in re.split(r"[,;:]\s*", one.where)[1:]
            if (heading := heading_of(re.sub(r"^(column|result|property)\s+", "", part.strip())))
            and (name := heading.name) in sample.values
        ]
        if not names:
            return replace(sample, excluded=one.reason or "set aside without a reason")
        for name in names:
            value = sample.values[name]
            kept.unread.append(
                UnreadCell(source=value.source, text=value.text, reason=f"set aside: {one.reason}")
            )
        rest = {name: value for name, value in sample.values.items() if name not in names}
        sample = replace(sample, values=rest)
    return sample


def _meant(one: Excluded, sample: OilSample) -> bool:
    """Whether an [[excluded]] entry speaks of a sample: the file, its row, or its number."""
    where = one.where.strip()
    if not where:
        return True
    row = sample.source.locator.casefold()
    said = where.casefold()
    if re.search(rf"(?<![\w.]){re.escape(row)}(?![\w.])", said):
        return True
    name = re.escape(sample.id.casefold())
    return re.search(rf"(?<![\w-]){name}(?![\w-])", said) is not None


def _proposals(report: OilReportFile, layout: Layout) -> list[str]:
    """The line for case.toml: columns the reader does not know, and units that are not said."""
    meanings: dict[str, str] = {}
    for _, title in layout.unknown:
        near = nearest(fold(title).replace(" ", "_"), _PROPERTIES, most=1)
        meanings[title] = f"{near[0]} [{property_of(near[0]).unit}]" if near else "ignore"
    for column in layout.columns:
        kept = property_of(column.heading.name)
        if not column.heading.unit and kept.stated:
            meanings[column.title] = f"{kept.name} [{kept.unit}]"
    if not meanings:
        return []
    pairs = ", ".join(f'"{_toml(title)}" = "{meaning}"' for title, meaning in meanings.items())
    return [f"{report.file}: columns = {{ {pairs} }}"]


def _unknown_columns(report: OilReportFile, layout: Layout, sha256: str) -> list[UnreadCell]:
    """One entry for each column nobody knows."""
    found = []
    for index, title in layout.unknown:
        if layout.kind == "long":
            continue
        cells = [row[index] for row in layout.body if index < len(row) and row[index].text.strip()]
        if cells:
            found.append(
                UnreadCell(
                    source=Source(file=report.file, locator=cells[0].address, sha256=sha256),
                    text=title,
                    reason=f"a column this program doesn't know; {len(cells)} cells not used",
                )
            )
    return found


def _toml(text: str) -> str:
    return text.replace("\\", "\\\\").replace('"', '\\"').replace("\n", " ")


def _site_limits(folder: Path, kept: Kept) -> tuple[Limit, ...]:
    path = folder / SITE_LIMITS
    if not path.is_file():
        return ()
    try:
        return read_limits(path.read_text(encoding="utf-8"), SITE_LIMITS)
    except (KnowledgeError, UnicodeDecodeError) as error:
        kept.problems.append(
            Problem(
                severity=Severity.ERROR,
                file=SITE_LIMITS,
                place="",
                found=str(error),
                expected="[[limit]] tables with property, direction, value, source and flag",
                mend="Mend the entry; the shipped limits are used until then.",
            )
        )
        return ()


def _twice(sample: OilSample, severity: Severity, found: str, expected: str) -> Problem:
    return Problem(
        severity=severity,
        file=sample.source.file,
        place=sample.source.locator,
        found=f"sample {sample.id}: {found}",
        expected=f"each bottle {expected}",
        mend="The last report stands; set the other aside under [[excluded]] if it is wrong.",
    )


def _whole_file(report: OilReportFile, hashes: dict[str, str], reason: str) -> UnreadCell:
    source = Source(file=report.file, locator="whole file", sha256=hashes.get(report.file, ""))
    return UnreadCell(source=source, text=report.file, reason=reason)


def _pdf(report: OilReportFile) -> Problem:
    return Problem(
        severity=Severity.WARNING,
        file=report.file,
        place="",
        found="a PDF report, kept as an exhibit and not read",
        expected="CSV or XLSX",
        mend="Ask the laboratory for a table, or type the results into one beside the PDF.",
    )


def _no_heading(report: OilReportFile) -> Problem:
    return Problem(
        severity=Severity.WARNING,
        file=report.file,
        place="",
        found="no heading this program can read",
        expected="sample number, date and properties in a row or a column",
        mend="Name the columns under [[oil_reports]], columns = { ... }.",
    )
