"""The embedded store of incidents: one DuckDB file, written whole, read as arrays or asked in SQL.

    incidents(n, id, title, site, asset, occurred, side, knowledge, main_cause, downtime_h, cost,
              currency, invented, source, sha256, ended)
    mechanisms(n, name, p, prior)   causes(n, name, p)     signs(n, name, seen)
    numbers(n, name, value)         words(n, name, value)
    actions(n, id, kind, text, cause, owner, status, due, done, proof, reason,
            objections)
    refused(source, reason)         replaced(source)

Anyone may open the file with DuckDB and ask it other questions. Values go in as data, never as
SQL, and the store reads no other file and loads no extension.
"""

import json
from collections.abc import Iterator, Mapping
from contextlib import contextmanager
from pathlib import Path
from typing import Any

import duckdb
import numpy as np
import pandas as pd

from rca.base.errors import ArchiveError
from rca.compare.gather import Gathered, Refused
from rca.compare.incident import Incident, PastAction
from rca.compare.table import IncidentTable, machine_names

_CONFIG: dict[str, str | bool | int | float | list[str]] = {
    "enable_external_access": False,
    "autoinstall_known_extensions": False,
    "autoload_known_extensions": False,
}
_TEXT = ("id", "title", "site", "asset", "side", "knowledge", "main_cause", "currency", "source")
_TYPES = {
    "n": "INTEGER",
    **dict.fromkeys(("p", "prior", "value", "downtime_h", "cost"), "DOUBLE"),
    **dict.fromkeys(("occurred", "due", "done"), "DATE"),
    "seen": "TINYINT",
    "invented": "BOOLEAN",
}
_TABLES = {
    "incidents": (
        *("n", "id", "title", "site", "asset", "occurred", "side", "knowledge", "main_cause"),
        *("downtime_h", "cost", "currency", "invented", "source", "sha256", "ended"),
    ),
    "mechanisms": ("n", "name", "p", "prior"),
    "causes": ("n", "name", "p"),
    "signs": ("n", "name", "seen"),
    "numbers": ("n", "name", "value"),
    "words": ("n", "name", "word"),
    "actions": (
        *("n", "id", "kind", "text", "cause", "owner", "status", "due", "done"),
        *("proof", "reason", "objections"),
    ),
    "refused": ("source", "reason"),
    "replaced": ("source",),
}


def write_index(path: Path, gathered: Gathered) -> None:
    """Write everything gathered into a new store at ``path``.

    Raises ArchiveError where the file is there already or can't be written.
    """
    if path.exists():
        raise ArchiveError(f"{path} is there already; a store is written whole, not added to")
    rows = _rows(gathered)
    with _opened(path, read_only=False) as store:
        for name, columns in _TABLES.items():
            kinds = ", ".join(f"{c} {_TYPES.get(c, 'VARCHAR')}" for c in columns)
            store.execute(f"CREATE TABLE {name} ({kinds})")
            if not rows[name]:
                continue
            frame = pd.DataFrame(rows[name], columns=list(columns), dtype=object)
            for column in columns:
                kind = _TYPES.get(column)
                if kind == "DOUBLE":
                    frame[column] = frame[column].astype(float)
                elif kind in {"INTEGER", "TINYINT"}:
                    frame[column] = frame[column].astype("int32")
                elif kind is None:
                    frame[column] = frame[column].astype(str)
            store.register("frame", frame)
            store.execute(f"INSERT INTO {name} SELECT * FROM frame")  # noqa: S608  own names only
            store.unregister("frame")


def read_index(path: Path) -> tuple[IncidentTable, tuple[Refused, ...], tuple[str, ...]]:
    """All incidents as arrays, what was refused, what was replaced.

    Raises ArchiveError where the store can't be read.
    """
    with _opened(path, read_only=True) as store:
        refused = store.execute("SELECT source, reason FROM refused ORDER BY source").fetchall()
        replaced = store.execute("SELECT source FROM replaced ORDER BY source").fetchall()
        return (
            _table(store),
            tuple(Refused(source=s, reason=r) for s, r in refused),
            tuple(s for (s,) in replaced),
        )


def ask(path: Path, sql: str, values: Mapping[str, object] | None = None) -> list[tuple[Any, ...]]:
    """The rows of a question in SQL, read only; values by name as ``$name``.

    Raises ArchiveError for a question the store does not understand.
    """
    with _opened(path, read_only=True) as store:
        return store.execute(sql, dict(values or {})).fetchall()


@contextmanager
def _opened(path: Path, *, read_only: bool) -> Iterator[duckdb.DuckDBPyConnection]:
    try:
        with duckdb.connect(path, read_only=read_only, config=_CONFIG) as store:
            yield store
    except duckdb.Error as error:
        raise ArchiveError(f"the store {path.name}: {error}") from error


