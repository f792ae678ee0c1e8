"""The store: one folder in which each notebook leaves its results for the next and the report.

STORE/
  stages/<stage>.json    typed result, evidence, panels of one notebook
  figures/*.svg          one file a figure
  tables/*.csv           one file a table, all rows
  series/aligned.npz     the slow records on one time base
"""

import csv
import io
import json
import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any, Protocol

import numpy as np

from rca.archive.codec import dumps, from_plain, to_plain
from rca.base.errors import ArchiveError
from rca.base.panel import Section, Table
from rca.base.source import Source
from rca.case.model import Gap
from rca.case.series import AlignedRecord, Series
from rca.evidence.item import EvidenceItem, NotAssessed

_NAME = re.compile(r"[a-z0-9][a-z0-9._-]*")
_FORMULA = ("=", "+", "-", "@", "\t", "\r")


class Drawing(Protocol):
    """Anything that can write itself as a picture: a Matplotlib figure."""

    def savefig(self, fname: Any, **kwargs: Any) -> None:
        """Write the picture to ``fname``."""


@dataclass(frozen=True, slots=True, kw_only=True)
class StageResult:
    """What one notebook found, read back from the store."""

    stage: str
    check: Any  # plain JSON of the typed check result
    evidence: tuple[EvidenceItem, ...] = ()
    not_assessed: tuple[NotAssessed, ...] = ()
    gaps: tuple[Gap, ...] = ()
    sections: tuple[Section, ...] = ()


@dataclass(frozen=True, slots=True)
class Store:
    """A store folder; every write is whole or not at all."""

    folder: Path

    def write(self, stage: StageResult) -> Path:
        """Store one stage."""
        return self._put(f"stages/{_checked(stage.stage)}.json", dumps(to_plain(stage)).encode())

    def has(self, stage: str) -> bool:
        """Whether that stage was stored."""
        return self.written_ns(stage) is not None

    def written_ns(self, stage: str) -> int | None:
        """When that stage was stored [ns since 1970]; None where it was not."""
        path = self.folder / "stages" / f"{_checked(stage)}.json"
        return path.stat().st_mtime_ns if path.is_file() else None

    def read(self, stage: str) -> StageResult:
        """One stage, typed but for its check (see ``from_plain``).

        Raises ArchiveError where it is missing or has another shape.
        """
        path = self.folder / "stages" / f"{_checked(stage)}.json"
        try:
            plain = json.loads(path.read_text(encoding="utf-8"))
        except FileNotFoundError as error:
            raise ArchiveError(
                f"the results of the notebook {stage!r} are not in the store {self.folder}. "
                "Run that notebook first."
            ) from error
        except ValueError as error:
            raise ArchiveError(f"{path} is not JSON ({error}). Run the notebook again.") from error
        return from_plain(StageResult, plain)

    def stages(self) -> tuple[str, ...]:
        """Names of the stored stages, sorted."""
        return tuple(sorted(p.stem for p in (self.folder / "stages").glob("*.json")))

    def write_svg(self, name: str, svg: bytes) -> Path:
        """Store one figure."""
        return self._put(f"figures/{_checked(name)}.svg", svg)

    def write_table(self, table: Table) -> Path:
        """Store all rows of a table as CSV, safe to open in a spreadsheet."""
        out = io.StringIO()
        writer = csv.writer(out, lineterminator="\n")
        writer.writerow([f"{c.title} [{c.unit}]" if c.unit else c.title for c in table.columns])
        writer.writerows([_inert(cell) for cell in row] for row in table.rows)
        return self._put(f"tables/{_checked(table.name)}.csv", out.getvalue().encode())

    def write_aligned(self, record: AlignedRecord) -> Path:
        """Store the slow records on their common time base."""
        arrays: dict[str, Any] = {"time_s": record.time_s}
        heads: list[dict[str, Any]] = []
        for number, series in enumerate(record.series.values()):
            for part in ("mean", "low", "high"):
                arrays[f"{number}.{part}"] = getattr(series, part)
            heads.append(
                {
                    "quantity": series.quantity,
                    "unit": series.unit,
                    "source": to_plain(series.source),
                    "usable": series.usable,
                    "remark": series.remark,
                }
            )
        arrays["head"] = np.frombuffer(
            dumps({"bin_s": record.bin_s, "series": heads}).encode(), dtype=np.uint8
        )
        out = io.BytesIO()
        np.savez_compressed(out, **arrays)
        return self._put("series/aligned.npz", out.getvalue())

    def read_aligned(self) -> AlignedRecord | None:
        """The slow records, or None where no record was read."""
        path = self.folder / "series" / "aligned.npz"
        if not path.is_file():
            return None
        with np.load(path, allow_pickle=False) as arrays:
            head = json.loads(arrays["head"].tobytes().decode())
            series = {
                one["quantity"]: Series(
                    quantity=one["quantity"],
                    unit=one["unit"],
                    mean=arrays[f"{number}.mean"],
                    low=arrays[f"{number}.low"],
                    high=arrays[f"{number}.high"],
                    source=from_plain(Source, one["source"]),
                    usable=one["usable"],
                    remark=one["remark"],
                )
                for number, one in enumerate(head["series"])
            }
            return AlignedRecord(time_s=arrays["time_s"], bin_s=head["bin_s"], series=series)

    def _put(self, relative: str, content: bytes) -> Path:
        path = self.folder / relative
        path.parent.mkdir(parents=True, exist_ok=True)
        partial = path.with_name(path.name + ".partial")
        partial.write_bytes(content)
        partial.replace(path)
        return path


def split_items(
    items: Sequence[EvidenceItem | NotAssessed],
) -> tuple[tuple[EvidenceItem, ...], tuple[NotAssessed, ...]]:
    """Items that weigh, and nodes nobody could look at."""
    return (
        tuple(i for i in items if isinstance(i, EvidenceItem)),
        tuple(i for i in items if isinstance(i, NotAssessed)),
    )


def tables_of(sections: Sequence[Section]) -> Mapping[str, Table]:
    """Every table of the sections by name.

    Raises ArchiveError where two tables share a name.
    """
    found: dict[str, Table] = {}
    for table in (t for s in sections for p in s.panels for t in p.tables):
        if table.name in found:
            raise ArchiveError(f"two tables are both named {table.name!r}; rename one")
        found[table.name] = table
    return found


def _checked(name: str) -> str:
    if not _NAME.fullmatch(name):
        raise ArchiveError(
            f"{name!r} can't name a stored file; use lower-case letters, digits, dots and hyphens"
        )
    return name


def _inert(cell: str) -> str:
    """A cell a spreadsheet will not take for a formula; numbers stay as they are."""
    if cell.startswith(_FORMULA) and not _is_number(cell):
        return "'" + cell
    return cell


def _is_number(cell: str) -> bool:
    try:
        float(cell.replace("\u2212", "-"))
    except ValueError:
        return False
    return True
