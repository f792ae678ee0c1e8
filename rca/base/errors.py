"""The one tree of errors, and the problem record that every reader fills.

RcaError
├── CaseError           the case folder is at fault; carries every problem found
├── OutOfRangeError     a value lies outside the range a model is valid for
├── SolverError         a numerical method failed; carries the state it failed in
├── KnowledgeError      the knowledge file is at fault
├── ParameterError      a notebook parameter is unknown, missing or of the wrong type
├── NotebookError       a notebook cell failed
├── RenderError         the page could not be rendered as it should
└── ArchiveError        a stored result is missing, changed or unreadable
"""

from collections.abc import Sequence
from dataclasses import dataclass
from enum import StrEnum


class Severity(StrEnum):
    """How much a problem weighs."""

    ERROR = "error"  # the case can't be used before it is mended
    WARNING = "warning"  # usable, but a person should look
    NOTE = "note"  # worth knowing


@dataclass(frozen=True, slots=True, kw_only=True)
class Problem:
    """One thing wrong with an input: where, what was found, what was expected, how to mend it."""

    severity: Severity
    file: str  # relative to the case folder
    place: str  # key, row and column, or line; "" for the file as a whole
    found: str
    expected: str
    mend: str

    def __str__(self) -> str:
        """One readable paragraph."""
        where = f"{self.file}: {self.place}" if self.place else self.file
        return f"{where}: found {self.found}; expected {self.expected}. {self.mend}"


class RcaError(Exception):
    """Base of every error this program raises on purpose."""


class CaseError(RcaError):
    """The case folder can't be used; ``problems`` lists everything found, not just the first."""

    def __init__(self, problems: Sequence[Problem]) -> None:
        self.problems = tuple(problems)
        super().__init__("\n".join(str(p) for p in self.problems))


class OutOfRangeError(RcaError, ValueError):
    """A value lies outside the range a model is valid for."""


class SolverError(RcaError):
    """A numerical method failed; the message holds the state it failed in."""


class KnowledgeError(RcaError):
    """The knowledge file is at fault."""


class ParameterError(RcaError):
    """A notebook parameter is unknown, missing or of the wrong type."""


class NotebookError(RcaError):
    """A notebook cell failed; the message names notebook, cell and evidence file."""


class RenderError(RcaError):
    """The page could not be rendered as it should."""


class ArchiveError(RcaError):
    """A stored result is missing, changed or unreadable."""
