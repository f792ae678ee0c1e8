"""The ``verify`` condition of an action: its grammar, and a parser that points and teaches.

    condition  = clause { "and" clause }
    clause     = measured | silence
    measured   = function "(" quantity ")" comparison value [ "for" duration ] [ "after" anchor ]
    silence    = "no recurrence" [ "of" word ] [ "for" ( duration | count "old intervals" ) ]
                 [ "against one in" duration ] [ "after" anchor ]
    function   = min | max | mean | median | p05 | p95
    comparison = >= | > | <= | <
    value      = number unit          a pressure says (a) or (g), as everywhere in a case
    duration   = number ( h | d | weeks | months | years ) [ "in service" ]
    word       = a cause or a mechanism by its known name; the action's own cause without it
    anchor     = done | YYYY-MM-DD    "done" is the action's own done date; it is the default

    min(inlet pressure) >= 0.85 bar(a) for 30 d after done
    p95(oil temperature) < 60 degC for 200 h in service
    no recurrence of suction strainer clogged for 3 old intervals

A duration is calendar time after the end of the anchor's day; "in service" counts running time
only. A measured clause without "for" looks at everything after the anchor. Silence without "for"
asks for three old intervals: then no event has a probability of 0.05 if nothing changed.
"""

import re
from dataclasses import dataclass
from datetime import date

from rca.actions.words import ConditionError, Text, complain, nearest
from rca.base.units import QUANTITY_DIMENSIONS, UnitError, parse_quantity
from rca.case.vocabulary import CAUSES, MECHANISMS, QUANTITIES

FUNCTIONS = ("min", "max", "mean", "median", "p05", "p95")
COMPARISONS = (">=", ">", "<=", "<")
OLD_INTERVALS = 3.0  # exp(-3) = 0.05
EXAMPLE = "min(inlet pressure) >= 0.85 bar(a) for 30 d after done"
SILENCE_EXAMPLE = "no recurrence for 3 old intervals"
_HOURS = {"h": 1.0, "hour": 1.0, "hours": 1.0, "d": 24.0, "day": 24.0, "days": 24.0}
_HOURS |= {"week": 168.0, "weeks": 168.0, "month": 730.5, "months": 730.5}
_HOURS |= {"year": 8766.0, "years": 8766.0}
_UNITS_SHOWN = ("h", "d", "weeks", "months", "years")

