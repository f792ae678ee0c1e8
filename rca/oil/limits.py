"""Limits of oil properties: shipped in one data file, overruled by a site's own."""

import tomllib
from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache
from importlib.resources import files

from rca.base.errors import KnowledgeError
from rca.case.oil import OilValue

DIRECTIONS = {
    "above": "absolute",
    "below": "absolute",
    "rise": "change from new oil",
    "fall": "change from new oil",
    "rise %": "change from new oil",
    "fall %": "change from new oil",
}
KEYS = {
    "property",
    "direction",
    "value",
    "unit",
    "source",
    "edition",
    "flag",
    "inclusive",
    "fluids",
}


@dataclass(frozen=True, slots=True, kw_only=True)
class Limit:
    """One limit; ``inclusive`` means it counts as reached at the value itself."""

    property: str
    direction: str  # a key of DIRECTIONS
    value: float
    unit: str
    source: str
    edition: str
    flag: str
    inclusive: bool = False
    fluids: tuple[str, ...] = ()  # classes of fluid it holds for; empty for all

    def basis(self) -> str:
        """Absolute, or change from new oil."""
        return DIRECTIONS[self.direction]

    def words(self) -> str:
        """The limit as it is printed, e.g. "rise over 15 % from new"."""
        beyond = "of" if self.inclusive else "over"
        unit = "%" if self.direction.endswith("%") else self.unit
        number = f"{self.value:g} {unit}".strip()
        if self.direction in ("above", "below"):
            return f"{self.direction} {number}"
        more = " or more" if self.inclusive else ""
        return f"{self.direction.split()[0]} {beyond} {number}{more} from new"

    def line(self, new: float | None) -> float | None:
        """Where the limit lies on the property's axis; None where that needs a new-oil value."""
        if self.basis() == "absolute":
            return self.value
        if new is None:
            return None
        step = self.value * (abs(new) / 100.0 if self.direction.endswith("%") else 1.0)
        return new + (step if self.direction.startswith("rise") else -step)

    def crossed(self, value: OilValue, new: float | None) -> bool | None:
        """Whether a result passes the limit; None where that can't be told.

        A result "<" 5 is surely below 5, ">" 8 surely above 8; what a limit of detection leaves
        open stays open.
        """
        line = self.line(new)
        if line is None:
            return None
        rising = self.direction in ("above", "rise", "rise %")
        slack = 1e-9 * max(abs(line), 1.0)  # 46.1 * 1.15 is not held exactly
        x = value.value
        if value.op in ("=", "~"):
            gap = x - line if rising else line - x
            return gap >= -slack if self.inclusive else gap > slack
        open_side_up = value.op == ">"
        if open_side_up is rising:
            past = x >= line if rising else x <= line
            return True if past else None
        held = x <= line if rising else x >= line
        return False if held else None


@cache
def shipped_limits() -> tuple[Limit, ...]:
    """The limits that ship with the program."""
    text = files("rca.oil").joinpath("limits.toml").read_text(encoding="utf-8")
    return read_limits(text, "limits.toml")


def read_limits(text: str, name: str) -> tuple[Limit, ...]:
    """Limits from TOML text with [[limit]] tables.

    Raises KnowledgeError that names the entry, what is wrong with it and what is expected.
    """
    try:
        rows = tomllib.loads(text).get("limit", [])
    except tomllib.TOMLDecodeError as error:
        raise KnowledgeError(f"{name}: {error}") from error
    return tuple(_limit(row, f"{name}: limit {k}") for k, row in enumerate(rows, start=1))


def merged(shipped: tuple[Limit, ...], site: tuple[Limit, ...]) -> tuple[Limit, ...]:
    """Shipped limits with a site's own in place of those for the same property and direction."""
    own = {(one.property, one.direction) for one in site}
    return tuple(one for one in shipped if (one.property, one.direction) not in own) + site


def limits_for(limits: tuple[Limit, ...], name: str, fluid: str | None) -> tuple[Limit, ...]:
    """The limits of one property that hold for a class of fluid (None: class not stated)."""
    return tuple(
        one
        for one in limits
        if one.property == name and (not one.fluids or fluid is None or fluid in one.fluids)
    )


def _limit(row: Mapping[str, object], place: str) -> Limit:
    unknown = set(row) - KEYS
    if unknown:
        raise KnowledgeError(f"{place}: unknown keys {sorted(unknown)}; known: {sorted(KEYS)}")
    direction, value = str(row.get("direction", "")), row.get("value")
    if direction not in DIRECTIONS:
        raise KnowledgeError(f"{place}: direction {direction!r}; expected one of {[*DIRECTIONS]}")
    if isinstance(value, bool) or not isinstance(value, int | float):
        raise KnowledgeError(f"{place}: value {value!r}; expected a number")
    for key in ("property", "source", "flag"):
        if not str(row.get(key, "")).strip():
            raise KnowledgeError(f"{place}: key {key!r} is missing; a limit needs its source")
    fluids = row.get("fluids", [])
    return Limit(
        property=str(row["property"]),
        direction=direction,
        value=float(value),
        unit=str(row.get("unit", "")),
        source=str(row["source"]),
        edition=str(row.get("edition", "")),
        flag=str(row["flag"]),
        inclusive=bool(row.get("inclusive", False)),
        fluids=tuple(str(f) for f in fluids) if isinstance(fluids, list) else (),
    )
