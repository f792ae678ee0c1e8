"""What people ask for beside the report: a workbook, an editable narrative, a calendar."""

from collections.abc import Mapping
from datetime import date
from typing import Any

from rca.actions.calendar import DueDate, calendar_bytes
from rca.archive.store import Store, tables_of
from rca.case.model import Case
from rca.report.narrative import narrative_bytes
from rca.report.view import CAUTIONS, ORDER
from rca.report.workbook import workbook_bytes

WORKBOOK = "tables/evidence-and-actions.xlsx"
NARRATIVE = "narrative.docx"
CALENDAR = "actions.ics"
FIRST = ("evidence", "actions", "actions-proof", "actions-effect", "causes", "verdict-mechanisms")
ENDED = ("rejected", "superseded", "closed", "effective")


def write_exports(
    case: Case, store: Store, results: Mapping[str, Any], *, language: str = ""
) -> None:
    """Write workbook and narrative, and the calendar where an open action has a due date.

    The language is that of case.toml where none is given; the words stay as they are stored.
    """
    stages = {name: store.read(name) for name in store.stages()}
    sections = [s for name in _ordered(stages) for s in stages[name].sections]
    tables = tables_of(sections)
    order = [*(n for n in FIRST if n in tables), *(n for n in sorted(tables) if n not in FIRST)]
    about = (
        ("Case", f"{case.header.id}: {case.header.title}"),
        ("What this is", "The tables of report.pdf, all rows; results.json holds every number."),
        ("Text", "Cells that begin with = + - or @ are text as received, not formulas."),
        ("Caution", "Software output authorises nothing; a competent person decides."),
    )
    (store.folder / "tables").mkdir(exist_ok=True)
    (store.folder / WORKBOOK).write_bytes(
        workbook_bytes((tables[name] for name in order), about=about)
    )
    words = results["verdict"]["words"]
    (store.folder / NARRATIVE).write_bytes(
        narrative_bytes(
            title=f"{case.header.id}: {case.header.title}",
            subtitle=", ".join(t for t in (case.header.asset, case.header.site) if t),
            summary=(
                ("Finding", (words["finding"], words["rule"])),
                ("What speaks for it", tuple(words["supports"]) or ("Nothing was found.",)),
                ("What speaks against it", tuple(words["against"]) or ("Nothing was found.",)),
                ("How it could be wrong", (words["biggest_doubt"],)),
            ),
            sections=sections,
            cautions=CAUTIONS,
            language=language or case.commission.language,
        )
    )
    dates = due_dates(case, results)
    if dates:
        occurred = case.header.occurred
        stamp = occurred.date() if occurred is not None else min(d.due for d in dates)
        (store.folder / CALENDAR).write_bytes(calendar_bytes(dates, stamp=stamp))


def due_dates(case: Case, results: Mapping[str, Any]) -> tuple[DueDate, ...]:
    """Open actions of the results with a due date."""
    return tuple(
        DueDate(
            case=case.header.id,
            id=a["id"],
            text=a["text"],
            owner=a["owner"],
            asset=case.header.asset,
            due=date.fromisoformat(a["due"]),
            caution=CAUTIONS[1],
        )
        for a in results["actions"]
        if a.get("due") and not a.get("done") and a.get("status") not in ENDED
    )


def _ordered(stages: Mapping[str, Any]) -> list[str]:
    """Stages as the report has them: facts, checks, verdict, the site's own, actions."""
    first = [*ORDER, "verdict"]
    own = [n for n in sorted(stages) if n not in {*first, "actions"}]
    return [n for n in (*first, *own, "actions") if n in stages]
