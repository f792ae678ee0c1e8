"""Reading a condition from left to right, and errors that point at the words they mean."""

import difflib
import re
from collections.abc import Sequence
from typing import NoReturn

from rca.base.errors import RcaError

Span = tuple[str, int, int]  # words, start, end in the line


class ConditionError(RcaError, ValueError):
    """A ``verify`` condition can't be read; ``start`` and ``end`` are the words that are wrong.

    ``reason`` is one line for a table; the message also shows the line with carets under them.
    """

    def __init__(self, reason: str, line: str, start: int, end: int) -> None:
        self.reason, self.line, self.start, self.end = reason, line, start, end
        pointed = f"\n  {line}\n  {' ' * start}{'^' * max(end - start, 1)}" if line else ""
        super().__init__(f"{reason}{pointed}")


def complain(line: str, span: tuple[int, int], reason: str) -> NoReturn:
    """Raise with carets under a part of the line, spaces around it left out."""
    start, end = span
    found = line[start:end]
    raise ConditionError(
        reason,
        line,
        start + len(found) - len(found.lstrip()),
        end - len(found) + len(found.rstrip()),
    )


def nearest(what: str, found: str, known: Sequence[str]) -> str:
    """What was found and expected, with the nearest known words first."""
    near = difflib.get_close_matches(found, known, n=3, cutoff=0.5)
    hint = f" Did you mean {' or '.join(map(repr, near))}?" if near else ""
    named = f"the {what} {found!r}" if found else f"no {what}"
    return f"found {named}, expected one of {', '.join(known)}.{hint}"


class Text:
    """A part of a line that is read from its start."""

    def __init__(self, line: str, start: int, end: int) -> None:
        self._line, self._start, self._end = line, start, end
        self._at = start
        self._skip()

    def _skip(self) -> None:
        while self._at < self._end and self._line[self._at].isspace():
            self._at += 1

    @property
    def empty(self) -> bool:
        """Whether everything was read."""
        return self._at >= self._end

    def peek(self, pattern: str) -> bool:
        """Whether the next words fit."""
        return re.compile(pattern).match(self._line, self._at, self._end) is not None

    def take(self, pattern: str) -> Span | None:
        """Read the next words where they fit, else read nothing."""
        match = re.compile(pattern).match(self._line, self._at, self._end)
        if match is None:
            return None
        self._at = match.end()
        self._skip()
        return match[0], match.start(), match.end()

    def rest(self) -> Span:
        """Everything not yet read."""
        return self._line[self._at : self._end], self._at, self._end

    def here(self) -> Span:
        """The place reached, one character wide."""
        return "", self._at, self._at + 1

    def whole(self) -> str:
        """All of this part."""
        return self._line[self._start : self._end].strip()

    def fail(self, span: Span, reason: str) -> NoReturn:
        """Raise with carets under the span."""
        if span[1] >= len(self._line):
            raise ConditionError(reason, self._line, len(self._line), len(self._line) + 1)
        complain(self._line, (span[1], max(span[2], span[1] + 1)), reason)
