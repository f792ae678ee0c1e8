"""Many finished cases become one comparison folder."""

import hashlib
import sys
from collections.abc import Sequence
from contextlib import nullcontext
from dataclasses import dataclass
from datetime import date
from pathlib import Path
from tempfile import TemporaryDirectory
from typing import Any

from rca.archive.codec import dumps
from rca.archive.store import Store
from rca.base.errors import ArchiveError
from rca.base.shipped import shipped_folder
from rca.compare.gather import Gathered, gather
from rca.compare.index import write_index
from rca.compare.page import Pages, write_pages
from rca.compare.reweigh import reweighed
from rca.compare.session import EXPLORER, STAGE
from rca.runner.execute import run_notebook
from rca.runner.report_folder import whole_folder
from rca.runner.warm_process import WarmProcess

INDEX = "incidents.duckdb"
RESULT = "comparison.json"
CELL_TIMEOUT_S = 1800.0


@dataclass(frozen=True, slots=True, kw_only=True)
class Asked:
    """What to compare and how."""

    places: tuple[Path, ...]
    until: date
    since: date | None = None
    exposure: Path | None = None
    like: str = ""
    reweigh: bool = False
    paper: str = "A4"


@dataclass(frozen=True, slots=True, kw_only=True)
class Compared:
    """What a finished comparison left behind."""

    folder: Path
    gathered: Gathered
    result: dict[str, Any]
    pages: Pages


class NothingUsableError(ArchiveError):
    """Not one file could be used; ``gathered`` says why for each."""

    def __init__(self, gathered: Gathered, places: Sequence[Path]) -> None:
        self.gathered = gathered
        found = "\n".join(f"  {r.source}: {r.reason}" for r in gathered.refused)
        where = ", ".join(str(p) for p in places)
        super().__init__(
            f"no usable results in {where}" + (f":\n{found}" if found else "; nothing was found")
        )


def compare(asked: Asked, out: Path) -> Compared:
    """Read, index, run the notebook, lay out the pages; ``out`` appears whole or not at all.

    Raises NothingUsableError, or another RcaError where a step fails.
    """
    gathered = gather(asked.places)
    if not gathered.incidents:
        raise NothingUsableError(gathered, asked.places)
    if asked.reweigh:
        gathered = reweighed(gathered)
    with (
        whole_folder(out, mark=RESULT) as building,
        TemporaryDirectory(prefix="rca-") as scratch,
        nullcontext() if sys.platform == "win32" else WarmProcess() as warm,
    ):
        write_index(building / INDEX, gathered)
        book = shipped_folder("notebooks") / "compare" / "comparison.ipynb"
        run_notebook(
            book,
            {
                "index_file": str(building / INDEX),
                "store_dir": str(building),
                "until": asked.until.isoformat(),
                "since": asked.since.isoformat() if asked.since else "",
                "exposure_file": str(asked.exposure.resolve()) if asked.exposure else "",
                "like": asked.like,
            },
            output=building / "notebooks" / book.name,
            folder=Path(scratch),
            warm=warm,
            seed=0,
            cell_timeout_s=CELL_TIMEOUT_S,
        )
        stage = Store(building).read(STAGE)
        result = {"format": 1, "comparison": stage.check, "gathered": _told(gathered)}
        text = dumps(result)
        (building / RESULT).write_text(text, encoding="utf-8")
        pages = write_pages(
            building,
            stage.sections[0],
            explorer=(building / EXPLORER).read_text(encoding="utf-8"),
            digest=hashlib.sha256(text.encode()).hexdigest(),
            until=asked.until,
            paper=asked.paper,
        )
    return Compared(folder=out, gathered=gathered, result=result, pages=pages)


def _told(gathered: Gathered) -> dict[str, Any]:
    return {
        "cases": len(gathered.incidents),
        "refused": [{"source": r.source, "reason": r.reason} for r in gathered.refused],
        "replaced": list(gathered.replaced),
        "not_reweighed": list(gathered.not_reweighed),
    }
