"""Everything a notebook of an investigation imports.

    from rca.notebook import open_investigation

    inv = open_investigation(case_dir, store_dir)
    check = inv.check_oil()
    ...
    inv.keep("oil", ...)

A notebook opened by hand in JupyterLab needs no store: earlier stages it depends on are then
computed on the spot and kept in a temporary folder, whose path ``open_investigation`` shows.
"""

import tempfile
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from pathlib import Path
from typing import TypeVar

from IPython.display import HTML, display
from matplotlib.figure import Figure

from rca.archive.codec import from_plain, to_plain
from rca.archive.store import StageResult, Store, split_items
from rca.base.panel import Section
from rca.case.model import Case, Gap
from rca.evidence.item import EvidenceItem, NotAssessed
from rca.figures.notebook_page import section_html
from rca.figures.style import svg_bytes
from rca.intake.read import load_case

T = TypeVar("T")

__all__ = ["Investigation", "open_investigation", "show"]


@dataclass(frozen=True, slots=True)
class Investigation:
    """One case and the store its notebooks fill."""

    case: Case
    folder: Path
    store: Store
    figures: dict[str, Figure] = field(default_factory=dict)

    def keep(
        self,
        stage: str,
        *,
        check: object,
        section: Section | None = None,
        figures: Mapping[str, Figure] | None = None,
        evidence: Sequence[EvidenceItem | NotAssessed] = (),
        gaps: Sequence[Gap] = (),
    ) -> None:
        """Store what a notebook found, for the next notebooks and the report."""
        weighed, not_assessed = split_items(evidence)
        for name, figure in (figures or {}).items():
            self.store.write_svg(name, svg_bytes(figure))
        for table in (t for p in (section.panels if section else ()) for t in p.tables):
            self.store.write_table(table)
        self.store.write(
            StageResult(
                stage=stage,
                check=to_plain(check),
                evidence=weighed,
                not_assessed=not_assessed,
                gaps=tuple(gaps),
                sections=(section,) if section else (),
            )
        )

    def result(self, stage: str, kind: type[T]) -> T:
        """The typed result an earlier notebook stored.

        Raises ArchiveError where that notebook has not run yet.
        """
        return from_plain(kind, self.store.read(stage).check)

    def evidence(self) -> tuple[tuple[EvidenceItem, ...], tuple[NotAssessed, ...]]:
        """All items stored so far, in a fixed order: those that weigh, and those nobody saw."""
        stages = [self.store.read(stage) for stage in self.store.stages()]
        items = sorted((i for s in stages for i in s.evidence), key=lambda i: (i.group, i.key))
        missing = sorted((n for s in stages for n in s.not_assessed), key=lambda n: n.key)
        return tuple(items), tuple(missing)


def open_investigation(case_dir: str, store_dir: str = "") -> Investigation:
    """The case in ``case_dir`` and the store in ``store_dir`` (a temporary folder where empty).

    Raises CaseError with every problem of the case folder.
    """
    folder = Path(case_dir).resolve()
    store = Path(store_dir) if store_dir else Path(tempfile.mkdtemp(prefix="rca-store-"))
    return Investigation(case=load_case(folder), folder=folder, store=Store(store))


def show(section: Section, figures: Mapping[str, Figure] | None = None) -> None:
    """Show the panels of a section with their figures, as the report will lay them out."""
    display(HTML(section_html(section, figures or {})))
