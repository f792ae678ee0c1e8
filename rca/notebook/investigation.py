"""A case and the store its notebooks fill: what each of them takes and keeps."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from datetime import date, datetime
from pathlib import Path
from typing import TypeVar

from matplotlib.figure import Figure

from rca.actions.effect import effects
from rca.actions.failures import failures_of
from rca.actions.review import ActionsCheck, review_actions
from rca.archive.codec import from_plain, to_plain
from rca.archive.store import StageResult, Store, split_items
from rca.base.errors import CaseError, Problem
from rca.base.panel import Section
from rca.base.units import QUANTITY_DIMENSIONS, parse_quantity
from rca.case.model import Case, Gap
from rca.case.series import AlignedRecord, FloatArray
from rca.case.site import local_atmosphere
from rca.evidence.item import EvidenceItem, NotAssessed
from rca.figures.panels_records import FileRow
from rca.figures.style import svg_bytes
from rca.figures.timeline import Coverage
from rca.intake.oil_reports import OilReading, read_oil_reports
from rca.intake.read import site_knowledge
from rca.intake.record_files import RecordReading, read_records
from rca.records.bursts import BurstFinding, burst_finding
from rca.records.check import usable
from rca.suction.check import SuctionCheck, inlet_limit
from rca.verdict.knowledge import Knowledge

T = TypeVar("T")


@dataclass(frozen=True, slots=True)
class Investigation:
    """One case and the store its notebooks fill."""

    case: Case
    problems: tuple[Problem, ...]
    folder: Path
    store: Store

    def keep(
        self,
        stage: str,
        *,
        check: object,
        section: Section | None = None,
        figures: Mapping[str, Figure] | None = None,
        evidence: Sequence[EvidenceItem | NotAssessed] = (),
        gaps: Sequence[Gap] = (),
    ) -> None:
        """Store what a notebook found, for the next notebooks and the report."""
        weighed, not_assessed = split_items(evidence)
        for name, figure in (figures or {}).items():
            self.store.write_svg(name, svg_bytes(figure))
        for table in (t for p in (section.panels if section else ()) for t in p.tables):
            self.store.write_table(table)
        self.store.write(
            StageResult(
                stage=stage,
                check=to_plain(check),
                evidence=weighed,
                not_assessed=not_assessed,
                gaps=tuple(gaps),
                sections=(section,) if section else (),
            )
        )

    def result(self, stage: str, kind: type[T]) -> T:
        """The typed result an earlier notebook stored.

        Raises ArchiveError where that notebook has not run yet.
        """
        return from_plain(kind, self.store.read(stage).check)

    def result_if_any(self, stage: str, kind: type[T]) -> T | None:
        """The typed result an earlier notebook stored; None where it had nothing to look at."""
        return None if self.store.read(stage).check is None else self.result(stage, kind)

    def knowledge(self) -> Knowledge:
        """The shipped knowledge, with the site's changes where the case names them.

        Raises KnowledgeError with the line of the change that is at fault.
        """
        return site_knowledge(self.folder, self.case)

    def evidence(self) -> tuple[tuple[EvidenceItem, ...], tuple[NotAssessed, ...]]:
        """All items stored so far, in a fixed order: those that weigh, and those nobody saw."""
        stages = [self.store.read(stage) for stage in self.store.stages()]
        items = sorted((i for s in stages for i in s.evidence), key=lambda i: (i.group, i.key))
        seen = {item.node for item in items}
        missing = sorted(
            (n for s in stages for n in s.not_assessed if n.node not in seen), key=lambda n: n.key
        )
        return tuple(items), tuple(missing)

    def read_oil(self) -> OilReading:
        """The laboratory reports.

        Raises CaseError where one can't be read.
        """
        return _without_errors(read_oil_reports(self.folder, self.case))

    def read_records(self) -> RecordReading:
        """The slow and fast records; kept for the next notebooks.

        Raises CaseError where one can't be read.
        """
        reading = _without_errors(
            read_records(
                self.folder,
                self.case,
                atmosphere=local_atmosphere(self.case),
                limit=inlet_limit(self.case)[0],
            )
        )
        if reading.aligned is not None:
            self.store.write_aligned(usable(self.case, reading.aligned))
        return reading

    def aligned(self) -> AlignedRecord | None:
        """The slow records as the records notebook kept them; None where there are none."""
        return self.store.read_aligned()

    def bursts(self, reading: RecordReading) -> tuple[tuple[BurstFinding, FloatArray], ...]:
        """What each fast record shows, with its samples."""
        pump = self.case.pump
        speed = pump.speed.value if pump.speed is not None else None
        return tuple(
            (
                burst_finding(
                    b.quantity, b.values, b.rate_hz, b.source, speed=speed, elements=pump.elements
                ),
                b.values,
            )
            for b in reading.bursts
        )

    def file_rows(self, reading: RecordReading) -> tuple[FileRow, ...]:
        """The record files as they were read, for the table of their quality."""
        return tuple(
            FileRow(
                file=f.file,
                rows=f.rows,
                start_s=f.start_s,
                end_s=f.end_s,
                interval_s=f.interval_s,
                gaps=f.gaps,
                bad_stamps=f.bad_stamps,
                backward_stamps=f.backward_stamps,
                bad_cells=sum(f.bad_cells.values()),
                offset_s=f.offset_s,
            )
            for f in reading.files
        )

    def coverage(self, reading: RecordReading) -> tuple[Coverage, ...]:
        """The times the records cover, with their gaps, for the sequence of events."""
        return tuple(
            Coverage(start_s=f.start_s, end_s=f.end_s, gaps=f.gaps, fast=f.fast)
            for f in reading.files
        )

    def inlet_for_discharge(self) -> tuple[tuple[float, float] | None, float | None]:
        """Inlet pressure with its uncertainty [Pa] and released air [-], measured first."""
        suction = self.result("suction", SuctionCheck)
        measured = suction.measured and (suction.measured.last or suction.measured.warm)
        if measured and suction.measured is not None:
            return (measured.median, suction.measured.sensor_u), measured.released
        if suction.normal is not None:
            state = suction.normal
            return (state.pressure.mean, state.pressure.sd), state.released.p50
        return None, None

    def review_actions(self, *, seed: int) -> ActionsCheck:
        """Every action against its guards and the records, as of the last day of the evidence."""
        day, record = self._last_day(), self.aligned()
        check = review_actions(
            self.case.actions,
            record,
            convert=self._convert,
            as_of=day,
            failures=failures_of(self.case, until=day),
        )
        return replace(check, effects=effects(self.case, self.case.actions, record, seed=seed))

    def _convert(self, text: str, quantity: str) -> float:
        dimension = QUANTITY_DIMENSIONS[quantity]
        return parse_quantity(text, dimension, atmosphere=local_atmosphere(self.case)).value

    def _last_day(self) -> date | None:
        """The latest day anything in the folder speaks of; the clock is never asked."""
        days = [a.done for a in self.case.actions if a.done is not None]
        days += [
            e.when.date() if isinstance(e.when, datetime) else e.when for e in self.case.history
        ]
        days += [f.when for f in self.case.findings if f.when is not None]
        record = self.aligned()
        if record is not None and record.time_s.size:
            days.append(date.fromordinal(719163 + int(record.time_s[-1] // 86400)))
        return max(days, default=None)


R = TypeVar("R", OilReading, RecordReading)


def _without_errors(reading: R) -> R:
    if reading.problems:
        raise CaseError(reading.problems)
    return reading
