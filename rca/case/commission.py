"""Who asked for the report, under which rules, and what only people can state about the case."""

from dataclasses import dataclass
from datetime import date
from enum import StrEnum

from rca.base.source import Source


class BarrierState(StrEnum):
    """What became of a control that should have prevented or detected the failure."""

    WORKED = "worked"
    FAILED = "failed"
    BYPASSED = "bypassed"
    ABSENT = "absent"
    OUTSIDE = "outside its range"
    UNKNOWN = "not known"


@dataclass(frozen=True, slots=True, kw_only=True)
class Claim:
    """A standard the report claims to follow, with the deviation from it, if any."""

    name: str
    deviation: str = ""
    effect: str = ""  # of the deviation on the result


@dataclass(frozen=True, slots=True, kw_only=True)
class Signatory:
    """Somebody who signs, with competence and relationship to plant, supplier and equipment."""

    role: str
    name: str
    qualification: str = ""
    relationship: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class Barrier:
    """A control that should have prevented or detected the failure."""

    name: str
    state: BarrierState
    note: str
    source: Source


@dataclass(frozen=True, slots=True, kw_only=True)
class OtherUnit:
    """A unit of the same build, oil or duty, and whether it was looked at."""

    unit: str
    found: str  # "" where it was not looked at
    looked: date | None
    source: Source


@dataclass(frozen=True, slots=True, kw_only=True)
class Sought:
    """Evidence that was asked for and not obtained."""

    what: str
    asked: str  # of whom
    outcome: str
    effect: str
    source: Source


@dataclass(frozen=True, slots=True, kw_only=True)
class AlteringTest:
    """A test that altered evidence: what was recorded before, and who was told."""

    test: str
    exhibit: str
    when: date | None
    state_before: str  # photographs or notes of the state before
    notified: str
    retained: str  # the part kept back
    source: Source


@dataclass(frozen=True, slots=True, kw_only=True)
class Commission:
    """The [report] table and the tables beside it; all of it optional."""

    language: str = "en"  # "en" or "de"
    paper: str = "A4"  # "A4" or "Letter"
    distribution: tuple[str, ...] = ()
    standards: tuple[Claim, ...] = ()
    limits: tuple[str, ...] = ()  # of the instruction
    dissent: tuple[str, ...] = ()
    dissent_asked: str = ""  # who was asked for another opinion, and when
    stopped: str = ""  # why the search for causes ended where it did
    exposure: str = ""  # what the examiner knew before the first reading of the parts
    place: str = ""  # where the parts were examined
    received: date | None = None  # the first exhibit
    issued: date | None = None
    approver: str = ""
    signatories: tuple[Signatory, ...] = ()
    barriers: tuple[Barrier, ...] = ()
    other_units: tuple[OtherUnit, ...] = ()
    sought: tuple[Sought, ...] = ()
    altering_tests: tuple[AlteringTest, ...] = ()
