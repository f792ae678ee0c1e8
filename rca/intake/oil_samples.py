"""Rows of a laboratory table to samples; what can't be read is kept with the reason."""

import re
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field
from datetime import date

from rca.base.errors import Problem, Severity
from rca.base.source import Source
from rca.case.model import OilReportFile
from rca.case.oil import OilSample, OilValue, UnreadCell
from rca.intake.oil_cells import (
    Code,
    Parsed,
    is_not_detected,
    is_not_tested,
    parse_code,
    parse_result,
    plain_text,
    to_kept_unit,
)
from rca.intake.oil_dates import day_first_of, parse_day
from rca.intake.oil_layout import Layout, is_no_sample
from rca.intake.oil_properties import (
    Heading,
    fold,
    folded_words,
    heading_of,
    property_of,
    unit_factor,
)
from rca.intake.tables import Cell

_REVISION = re.compile(r"[\s(_-]*\brev(?:ision)?\.?\s*(\d+)\)?\s*$", re.IGNORECASE)
_OF_NEW_OIL = re.compile(r"\b(new oil|fresh oil|virgin oil|neuol|frischol|huile neuve)\b")
_PARTS = ("code_4", "code_6", "code_14")
Meta = Callable[[str], str]


@dataclass(slots=True)
class Kept:
    """What a reader collects besides samples."""

    unread: list[UnreadCell] = field(default_factory=list)
    problems: list[Problem] = field(default_factory=list)


