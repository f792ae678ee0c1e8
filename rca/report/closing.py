"""The closing pages: who signs what, what an opposing reader should know, the run."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from rca.case.model import Case
from rca.report.catalogue import Reader


@dataclass(frozen=True, slots=True, kw_only=True)
class Signature:
    """One line of the sign-off."""

    role: str
    name: str
    qualification: str
    relationship: str


@dataclass(frozen=True, slots=True, kw_only=True)
class TopAction:
    """One action on the first page."""

    id: str
    text: str
    owner: str
    due: str
    state: str


def signatures(case: Case, reader: Reader) -> tuple[Signature, ...]:
    """Investigator, reviewer, approver, and whoever else is named to sign."""
    missing = reader.frame("not stated")
    given = {s.role.casefold(): s for s in case.commission.signatories}
    header = case.header
    rows = []
    for role, name in (
        ("Investigator", header.investigator),
        ("Reviewer", header.reviewer),
        ("Approved for issue", case.commission.approver),
    ):
        stated = given.pop(role.casefold(), None)
        rows.append(
            Signature(
                role=reader.frame(role),
                name=(stated.name if stated else name) or missing,
                qualification=(stated.qualification if stated else "") or missing,
                relationship=(stated.relationship if stated else "") or missing,
            )
        )
    rows += [
        Signature(
            role=reader.word(s.role),
            name=s.name,
            qualification=s.qualification or missing,
            relationship=s.relationship or missing,
        )
        for s in given.values()
    ]
    return tuple(rows)


def dissent(case: Case, reader: Reader) -> tuple[str, ...]:
    """Other opinions as their authors wrote them, or that nobody is known to have been asked."""
    given = case.commission
    if given.dissent:
        return given.dissent
    if given.dissent_asked:
        return (f"{reader.frame('No other opinion. Asked')}: {given.dissent_asked}.",)
    return (reader.frame("None stated; whether anybody was asked for one is not recorded."),)


def top_actions(actions: Sequence[Mapping[str, Any]], reader: Reader) -> tuple[TopAction, ...]:
    """The three actions a manager must know of: containment first, then what is due first."""
    rank = {"containment": 0, "corrective": 1, "correction": 2, "preventive": 3}
    chosen = sorted(actions, key=lambda a: (rank.get(a["kind"], 4), a["due"] or "9999"))[:3]
    return tuple(
        TopAction(
            id=a["id"],
            text=a["text"],
            owner=a["owner"] or reader.frame("no owner"),
            due=a["due"] or reader.frame("no date"),
            state=f"{reader.word(a['status'] or 'no status')}; {reader.word(a['proof'])}",
        )
        for a in chosen
    )


def elsewhere(case: Case, actions: Sequence[Mapping[str, Any]], reader: Reader) -> str:
    """Whether other units are concerned, in one line."""
    units = case.commission.other_units
    if units:
        looked = [u for u in units if u.found]
        rest = [u.unit for u in units if not u.found]
        words = "; ".join(f"{u.unit}: {u.found}" for u in looked)
        left = f"{reader.frame('Not looked at yet')}: {', '.join(rest)}." if rest else ""
        return " ".join(x for x in (f"{words}." if words else "", left) if x)
    named = [a for a in actions if a["kind"] == "preventive"]
    if named:
        return f"{reader.frame('See action')} {named[0]['id']}: {named[0]['text']}"
    return reader.frame("Not looked into: no other unit is named.")


def decision(results: Mapping[str, Any], reader: Reader) -> str:
    """What the manager must decide next."""
    t = reader.frame
    waiting = [a for a in results["actions"] if a["status"] in ("proposed", "planned")]
    if waiting:
        first = min(waiting, key=lambda a: a["due"] or "9999")
        due = first["due"] or t("no date")
        return f"{t('Release the actions still proposed or planned')}: " + (
            ", ".join(a["id"] for a in waiting) + f". {t('First due')}: {first['id']}, {due}."
        )
    useful = [t_ for t_ in results["verdict"]["next_tests"] if t_["could_change_side"]]
    if useful:
        return f"{t('Decide on the next test')}: {useful[0]['name']}."
    return t("Name owners and dates for corrective actions; none is waiting for release.")


def run_record(results: Mapping[str, Any], reader: Reader) -> tuple[tuple[str, str], ...]:
    """What the numbers were made with."""
    record = results["record"]
    rows = [
        (reader.frame("Knowledge"), record["knowledge"]),
        (reader.frame("Seed"), str(record["seed"])),
        (reader.frame("Program code, SHA-256"), record["code"][:32]),
    ]
    rows += [(name, number) for name, number in sorted(record["versions"].items())]
    return tuple(rows)
