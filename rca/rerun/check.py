"""Issued and recomputed results to one answer for the auditor."""

import hashlib
import math
from collections.abc import Mapping, Sequence
from dataclasses import replace
from typing import Any

from rca.archive.codec import dumps
from rca.archive.edges import edges
from rca.archive.integrity import Breach
from rca.rerun.model import (
    MEANING,
    WORDS,
    FileCompared,
    Margin,
    Reason,
    RerunCheck,
    RunClass,
)
from rca.rerun.quantity import compare
from rca.rerun.reasons import reason_words, reasons
from rca.verdict.side import HELD

SIDES = ("suction", "discharge")
PAGES = ("report.pdf", "report.html")


def check_rerun(
    issued: Mapping[str, Any],
    recomputed: Mapping[str, Any],
    *,
    source: str,
    issued_record: Mapping[str, Any],
    recomputed_record: Mapping[str, Any],
    breaches: Sequence[Breach] = (),
    signature: str = "",
    files: Sequence[FileCompared] = (),
) -> RerunCheck:
    """Compare two runs; the records may be whole ones or the stable part inside results."""
    found = reasons(issued_record, recomputed_record, breaches)
    differences, counts = compare(issued, recomputed)
    why = reason_words(found)
    run_class = _run_class(
        max((d.run_class for d in differences), default=RunClass.IDENTICAL), found, files
    )
    return RerunCheck(
        source=source,
        case_id=str(issued["case"]["id"]),
        title=str(issued["case"]["title"]),
        run_class=run_class,
        answer=_answer(run_class, issued, recomputed, why if differences else "", breaches),
        breaches=tuple(breaches),
        signature=signature,
        reasons=found,
        counts=counts,
        differences=tuple(replace(d, reason=why) for d in differences),
        margins=tuple(_margin(name, issued, recomputed) for name in SIDES),
        near_edges=_near(issued, issued_record),
        files=tuple(files),
        issued_sha256=digest(issued),
        recomputed_sha256=digest(recomputed),
    )


def not_runnable(
    issued: Mapping[str, Any],
    *,
    source: str,
    failure: str,
    breaches: Sequence[Breach] = (),
    signature: str = "",
) -> RerunCheck:
    """The finding that a run could not be repeated."""
    answer = f"{_first(RunClass.NOT_RUNNABLE)} {failure}"
    return RerunCheck(
        source=source,
        case_id=str(issued["case"]["id"]),
        title=str(issued["case"]["title"]),
        run_class=RunClass.NOT_RUNNABLE,
        answer=answer,
        failure=failure,
        breaches=tuple(breaches),
        signature=signature,
        near_edges=_near(issued, {}),
        issued_sha256=digest(issued),
    )


def digest(results: Mapping[str, Any]) -> str:
    """SHA-256 of results in their canonical form."""
    return hashlib.sha256(dumps(results).encode()).hexdigest()


def _run_class(
    worst: RunClass, found: Sequence[Reason], files: Sequence[FileCompared]
) -> RunClass:
    if {"input", "knowledge"} & {one.kind for one in found}:
        return RunClass.NOT_COMPARABLE
    pages = [f for f in files if f.name in PAGES and not f.same]
    if worst is RunClass.IDENTICAL and pages:
        return RunClass.SAME_CONTENT
    return worst


def _answer(
    run_class: RunClass,
    issued: Mapping[str, Any],
    recomputed: Mapping[str, Any],
    why: str,
    breaches: Sequence[Breach],
) -> str:
    before, after = issued["verdict"]["side"], recomputed["verdict"]["side"]
    parts = [_first(run_class)]
    if before == after:
        parts.append(f"The verdict is {before!r}, issued and recomputed.")
    else:
        parts.append(f"The verdict was {before!r} and is now {after!r}.")
    if why:
        parts.append(f"Reason for the differences: {why}.")
    if breaches:
        many = len(breaches)
        parts.append(
            f"{many} file{'s are' if many > 1 else ' is'} not as issued: "
            f"{', '.join(dict.fromkeys(b.name for b in breaches[:5]))}"
            f"{' and others' if many > 5 else ''}."
        )
    return " ".join(parts)


def _first(run_class: RunClass) -> str:
    return f"Class {run_class.value}, {WORDS[run_class]}: {MEANING[run_class]}"


def _margin(side: str, issued: Mapping[str, Any], recomputed: Mapping[str, Any]) -> Margin:
    before = float(issued["verdict"]["sides"][side])
    after = float(recomputed["verdict"]["sides"][side])
    return Margin(
        side=side,
        issued=before,
        recomputed=after,
        moved_log10_odds=_log_odds(after) - _log_odds(before),
        threshold=HELD,
        distance_log10_odds=_log_odds(after) - _log_odds(HELD),
    )


def _near(issued: Mapping[str, Any], record: Mapping[str, Any]) -> tuple[str, ...]:
    """Edges named at issue time; worked out now where the record does not travel along."""
    told = record.get("edges") if isinstance(record.get("edges"), list) else None
    rows = told if told is not None else edges(issued)
    return tuple(
        f"{e['quantity']} = {e['value']:.6g} lies {abs(e['distance']):.2g} from {e['limit']:g}, "
        f"which decides {e['decides']}"
        for e in rows
        if e["near"] or e["inside_band"]
    )


def _log_odds(p: float) -> float:
    inside = min(max(p, 1e-15), 1 - 1e-15)
    return math.log10(inside / (1 - inside))
