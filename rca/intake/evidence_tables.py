"""The case's own tables: findings, custody, history, actions."""

from pathlib import Path

from rca.base.errors import Problem, Severity
from rca.case.model import Action, CustodyRow, Finding, HistoryEvent
from rca.case.vocabulary import ZONE_SIDES, ZONES, ActionKind, Extent, Sign
from rca.intake.rows import Row, read_rows
from rca.intake.words import mend_word

FINDINGS = ("id", "component", "zone", "sign", "extent", "photo", "note", "by", "date")
CUSTODY = ("exhibit", "description", "from", "to", "when", "seal", "condition")
HISTORY = ("date", "kind", "text")
ACTIONS = (
    "id",
    "kind",
    "text",
    "cause",
    "owner",
    "due",
    "done",
    "status",
    "verified_by",
    "verify",
)


def read_findings(folder: Path, sha256: str, problems: list[Problem]) -> tuple[Finding, ...]:
    """teardown/findings.csv, one observation a row."""
    name = "teardown/findings.csv"
    found = [
        _finding(row)
        for row in read_rows(folder, name, FINDINGS, ("id", "zone", "sign"), sha256, problems)
    ]
    _no_twins([(f.id, f.source.locator) for f in found], name, "id", problems)
    return tuple(found)


def _finding(row: Row) -> Finding:
    zone = row.get("zone").casefold()
    if zone not in ZONE_SIDES:
        row.wrong(
            "zone",
            "a known zone",
            mend_word(zone, ZONES) + " It is kept and shown, and carries no weight.",
            Severity.WARNING,
        )
    extent = row.word("extent", Extent, severity=Severity.ERROR)
    sign = row.word("sign", Sign)
    if not row.get("extent"):
        row.wrong(
            "extent",
            "none, slight, moderate or severe",
            "Write none where it was looked for and not there.",
            Severity.WARNING,
        )
    return Finding(
        id=row.get("id"),
        source=row.source(),
        component=row.get("component"),
        zone=row.get("zone"),
        sign=sign,
        sign_text=row.get("sign"),
        extent=extent,
        side=ZONE_SIDES.get(zone),
        photo=row.get("photo"),
        note=row.get("note"),
        by=row.get("by"),
        when=row.day("date"),
    )


def read_custody(folder: Path, sha256: str, problems: list[Problem]) -> tuple[CustodyRow, ...]:
    """custody.csv, one hand-over a row."""
    return tuple(
        CustodyRow(
            exhibit=row.get("exhibit"),
            source=row.source(),
            description=row.get("description"),
            handed_from=row.get("from"),
            handed_to=row.get("to"),
            when=row.moment("when"),
            seal=row.get("seal"),
            condition=row.get("condition"),
        )
        for row in read_rows(folder, "custody.csv", CUSTODY, ("exhibit", "when"), sha256, problems)
    )


def read_history(folder: Path, sha256: str, problems: list[Problem]) -> tuple[HistoryEvent, ...]:
    """history.csv, one event a row, in order of time as written."""
    events = []
    for row in read_rows(folder, "history.csv", HISTORY, ("date", "kind"), sha256, problems):
        when = row.moment("date") if "T" in row.get("date") else row.day("date")
        if when is None:
            if not row.get("date"):
                row.wrong("date", "a date", "An event without a date can't be placed.")
            continue
        events.append(
            HistoryEvent(
                when=when, kind=row.get("kind"), text=row.get("text"), source=row.source()
            )
        )
    return tuple(events)


def read_actions(folder: Path, sha256: str, problems: list[Problem]) -> tuple[Action, ...]:
    """actions.csv, one corrective action a row."""
    actions = [
        Action(
            id=row.get("id"),
            kind=row.word("kind", ActionKind),
            text=row.get("text"),
            source=row.source(),
            cause=row.get("cause"),
            owner=row.get("owner"),
            due=row.day("due"),
            done=row.day("done"),
            status=row.get("status"),
            verified_by=row.get("verified_by"),
            verify=row.get("verify"),
        )
        for row in read_rows(folder, "actions.csv", ACTIONS, ("id", "text"), sha256, problems)
    ]
    _no_twins([(a.id, a.source.locator) for a in actions], "actions.csv", "id", problems)
    return tuple(actions)


def _no_twins(
    keys: list[tuple[str, str]], name: str, column: str, problems: list[Problem]
) -> None:
    first: dict[str, str] = {}
    for key, place in keys:
        if key in first:
            problems.append(
                Problem(
                    severity=Severity.ERROR,
                    file=name,
                    place=f"{place}, column {column}",
                    found=f"{key!r} a second time, first in {first[key]}",
                    expected="each id once",
                    mend="Give one of them another id.",
                )
            )
        first.setdefault(key, place)
