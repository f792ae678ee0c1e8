"""A site's own numbers over the shipped knowledge, each with its reason.

    site = "Harrow Creek"

    [[change]]
    variable = "soot in the oil"
    number = "leaves micro-dieseling"     # anyway, prior, worse, explains_failure,
    value = [0.5, 0.8, 0.95]              # "leaves X", "given STATE" or "gate both"
    reason = "patches of eleven units with charred seals, 2019 to 2025"

A "leaves X" for an X that the shipped knowledge does not name there adds an arrow. The hash of
such knowledge covers both texts: its verdicts are never taken for those of the shipped one.
"""

import hashlib
import tomllib
from collections.abc import Mapping
from dataclasses import dataclass, replace
from typing import Any

from rca.base.errors import KnowledgeError
from rca.verdict.knowledge import (
    Change,
    Knowledge,
    Number,
    Variable,
    known_parents,
    no_cycle,
    parse_number,
)

KEYS = {"variable", "number", "value", "reason"}
MAPS = {"leaves": "leaves", "given": "given", "gate": "gate"}
ALONE = {
    "prior": "anyway",
    "anyway": "anyway",
    "worse": "worse",
    "explains_failure": "explains_failure",
}


@dataclass(frozen=True, slots=True)
class _Place:
    """Where a change stands in the overlay."""

    file: str
    line: int

    def __str__(self) -> str:
        return f"{self.file}, line {self.line}"


def overlaid(base: Knowledge, text: str, *, file: str = "site knowledge") -> Knowledge:
    """The shipped knowledge with a site's changes.

    Raises KnowledgeError with file and line for a syntax error, an unknown name, a probability of
    0 or 1 or beyond, a change without a reason, or a circle of causes.
    """
    try:
        plain = tomllib.loads(text)
    except tomllib.TOMLDecodeError as error:
        raise KnowledgeError(f"{file} is not TOML: {error}") from error
    unknown = set(plain) - {"site", "change"}
    if unknown:
        raise KnowledgeError(f"{file}: unknown keys {sorted(unknown)}; known: change, site")
    rows = plain.get("change", [])
    if not isinstance(rows, list) or not all(isinstance(row, dict) for row in rows):
        raise KnowledgeError(f"{file}: expected [[change]] tables")
    lines = [n for n, line in enumerate(text.splitlines(), 1) if line.strip() == "[[change]]"]
    lines += [0] * (len(rows) - len(lines))
    variables, changes = dict(base.variables), []
    for row, line in zip(rows, lines, strict=False):
        place = _Place(file, line)
        variable, change = _changed(variables, row, place)
        variables[variable.name] = variable
        known_parents({variable.name: variable}, variables, str(place))
        _in_place(variables, place)
        changes.append(change)
    both = hashlib.sha256(f"{base.sha256}\n{text}".encode()).hexdigest()
    return replace(
        base,
        version=f"{base.version} with {plain.get('site') or 'site'} changes",
        sha256=both,
        variables=variables,
        changes=tuple(changes),
    )


def _in_place(variables: Mapping[str, Variable], place: _Place) -> None:
    try:
        no_cycle(variables)
    except KnowledgeError as error:
        raise KnowledgeError(f"{place}: {error}") from error


def _changed(
    variables: Mapping[str, Variable], row: Mapping[str, Any], place: _Place
) -> tuple[Variable, Change]:
    if set(row) != KEYS:
        odd = sorted(set(row) ^ KEYS)
        raise KnowledgeError(f"{place}: keys {odd} missing or unknown; expected {sorted(KEYS)}")
    name, number, reason = str(row["variable"]), str(row["number"]), str(row["reason"]).strip()
    if name not in variables:
        raise KnowledgeError(f"{place}: unknown variable {name!r}")
    if not reason:
        raise KnowledgeError(f"{place}: a change needs a reason")
    new = parse_number(row["value"], str(place))
    variable = variables[name]
    before: Number | None
    if number in ALONE:
        before = getattr(variable, ALONE[number])
        if before is None:
            raise KnowledgeError(f"{place}: {name!r} has no number {number!r}")
        changed: dict[str, Any] = {ALONE[number]: new}
    else:
        kind, _, which = number.partition(" ")
        table: Mapping[str, Number] = getattr(variable, MAPS.get(kind, ""), {})
        addable = kind == "leaves" and which and variable.anyway is not None
        if kind not in MAPS or (which not in table and not addable):
            raise KnowledgeError(
                f"{place}: {name!r} has no number {number!r}; it has {_has(variable)}"
            )
        before = table.get(which)
        changed = {kind: {**table, which: new}}
    return replace(variable, **changed), Change(
        variable=name,
        number=number,
        before=before.best if before is not None else None,
        after=new.best,
        reason=reason,
        place=str(place),
    )


def _has(variable: Variable) -> str:
    numbers = [k for k in ("worse", "explains_failure") if getattr(variable, k) is not None]
    if variable.anyway is not None:
        numbers.insert(0, "prior" if variable.kind == "cause" else "anyway")
    for kind in MAPS:
        numbers += [f"{kind} {k}" for k in getattr(variable, kind)]
    return ", ".join(numbers)
