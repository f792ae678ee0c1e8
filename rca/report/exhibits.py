"""Exhibits: who held them and where nobody did, what was relied upon and what was not."""

import itertools
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from datetime import datetime
from typing import Any

from rca.case.model import Case, CustodyRow, Photo
from rca.report.catalogue import Reader


@dataclass(frozen=True, slots=True, kw_only=True)
class Plate:
    """One photograph as it is printed."""

    file: str
    caption: str
    details: str
    alt: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Exhibit:
    """One exhibit with its photographs and the intervals in which nobody is shown to hold it."""

    id: str
    description: str
    collected: str
    condition: str
    now: str
    photos: str
    unheld: str


def exhibits(case: Case, reader: Reader) -> tuple[Exhibit, ...]:
    """Every exhibit named in custody.csv or on a photograph."""
    t = reader.frame
    names = dict.fromkeys(
        [row.exhibit for row in case.custody] + [p.exhibit for p in case.photos if p.exhibit]
    )
    found = []
    for name in sorted(names):
        rows = sorted((r for r in case.custody if r.exhibit == name), key=_order)
        shots = [
            p.file.removeprefix("photos/").split("-")[0] for p in case.photos if p.exhibit == name
        ]
        first = rows[0] if rows else None
        found.append(
            Exhibit(
                id=name,
                description=first.description if first else t("not recorded"),
                collected=(
                    f"{first.handed_to}, {reader.moment(first.when)}, "
                    f"{t('from')} {first.handed_from}"
                    if first
                    else t("no hand-over on record")
                ),
                condition=first.condition if first and first.condition else t("not recorded"),
                now=rows[-1].handed_to if rows else t("not known"),
                photos=", ".join(shots) or t("none"),
                unheld="; ".join(unheld(rows, reader)) if rows else t("the whole time"),
            )
        )
    return tuple(found)


def unheld(rows: Sequence[CustodyRow], reader: Reader) -> list[str]:
    """Intervals of one exhibit's hand-overs in which the next giver is not the last taker."""
    gaps = []
    for before, after in itertools.pairwise(rows):
        if before.handed_to.strip().casefold() != after.handed_from.strip().casefold():
            gaps.append(
                f"{reader.moment(before.when)} {reader.frame('to')} {reader.moment(after.when)}: "
                f"{before.handed_to} \u2192 {after.handed_from} {reader.frame('not shown')}"
            )
    return gaps


def _order(row: CustodyRow) -> tuple[bool, float]:
    return (row.when is None, row.when.timestamp() if isinstance(row.when, datetime) else 0.0)


def relied_upon(case: Case, results: Mapping[str, Any]) -> tuple[tuple[str, str], ...]:
    """Files the weighing rests on, with the items that cite each."""
    cited: dict[str, list[str]] = {}
    for item in results["evidence"]:
        sources = [item["source"], *item.get("more_sources", ())]
        for source in sources:
            if source["file"]:
                cited.setdefault(source["file"], []).append(item["id"])
    known = {file.file for file in case.files}
    return tuple(
        (name, ", ".join(dict.fromkeys(ids)))
        for name, ids in sorted(cited.items())
        if name in known
    )


def not_relied_upon(
    case: Case, results: Mapping[str, Any], reader: Reader
) -> tuple[tuple[str, str], ...]:
    """What was considered and carries no weight, with the reason."""
    t = reader.frame
    rows = [
        (f"{e.file}, {e.where}" if e.where else e.file, f"{t('set aside')}: {e.reason}")
        for e in case.excluded
    ]
    cited = {
        s["file"] for i in results["evidence"] for s in (i["source"], *i.get("more_sources", ()))
    }
    reasons = {
        "notes": "the words of notes carry no weight",
        "photo": "shown; the finding it documents is weighed, not the picture",
        "custody": "shows who held what; says nothing of the cause",
        "actions": "says what is being done; says nothing of the cause",
        "photo list": "describes the photographs",
    }
    by_reason: dict[str, list[str]] = {}
    for file in case.files:
        if file.file not in cited and file.role != "descriptor":
            reason = reasons.get(file.role, "no item of the weighing cites it")
            by_reason.setdefault(t(reason), []).append(file.file)
    rows += [(_short(files), reason) for reason, files in by_reason.items()]
    return tuple(rows)


def _short(names: Sequence[str]) -> str:
    most = 3
    if len(names) <= most:
        return ", ".join(names)
    return f"{names[0]} \u2026 {names[-1]} ({len(names)})"


def plates(case: Case, names: Mapping[str, str], reader: Reader) -> tuple[Plate, ...]:
    """The photographs with scale, orientation, time and taker, or that these are not stated."""
    return tuple(_plate(photo, names[photo.file], reader) for photo in case.photos)


def _plate(photo: Photo, name: str, reader: Reader) -> Plate:
    t = reader.frame
    upright = photo.orientation != 1
    details = (
        photo.exhibit or t("exhibit not stated"),
        reader.word(photo.view) if photo.view else t("view not stated"),
        reader.word(photo.zone) if photo.zone else t("zone not stated"),
        f"{t('scale')}: {photo.scale or t('none stated')}",
        t("turned upright") if upright else t("as taken"),
        f"{t('taken')} {reader.moment(photo.taken)}" if photo.taken else t("time not recorded"),
        photo.by or t("photographer not recorded"),
        photo.device,
    )
    caption = photo.caption or photo.file
    return Plate(
        file=f"photos/{name}",
        caption=caption,
        details=", ".join(x for x in details if x),
        alt=f"{caption}; {photo.zone or t('zone not stated')}",
    )
