"""Rows of the case's own CSV tables under fixed headers, with every problem placed."""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from datetime import date, datetime
from enum import StrEnum
from pathlib import Path
from typing import TypeVar

from rca.base.errors import Problem, Severity
from rca.base.source import Source
from rca.intake.tables import TableError, read_table
from rca.intake.words import mend_word, nearest

E = TypeVar("E", bound=StrEnum)


@dataclass(frozen=True, slots=True)
class Row:
    """One data row by column name."""

    cells: dict[str, str]
    file: str
    line: str
    sha256: str
    problems: list[Problem]

    def get(self, column: str) -> str:
        """The trimmed text of a cell; empty where blank."""
        return self.cells.get(column, "").strip()

    def source(self) -> Source:
        """Where the row stands."""
        return Source(file=self.file, locator=self.line, sha256=self.sha256)

    def wrong(
        self,
        column: str,
        expected: str,
        mend: str,
        severity: Severity = Severity.ERROR,
    ) -> None:
        """Note a cell that can't be used as it stands."""
        self.problems.append(
            Problem(
                severity=severity,
                file=self.file,
                place=f"{self.line}, column {column}",
                found=repr(self.get(column)) if self.get(column) else "nothing",
                expected=expected,
                mend=mend,
            )
        )

    def day(self, column: str) -> date | None:
        """A date such as 2026-03-09."""
        text = self.get(column)
        if not text:
            return None
        try:
            return date.fromisoformat(text[:10]) if "T" in text else date.fromisoformat(text)
        except ValueError:
            self.wrong(column, "a date such as 2026-03-09", "Write year-month-day.")
            return None

    def moment(self, column: str) -> datetime | None:
        """A date and time with its zone, such as 2026-03-09T08:30+01:00."""
        text = self.get(column)
        if not text:
            return None
        mend = "Write for example 2026-03-09T08:30+01:00."
        try:
            moment = datetime.fromisoformat(text)
        except ValueError:
            self.wrong(column, "a date and time with its zone", mend)
            return None
        if moment.tzinfo is None:
            self.wrong(column, "a date and time with its zone (a date alone has none)", mend)
            return None
        return moment

    def word(
        self, column: str, kind: type[E], *, severity: Severity = Severity.WARNING
    ) -> E | None:
        """A controlled word; an unknown one is kept as text and answered with the nearest."""
        text = self.get(column)
        folded = {str(one).casefold(): one for one in kind}
        if not text:
            return None
        if text.casefold() not in folded:
            known = [str(one) for one in kind]
            near = nearest(text, known)
            self.wrong(
                column,
                "a known word" if near else f"one of {', '.join(known)}",
                mend_word(text, known) + " It is kept and shown, and carries no weight.",
                severity,
            )
            return None
        return folded[text.casefold()]


def read_rows(
    folder: Path,
    name: str,
    columns: Sequence[str],
    required: Sequence[str],
    sha256: str,
    problems: list[Problem],
) -> Iterator[Row]:
    """The data rows of ``folder/name``; nothing where the file is not there.

    Problems of header and rows are added to ``problems``; a row that can't be placed under the
    header is reported and skipped.
    """
    path = folder / name
    if not path.exists():
        return
    try:
        table = read_table(path, name)
    except TableError as error:
        problems.append(error.problem)
        return
    rows = [row for row in table.rows if any(cell.text.strip() for cell in row)]
    header = [cell.text.strip().casefold() for cell in rows[0]] if rows else []
    if not _header_fits(name, header, columns, required, problems):
        return
    for row in rows[1:]:
        line = row[0].address.split(",")[0]
        if len(row) != len(header):
            problems.append(
                Problem(
                    severity=Severity.ERROR,
                    file=name,
                    place=line,
                    found=f"{len(row)} cells",
                    expected=f"{len(header)} cells, as in the header",
                    mend="Put texts that hold the delimiter in quotes.",
                )
            )
            continue
        cells = {key: cell.text for key, cell in zip(header, row, strict=True)}
        yield Row(cells=cells, file=name, line=line, sha256=sha256, problems=problems)


def _header_fits(
    name: str,
    header: Sequence[str],
    columns: Sequence[str],
    required: Sequence[str],
    problems: list[Problem],
) -> bool:
    fits = True
    for column in required:
        if column not in header:
            fits = False
            problems.append(
                _header_problem(
                    name,
                    f"no column {column!r}",
                    f"the columns {', '.join(columns)}",
                    mend_word(column, header) if header else "Add a header row.",
                )
            )
    for column in sorted({c for c in header if header.count(c) > 1}):
        fits = False
        problems.append(
            _header_problem(name, f"two columns {column!r}", "each column once", "Rename one.")
        )
    for column in header:
        if column not in columns:
            problems.append(
                _header_problem(
                    name,
                    f"the unknown column {column!r}",
                    f"the columns {', '.join(columns)}",
                    mend_word(column, columns) + " It is kept in the file and not used.",
                    Severity.WARNING,
                )
            )
    return fits


def _header_problem(
    name: str, found: str, expected: str, mend: str, severity: Severity = Severity.ERROR
) -> Problem:
    return Problem(
        severity=severity, file=name, place="header", found=found, expected=expected, mend=mend
    )
