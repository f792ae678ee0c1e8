"""Every number and word of ``results.json`` by a stable name, with its tolerance.

A quantity is named by its path, ``verdict/sides/suction``. Members of a list are named by their
own key (``evidence/air.released/suction_ratio``), so that one more item moves no other name.
"""

import tomllib
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from fnmatch import fnmatchcase
from functools import cache
from importlib.resources import files
from typing import Any

Leaf = str | int | float | bool | None
APART = ("record", "format", "units")  # compared as reasons, not as quantities
KEYS = ("key", "id", "name", "cause", "without", "group", "quantity", "property", "file")
HEADLINE = (
    "verdict/sides/*",
    "verdict/mechanisms/*",
    "verdict/robustness/*",
    "causes/*/probability",
    "evidence/*/likelihood_ratio",
    "evidence/*/suction_ratio",
    "evidence/*/discharge_ratio",
)


@dataclass(frozen=True, slots=True, kw_only=True)
class Tolerance:
    """One rule of ``tolerances.toml``."""

    name: str
    paths: tuple[str, ...]
    rtol: float  # [-] of the issued value
    atol: float  # in the quantity's own unit
    basis: str

    def width(self, issued: float) -> float:
        """How far a recomputed value may lie from the issued one."""
        return self.atol + self.rtol * abs(issued)


@cache
def tolerances() -> tuple[Tolerance, ...]:
    """The shipped rules, in order; the last one fits everything."""
    text = files("rca.archive").joinpath("tolerances.toml").read_text(encoding="utf-8")
    return tuple(
        Tolerance(
            name=row["name"],
            paths=tuple(row["paths"]),
            rtol=float(row["rtol"]),
            atol=float(row["atol"]),
            basis=row["basis"],
        )
        for row in tomllib.loads(text)["rule"]
    )


def tolerance_of(name: str) -> Tolerance:
    """The first rule that fits a quantity."""
    return next(
        rule for rule in tolerances() if any(fnmatchcase(name, path) for path in rule.paths)
    )


def quantities(results: Mapping[str, Any]) -> dict[str, Leaf]:
    """All leaves of the results but the run record, by name, in document order."""
    plain = {key: value for key, value in results.items() if key not in APART}
    return dict(_leaves(plain, ""))


def headline(results: Mapping[str, Any]) -> list[dict[str, Any]]:
    """The numbers the verdict rests on, with exact value, unit and tolerance."""
    rows = []
    for name, value in quantities(results).items():
        if type(value) is not float or not any(fnmatchcase(name, p) for p in HEADLINE):
            continue
        rule = tolerance_of(name)
        rows.append(
            {
                "id": name,
                "value": value,
                "hex": value.hex(),
                "unit": "1",
                "rule": rule.name,
                "tolerance": rule.width(value),
            }
        )
    return rows


def _leaves(node: Any, name: str) -> Iterator[tuple[str, Leaf]]:
    if isinstance(node, Mapping):
        for key, value in node.items():
            yield from _leaves(value, _joined(name, str(key)))
        if not node:
            yield name, None
    elif isinstance(node, list | tuple):
        for label, value in zip(_labels(node), node, strict=True):
            yield from _leaves(value, _joined(name, label))
    else:
        yield name, node


def _joined(name: str, part: str) -> str:
    return f"{name}/{part}" if name else part


def _labels(rows: Sequence[Any]) -> list[str]:
    """Names of a list's members: a key that tells them apart, else their places."""
    for key in KEYS:
        if rows and all(isinstance(r, Mapping) and isinstance(r.get(key), str) for r in rows):
            names = [row[key] for row in rows]
            if len(set(names)) == len(names):
                return names
    return [str(index) for index in range(len(rows))]