__all__ = ["Clause", "ConditionError", "Silence", "parse_condition"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Clause:
    """A measured clause; the value keeps its unit for conversion at the edge."""

    function: str
    quantity: str
    comparison: str
    value: str
    hours: float | None  # None: everything after the anchor
    anchor: date | None  # None: the action's done date
    text: str
    in_service: bool = False


@dataclass(frozen=True, slots=True, kw_only=True)
class Silence:
    """A clause that asks for no recurrence."""

    word: str  # a cause or mechanism; "" for the action's own cause
    hours: float | None  # None: by old intervals
    intervals: float
    old_interval_hours: float | None  # None: from the history
    anchor: date | None
    text: str
    in_service: bool = False


def parse_condition(text: str) -> tuple[Clause | Silence, ...]:
    """The clauses of a condition.

    Raises ConditionError that points at the words, says what was expected, and shows an example.
    """
    line = " ".join(text.split())
    if not line:
        raise ConditionError(f"the condition is empty; write for example: {EXAMPLE}", "", 0, 0)
    clauses = []
    start = 0
    for match in [*re.finditer(r"(?:^|\s)and(?=\s|$)", line), None]:
        end = match.start() if match else len(line)
        part = Text(line, start, end)
        if part.empty:
            where = match.span() if match else (max(start - 4, 0), len(line))
            complain(line, where, f"there is no clause beside 'and'; for example: {EXAMPLE}")
        clauses.append(_clause(part))
        start = match.end() if match else end
    return tuple(clauses)


def _clause(text: Text) -> Clause | Silence:
    if text.take(r"no\s+recurrences?\b"):
        return _silence(text)
    return _measured(text)


def _measured(text: Text) -> Clause:
    function = text.take(r"[A-Za-z_]\w*")
    if function is None or not text.peek(r"\("):
        _no_measure(text, function)
    assert function is not None
    if function[0] not in FUNCTIONS:
        text.fail(function, nearest("function", function[0], FUNCTIONS))
    text.take(r"\(")
    quantity = text.take(r"[^()<>=]*")
    if not text.take(r"\)"):
        text.fail(text.here(), f"the bracket does not close; for example: {EXAMPLE}")
    assert quantity is not None
    if quantity[0].strip() not in QUANTITIES:
        text.fail(quantity, nearest("quantity", quantity[0].strip(), QUANTITIES))
    comparison = text.take(r"[<>=≤≥!]+")
    if comparison is None:
        text.fail(
            text.here(),
            f"found no comparison here, expected one of {', '.join(COMPARISONS)}; "
            f"for example: {EXAMPLE}",
        )
    assert comparison is not None
    if comparison[0] not in COMPARISONS:
        text.fail(
            comparison,
            f"found the comparison {comparison[0]!r}, expected one of {', '.join(COMPARISONS)}; "
            "a measured value is never exactly equal to a limit",
        )
    value = _value(text, quantity[0].strip())
    hours, in_service = _for(text)
    anchor = _after(text)
    _end(text)
    return Clause(
        function=function[0],
        quantity=quantity[0].strip(),
        comparison=comparison[0],
        value=value,
        hours=hours,
        anchor=anchor,
        text=text.whole(),
        in_service=in_service,
    )


def _no_measure(text: Text, function: tuple[str, int, int] | None) -> None:
    """Say what stands where a measure should."""
    rest = text.rest()
    if function is not None and any(rest[0].startswith(q) for q in ("[", "{")):
        text.fail(rest, f"expected a round bracket here; for example: {EXAMPLE}")
    place = function or rest
    text.fail(
        place,
        f"found {place[0]!r}, expected a measure such as min(inlet pressure), or "
        f"'no recurrence'; write for example: {EXAMPLE}",
    )


def _value(text: Text, quantity: str) -> str:
    value = text.take(r".*?(?=\s+(?:for|after)(?:\s|$)|$)")
    assert value is not None
    found = value[0].strip()
    if not found or re.match(r"(?:for|after)\b", found):
        text.fail(value, f"the value after the comparison is missing; for example: {EXAMPLE}")
    try:
        parse_quantity(found.replace("\u2212", "-"), QUANTITY_DIMENSIONS[quantity])
    except UnitError as error:
        text.fail(value, f"{error}")
    return found.replace("\u2212", "-")


def _for(text: Text) -> tuple[float | None, bool]:
    if not text.take(r"for\b"):
        return None, False
    hours = _duration(text)
    return hours, bool(text.take(r"in\s+service\b"))


def _duration(text: Text) -> float:
    number = text.take(r"[-+]?[\d.,]+")
    if number is None:
        text.fail(text.rest(), "found no number, expected a duration such as 30 d")
    assert number is not None
    try:
        amount = float(number[0])
    except ValueError:
        text.fail(number, f"{number[0]!r} is not a number, expected a duration such as 30 d")
    unit = text.take(r"[A-Za-z]+")
    if unit is None:
        text.fail(number, f"expected a unit of time after {number[0]}: {', '.join(_UNITS_SHOWN)}")
    assert unit is not None
    if unit[0] not in _HOURS:
        text.fail(unit, nearest("unit of time", unit[0], _UNITS_SHOWN))
    if not amount > 0:
        text.fail(number, "a duration must be longer than nothing")
    return amount * _HOURS[unit[0]]


def _after(text: Text) -> date | None:
    if not text.take(r"after\b"):
        return None
    anchor = text.take(r"\S+")
    if anchor is None:
        text.fail(text.here(), "expected 'after done' or a date such as 'after 2026-03-20'")
    assert anchor is not None
    if anchor[0] == "done":
        return None
    try:
        return date.fromisoformat(anchor[0])
    except ValueError:
        text.fail(
            anchor,
            f"found 'after {anchor[0]}', expected 'after done' or a date such as "
            "'after 2026-03-20'",
        )


def _silence(text: Text) -> Silence:
    word = ""
    if text.take(r"of\b"):
        found = text.take(r".*?(?=\s+(?:for|after|against)(?:\s|$)|$)")
        assert found is not None
        word = found[0].strip()
        if word not in (*CAUSES, *MECHANISMS):
            text.fail(found, nearest("cause or mechanism", word, (*CAUSES, *MECHANISMS)))
    hours, intervals, in_service = None, OLD_INTERVALS, False
    if text.take(r"for\b"):
        count = text.take(r"[\d.]+(?=\s+old\s+intervals?\b)")
        if count:
            text.take(r"old\s+intervals?\b")
            intervals = float(count[0])
            if not intervals > 0:
                text.fail(count, "the silence must be longer than nothing")
        else:
            hours = _duration(text)
            in_service = bool(text.take(r"in\s+service\b"))
    old = _duration(text) if text.take(r"against\s+one\s+in\b") else None
    anchor = _after(text)
    _end(text, SILENCE_EXAMPLE)
    return Silence(
        word=word,
        hours=hours,
        intervals=intervals,
        old_interval_hours=old,
        anchor=anchor,
        text=text.whole(),
        in_service=in_service,
    )


def _end(text: Text, example: str = EXAMPLE) -> None:
    if not text.empty:
        rest = text.rest()
        text.fail(rest, f"{rest[0]!r} can't be read here; write for example: {example}")
