"""Panels of intake and actions: what the folder holds, what was set aside, what is being done."""

from collections.abc import Sequence

from rca.actions.review import ActionsCheck
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
                answer=f"{len(case.files)} files, {len(case.photos)} photographs, "
                f"{len(case.findings)} findings, {len(case.history)} history entries.",
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


def panels_actions(check: ActionsCheck) -> Section:
    """The section of the actions."""
    rows = tuple(
        (
            a.id,
            a.kind,
            a.text,
            a.cause or "none named",
            a.owner,
            a.due.isoformat() if a.due else "",
            a.done.isoformat() if a.done else "",
            a.status + (" (overdue)" if a.overdue else ""),
            a.proof.value,
        )
        for a in check.actions
    )
    remarks = tuple(
        (a.id, a.verify or "no condition", a.reason, "; ".join(a.objections) or "none")
        for a in check.actions
    )
    proved = sum(a.proof.value == "proved" for a in check.actions)
    day = check.as_of.isoformat() if check.as_of else "an unknown day"
    return Section(
        stage="actions",
        title="Actions",
        panels=(
            Panel(
                key="actions.register",
                title="Corrective actions",
                question="What is being done, and is it proved?",
                answer=(
                    f"{len(check.actions)} actions, {proved} proved, as of {day}."
                    if check.actions
                    else "No action is on record."
                ),
                tables=(
                    Table(
                        name="actions",
                        title="Actions",
                        columns=(
                            Column(title="Id"),
                            Column(title="Kind"),
                            Column(title="Action"),
                            Column(title="Cause it addresses"),
                            Column(title="Owner"),
                            Column(title="Due"),
                            Column(title="Done"),
                            Column(title="Status"),
                            Column(title="Proof"),
                        ),
                        rows=rows,
                    ),
                    Table(
                        name="actions-proof",
                        title="Proof and objections",
                        columns=(
                            Column(title="Id"),
                            Column(title="Condition"),
                            Column(title="What the records say"),
                            Column(title="Objections"),
                        ),
                        rows=remarks,
                        note="The owner of an action can't verify it; nothing closes without "
                        "proof. Records after the day the action was done count.",
                    ),
                )
                if check.actions
                else (),
                limits=("Software output authorises nothing; a competent person decides.",),
            ),
        ),
    )
