"""Names of oil properties as laboratories write them, and their units; the lists are data."""

import re
import tomllib
import unicodedata
from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache, lru_cache
from importlib.resources import files
from typing import Any

_BRACKETED = re.compile(r"[\[(]\s*([^\])]*?)\s*[\])]\s*$")
_METHOD = re.compile(
    r"\b(ASTM\s*D\s?\d{3,4}(?:-\d+\w*)?|D\d{3,4}|(?:DIN(?: EN)?|EN)(?: ISO)?\s*\d{4,5}(?:-\d+)?|"
    r"ISO\s*(?!4406)\d{4,5}|IEC\s*\d{5})\b",
    re.IGNORECASE,
)
_SCALE = re.compile(r"D\s?1500", re.IGNORECASE)


@dataclass(frozen=True, slots=True, kw_only=True)
class Property:
    """One property the reader knows, its unit and what a number in that unit can be."""

    name: str
    unit: str
    stated: bool
    low: float
    high: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Heading:
    """What a heading stands for; ``unit`` and ``method`` as written, empty where not said."""

    name: str  # of the property
    unit: str
    method: str


@cache
def _data() -> Mapping[str, Any]:
    text = files("rca.intake").joinpath("oil_headers.toml").read_text(encoding="utf-8")
    return tomllib.loads(text)


@cache
def _names() -> dict[str, str]:
    found = {
        fold(spelling): name
        for name, row in _data()["property"].items()
        for spelling in (name, *row.get("names", ()))
    }
    for symbol, words in _data()["element"].items():
        found |= {fold(word): symbol for word in words}
    return found


@cache
def _patterns() -> tuple[tuple[str, re.Pattern[str]], ...]:
    return tuple(
        (name, re.compile(pattern))
        for name, row in _data()["property"].items()
        for pattern in row.get("patterns", ())
    )


@cache
def _meta_names() -> dict[str, str]:
    return {
        fold(spelling): name
        for name, spellings in _data()["meta"].items()
        for spelling in (name, *spellings)
    }


@cache
def words(kind: str) -> frozenset[str]:
    """A list of words: new_oil, not_tested, not_detected or not_a_sample."""
    return frozenset(_data()["words"][kind])


@cache
def folded_words(kind: str) -> frozenset[str]:
    """The same list, folded."""
    return frozenset(fold(word) for word in words(kind))


def elements() -> tuple[str, ...]:
    """Symbols of the elements the reader knows."""
    return tuple(_data()["element"])


def known_names() -> tuple[str, ...]:
    """All names that may stand in case.toml."""
    return (*_data()["property"], *elements(), *(m for m in _data()["meta"] if m != "date"))


@lru_cache(maxsize=20000)
def fold(text: str) -> str:
    """Lower case, accents and umlauts simplified, only letters, digits and single blanks."""
    plain = unicodedata.normalize("NFKD", text.replace("ß", "ss").replace("ø", "o"))
    plain = "".join(c for c in plain if not unicodedata.combining(c)).casefold()
    plain = plain.replace("μ", "u").replace("µ", "u")
    return re.sub(r"[^a-z0-9]+", " ", plain).strip()


def _looked_up(text: str, names: Mapping[str, str]) -> str | None:
    """The entry of a folded spelling; ae, oe and ue also stand for the umlauts."""
    folded = fold(text)
    return names.get(folded) or names.get(re.sub(r"([aou])e", r"\1", folded))


@cache
def property_of(name: str) -> Property:
    """The property by its canonical name or element symbol."""
    row = _data()["property"].get(name, {"unit": "mg/kg", "low": -0.5, "high": 500000.0})
    return Property(
        name=name,
        unit=row["unit"],
        stated=bool(row.get("stated", False)),
        low=float(row.get("low", float("-inf"))),
        high=float(row.get("high", float("inf"))),
    )


@cache
def heading_of(text: str) -> Heading | None:
    """The property, unit and method a heading names, or None."""
    plain = re.sub(r"\s+", " ", text.replace("_", " ")).strip()
    method = _METHOD.search(plain)
    written = method[0] if method is not None else ""
    bare = plain.replace(written, " ").strip() if written else plain
    bare = re.sub(r"[\[(]\s*[\])]", " ", bare).strip()
    for body, unit in _splits(bare):
        name = _name(body)
        if name is not None and (not unit or unit_factor(name, unit) is not None):
            return Heading(name=name, unit=unit, method="" if _SCALE.search(written) else written)
        if name is not None and _foreign(unit):
            return Heading(name=name, unit=unit, method=written)
    remarks = re.sub(r"\s*\([^)]*\)\s*", " ", bare).strip()  # "Wassergehalt (KF) ppm"
    return heading_of(f"{remarks} {written}".strip()) if remarks not in ("", bare) else None


def _splits(text: str) -> list[tuple[str, str]]:
    """Ways to part a heading into name and unit, the likeliest first."""
    out = []
    match = _BRACKETED.search(text)
    if match is not None:
        out.append((text[: match.start()].strip(), match[1]))
        out.append((text.replace("(", " ").replace(")", " "), ""))
    out.append((text, ""))
    parts = re.split(r"[\s,;]+", text)
    for k in range(len(parts) - 1, 0, -1):
        out.append((" ".join(parts[:k]), " ".join(parts[k:])))
    for k in range(1, min(len(parts), 3)):  # "cSt 40" and "ppm Fe"
        out.append((" ".join(parts[k:]), " ".join(parts[:k])))
    return out


def _name(text: str) -> str | None:
    if text in elements():
        return text
    match = re.fullmatch(r"([A-Z][a-z]?)\W.*|.*\W\(?([A-Z][a-z]?)\)?", text)
    folded = fold(text)
    found = _looked_up(text, _names())
    if found is None:
        found = next((n for n, pattern in _patterns() if pattern.fullmatch(folded)), None)
    if found is None and match is not None:  # "Iron (Fe)", "Fe - iron"
        symbol = match[1] or match[2]
        rest = fold(text.replace(symbol, " ", 1))
        if symbol in elements() and _names().get(rest) == symbol:
            found = symbol
    return found


@cache
def meta_of(text: str) -> str | None:
    """Which descriptive column a heading stands for, or None."""
    match = _BRACKETED.search(text)
    bare = text[: match.start()] if match is not None else text
    return _looked_up(bare, _meta_names()) or _looked_up(text, _meta_names())


def heading_unit(text: str) -> str:
    """The bracketed unit of a heading, empty where there is none."""
    match = _BRACKETED.search(text.strip())
    return match[1] if match is not None else ""


def fold_unit(unit: str) -> str:
    """A written unit without blanks, in lower case, superscripts and µ made plain."""
    plain = unicodedata.normalize("NFKC", unit).replace("μ", "u").replace("µ", "u")
    return re.sub(r"\s+", "", plain).casefold().replace(",", ".").replace("mm^2", "mm2")


@lru_cache(maxsize=20000)
def unit_factor(name: str, unit: str) -> float | None:
    """Factor from a written unit to the one kept; None where the unit does not fit."""
    kept = property_of(name).unit if name not in ("h", "L") else name
    if not unit.strip():
        return 1.0
    factor = _data()["units"].get(kept, {}).get(fold_unit(unit))
    return float(factor) if factor is not None else None


def _foreign(unit: str) -> bool:
    """Units read with more than a factor, or refused with a reason of their own."""
    folded = fold_unit(unit)
    known = any(folded in table for table in _data()["units"].values())
    return known or folded in ("mg/l", "°f", "degf", "f", "abs", "a", "vol%", "%v/v")
