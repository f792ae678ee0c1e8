"""Laboratory reports, wide (a sample a row) or long (a result a row), CSV or XLSX."""

import re
from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from datetime import date, datetime
from pathlib import Path

from rca.base.errors import Problem, Severity
from rca.base.source import Source
from rca.case.model import Case, OilReportFile
from rca.case.oil import OilSample, OilValue, UnreadCell
from rca.intake.oil_properties import (
    canonical_unit,
    recognise,
    recognise_meta,
    split_unit,
    unit_factor,
)
from rca.intake.tables import Cell, TableError, read_table

NEW_OIL = re.compile(r"new|neu|neuöl|frisch|baseline|reference|virgin|neuve", re.IGNORECASE)
NOT_TESTED = {"", "-", "–", "n/a", "na", "nt", "n.t.", "not tested", "."}
NOT_DETECTED = {"nd", "n.d.", "n.n.", "nn", "bdl", "not detected", "trace", "neg"}
_VALUE = re.compile(
    r"(?P<op><=?|>=?|≤|≥|~|ca\.?|approx\.?)?\s*(?P<n>[-\u2212]?\d[\d.,'\u00a0\u202f ]*)\s*"
    r"(?P<unit>[^\d▲▼*!]*)[▲▼*!]*"
)


@dataclass(frozen=True, slots=True, kw_only=True)
class OilReading:
    """All samples of a case, what could not be read, and lines a person should confirm."""

    samples: tuple[OilSample, ...]
    unread: tuple[UnreadCell, ...]
    problems: tuple[Problem, ...]
    proposals: tuple[str, ...]  # for case.toml


@dataclass(slots=True)
class _Columns:
    meta: dict[str, int]
    properties: dict[int, tuple[str, str]]  # column -> (property, unit)
    unknown: list[str]


def read_oil_reports(folder: Path, case: Case) -> OilReading:
    """Read every report named in case.toml; samples in order of date."""
    samples: list[OilSample] = []
    unread: list[UnreadCell] = []
    problems: list[Problem] = []
    proposals: list[str] = []
    hashes = {file.file: file.sha256 for file in case.files}
    for report in case.oil_reports:
        try:
            table = read_table(folder / report.file, report.file, sheet=report.sheet)
        except TableError as error:
            problems.append(error.problem)
            continue
        reader = _Reader(report, hashes.get(report.file, ""), unread, problems, proposals)
        samples += reader.samples([row for row in table.rows if any(c.text.strip() for c in row)])
    marked = [_marked(sample, case) for sample in _latest(samples)]
    marked.sort(key=lambda s: (s.sampled or date.min, s.id))
    return OilReading(
        samples=tuple(marked),
        unread=tuple(unread),
        problems=tuple(problems),
        proposals=tuple(proposals),
    )


def parse_result(text: str, decimal: str) -> tuple[str, float, str] | str:
    """Operator, number and unit of a cell; or the reason why it can't be read.

    ``decimal`` is the file's decimal mark.
    """
    plain = text.strip().replace("\u2212", "-").replace("\u00a0", " ").replace("\u202f", " ")
    if re.fullmatch(r"D\s?8(\.0)?", plain):
        return ">", 8.0, ""  # ASTM D1500: darker than 8
    match = _VALUE.fullmatch(plain)
    if match is None:
        return "not a number"
    digits = match["n"].replace("'", "").replace(" ", "").replace("\u2212", "-")
    other = "," if decimal == "." else "."
    if other in digits:
        if re.fullmatch(rf"-?\d{{1,3}}(\{other}\d{{3}})+(\{decimal}\d+)?", digits):
            return f"{text!r} may be thousands or decimals"
        return f"decimal mark {other!r} in a file that uses {decimal!r}"
    try:
        number = float(digits.replace(decimal, "."))
    except ValueError:
        return "not a number"
    op = {"<": "<", "<=": "<", "≤": "<", ">": ">", ">=": ">", "≥": ">", None: "="}.get(
        match["op"], "~"
    )
    return op, number, match["unit"].strip()


