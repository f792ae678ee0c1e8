"""What the notebook of the comparison calls: open the store of incidents, compare, keep."""

from collections.abc import Mapping
from dataclasses import dataclass
from datetime import date
from pathlib import Path

from matplotlib.figure import Figure

from rca.archive.codec import dumps, to_plain
from rca.archive.store import StageResult, Store
from rca.base.panel import Section
from rca.compare.check import Comparison, compare_cases
from rca.compare.explorer import explorer_data
from rca.compare.exposure import Watch, read_exposure
from rca.compare.figures import figures_comparison
from rca.compare.gather import Refused
from rca.compare.index import read_index
from rca.compare.panels import panels_comparison
from rca.compare.table import IncidentTable
from rca.figures.style import svg_bytes

STAGE = "compare"
EXPLORER = "explorer.json"


@dataclass(frozen=True, slots=True, kw_only=True)
class Cases:
    """The incidents of a store and where the results of their comparison go."""

    table: IncidentTable
    refused: tuple[Refused, ...]
    replaced: tuple[str, ...]
    store: Store

    def compare(
        self, *, until: str, since: str = "", exposure_file: str = "", like: str = ""
    ) -> Comparison:
        """Compare all incidents; dates as 2026-12-01.

        Raises ArchiveError for an exposure table that can't be read or an unknown case id.
        """
        given: tuple[Watch, ...] = read_exposure(Path(exposure_file)) if exposure_file else ()
        return compare_cases(
            self.table,
            until=date.fromisoformat(until),
            since=date.fromisoformat(since) if since else None,
            given=given,
            like=like,
        )

    def figures(self, check: Comparison) -> dict[str, Figure]:
        """All figures of the comparison by name."""
        return figures_comparison(self.table, check)

    def panels(self, check: Comparison, figures: Mapping[str, Figure]) -> Section:
        """The comparison in words and tables."""
        return panels_comparison(
            self.table,
            check,
            refused=self.refused,
            replaced=self.replaced,
            figures=frozenset(figures),
        )

    def keep(self, check: Comparison, section: Section, figures: Mapping[str, Figure]) -> None:
        """Store everything the pages are laid out from."""
        for name, figure in figures.items():
            self.store.write_svg(name, svg_bytes(figure))
        for table in (t for p in section.panels for t in p.tables):
            self.store.write_table(table)
        self.store.write(StageResult(stage=STAGE, check=to_plain(check), sections=(section,)))
        data = explorer_data(self.table, check)
        (self.store.folder / EXPLORER).write_text(dumps(data), encoding="utf-8")


def open_cases(index_file: str, store_dir: str) -> Cases:
    """The incidents in ``index_file``; results go to ``store_dir``.

    Raises ArchiveError where the store of incidents can't be read.
    """
    table, refused, replaced = read_index(Path(index_file))
    return Cases(table=table, refused=refused, replaced=replaced, store=Store(Path(store_dir)))