def _rows(gathered: Gathered) -> dict[str, list[tuple[Any, ...]]]:
    rows: dict[str, list[tuple[Any, ...]]] = {name: [] for name in _TABLES}
    for n, one in enumerate(gathered.incidents):
        rows["incidents"].append(_incident_row(n, one))
        rows["mechanisms"] += [
            (n, name, p, one.prior.get(name, np.nan)) for name, p in one.mechanisms.items()
        ]
        rows["causes"] += [(n, name, p) for name, p in one.causes.items()]
        rows["signs"] += [(n, name, seen) for name, seen in one.signs.items()]
        rows["numbers"] += [(n, name, value) for name, value in one.numbers.items()]
        rows["words"] += [(n, name, word) for name, word in one.words.items()]
        rows["actions"] += [
            (
                *(n, a.id, a.kind, a.text, a.cause, a.owner, a.status, a.due, a.done),
                *(a.proof, a.reason, json.dumps(a.objections)),
            )
            for a in one.actions
        ]
    rows["refused"] = [(r.source, r.reason) for r in gathered.refused]
    rows["replaced"] = [(source,) for source in gathered.replaced]
    return rows


def _incident_row(n: int, one: Incident) -> tuple[Any, ...]:
    return (
        *(n, one.id, one.title, one.site, one.asset, one.occurred, one.side, one.knowledge),
        one.main_cause,
        np.nan if one.downtime_h is None else one.downtime_h,
        np.nan if one.cost is None else one.cost.amount,
        "" if one.cost is None else one.cost.currency,
        *(one.invented, one.source, one.sha256, one.ended),
    )


def _table(store: duckdb.DuckDBPyConnection) -> IncidentTable:
    head = store.execute(
        f"SELECT {', '.join(_TEXT)}, invented, downtime_h, cost, "  # noqa: S608  own names only
        "CAST(date_diff('day', DATE '1970-01-01', occurred) AS DOUBLE) AS days "
        "FROM incidents ORDER BY n"
    ).fetchnumpy()
    count = len(head["id"])
    texts = {name: tuple(map(str, head[name].tolist())) for name in _TEXT}
    numbers = {name: _floats(head[name]) for name in ("days", "downtime_h", "cost")}
    mechanism_names, mechanisms = _pivot(store, "mechanisms", "p", count)
    cause_names, causes = _pivot(store, "causes", "p", count)
    sign_names, signs = _pivot(store, "signs", "seen", count)
    number_names, measured = _pivot(store, "numbers", "value", count)
    word_names, words = _words(store, count)
    return IncidentTable(
        ids=texts["id"],
        titles=texts["title"],
        sites=texts["site"],
        assets=texts["asset"],
        machines=machine_names(texts["asset"], texts["site"]),
        sides=texts["side"],
        knowledge=texts["knowledge"],
        main_causes=texts["main_cause"],
        currencies=texts["currency"],
        sources=texts["source"],
        invented=np.asarray(head["invented"], dtype=bool),
        days=numbers["days"],
        downtime_h=numbers["downtime_h"],
        cost=numbers["cost"],
        mechanism_names=mechanism_names,
        mechanisms=mechanisms,
        prior=_pivot(store, "mechanisms", "prior", count)[1],
        cause_names=cause_names,
        causes=causes,
        sign_names=sign_names,
        signs=np.nan_to_num(signs).astype(np.int8),
        number_names=number_names,
        numbers=measured,
        word_names=word_names,
        words=words,
        actions=_actions(store),
    )


def _floats(column: Any) -> Any:
    """A column with its missing values as NaN."""
    return np.ma.filled(np.ma.asarray(column, dtype=float), np.nan)


def _names(store: duckdb.DuckDBPyConnection, name: str) -> tuple[str, ...]:
    found = store.execute(f"SELECT DISTINCT name FROM {name} ORDER BY name").fetchall()  # noqa: S608
    return tuple(one for (one,) in found)


def _pivot(
    store: duckdb.DuckDBPyConnection, name: str, value: str, count: int
) -> tuple[tuple[str, ...], Any]:
    """A long table as an array [incidents, names]; NaN where there is no row."""
    names = _names(store, name)
    long = store.execute(
        f"SELECT n, dense_rank() OVER (ORDER BY name) - 1 AS k, {value} AS v FROM {name}"  # noqa: S608
    ).fetchnumpy()
    out = np.full((count, len(names)), np.nan)
    out[np.asarray(long["n"], dtype=int), np.asarray(long["k"], dtype=int)] = _floats(long["v"])
    return names, out


def _words(store: duckdb.DuckDBPyConnection, count: int) -> tuple[tuple[str, ...], Any]:
    names = _names(store, "words")
    long = store.execute(
        "SELECT n, dense_rank() OVER (ORDER BY name) - 1 AS k, word FROM words"
    ).fetchall()
    wide = max((len(word) for _, _, word in long), default=1)
    out = np.full((count, len(names)), "", dtype=f"<U{wide}")
    for n, k, word in long:
        out[n, k] = word
    return names, out


def _actions(store: duckdb.DuckDBPyConnection) -> tuple[tuple[int, PastAction], ...]:
    rows = store.execute(
        "SELECT n, id, kind, text, cause, owner, status, due, done, proof, reason, "
        "objections "
        "FROM actions ORDER BY n, id"
    ).fetchall()
    names = ("id", "kind", "text", "cause", "owner", "status", "due", "done", "proof", "reason")
    return tuple(
        (
            row[0],
            PastAction(
                **dict(zip(names, row[1:-1], strict=True)), objections=tuple(json.loads(row[-1]))
            ),
        )
        for row in rows
    )
