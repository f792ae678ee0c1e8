"""What a record file is, before its rows are read: kind, encoding, header, delimiter."""

import csv
from dataclasses import dataclass
from pathlib import Path

HEAD_BYTES = 40_000
HEAD_LINES = 80
DELIMITERS = ";\t|,"
PART = 1_000_000
WIDE_MARKS = {
    b"\xff\xfe\x00\x00": "utf-32",
    b"\x00\x00\xfe\xff": "utf-32",
    b"\xff\xfe": "utf-16",
    b"\xfe\xff": "utf-16",
}
OTHER_KINDS = {
    b"PK\x03\x04": ("a workbook or ZIP archive", "Export the sheet as CSV, or unpack it."),
    b"\xd0\xcf\x11\xe0": ("an old workbook", "Export the sheet as CSV."),
    b"\x1f\x8b": ("a compressed file", "Unpack it first."),
    b"%PDF": ("a PDF", "Ask for the samples as CSV; keep the PDF as an exhibit."),
}
ODD_SHARE = 0.3  # of the bytes; text of two bytes a character is half zeros


@dataclass(frozen=True, slots=True)
class Head:
    """The header row of a text file."""

    separator: str
    title_lines: int
    names: tuple[str, ...]  # as a person reads them, whatever the encoding; () where not found


def other_kind(start: bytes) -> tuple[str, str] | None:
    """What a file that is no record is, and the mend; None for anything that may be text."""
    return next((kind for magic, kind in OTHER_KINDS.items() if start.startswith(magic)), None)


def rewriting(head: bytes) -> str | None:
    """The encoding from which a file must be written anew to be read; None where it need not be.

    Two or four bytes a character, or lines that end in a carriage return only.
    """
    for mark, encoding in WIDE_MARKS.items():
        if head.startswith(mark):
            return encoding
    for shift, encoding in ((1, "utf-16-le"), (0, "utf-16-be")):
        odd = head[shift::2]
        if odd and odd.count(0) > 2 * ODD_SHARE * len(odd) and head.count(0) < 0.6 * len(head):
            return encoding
    if b"\r" in head and b"\n" not in head:
        return "utf-8" if _is_utf8(head) else "cp1252"
    return None


def rewrite(path: Path, target: Path, encoding: str) -> Path:
    """The file as UTF-8 with plain line ends, part by part."""
    with (
        path.open(encoding=encoding, errors="replace", newline=None) as wide,
        target.open("w", encoding="utf-8", newline="\n") as narrow,
    ):
        while part := wide.read(PART):
            narrow.write(part.removeprefix("\ufeff"))
    return target


def header(path: Path, wanted: list[str]) -> Head:
    """Delimiter, title lines above the header, and its names; the row that has all wanted names.

    Without such a row the delimiter is the commonest one and the first row the header.
    """
    with path.open("rb") as stream:
        raw = stream.read(HEAD_BYTES)
    text = raw.decode("utf-8-sig" if _is_utf8(raw) else "cp1252", errors="replace")
    lines = text.splitlines()[:HEAD_LINES]
    for number, line in enumerate(lines):
        for delimiter in DELIMITERS:
            names = cells(line, delimiter)
            if len(names) > 1 and all(column in names for column in wanted):
                return Head(delimiter, number, names)
    commonest = max(DELIMITERS, key=lambda d: min((x.count(d) for x in lines[:10]), default=0))
    return Head(commonest, 0, cells(lines[0], commonest) if lines else ())


def cells(line: str, delimiter: str) -> tuple[str, ...]:
    """The cells of one line, without outer blanks."""
    return tuple(cell.strip() for row in csv.reader([line], delimiter=delimiter) for cell in row)


def _is_utf8(raw: bytes) -> bool:
    try:
        raw.decode("utf-8")
    except UnicodeDecodeError as error:
        return error.start > len(raw) - 4  # a character cut at the end of the part
    return True