class _Reader:
    """Reads one report."""

    def __init__(
        self,
        report: OilReportFile,
        sha256: str,
        unread: list[UnreadCell],
        problems: list[Problem],
        proposals: list[str],
    ) -> None:
        self.report, self.sha256 = report, sha256
        self.unread, self.problems, self.proposals = unread, problems, proposals
        self.decimal = "."

    def samples(self, rows: Sequence[tuple[Cell, ...]]) -> list[OilSample]:
        """All samples of the table."""
        head = _header_row(rows)
        if head is None:
            self._problem(
                "no header this program can read",
                "sample id, date and properties",
                "Name the columns in case.toml under columns = { ... }.",
            )
            return []
        self.decimal = self.report.decimal or _decimal_mark(rows[head + 1 :])
        titles = [cell.text.strip() for cell in rows[head]]
        folded = [title.casefold() for title in titles]
        if _is_long(folded):
            return self._long(rows[head + 1 :], folded)
        columns = self._columns(titles)
        return [
            self._wide(row, columns) for row in rows[head + 1 :] if _same(row, titles) is False
        ]

    def _columns(self, titles: Sequence[str]) -> _Columns:
        columns = _Columns(meta={}, properties={}, unknown=[])
        for index, title in enumerate(titles):
            if not title:
                continue
            stated = self.report.columns.get(title)
            name, unit = split_unit(stated) if stated else split_unit(title)
            known = recognise(name)
            meta = None if stated else recognise_meta(title)
            if meta is not None and meta not in columns.meta:
                columns.meta[meta] = index
            elif known is not None and unit_factor(known, unit) is not None:
                columns.properties[index] = (known, unit)
            else:
                columns.unknown.append(title)
                self.proposals.append(f'"{title}" = "PROPERTY [UNIT]"')
        return columns

    def _wide(self, row: tuple[Cell, ...], columns: _Columns) -> OilSample:
        values: dict[str, OilValue] = {}
        for index, (name, unit) in columns.properties.items():
            if index < len(row):
                value = self._value(name, unit, row[index])
                if value is not None:
                    values.setdefault(name, value)

        def meta(key: str) -> str:
            place = columns.meta.get(key)
            return row[place].text.strip() if place is not None and place < len(row) else ""

        return self._sample(row[0], values, meta)

    def _long(self, rows: Sequence[tuple[Cell, ...]], header: Sequence[str]) -> list[OilSample]:
        def place(*words: str) -> int | None:
            return next((i for i, h in enumerate(header) if h in words), None)

        test = place("test", "property", "parameter", "prüfung", "quantity")
        value = place("value", "result", "wert", "ergebnis")
        unit = place("unit", "einheit", "units")
        metas = {m: i for i, h in enumerate(header) if (m := recognise_meta(h)) is not None}
        assert test is not None and value is not None  # noqa: PT018  _is_long saw both
        found: dict[str, tuple[Cell, dict[str, OilValue], tuple[Cell, ...]]] = {}
        for row in rows:
            if len(row) <= max(test, value):
                continue
            key = row[metas["id"]].text if "id" in metas else row[0].text
            name = recognise(self.report.columns.get(row[test].text.strip(), row[test].text))
            _, values, _ = found.setdefault(key, (row[0], {}, row))
            if name is None:
                self._unread(row[value], f"unknown test {row[test].text!r}")
                continue
            written = row[unit].text if unit is not None and unit < len(row) else ""
            if unit_factor(name, written) is None:
                self._unread(row[value], f"unit {written!r} does not fit {name}")
                continue
            one = self._value(name, written, row[value])
            if one is not None:
                values[name] = one

        def reader(row: tuple[Cell, ...]) -> "_Meta":
            return _Meta(row, metas)

        return [self._sample(cell, values, reader(row)) for cell, values, row in found.values()]

    def _sample(
        self, first: Cell, values: dict[str, OilValue], meta: Callable[[str], str]
    ) -> OilSample:
        kind = f"{meta('kind')} {meta('id')} {meta('comment')}"
        name = meta("id") or first.text.strip()
        return OilSample(
            id=name,
            sampled=self._date(meta("sampled"), first),
            point=meta("point") or self.report.sample_point,
            laboratory=meta("laboratory") or self.report.laboratory or self.report.file,
            machine_hours=self._plain(meta("machine_hours")),
            oil_hours=self._plain(meta("oil_hours")),
            new_oil=bool(NEW_OIL.search(kind)),
            values=values,
            source=Source(
                file=self.report.file, locator=first.address.split(",")[0], sha256=self.sha256
            ),
        )

    def _value(self, name: str, unit: str, cell: Cell) -> OilValue | None:
        text = cell.text.strip()
        if text.casefold() in NOT_TESTED:
            return None
        source = Source(file=self.report.file, locator=cell.address, sha256=self.sha256)
        if name == "cleanliness_code":
            return self._code(cell, source)
        if text.casefold() in NOT_DETECTED:
            self._unread(cell, "below a detection limit that is not stated")
            return None
        parsed = parse_result(text, self.decimal)
        if isinstance(parsed, str):
            self._unread(cell, parsed)
            return None
        op, number, own_unit = parsed
        factor = unit_factor(name, own_unit or unit)
        if factor is None:
            self._unread(cell, f"unit {own_unit or unit!r} does not fit {name}")
            return None
        return OilValue(
            property=name,
            op=op,
            value=number * factor,
            unit=canonical_unit(name),
            text=text,
            source=source,
        )

    def _code(self, cell: Cell, source: Source) -> OilValue | None:
        match = re.fullmatch(
            r"(?:ISO\s*)?[≥>]?(\d\d?)[/-][≥>]?(\d\d?)[/-][≥>]?(\d\d?)", cell.text.strip()
        )
        if match is None:
            self._unread(cell, "not a code of ISO 4406 such as 18/16/13")
            return None
        return OilValue(
            property="cleanliness_code",
            op="=",
            value=float(match[2]),
            unit="ISO 4406",
            text="/".join(match.groups()),
            source=source,
        )

    def _date(self, text: str, cell: Cell) -> date | None:
        if not text:
            return None
        for form in ("%Y-%m-%d", "%d.%m.%Y", "%Y/%m/%d", "%d-%b-%Y", "%d %b %Y"):
            try:
                return datetime.strptime(text[:11].strip(), form).date()  # noqa: DTZ007  a day
            except ValueError:
                continue
        match = re.fullmatch(r"(\d\d?)/(\d\d?)/(\d{4})", text)
        if match and self.report.day_first is not None:
            first, second, year = map(int, match.groups())
            day, month = (first, second) if self.report.day_first else (second, first)
            return date(year, month, day)
        self._unread(
            replace_text(cell, text),
            "a date that may be day or month first; say "
            "day_first = true or false under [[oil_reports]]",
        )
        return None

    def _plain(self, text: str) -> float | None:
        if not text:
            return None
        parsed = parse_result(text, self.decimal)
        return None if isinstance(parsed, str) else parsed[1]

    def _unread(self, cell: Cell, reason: str) -> None:
        source = Source(file=self.report.file, locator=cell.address, sha256=self.sha256)
        self.unread.append(UnreadCell(source=source, text=cell.text, reason=reason))

    def _problem(self, found: str, expected: str, mend: str) -> None:
        self.problems.append(
            Problem(
                severity=Severity.ERROR,
                file=self.report.file,
                place="",
                found=found,
                expected=expected,
                mend=mend,
            )
        )


