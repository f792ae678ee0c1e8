"""One cell of a laboratory report: an operator, a number and a unit, or the reason why not."""

import re
from dataclasses import dataclass
from itertools import pairwise
from math import isfinite

from rca.intake.oil_properties import fold_unit, property_of, unit_factor, words

_MARKS = re.compile(r"\s*(?:[▲▼△▽↑↓*!†]+|\((?:H|L|HH|LL)\)|\b(?:H|L|HH|LL|HIGH|LOW|OK)\*?)\s*$")
_VALUE = re.compile(
    r"(?P<op><=?|>=?|≤|≥|~|≈|ca\.?|approx\.?|etwa|env\.?)?\s*"
    r"(?P<n>[-+]?\d[\d.,'\u2019 ]*(?:[eE][-+]?\d+)?)\s*(?P<unit>[^\d\s].*)?"
)
_OPERATORS = {"<": "<", "<=": "<", "≤": "<", ">": ">", ">=": ">", "≥": ">", "": "="}
_DATE = re.compile(
    r"\d{4}-\d\d?-\d\d?(?:[T ].*)?|\d\d?[./-]\d\d?[./-]\d{4}|"
    r"\d\d?[-. ][A-Za-zäé]{3,}\.?[-. ]\d{2,4}"
)
_CODE_NUMBER = r"(?:[≥>]=?\s*)?\d\d?|[*–—-]"
_CODE = re.compile(
    rf"(?:ISO\s*(?:4406)?[: ]*)?({_CODE_NUMBER})\s*[/\\-]\s*({_CODE_NUMBER})\s*[/\\-]"
    rf"\s*({_CODE_NUMBER})"
)
_TWO = re.compile(r"(?:ISO\s*(?:4406)?[: ]*)?(\d\d?)\s*/\s*(\d\d?)")
BLANKS = "\u00a0\u202f\u2007\u2009\t"


@dataclass(frozen=True, slots=True, kw_only=True)
class Parsed:
    """A result as read: operator, number as written, the cell's own unit, and what was done."""

    op: str  # "=", "<", ">" or "~"
    number: float
    unit: str
    note: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class Code:
    """An ISO 4406 code; ``scale`` is its ≥6 µm number."""

    text: str
    op: str
    scale: float
    note: str = ""


def plain_text(text: str) -> str:
    """A cell's text with special blanks and the long minus made plain."""
    for blank in BLANKS:
        text = text.replace(blank, " ")
    return text.strip().replace("\u2212", "-")


def parse_result(text: str, decimal: str) -> Parsed | str:
    """Operator, number and unit of a cell; or the reason why it can't be read.

    ``decimal`` is the file's decimal mark, "" where the file doesn't show one. "1.234" is
    refused where it may be one thousand; nothing is guessed.
    """
    plain = plain_text(text)
    if plain[:1] in "=@" and plain:
        return "a formula; formulas are never evaluated"
    if re.fullmatch(r"D\s?8(?:[.,]0)?", plain):
        return Parsed(op=">", number=8.0, unit="", note="darker than 8 (ASTM D1500)")
    notes = []
    lighter = re.fullmatch(r"L\s?(\d[.,]\d)", plain)
    if lighter is not None:
        plain = lighter[1]
        notes.append("L: between this glass and the lighter one (ASTM D1500)")
    stripped = _MARKS.sub("", plain)
    if stripped and stripped != plain:
        notes.append(f"mark {plain[len(stripped) :].strip()!r} left out")
        plain = stripped
    if re.fullmatch(r"\d[\d.,]*\s*(?:-|–|—|to|bis|à)\s*\d[\d.,]*.*", plain):
        return "a range, not a number"
    match = _VALUE.fullmatch(plain)
    if match is None:
        return "not a number"
    number = _number(match["n"].strip(), decimal)
    if isinstance(number, str):
        return number
    value, note = number
    if not isfinite(value):
        return "a number too large to be meant"
    written = (match["op"] or "").casefold()
    return Parsed(
        op=_OPERATORS.get(written, "~"),
        number=value,
        unit=(match["unit"] or "").strip(),
        note="; ".join([*notes, *([note] if note else [])]),
    )


def _number(digits: str, decimal: str) -> tuple[float, str] | str:
    """The number and a note, or why it is ambiguous."""
    body, _, exponent = digits.partition("e" if "e" in digits else "E")
    tail = f"e{exponent}" if exponent else ""
    if re.search(r"['\u2019 ]", body):
        if not re.fullmatch(r"[-+]?\d{1,3}(?:['\u2019 ]\d{3})+(?:[.,]\d+)?", body):
            return "blanks or apostrophes that are no thousands marks"
        body = re.sub(r"['\u2019 ]", "", body)
        return float(body.replace(",", ".") + tail), "thousands marks left out"
    marks = [c for c in body if c in ".,"]
    if not marks:
        return float(body + tail), ""
    if len(set(marks)) == 2:
        last = max(body.rfind("."), body.rfind(","))
        other = "," if body[last] == "." else "."
        if not re.fullmatch(rf"[-+]?\d{{1,3}}(?:\{other}\d{{3}})+\{body[last]}\d+", body):
            return "marks of thousands and decimals that don't fit together"
        joined = body.replace(other, "").replace(body[last], ".")
        return float(joined + tail), "thousands marks left out"
    mark = marks[0]
    if len(marks) > 1:
        if not re.fullmatch(rf"[-+]?\d{{1,3}}(?:\{mark}\d{{3}})+", body):
            return f"more than one {mark!r}, and no thousands"
        return float(body.replace(mark, "") + tail), "thousands marks left out"
    if mark == decimal:
        return float(body.replace(mark, ".") + tail), ""
    thousands = re.fullmatch(rf"[-+]?[1-9]\d{{0,2}}\{mark}\d{{3}}", body) is not None
    if thousands:
        return f"{body!r} may be thousands or decimals; say decimal under [[oil_reports]]"
    if not re.fullmatch(rf"[-+]?\d+\{mark}\d+", body):
        return "not a number"
    note = f"decimal mark {mark!r}, unlike the rest of the file" if decimal else ""
    return float(body.replace(mark, ".") + tail), note


