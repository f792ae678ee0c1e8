"""Panels of intake: what the folder holds, what was set aside."""

from collections.abc import Sequence

from rca.base.counted import counted
from rca.base.errors import Problem
from rca.base.panel import Column, Panel, Section, Table
from rca.case.model import Case


def panels_intake(case: Case, problems: Sequence[Problem]) -> Section:
    """The section of the evidence as received."""
    tables = [
        Table(
            name="evidence-files",
            title="Evidence files",
            columns=(
                Column(title="File"),
                Column(title="Role"),
                Column(title="Size", unit="kB", numeric=True),
                Column(title="SHA-256, first 16 digits"),
            ),
            rows=tuple((f.file, f.role, f"{f.size / 1e3:.1f}", f.sha256[:16]) for f in case.files),
            shown=60,
            note="All digests stand in full in results.json.",
        )
    ]
    if case.excluded:
        tables.append(
            Table(
                name="evidence-excluded",
                title="Considered and not relied upon",
                columns=(Column(title="File"), Column(title="Where"), Column(title="Why")),
                rows=tuple((e.file, e.where, e.reason) for e in case.excluded),
            )
        )
    if case.custody:
        tables.append(_custody(case))
    if problems:
        tables.append(
            Table(
                name="intake-problems",
                title="Remarks of the reader",
                columns=(Column(title="Place"), Column(title="Found"), Column(title="Mend")),
                rows=tuple((f"{p.file} {p.place}", p.found, p.mend) for p in problems),
            )
        )
    return Section(
        stage="intake",
        title="Evidence",
        panels=(
            Panel(
                key="intake.files",
                title="What was received",
                question="What does the case folder hold, and who held it?",
                answer=f"{counted(len(case.files), 'file')}, "
                f"{counted(len(case.photos), 'photograph')}, "
                f"{counted(len(case.findings), 'finding')}, "
                f"{counted(len(case.history), 'history entry', 'history entries')}.",
                tables=tuple(tables),
            ),
        ),
    )


def _custody(case: Case) -> Table:
    rows, marks = [], []
    last: dict[str, str] = {}
    for row in sorted(
        case.custody, key=lambda r: (r.exhibit, r.when.isoformat() if r.when else "")
    ):
        gap = row.exhibit in last and last[row.exhibit] != row.handed_from
        rows.append(
            (
                row.exhibit,
                row.description,
                row.handed_from,
                row.handed_to,
                row.when.strftime("%Y-%m-%d %H:%M %z") if row.when else "not recorded",
                row.seal,
                row.condition,
                f"not shown how it came from {last[row.exhibit]} to {row.handed_from}"
                if gap
                else "",
            )
        )
        marks.append("beyond" if gap else "")
        last[row.exhibit] = row.handed_to
    return Table(
        name="custody",
        title="Custody",
        columns=(
            Column(title="Exhibit"),
            Column(title="What"),
            Column(title="From"),
            Column(title="To"),
            Column(title="When"),
            Column(title="Seal"),
            Column(title="Condition"),
            Column(title="Unheld interval"),
        ),
        rows=tuple(rows),
        marks=tuple(marks),
    )