class _Meta:
    """Descriptive cells of a row of a long table."""

    def __init__(self, row: tuple[Cell, ...], places: dict[str, int]) -> None:
        self.row, self.places = row, places

    def __call__(self, key: str) -> str:
        place = self.places.get(key)
        return self.row[place].text.strip() if place is not None and place < len(self.row) else ""


def replace_text(cell: Cell, text: str) -> Cell:
    """The cell with another text, for messages."""
    return Cell(text=text, address=cell.address)


def _header_row(rows: Sequence[tuple[Cell, ...]]) -> int | None:
    scores = [
        sum(bool(recognise(c.text) or recognise_meta(c.text)) for c in row) for row in rows[:15]
    ]
    best = max(scores, default=0)
    return scores.index(best) if best >= 3 else None


def _is_long(header: Sequence[str]) -> bool:
    return any(h in ("test", "property", "parameter", "prüfung", "quantity") for h in header) and (
        any(h in ("value", "result", "wert", "ergebnis") for h in header)
    )


def _decimal_mark(rows: Sequence[tuple[Cell, ...]]) -> str:
    texts = [cell.text.strip() for row in rows for cell in row]
    commas = sum(
        bool(re.fullmatch(r"[<>]?\s*-?\d+,\d{1,2}|[<>]?\s*-?\d+,\d{4,}", t)) for t in texts
    )
    points = sum(
        bool(re.fullmatch(r"[<>]?\s*-?\d+\.\d{1,2}|[<>]?\s*-?\d+\.\d{4,}", t)) for t in texts
    )
    return "," if commas > points else "."


def _same(row: tuple[Cell, ...], titles: Sequence[str]) -> bool:
    return [c.text.strip() for c in row] == list(titles)


def _latest(samples: list[OilSample]) -> list[OilSample]:
    """A sample reported twice with the same values counts once; the later report stands."""
    found: dict[tuple[str, date | None], OilSample] = {}
    for sample in samples:
        found[sample.id, sample.sampled] = sample
    return list(found.values())


def _marked(sample: OilSample, case: Case) -> OilSample:
    for one in case.excluded:
        if one.file == sample.source.file and re.search(rf"\b{re.escape(sample.id)}\b", one.where):
            return replace(sample, excluded=one.reason)
    return sample
