"""Where a value came from: the evidence file and the place in it."""

from dataclasses import dataclass
from enum import StrEnum


class Origin(StrEnum):
    """How a value is known; printed as a badge beside it."""

    MEASURED = "measured"  # measured by the author or the plant's instruments
    LABORATORY = "laboratory"  # an outside laboratory's result
    OBSERVED = "observed"  # seen at the teardown or on a photograph
    RECORD = "plant record"  # a work order, a log entry
    STATED = "stated"  # given in case.toml
    DEFAULT = "class default"  # taken for the class of fluid or machine, not for this one
    ASSUMED = "assumed"
    CALCULATED = "calculated"


@dataclass(frozen=True, slots=True, kw_only=True)
class Source:
    """One place in one evidence file."""

    file: str  # relative to the case folder, forward slashes
    locator: str  # key, row and column, sheet and cell, time span
    sha256: str = ""  # of the whole file; "" for case.toml keys before hashing


@dataclass(frozen=True, slots=True, kw_only=True)
class Reading:
    """A number with its unit, standard uncertainty and origin, in SI unless ``unit`` says other.

    ``u`` is the standard uncertainty in the same unit; ``None`` means it is not known, which is
    not the same as zero.
    """

    value: float
    unit: str
    u: float | None = None
    origin: Origin = Origin.STATED
    text: str = ""  # as written in the evidence
    source: Source | None = None
