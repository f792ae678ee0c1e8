"""Opening a case in a notebook, and showing what it found."""

from collections.abc import Mapping, Sequence
from pathlib import Path

from IPython.display import HTML, display
from matplotlib.figure import Figure

from rca.archive.store import Store
from rca.base.errors import CaseError
from rca.base.panel import Section
from rca.figures.notebook_page import section_html
from rca.intake.read import read_case
from rca.notebook.by_hand import run_missing, store_by_hand
from rca.notebook.investigation import Investigation


def open_investigation(
    case_dir: str, store_dir: str = "", *, after: Sequence[str] = ()
) -> Investigation:
    """The case in ``case_dir`` and the store in ``store_dir``.

    ``after`` names the stages this notebook builds on. Opened by hand, without a ``store_dir``,
    those that nobody ran on the case as it is now are run first.

    Raises CaseError with every problem of the case folder, ArchiveError where a stage of ``after``
    is not in the store.
    """
    folder = Path(case_dir).resolve()
    reading = read_case(folder)
    if reading.case is None or reading.errors:
        raise CaseError(reading.errors)
    if store_dir:
        store = Store(Path(store_dir))
    else:
        store = store_by_hand(folder, reading.case)
        run_missing(after, store, folder)
    for stage in after:
        store.read(stage)
    return Investigation(case=reading.case, problems=reading.problems, folder=folder, store=store)


def show(section: Section, figures: Mapping[str, Figure] | None = None) -> None:
    """Show the panels of a section with their figures, as the report will lay them out."""
    display(HTML(section_html(section, figures or {})))
