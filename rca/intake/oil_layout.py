"""How a laboratory table is laid out: wide, long or transposed, with one or two heading rows."""

import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from rca.intake.oil_cells import plain_text
from rca.intake.oil_properties import (
    Heading,
    fold,
    heading_of,
    heading_unit,
    meta_of,
    unit_factor,
    words,
)
from rca.intake.tables import Cell

Rows = Sequence[tuple[Cell, ...]]
HEAD_WITHIN = 30  # rows of logos and addresses before the heading
LEAST_KNOWN = 3
MOST_HEADS = 4  # rows of heading: names, temperatures, units, methods
MOST_LYING = 400  # tests down the page; longer tables are upright


@dataclass(frozen=True, slots=True, kw_only=True)
class Column:
    """One column of results."""

    index: int
    title: str
    heading: Heading


@dataclass(frozen=True, slots=True, kw_only=True)
class Layout:
    """Where things stand in a table whose rows are samples or single results."""

    kind: str  # "wide", "long" or "transposed"
    meta: Mapping[str, int]
    units: Mapping[str, str]  # of descriptive columns, e.g. hours in days
    columns: tuple[Column, ...]
    unknown: tuple[tuple[int, str], ...]  # (column, title)
    titles: tuple[str, ...]
    body: Rows


def layout_of(rows: Rows, stated: Mapping[str, str]) -> Layout | None:
    """The layout of a table; ``stated`` are the columns named in case.toml. None if unknown."""
    table = [row for row in rows if any(cell.text.strip() for cell in row)]
    upright = _best_head(table, stated)
    turned = _turned(table)
    lying = _best_head(turned, stated) if turned else None
    if upright is not None and _is_long(upright[1]):
        return _layout("long", table, *upright, stated)
    if lying is not None and (upright is None or lying[2] > upright[2]):
        return _layout("transposed", turned, *lying, stated)
    if upright is None:
        return None
    return _layout("wide", table, *upright, stated)


def _layout(
    kind: str,
    rows: Rows,
    start: int,
    titles: tuple[str, ...],
    score: int,
    depth: int,
    stated: Mapping[str, str],
) -> Layout:
    _ = score
    meta: dict[str, int] = {}
    units: dict[str, str] = {}
    columns: list[Column] = []
    unknown: list[tuple[int, str]] = []
    for index, title in enumerate(titles):
        if not title:
            continue
        said = _stated(title, stated)
        if said == "ignore":
            continue
        heading = heading_of(said) if said else heading_of(title)
        name = meta_of(said) if said and heading is None else meta_of(title)
        if kind == "long" and name is not None:
            heading = None
        if heading is not None:
            columns.append(Column(index=index, title=title, heading=heading))
        elif name is not None and name not in meta:
            meta[name], units[name] = index, heading_unit(title)
        elif name is None:
            unknown.append((index, title))
    if kind == "transposed" and "id" not in meta:
        named = (i for i, title in enumerate(titles) if meta_of(title.split(" [")[0]) == "test")
        meta["id"] = next(named, 0)
        unknown = [one for one in unknown if one[0] != meta["id"]]
        columns = [one for one in columns if one.index != meta["id"]]
    return Layout(
        kind=kind,
        meta=meta,
        units=units,
        columns=tuple(columns),
        unknown=tuple(unknown),
        titles=titles,
        body=rows[start + depth :],
    )


def _stated(title: str, stated: Mapping[str, str]) -> str:
    """What case.toml says a column is; blanks and case of the title don't matter."""
    by_fold = {re.sub(r"\s+", " ", key).strip().casefold(): value for key, value in stated.items()}
    return by_fold.get(re.sub(r"\s+", " ", title).strip().casefold(), "")