@dataclass(slots=True)
class SampleReader:
    """Reads the rows of one report."""

    report: OilReportFile
    sha256: str
    decimal: str  # "" where the file shows none
    density: float | None  # [kg/L]
    kept: Kept
    day_first: bool | None = None

    def samples(self, layout: Layout) -> list[OilSample]:
        """All samples of a table."""
        self.day_first = self.report.day_first
        if self.day_first is None:
            columns = [i for m, i in layout.meta.items() if m in ("sampled", "date", "received")]
            cells = [row[i].text for row in layout.body for i in columns if i < len(row)]
            self.day_first = day_first_of(cells)
        rows = []
        for row in layout.body:
            why = is_no_sample(row, layout)
            if not why:
                rows.append(row)
            elif why != "the heading again":
                self._unread(next(c for c in row if c.text.strip()), why)
        if layout.kind == "long":
            return self._long(rows, layout)
        return [one for row in rows if (one := self._wide(row, layout)) is not None]

    def _wide(self, row: tuple[Cell, ...], layout: Layout) -> OilSample | None:
        values: dict[str, OilValue] = {}
        for column in layout.columns:
            if column.index < len(row):
                self._add(values, column.heading, row[column.index], column.heading.unit)
        meta = _meta_of_row(row, layout.meta)
        if not values and not meta("id"):
            for cell in row:
                if cell.text.strip():
                    self._unread(cell, "a row without sample number and results")
            return None
        return self._sample(row, values, meta, layout)

    def _long(self, rows: Sequence[tuple[Cell, ...]], layout: Layout) -> list[OilSample]:
        found: dict[tuple[str, str, str], tuple[tuple[Cell, ...], dict[str, OilValue]]] = {}
        last = ""
        for row in rows:
            meta = _meta_of_row(row, layout.meta)
            test, place = meta("test"), layout.meta["value"]
            if not test or place >= len(row):
                continue
            last = meta("id") or last  # merged cells leave the number out in the rows below
            key = (last, meta("sampled") or meta("date"), meta("revision"))
            blank = next((k for k in found if k[0] == last and not key[1]), key)
            _, values = found.setdefault(blank, (row, {}))
            heading = heading_of(self.report.columns.get(test, test))
            cell = row[place]
            if heading is None:
                self._unread(cell, f"unknown test {test!r}")
                continue
            sign = meta("operator")
            if sign in ("<", ">", "~", "≤", "≥"):
                cell = Cell(text=f"{sign} {cell.text}", address=cell.address, typed=cell.typed)
            method = meta("method") or heading.method
            said = Heading(name=heading.name, unit=heading.unit, method=method)
            self._add(values, said, cell, meta("unit") or heading.unit)
        out = []
        for (name, _, _), (row, values) in found.items():
            known = _meta_of_row(row, layout.meta)
            out.append(self._sample(row, values, _with_id(known, name), layout))
        return out

    def _add(self, values: dict[str, OilValue], heading: Heading, cell: Cell, unit: str) -> None:
        """Put one result among the values; a second column of a property fills gaps only."""
        value = self._value(heading, cell, unit)
        if isinstance(value, str):
            self._unread(cell, value)
        if not isinstance(value, OilValue):
            return
        earlier = values.get(heading.name)
        if earlier is None:
            values[heading.name] = value
        elif (earlier.op, earlier.value) != (value.op, value.value):
            self._unread(
                cell, f"a second, different result of {heading.name}; {earlier.text!r} is used"
            )

    def _value(self, heading: Heading, cell: Cell, unit: str) -> OilValue | str | None:
        """The result of a cell, the reason why it can't be read, or None: not tested."""
        name = heading.name
        if is_not_tested(cell.text):
            return None
        if name == "cleanliness_code":
            return self._code(cell)
        if is_not_detected(cell.text):
            return "below a detection limit that is not stated"
        if cell.typed == "date":
            return "a date in a column of results"
        parsed = parse_result(cell.text, "." if cell.typed == "number" else self.decimal)
        if isinstance(parsed, str):
            return parsed
        if name in _PARTS:
            return self._made(heading, cell, parsed, parsed.number, "")
        kept = to_kept_unit(name, parsed, unit, self.density)
        if isinstance(kept, str):
            return kept
        return self._made(heading, cell, parsed, *kept)

    def _made(
        self, heading: Heading, cell: Cell, parsed: Parsed, number: float, note: str
    ) -> OilValue:
        kept = property_of(heading.name)
        return OilValue(
            property=heading.name,
            op=parsed.op,
            value=number,
            unit=kept.unit,
            text=plain_text(cell.text),
            source=self._source(cell),
            basis="mass" if kept.unit == "mg/kg" else "",
            method=heading.method,
            note="; ".join(n for n in (parsed.note, note) if n),
        )

    def _code(self, cell: Cell) -> OilValue | str:
        code = (
            "a date: a spreadsheet may have turned a code such as 12/10/8 into it"
            if cell.typed == "date"
            else parse_code(cell.text)
        )
        if not isinstance(code, Code):
            return code
        return OilValue(
            property="cleanliness_code",
            op=code.op,
            value=code.scale,
            unit="ISO 4406",
            text=code.text,
            source=self._source(cell),
            note=code.note,
        )

    def _sample(
        self,
        row: tuple[Cell, ...],
        values: dict[str, OilValue],
        meta: Meta,
        layout: Layout,
    ) -> OilSample:
        first = next((cell for cell in row if cell.text.strip()), row[0])
        written = meta("id") or plain_text(first.text)
        revised = _REVISION.search(written)
        name = written[: revised.start()] if revised else written
        revision = re.search(r"\d+", meta("revision"))
        machine = self._hours("machine_hours", row, layout, meta)
        oil = self._hours("oil_hours", row, layout, meta)
        if machine is not None and oil is not None and oil > machine:
            self._warn(first, f"oil hours {oil:g} above machine hours {machine:g}", "Check both.")
        point = meta("point") or self.report.sample_point
        asset = meta("asset") or ("" if layout.kind == "long" else meta("unit"))
        return OilSample(
            id=name,
            sampled=self._sampled(row, meta, layout, new=_is_new(meta, name)),
            point=point,
            asset=asset,
            laboratory=meta("laboratory") or self.report.laboratory or "",
            machine_hours=machine,
            oil_hours=oil,
            new_oil=_is_new(meta, name),
            values=_with_code(values),
            source=Source(file=self.report.file, locator=_row_address(first), sha256=self.sha256),
            received=self._day("received", row, meta, layout),
            reported=self._day("reported", row, meta, layout),
            revision=int(revised[1]) if revised else int(revision[0]) if revision else 0,
            top_up=self._top_up(row, layout, meta),
            fluid=meta("fluid"),
        )

    def _sampled(
        self, row: tuple[Cell, ...], meta: Meta, layout: Layout, *, new: bool
    ) -> date | None:
        """The day of sampling; a bare "Date", then the day of receipt, stand in and say so."""
        for key, why in (
            ("sampled", ""),
            ("date", "no day of sampling; the column 'date' is taken for it"),
            ("received", "no day of sampling; the day of receipt is taken for it"),
        ):
            day = self._day(key, row, meta, layout)
            if day is not None:
                if why and not new:
                    self._note(row[layout.meta[key]], why)
                return day
        return None

    def _day(self, key: str, row: tuple[Cell, ...], meta: Meta, layout: Layout) -> date | None:
        text = meta(key)
        if not text or is_not_tested(text):
            return None
        day = parse_day(text, day_first=self.day_first)
        if isinstance(day, str):
            self._unread(row[layout.meta[key]], f"{key}: {day}")
            return None
        return day

    def _hours(self, key: str, row: tuple[Cell, ...], layout: Layout, meta: Meta) -> float | None:
        text = meta(key)
        if not text or is_not_tested(text):
            return None
        cell = row[layout.meta[key]]
        parsed = parse_result(text, "." if cell.typed == "number" else self.decimal)
        unit = layout.units.get(key, "")
        if isinstance(parsed, str) and re.fullmatch(r"[1-9]\d{0,2}[.,]\d{3}", text):
            parsed = Parsed(op="=", number=float(re.sub(r"[.,]", "", text)), unit="")
            self._note(cell, f"{text!r} read as thousands of hours")
        if isinstance(parsed, str):
            self._unread(cell, f"{key}: {parsed}")
            return None
        factor = unit_factor("h", parsed.unit or unit)
        if factor is None:
            self._unread(cell, f"{key} in {parsed.unit or unit!r}, not in hours or days")
            return None
        return parsed.number * factor

    def _top_up(self, row: tuple[Cell, ...], layout: Layout, meta: Meta) -> float | None:
        text = meta("top_up")
        if not text or is_not_tested(text):
            return None
        parsed = parse_result(text, self.decimal)
        unit = layout.units.get("top_up", "")
        factor = unit_factor("L", parsed.unit or unit) if isinstance(parsed, Parsed) else None
        if not isinstance(parsed, Parsed) or factor is None:
            self._unread(row[layout.meta["top_up"]], "a top-up that is no volume in litres")
            return None
        return parsed.number * factor / 1000.0 or None

    def _source(self, cell: Cell) -> Source:
        return Source(file=self.report.file, locator=cell.address, sha256=self.sha256)

    def _unread(self, cell: Cell, reason: str) -> None:
        self.kept.unread.append(
            UnreadCell(source=self._source(cell), text=cell.text, reason=reason)
        )

    def _note(self, cell: Cell, found: str) -> None:
        self._problem(cell, Severity.NOTE, found, "Name the column in case.toml if it is wrong.")

    def _warn(self, cell: Cell, found: str, mend: str) -> None:
        self._problem(cell, Severity.WARNING, found, mend)

    def _problem(self, cell: Cell, severity: Severity, found: str, mend: str) -> None:
        self.kept.problems.append(
            Problem(
                severity=severity,
                file=self.report.file,
                place=cell.address,
                found=found,
                expected="what the laboratory reported",
                mend=mend,
            )
        )


