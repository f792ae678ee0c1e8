"""The ``verify`` condition of an action: its grammar, and a parser that teaches.

    condition = clause { "and" clause }
    clause    = measure comparison value [ "for" duration ] [ "after" anchor ]
    measure   = function "(" quantity ")"
    function  = min | max | mean | median | p05 | p95
    comparison= >= | > | <= | <
    value     = number unit            a pressure says (a) or (g), as everywhere in a case
    duration  = number ( h | d | weeks )      of time in service after the anchor
    anchor    = done | YYYY-MM-DD      "done" is the action's own done date; it is the default

Example: ``min(inlet pressure) >= 0.85 bar(a) for 30 d after done``. The quantities are those a
record may hold. A clause without ``for`` looks at everything after the anchor.
"""

import difflib
import re
from dataclasses import dataclass
from datetime import date

from rca.base.errors import RcaError
from rca.case.vocabulary import QUANTITIES

FUNCTIONS = ("min", "max", "mean", "median", "p05", "p95")
COMPARISONS = (">=", "<=", ">", "<")
_HOURS = {"h": 1.0, "hour": 1.0, "hours": 1.0, "d": 24.0, "day": 24.0, "days": 24.0}
_HOURS |= {"week": 168.0, "weeks": 168.0}

_CLAUSE = re.compile(
    r"""(?P<function>[\w]+)\s*\(\s*(?P<quantity>[^()]*?)\s*\)\s*
        (?P<comparison>>=|<=|>|<|=+)\s*
        (?P<value>[-+\u2212]?[\d.,]+\s*\S*)
        (?:\s+for\s+(?P<number>[\d.]+)\s*(?P<unit>[A-Za-z]+))?
        (?:\s+after\s+(?P<anchor>\S+))?""",
    re.VERBOSE,
)
EXAMPLE = "min(inlet pressure) >= 0.85 bar(a) for 30 d after done"


class ConditionError(RcaError, ValueError):
    """A ``verify`` condition can't be read; the message says what was expected and shows one."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Clause:
    """One clause, as written; the value keeps its unit for conversion at the edge."""

    function: str
    quantity: str
    comparison: str
    value: str
    hours: float | None  # None: everything after the anchor
    anchor: date | None  # None: the action's done date
    text: str


def parse_condition(text: str) -> tuple[Clause, ...]:
    """The clauses of a condition.

    Raises ConditionError that names the clause, what was found, what was expected, and an example.
    """
    if not text.strip():
        raise ConditionError(f"the condition is empty; write for example: {EXAMPLE}")
    return tuple(_clause(part.strip()) for part in re.split(r"\s+and\s+", text.strip()))


def _clause(text: str) -> Clause:
    match = _CLAUSE.fullmatch(text)
    if match is None:
        raise ConditionError(_explain(text))
    function, quantity, comparison = match["function"], match["quantity"], match["comparison"]
    if function not in FUNCTIONS:
        raise ConditionError(_unknown(text, "function", function, FUNCTIONS))
    if quantity not in QUANTITIES:
        raise ConditionError(_unknown(text, "quantity", quantity, QUANTITIES))
    if comparison not in COMPARISONS:
        raise ConditionError(
            f"{text!r}: found the comparison {comparison!r}, expected one of "
            f"{', '.join(COMPARISONS)}; a measured value is never exactly equal to a limit"
        )
    return Clause(
        function=function,
        quantity=quantity,
        comparison=comparison,
        value=match["value"].strip(),
        hours=_duration(text, match["number"], match["unit"]),
        anchor=_anchor(text, match["anchor"]),
        text=text,
    )


def _duration(text: str, number: str | None, unit: str | None) -> float | None:
    if number is None or unit is None:
        return None
    if unit not in _HOURS:
        raise ConditionError(_unknown(text, "unit of time", unit, tuple(_HOURS)))
    try:
        hours = float(number) * _HOURS[unit]
    except ValueError as error:
        raise ConditionError(f"{text!r}: {number!r} is not a number") from error
    if hours <= 0:
        raise ConditionError(f"{text!r}: a duration must be longer than nothing")
    return hours


def _anchor(text: str, anchor: str | None) -> date | None:
    if anchor is None or anchor == "done":
        return None
    try:
        return date.fromisoformat(anchor)
    except ValueError as error:
        raise ConditionError(
            f"{text!r}: found 'after {anchor}', expected 'after done' or a date such as "
            "'after 2026-03-20'"
        ) from error


def _unknown(text: str, what: str, found: str, known: tuple[str, ...]) -> str:
    near = difflib.get_close_matches(found, known, n=3, cutoff=0.5)
    hint = f"did you mean {' or '.join(map(repr, near))}?" if near else ""
    expected = ", ".join(known)
    return f"{text!r}: found the {what} {found!r}, expected one of {expected}. {hint}".rstrip()


def _explain(text: str) -> str:
    if text.count("(") != text.count(")"):
        return f"{text!r}: the brackets do not close; write for example: {EXAMPLE}"
    if "(" not in text:
        return (
            f"{text!r}: found no measure such as min(inlet pressure); write for example: {EXAMPLE}"
        )
    if not any(sign in text for sign in "<>="):
        return (
            f"{text!r}: found no comparison ({', '.join(COMPARISONS)}); "
            f"write for example: {EXAMPLE}"
        )
    if re.search(r"[<>=]\s*(for|after|$)", text):
        return f"{text!r}: the value after the comparison is missing; for example: {EXAMPLE}"
    return f"{text!r} can't be read; write for example: {EXAMPLE}"
