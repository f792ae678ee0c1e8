"""Small getters that read one table of ``case.toml`` and collect every problem with its line."""

from collections.abc import Iterable
from dataclasses import dataclass, field
from datetime import date, datetime
from enum import StrEnum
from typing import Any, TypeVar

from rca.base.errors import Problem, Severity
from rca.base.source import Origin, Reading, Source
from rca.base.units import DIMENSIONS, EXAMPLES, STANDARD_ATMOSPHERE, UnitError, parse_quantity
from rca.intake.words import mend_word

FILE = "case.toml"
E = TypeVar("E", bound=StrEnum)


@dataclass(slots=True)
class Findings:
    """What reading found wrong so far, the lines of the keys, and the local atmosphere."""

    lines: dict[str, int] = field(default_factory=dict)
    sha256: str = ""
    atmosphere: float = STANDARD_ATMOSPHERE
    problems: list[Problem] = field(default_factory=list)

    def place(self, path: str) -> str:
        """A key with its line where that is known."""
        line = self.lines.get(path)
        return f"{path} (line {line})" if line is not None else path

    def add(
        self,
        path: str,
        found: str,
        expected: str,
        mend: str,
        severity: Severity = Severity.ERROR,
    ) -> None:
        """One more problem of the descriptor."""
        self.problems.append(
            Problem(
                severity=severity,
                file=FILE,
                place=self.place(path),
                found=found,
                expected=expected,
                mend=mend,
            )
        )


@dataclass(slots=True)
class Table:
    """One TOML table being read; keys nobody asked for are reported by ``done``."""

    plain: dict[str, Any]
    path: str
    findings: Findings
    asked: set[str] = field(default_factory=set)

    def raw(self, key: str) -> Any:
        """The value as TOML has it, or None where it is not given."""
        self.asked.add(key)
        return self.plain.get(key)

    def at(self, key: str) -> str:
        """The dotted path of a key of this table."""
        return f"{self.path}.{key}" if self.path else key

    def wrong(self, key: str, found: object, expected: str, mend: str) -> None:
        """A value of the wrong kind."""
        self.findings.add(self.at(key), _shown(found), expected, mend)

    def text(self, key: str, *, required: bool = False) -> str:
        """A string; empty where not given."""
        value = self.raw(key)
        if value is None:
            if required:
                self.findings.add(
                    self.at(key), "nothing", "a text", f'Add the line  {key} = "..."'
                )
            return ""
        if not isinstance(value, str):
            self.wrong(key, value, "a text in quotes", f'Write  {key} = "{value}"')
            return ""
        if required and not value.strip():
            self.wrong(key, value, "a text that is not empty", f'Write  {key} = "..."')
        return value.strip()

    def quantity(self, key: str, dimension: str) -> Reading | None:
        """A quantity with its unit in SI, or None where it is not given or can't be read."""
        value = self.raw(key)
        if value is None:
            return None
        if dimension == "ratio" and isinstance(value, int | float) and not isinstance(value, bool):
            value = repr(value)
        if not isinstance(value, str):
            self.wrong(
                key,
                value,
                f"a {dimension} with its unit, in quotes",
                f'Write for example  {key} = "{EXAMPLES[dimension]}"',
            )
            return None
        try:
            si = parse_quantity(value, dimension, atmosphere=self.findings.atmosphere)
        except UnitError as error:
            self.findings.add(self.at(key), error.found, error.expected, error.mend)
            return None
        return Reading(
            value=si.value,
            unit=DIMENSIONS[dimension].replace("**", ""),
            u=si.u,
            origin=Origin.STATED,
            text=value,
            source=self.source(key),
        )

    def positive(self, key: str, dimension: str) -> Reading | None:
        """A quantity that must be above zero."""
        reading = self.quantity(key, dimension)
        if reading is not None and not reading.value > 0:
            self.wrong(key, reading.text, "a value above zero", "Check the sign and the number.")
            return None
        return reading

    def integer(self, key: str, *, low: int, high: int) -> int | None:
        """A whole number within bounds."""
        value = self.raw(key)
        if value is None:
            return None
        if isinstance(value, bool) or not isinstance(value, int) or not low <= value <= high:
            self.wrong(key, value, f"a whole number from {low} to {high}", "Check the number.")
            return None
        return value

    def number(self, key: str, *, low: float, high: float) -> float | None:
        """A bare number within bounds."""
        value = self.raw(key)
        if value is None:
            return None
        fits = isinstance(value, int | float) and not isinstance(value, bool)
        if not fits or not low <= value <= high:
            self.wrong(key, value, f"a number from {low:g} to {high:g}", "Check the number.")
            return None
        return float(value)

    def flag(self, key: str) -> bool | None:
        """A yes or no, as TOML has it."""
        value = self.raw(key)
        if value is not None and not isinstance(value, bool):
            self.wrong(key, value, "true or false, without quotes", f"Write  {key} = true")
            return None
        return value

    def word(self, key: str, kind: type[E]) -> E | None:
        """One word of a controlled vocabulary."""
        value = self.text(key)
        if not value:
            return None
        folded = {str(one).casefold(): one for one in kind}
        if value.casefold() in folded:
            return folded[value.casefold()]
        known = [str(one) for one in kind]
        self.findings.add(
            self.at(key), repr(value), f"one of {', '.join(known)}", mend_word(value, known)
        )
        return None

    def moment(self, key: str) -> datetime | None:
        """A date and time with its zone."""
        value = self.raw(key)
        if value is None:
            return None
        if isinstance(value, datetime) and value.tzinfo is not None:
            return value
        example = "2026-03-06T04:12:00+01:00"
        if isinstance(value, datetime | date):
            self.wrong(
                key,
                value.isoformat(),
                "a date and time with its zone",
                f"Write for example  {key} = {example}  (no quotes; +01:00 is the zone).",
            )
        else:
            self.wrong(key, value, "a TOML date and time", f"Write  {key} = {example}")
        return None

    def tables(self, key: str) -> list["Table"]:
        """An array of tables."""
        value = self.raw(key)
        if value is None:
            return []
        if not isinstance(value, list) or not all(isinstance(one, dict) for one in value):
            self.wrong(key, value, f"tables headed [[{key}]]", f"Head each with [[{key}]].")
            return []
        return [
            Table(one, f"{self.at(key)}[{number}]", self.findings)
            for number, one in enumerate(value)
        ]

    def table(self, key: str) -> "Table":
        """A sub-table; empty where it is not given."""
        value = self.raw(key)
        if value is not None and not isinstance(value, dict):
            self.wrong(key, value, f"a table headed [{self.at(key)}]", "Head it so.")
            value = None
        return Table(value or {}, self.at(key), self.findings)

    def source(self, key: str) -> Source:
        """Where a key of this table stands."""
        return Source(
            file=FILE, locator=self.findings.place(self.at(key)), sha256=self.findings.sha256
        )

    def done(self, also: Iterable[str] = ()) -> None:
        """Report keys nobody asked for, each with the nearest known key."""
        known = self.asked | set(also)
        for key in self.plain:
            if key not in known:
                self.findings.add(
                    self.at(key),
                    f"the unknown key {key!r}",
                    "a key this program knows",
                    mend_word(key, sorted(known)) + " It is kept in the file and not used.",
                    Severity.WARNING,
                )


def _shown(value: object) -> str:
    text = repr(value)
    return text if len(text) <= 80 else text[:77] + "..."
