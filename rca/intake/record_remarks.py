"""What a person should look at in a record file, though the file was read."""

from collections.abc import Iterator

from rca.base.errors import Problem, Severity
from rca.intake.record_blocks import OpenRecord
from rca.intake.record_cells import Marks

MOST_BAD = 0.05  # share of a column's cells that are no number; more of them is said


def file_remarks(file: OpenRecord, used: set[str], strays: int) -> tuple[Problem, ...]:
    """Of the file as a whole; ``used`` are the columns read, ``strays`` rows of a lost clock."""
    return tuple(_of_channels(file, used)) + tuple(_of_time(file, strays))


def column_remarks(
    file: OpenRecord, column: str, *, bad: int, example: str, error_values: int, rows: int
) -> tuple[Problem, ...]:
    """Of one column: ``bad`` cells that hold no number, and numbers that mean no value."""
    place = f"column {column}"
    found = []
    if bad > MOST_BAD * rows:
        found.append(
            _warning(
                file,
                place,
                f"{bad} of {rows} cells that are no number, as {example!r}",
                "numbers, with the unit in case.toml",
                "Export bare numbers; those cells are left out.",
            )
        )
    if error_values:
        found.append(
            _warning(
                file,
                place,
                f"{error_values} cells with a number that loggers write for no value, as -9999",
                "an empty cell",
                "They are left out; look at the sensor's line in that time.",
            )
        )
    if file.marks.get(column, Marks()).doubtful:
        found.append(
            _warning(
                file,
                place,
                "a comma before three digits in every cell: a decimal comma or a thousands mark",
                "cells that tell the two apart",
                "It is read as a decimal comma; check the size, or export plain numbers.",
            )
        )
    return tuple(found)


def _of_channels(file: OpenRecord, used: set[str]) -> Iterator[Problem]:
    for channel in file.record.channels:
        place = f"column {channel.column}"
        if channel.column not in used:
            yield _warning(
                file,
                place,
                f"a second channel of {channel.quantity}",
                "one channel a quantity; the first one is used",
                "Keep the better sensor first, or remove the other from case.toml.",
            )
        if sum(name == channel.column for name in file.names) > 1:
            yield _warning(
                file,
                place,
                "two columns of this name",
                "one column of each name",
                "The first is used; rename the other in the export.",
            )


def _of_time(file: OpenRecord, strays: int) -> Iterator[Problem]:
    place = f"column {file.record.time.column}"
    if file.rival:
        yield _warning(
            file,
            place,
            f"stamps that read equally well as {file.form} and as {file.rival}",
            "stamps that tell day from month",
            f"They are read as {file.form}; check the date, or export ISO 8601 stamps.",
        )
    if strays:
        yield _warning(
            file,
            place,
            f"{strays} rows with times outside those of the first and last rows",
            "a clock that keeps the time",
            "Those rows are left out; look at the logger's clock.",
        )


def _warning(file: OpenRecord, place: str, found: str, expected: str, mend: str) -> Problem:
    return Problem(
        severity=Severity.WARNING,
        file=file.record.file,
        place=place,
        found=found,
        expected=expected,
        mend=mend,
    )
