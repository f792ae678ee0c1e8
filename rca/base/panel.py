"""A panel: one check as it is laid out on the page and shown in a notebook.

Panels hold final words and numbers with units, so that a report only lays them out and a site's
own notebook can add panels of its own. Text is plain (no markup); the page escapes it.
"""

from dataclasses import dataclass, field


@dataclass(frozen=True, slots=True, kw_only=True)
class Column:
    """One column of a table; ``numeric`` columns are set flush right with tabular figures."""

    title: str
    unit: str = ""
    numeric: bool = False


@dataclass(frozen=True, slots=True, kw_only=True)
class Table:
    """A table; the page shows at most ``shown`` rows, the CSV beside the report holds them all."""

    name: str  # file stem of the CSV, lower case with hyphens
    title: str
    columns: tuple[Column, ...]
    rows: tuple[tuple[str, ...], ...]
    note: str = ""  # where a limit is applied, the rule is stated here
    shown: int = 12
    marks: tuple[str, ...] = ()  # per row: "", "beyond", "near", "set aside"; shown as a word too


@dataclass(frozen=True, slots=True, kw_only=True)
class FigureRef:
    """A figure by its file stem; ``alt`` states the finding, ``caption`` names what is drawn."""

    name: str
    caption: str
    alt: str
    width: str = "text"  # "text" or "half"


@dataclass(frozen=True, slots=True, kw_only=True)
class Card:
    """Credibility of a computed check; each factor is a level 0..4 with one sentence.

    After the factors of NASA-STD-7009 (names from memory).
    """

    verification: tuple[int, str]
    validation: tuple[int, str]
    input_pedigree: tuple[int, str]
    range_of_use: tuple[int, str]
    uncertainty: tuple[int, str]
    robustness: tuple[int, str]


@dataclass(frozen=True, slots=True, kw_only=True)
class Panel:
    """One question, its answer, and what the answer rests on."""

    key: str  # e.g. "suction.budget"
    title: str
    question: str
    answer: str  # one or two sentences, numbers with units
    status: str = ""  # "supported", "not excluded", "excluded by physics", "beyond", "within", ...
    paragraphs: tuple[str, ...] = ()
    tables: tuple[Table, ...] = ()
    figures: tuple[FigureRef, ...] = ()
    limits: tuple[str, ...] = ()  # range, which way it errs, sources
    card: Card | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class Section:
    """What one notebook contributes to the report: its panels, in order."""

    stage: str  # "oil", "records", "suction", ...
    title: str
    panels: tuple[Panel, ...] = field(default_factory=tuple)