def _meta_of_row(row: tuple[Cell, ...], places: Mapping[str, int]) -> Meta:
    def meta(key: str) -> str:
        place = places.get(key)
        return plain_text(row[place].text) if place is not None and place < len(row) else ""

    return meta


def _with_id(meta: Meta, name: str) -> Meta:
    return lambda key: name if key == "id" and name else meta(key)


def _is_new(meta: Meta, name: str) -> bool:
    kind, first = fold(meta("kind")), fold(name)
    known = folded_words("new_oil")
    starts = first.split(" ")[0] if first else ""
    return kind in known or starts in known or bool(_OF_NEW_OIL.search(fold(meta("comment"))))


def _with_code(values: dict[str, OilValue]) -> dict[str, OilValue]:
    """A code from three columns put together; the columns' own entries go."""
    parts = [values.pop(name, None) for name in _PARTS]
    if "cleanliness_code" in values or any(part is None for part in parts):
        return values
    shown = "/".join(
        f"{part.op if part.op != '=' else ''}{part.value:g}" for part in parts if part is not None
    )
    code, middle = parse_code(shown), parts[1]
    if isinstance(code, Code) and middle is not None:
        values["cleanliness_code"] = OilValue(
            property="cleanliness_code",
            op=code.op,
            value=code.scale,
            unit="ISO 4406",
            text=code.text,
            source=middle.source,
            note="put together from three columns",
        )
    return values


def _row_address(cell: Cell) -> str:
    return cell.address.split(",")[0]