def _best_head(
    rows: Rows, stated: Mapping[str, str]
) -> tuple[int, tuple[str, ...], int, int] | None:
    """(row, titles, how many are known, rows of heading) of the likeliest heading."""
    best: tuple[int, tuple[str, ...], int, int] | None = None
    for start, row in enumerate(rows[:HEAD_WITHIN]):
        titles = tuple(plain_text(cell.text) for cell in row)
        known = _known(titles, stated)
        if best is None or known > best[2]:
            best = (start, titles, known, 1)
        joined = titles
        for depth, following in enumerate(rows[start + 1 : start + MOST_HEADS], start=2):
            if not _is_heading_row(following):
                break
            joined = _joined(joined, following)
            more = _known(joined, stated)
            if more > best[2] or (more == best[2] and best[0] == start):
                best = (start, joined, more, depth)
    if best is None or best[2] < 2 * LEAST_KNOWN:
        return None
    return best


def _joined(titles: tuple[str, ...], second: tuple[Cell, ...]) -> tuple[str, ...]:
    """Headings of two rows; a cell of the upper row that spans several goes on to the right."""
    out, upper = [], ""
    for index in range(max(len(titles), len(second))):
        above = titles[index] if index < len(titles) else ""
        below = plain_text(second[index].text) if index < len(second) else ""
        upper = above or upper
        if not above and below and heading_of(below) is None and heading_of(f"{upper} {below}"):
            above = upper
        if not above:
            out.append(below)
        elif not below:
            out.append(above)
        else:
            out.append(_with_second(above, below))
    return tuple(out)


def _with_second(above: str, below: str) -> str:
    """One heading of two cells: a unit goes into brackets."""
    bare = below.strip("[]() ")
    heading = heading_of(above)
    if heading is not None and not heading.unit:
        fits = unit_factor(heading.name, bare) is not None or bare.casefold() in ("mg/l", "°f")
        both = heading_of(f"{above} {below}")
        if both is not None and both.name == heading.name and both.method:
            return f"{above} {below}"
        return f"{above} [{bare}]" if fits and bare not in ("", "-") else above
    if meta_of(f"{above} {below}") is not None:
        return f"{above} {below}"
    if meta_of(above) is not None:
        return f"{above} [{bare}]" if bare else above
    if heading_of(f"{above} {below}") is None and (heading_of(below) or meta_of(below)):
        return below
    return f"{above} {below}"


def _is_heading_row(row: tuple[Cell, ...]) -> bool:
    """A row without any number or date of its own: units, temperatures, methods."""
    texts = [plain_text(cell.text) for cell in row if cell.text.strip()]
    if not texts or any(cell.typed for cell in row):
        return False
    numbers = sum(bool(re.fullmatch(r"[<>~]?\s*[-+]?\d[\d.,/: -]*", text)) for text in texts)
    return numbers == 0


def _known(titles: tuple[str, ...], stated: Mapping[str, str]) -> int:
    """How well a heading is understood: 2 for each known title, 1 more where it has a unit."""
    score = 0
    for title in titles:
        if not title or len(title) >= 80:
            continue
        heading = heading_of(title)
        if heading is not None or meta_of(title) is not None or _stated(title, stated):
            score += 2 + bool(heading is not None and heading.unit)
    return score


def _is_long(titles: Sequence[str]) -> bool:
    metas = {meta_of(title) for title in titles if title}
    return {"test", "value"} <= metas


def _turned(rows: Rows) -> list[tuple[Cell, ...]]:
    """The table with rows and columns changed about; every cell keeps its address."""
    width = max((len(row) for row in rows), default=0)
    if width < 2 or not LEAST_KNOWN <= len(rows) <= MOST_LYING:
        return []
    blank = Cell(text="", address="")
    columns = [
        tuple(row[index] if index < len(row) else blank for row in rows) for index in range(width)
    ]
    return [column for column in columns if any(cell.text.strip() for cell in column)]


def is_no_sample(row: tuple[Cell, ...], layout: Layout) -> str:
    """Why a row of the body is no sample: a repeated heading, limits or totals; "" if it is."""
    texts = [plain_text(cell.text) for cell in row]
    if sum(a == b and bool(a) for a, b in zip(texts, layout.titles, strict=False)) >= LEAST_KNOWN:
        return "the heading again"
    filled = [text for text in texts if text]
    first = fold(filled[0]).split(" ") if filled else []
    if first and first[0] in words("not_a_sample") | {"unit", "units", "einheit", "method"}:
        return "a row of limits, totals or units, not a sample"
    return ""