def to_kept_unit(
    name: str, parsed: Parsed, header_unit: str, density: float | None
) -> tuple[float, str] | str:
    """The number in the property's unit with a note, or why the unit can't be used.

    ``density`` [kg/L] turns mg/L into mg/kg; None where the case doesn't state it.
    """
    kept = property_of(name)
    unit = parsed.unit or header_unit
    folded = fold_unit(unit)
    if not folded and kept.stated:
        return (
            f"no unit: {name} comes in more than one; say which under columns in case.toml, "
            f'e.g. "{name} [{kept.unit}]"'
        )
    if folded == "mg/l" and kept.unit == "mg/kg":
        if density is None:
            return "mg/L needs the oil's density: state density_15 under [fluid]"
        return _possible(
            kept.low, kept.high, parsed.number / density, kept.unit, "mg/L by density"
        )
    if folded in ("°f", "degf", "f") and kept.unit == "degC":
        return _possible(kept.low, kept.high, (parsed.number - 32.0) / 1.8, "degC", "from °F")
    factor = unit_factor(name, unit)
    if factor is None:
        return f"unit {unit!r} does not fit {name} [{kept.unit}]"
    note = ""
    if not folded and kept.unit not in ("-", "D1500"):
        note = f"unit not stated, {kept.unit} taken"
    elif factor != 1.0:
        note = f"from {unit}"
    return _possible(kept.low, kept.high, parsed.number * factor, kept.unit, note)


def _possible(
    low: float, high: float, value: float, unit: str, note: str
) -> tuple[float, str] | str:
    if not low <= value <= high:
        return f"{value:g} {unit} is outside what this test can give ({low:g} to {high:g}); unit?"
    return value, note


def parse_code(text: str) -> Code | str:
    """An ISO 4406 code such as 18/16/13, or why the cell is none."""
    plain = plain_text(text)
    if _DATE.fullmatch(plain):
        return "a date: a spreadsheet may have turned a code such as 12/10/8 into it"
    if re.match(r"NAS|AS\s?4059", plain, re.IGNORECASE):
        return "a class of another standard, not an ISO 4406 code"
    match = _CODE.fullmatch(plain)
    two = _TWO.fullmatch(plain)
    if match is None and two is None:
        return "not a code of ISO 4406 such as 18/16/13"
    parts = list(match.groups()) if match is not None else ["–", *two.groups()] if two else []
    parts = [
        re.sub(r"[≥>]=?\s*", lambda m: "≥" if "≥" in m[0] or "=" in m[0] else ">", p)
        for p in parts
    ]
    parts = ["–" if p in ("-", "—", "–") else p for p in parts]
    numbers = [int(p.strip("≥>")) for p in parts if p not in ("–", "*")]
    if any(n > 30 for n in numbers):
        return "scale numbers of ISO 4406 end at 28"
    if any(b > a for a, b in pairwise(numbers)):
        return "scale numbers must not rise with size; a date or a slip?"
    middle = parts[1]
    if not middle.strip("≥>").isdigit():
        return "a code without its ≥6 µm number"
    return Code(
        text="/".join(parts),
        op=">" if middle.startswith(">") else "=",
        scale=float(middle.strip("≥>")),
        note="two numbers: ≥5 and ≥15 µm by microscope" if match is None else "",
    )


def is_not_tested(text: str) -> bool:
    """Whether a cell says that nothing was tested."""
    return plain_text(text).casefold() in words("not_tested")


def is_not_detected(text: str) -> bool:
    """Whether a cell says "not detected" without a limit."""
    return plain_text(text).casefold() in words("not_detected")


def decimal_mark(texts: list[str]) -> str:
    """The decimal mark of a file from its unmistakable cells; "" where there are none."""
    counts = {".": 0, ",": 0}
    for text in texts:
        plain = plain_text(text)
        for mark in counts:
            if re.fullmatch(
                rf"[<>~]?\s*-?(?:\d+\{mark}(?:\d{{1,2}}|\d{{4,}})|0\{mark}\d+)(?!\S)", plain
            ):
                counts[mark] += 1
    if counts["."] == counts[","]:
        return ""
    return "." if counts["."] > counts[","] else ","
