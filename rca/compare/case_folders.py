"""Actions of many cases: a case folder is reviewed on its records of now, a report as stored."""

import os
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from datetime import date
from pathlib import Path

from rca.actions.failures import failures_of
from rca.actions.proof import Failure
from rca.actions.review import ActionReview, review_actions
from rca.base.errors import ArchiveError, CaseError, RcaError
from rca.base.units import QUANTITY_DIMENSIONS, parse_quantity
from rca.case.model import Case
from rca.case.series import AlignedRecord
from rca.case.site import local_atmosphere
from rca.compare.gather import Found, Refused, find, load
from rca.compare.incident import Incident, PastAction, read_incident
from rca.compare.open_actions import CaseActions
from rca.intake.read import load_case
from rca.intake.record_files import read_records
from rca.records.check import usable

DESCRIPTOR = "case.toml"


@dataclass(frozen=True, slots=True, kw_only=True)
class ActionsFound:
    """The actions of every case found, and what could not be read."""

    cases: tuple[CaseActions, ...]
    refused: tuple[Refused, ...] = ()


def gather_actions(places: Sequence[Path], *, today: date) -> ActionsFound:
    """Actions of the case folders and reports under ``places``.

    A case folder is read again with the records it holds now, and the failures of the other cases
    of its machine; a report, bundle or results.json gives what it stored. A case folder stands
    before a report of the same case. Raises ArchiveError where a place does not exist.
    """
    folders = dict.fromkeys(f for place in places for f in case_folders(place))
    refused: list[Refused] = []
    incidents = _incidents(places, tuple(folders), refused)
    found: dict[tuple[str, str], CaseActions] = {}
    for one in incidents:
        found[one.id, one.site] = CaseActions(
            case=one.id,
            title=one.title,
            asset=one.asset,
            site=one.site,
            source=one.source,
            actions=one.actions,
        )
    for folder in folders:
        try:
            made = review_folder(folder, incidents, today=today)
        except CaseError as error:
            reason = "; ".join(str(p) for p in error.problems[:3])
            refused.append(Refused(source=str(folder), reason=reason))
        except RcaError as error:
            refused.append(Refused(source=str(folder), reason=str(error)))
        else:
            found[made.case, made.site] = made
    return ActionsFound(cases=tuple(found.values()), refused=tuple(refused))


def case_folders(place: Path) -> Iterator[Path]:
    """Folders with a case.toml under a place, in a fixed order; links are not followed."""
    if not place.is_dir():
        return
    for root, names, files in os.walk(place):
        if DESCRIPTOR in files:
            names.clear()
            yield Path(root)
        names[:] = sorted(n for n in names if not n.startswith("."))


def _incidents(
    places: Sequence[Path], folders: Sequence[Path], refused: list[Refused]
) -> tuple[Incident, ...]:
    """Stored results under the places; of a case told twice the report made last stands."""
    latest: dict[tuple[str, str], Incident] = {}
    for source in dict.fromkeys(f for place in places for f in _results(place, folders)):
        try:
            plain, digest, ended = load(source)
            one = read_incident(plain, source=str(source.path), sha256=digest, ended=ended)
        except ArchiveError as error:
            refused.append(Refused(source=str(source.path), reason=str(error)))
            continue
        key = (one.id, one.site)
        if key not in latest or (latest[key].ended, latest[key].source) < (one.ended, one.source):
            latest[key] = one
    return tuple(latest.values())


def _results(place: Path, folders: Sequence[Path]) -> Iterator[Found]:
    """Results under a place; inside a case folder only its reports, not its evidence."""
    if place in folders:
        places = sorted(p.parent for p in place.glob("*/results.json"))
        yield from (Found(p / "results.json") for p in places)
        return
    for found in find(place):
        inside = [f for f in folders if f in found.path.parents and f.is_relative_to(place)]
        if not inside or found.path.name == "results.json":
            yield found


def review_folder(folder: Path, incidents: Sequence[Incident], *, today: date) -> CaseActions:
    """The actions of one case folder against the records it holds now.

    Raises CaseError with every problem of the folder.
    """
    case = load_case(folder)
    record = _record(folder, case)
    header = case.header
    others = [
        Failure(day=i.occurred, words=_words(i), source=i.id)
        for i in incidents
        if (i.asset, i.site) == (header.asset, header.site)
        and i.id != header.id
        and i.occurred is not None
    ]
    check = review_actions(
        case.actions,
        record,
        convert=lambda text, quantity: (
            parse_quantity(
                text, QUANTITY_DIMENSIONS[quantity], atmosphere=local_atmosphere(case)
            ).value
        ),
        as_of=today,
        failures=failures_of(case, until=today, others=others),
    )
    return CaseActions(
        case=header.id,
        title=header.title,
        asset=header.asset,
        site=header.site,
        source=str(folder),
        actions=tuple(_past(a) for a in check.actions),
    )


def _record(folder: Path, case: Case) -> AlignedRecord | None:
    if not case.records or not any(a.verify for a in case.actions):
        return None
    reading = read_records(folder, case, atmosphere=local_atmosphere(case))
    if reading.problems:
        raise CaseError(reading.problems)
    return usable(case, reading.aligned) if reading.aligned is not None else None


def _words(one: Incident) -> tuple[str, ...]:
    """Main cause and mechanisms of an incident, more likely than not."""
    likely = [n for n, p in {**one.causes, **one.mechanisms}.items() if p >= 0.5]
    return tuple(sorted(likely))


def _past(review: ActionReview) -> PastAction:
    return PastAction(
        id=review.id,
        kind=review.kind,
        text=review.text,
        cause=review.cause,
        owner=review.owner,
        status=review.status,
        due=review.due,
        done=review.done,
        proof=review.proof.value,
        reason=review.reason,
        objections=review.objections,
    )
