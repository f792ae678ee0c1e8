"""How each input file was read, for the run record: parser, encoding, separators, rows, units."""

import platform
from importlib.metadata import version
from pathlib import Path
from typing import Any

from rca.archive.codec import to_plain
from rca.archive.store import Store
from rca.case.model import Case
from rca.intake.tables import TableError, read_table

LARGEST = 4 * 2**20  # [bytes]; longer tables are records, told by their own notebook
TABLES = (".csv", ".xlsx", ".txt", ".tsv")


def readings(case: Case, case_dir: Path, store: Store) -> dict[str, dict[str, Any]]:
    """For each input file that is a table, a record or the descriptor: how it was read."""
    found: dict[str, dict[str, Any]] = {
        "case.toml": {
            "parser": f"tomllib of Python {platform.python_version()}",
            "encoding": "utf-8",
            "decimal": ".",
        }
    }
    for file in case.files:
        if file.size <= LARGEST and Path(file.file).suffix.lower() in TABLES:
            found[file.file] = _table(case_dir, file.file)
    rows = _record_rows(store)
    for record in case.records:
        found[record.file] = {
            "parser": f"polars {version('polars')}",
            "time": to_plain(record.time),
            "channels": [to_plain(channel) for channel in record.channels],
            **rows.get(record.file.removeprefix("pressure/"), {}),
        }
    for report in case.oil_reports:
        told = found.setdefault(report.file, {})
        told |= {
            "columns": dict(report.columns),
            "decimal": report.decimal or "decided from the whole file",
            "day_first": report.day_first,
            "zone": report.zone,
        }
    return found


def _table(case_dir: Path, name: str) -> dict[str, Any]:
    try:
        table = read_table(case_dir / name, name)
    except TableError as error:
        return {"parser": "none", "why": error.problem.found}
    workbook = table.encoding == "xlsx"
    return {
        "parser": f"openpyxl {version('openpyxl')}" if workbook else "csv",
        "encoding": table.encoding,
        "delimiter": table.delimiter,
        "rows_read": len(table.rows),
    }


def _record_rows(store: Store) -> dict[str, dict[str, Any]]:
    """Samples read and left out, as the records notebook told them."""
    if not store.has("records"):
        return {}
    tables = [t for s in store.read("records").sections for p in s.panels for t in p.tables]
    rows = [row for t in tables if t.name == "records-files" for row in t.rows]
    return {row[0]: {"rows_read": row[1], "cells_dropped": row[6]} for row in rows}
