"""Revisions of a report: numbered, what changed and why; the earlier report stays in the folder.

A new revision is made where the findings or the evidence differ from the issued report. A newer
program that finds the same from the same evidence makes none.
"""

import json
import shutil
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from rca.archive.codec import dumps, from_plain, to_plain
from rca.base.errors import ArchiveError
from rca.figures.numbers import share

FILE = "revisions.json"
EARLIER = "earlier"
NO_REASON = "no reason given"
MOST_CHANGES = 14
LEFT_BEHIND = (EARLIER, "series", "stages")  # not part of the issued report


@dataclass(frozen=True, slots=True, kw_only=True)
class Revision:
    """One issue of the report."""

    number: int
    results_sha256: str  # of results.json as issued
    issued: str  # the date stated in case.toml; "" where none is
    who: str
    reason: str
    changes: tuple[tuple[str, str, str], ...] = ()  # where, before, after


def next_revisions(
    results: Mapping[str, Any], digest: str, previous: Path, *, reason: str = ""
) -> tuple[Revision, ...]:
    """The revisions of the report now being made, the last one its own.

    ``previous`` is the report folder as it stands; where it holds no report this is revision 0.
    Raises ArchiveError where the revisions there can't be read.
    """
    commission = results.get("commission") or {}
    issued = commission.get("issued") or ""
    who = str(results["case"]["descriptor"].get("investigator", ""))
    before = _json(previous / "results.json")
    if before is None:
        return (
            Revision(
                number=0, results_sha256=digest, issued=issued, who=who, reason="first issue"
            ),
        )
    past = read_revisions(previous)
    if _substance(before) == _substance(results):
        return past
    return (
        *past,
        Revision(
            number=past[-1].number + 1,
            results_sha256=digest,
            issued=issued,
            who=who,
            reason=reason.strip() or NO_REASON,
            changes=changes(before, results),
        ),
    )


def read_revisions(folder: Path) -> tuple[Revision, ...]:
    """The revisions a report folder tells of; a folder from before revisions counts as 0.

    Raises ArchiveError where the file can't be read.
    """
    plain = _json(folder / FILE)
    if plain is None:
        return (Revision(number=0, results_sha256="", issued="", who="", reason="first issue"),)
    found: tuple[Revision, ...] = from_plain(tuple[Revision, ...], plain)
    if not found:
        raise ArchiveError(f"{folder / FILE} names no revision. Remove it or restore it.")
    return found


def keep_earlier(previous: Path, building: Path, revisions: tuple[Revision, ...]) -> None:
    """Write the revisions, and carry every earlier report over into the new folder."""
    (building / FILE).write_text(dumps(to_plain(revisions)), encoding="utf-8")
    if (previous / EARLIER).is_dir():
        shutil.copytree(previous / EARLIER, building / EARLIER)
    if not (previous / "results.json").is_file():
        return
    last = read_revisions(previous)[-1].number
    if last == revisions[-1].number:
        return
    shutil.copytree(
        previous,
        building / EARLIER / f"{last}",
        ignore=lambda folder, names: (
            [n for n in names if n in LEFT_BEHIND] if Path(folder) == previous else []
        ),
    )


def changes(
    before: Mapping[str, Any], after: Mapping[str, Any]
) -> tuple[tuple[str, str, str], ...]:
    """What a reader must know of the difference: findings first, then evidence and actions."""
    rows: list[tuple[str, str, str]] = []

    def row(where: str, old: str, new: str) -> None:
        if old != new:
            rows.append((where, old, new))

    one, two = before["verdict"], after["verdict"]
    row("side", one["side"], two["side"])
    for name in two["sides"]:
        row(f"probability: {name}", _share(one["sides"], name), _share(two["sides"], name))
    for name in two["mechanisms"]:
        row(name, _share(one["mechanisms"], name), _share(two["mechanisms"], name))
    row("most probable cause", _top(before), _top(after))
    row(
        "items of evidence",
        str(len(before["evidence"])),
        str(len(after["evidence"])),
    )
    rows += _file_changes(before["record"]["inputs"], after["record"]["inputs"])
    row("knowledge", before["record"]["knowledge"], after["record"]["knowledge"])
    row("actions", _actions(before), _actions(after))
    if not rows:
        rows.append(("figures or wording", "", "no probability, file or action differs"))
    if len(rows) > MOST_CHANGES:
        left = len(rows) - MOST_CHANGES
        rows = [*rows[:MOST_CHANGES], ("further changes", "", f"{left}, see both results.json")]
    return tuple(rows)


def _file_changes(
    before: Mapping[str, str], after: Mapping[str, str]
) -> list[tuple[str, str, str]]:
    rows = []
    for name in sorted({*before, *after}):
        old, new = before.get(name), after.get(name)
        if old != new:
            rows.append((name, old[:12] if old else "absent", new[:12] if new else "absent"))
    return rows


def _share(values: Mapping[str, float], name: str) -> str:
    return share(values[name]) if name in values else "not weighed"


def _top(results: Mapping[str, Any]) -> str:
    causes = results["causes"]
    return f"{causes[0]['cause']} ({share(causes[0]['probability'])})" if causes else "none"


def _actions(results: Mapping[str, Any]) -> str:
    states: dict[str, int] = {}
    for action in results["actions"]:
        states[action["status"] or "no status"] = (
            states.get(action["status"] or "no status", 0) + 1
        )
    return ", ".join(f"{n} {name}" for name, n in sorted(states.items())) or "none"


def _substance(results: Mapping[str, Any]) -> Any:
    """Findings and evidence, without what only says by which program they were found."""
    kept = {name: value for name, value in results.items() if name != "record"}
    record = results["record"]
    kept["record"] = {"inputs": record["inputs"], "knowledge": record["knowledge"]}
    return json.loads(dumps(kept))


def _json(path: Path) -> Any:
    if not path.is_file():
        return None
    try:
        return json.loads(path.read_text(encoding="utf-8"))
    except (ValueError, OSError) as error:
        raise ArchiveError(f"{path} can't be read ({error}). Restore it or use --out.") from error
