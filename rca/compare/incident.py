"""One finished case as the comparison sees it, and how it is read from ``results.json``.

Only what two cases can share is kept: what was seen, under which conditions, what was found, what
it cost, what was done. Which evidence files it rests on stays in the report.
"""

from collections.abc import Mapping
from dataclasses import dataclass, field
from datetime import date, datetime
from math import isfinite, log10
from typing import Any

from rca.base.errors import ArchiveError
from rca.compare.cost import Cost, read_cost

FORMAT = 1
TOOK_PART = 0.5  # a mechanism counts from this probability on; more likely than not
SEEN = 3.0  # odds of a sign's findings from which it counts as seen (1/3: as looked at and absent)
UNDETERMINED = "not determined"
SIDES = ("suction", "discharge", "both", "neither", "undetermined")
NUMBERS = {  # condition: (name in words, SI unit)
    "discharge_pressure_pa": ("discharge pressure", "Pa"),
    "speed_per_s": ("shaft speed", "1/s"),
    "displacement_m3": ("displacement", "m3"),
    "viscosity_40_m2_per_s": ("viscosity at 40 °C", "m2/s"),
    "oil_temperature_k": ("oil temperature", "K"),
    "oil_volume_m3": ("oil volume", "m3"),
    "altitude_m": ("altitude", "m"),
}
WORDS = {"pump_kind": "pump kind", "fluid_class": "fluid class"}


@dataclass(frozen=True, slots=True, kw_only=True)
class PastAction:
    """One action of a finished case, as its report stored it."""

    id: str
    kind: str
    text: str
    cause: str
    owner: str
    status: str
    due: date | None = None
    done: date | None = None
    proof: str = ""
    reason: str = ""
    objections: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class Incident:
    """One case.

    ``signs`` holds +1 seen, -1 looked at and absent; a sign nobody looked at is not
    in it, nor one whose findings lean neither way.
    """

    id: str
    title: str
    site: str
    asset: str
    occurred: date | None
    side: str
    knowledge: str
    program: str
    mechanisms: Mapping[str, float]
    prior: Mapping[str, float] = field(default_factory=dict)
    causes: Mapping[str, float] = field(default_factory=dict)
    signs: Mapping[str, int] = field(default_factory=dict)
    numbers: Mapping[str, float] = field(default_factory=dict)  # SI, by the words of NUMBERS
    words: Mapping[str, str] = field(default_factory=dict)
    downtime_h: float | None = None
    cost: Cost | None = None
    invented: bool = False
    actions: tuple[PastAction, ...] = ()
    source: str = ""
    sha256: str = ""
    ended: str = ""  # when the report was made, where its record says so

    @property
    def main_cause(self) -> str:
        """The likeliest cause, where it is more likely than not; else "not determined"."""
        named = {c: p for c, p in self.causes.items() if c != "unknown"}
        best = max(named, key=lambda c: named[c], default=UNDETERMINED)
        return best if named.get(best, 0.0) >= TOOK_PART else UNDETERMINED


def read_incident(plain: object, *, source: str, sha256: str = "", ended: str = "") -> Incident:
    """An incident from the plain JSON of ``results.json``.

    Raises ArchiveError naming the key, what was found and what was expected.
    """
    top = _table(plain, "results.json")
    if top.get("format") != FORMAT:
        raise ArchiveError(f"format: found {top.get('format')!r}, expected {FORMAT}")
    case, verdict, record = (_table(top.get(k), k) for k in ("case", "verdict", "record"))
    side = verdict.get("side")
    if side not in SIDES:
        raise ArchiveError(f"verdict.side: found {side!r}, expected one of {', '.join(SIDES)}")
    descriptor = case.get("descriptor") if isinstance(case.get("descriptor"), dict) else {}
    assert isinstance(descriptor, dict)
    machine = case.get("machine") if isinstance(case.get("machine"), dict) else {}
    assert isinstance(machine, dict)
    return Incident(
        id=_text(case, "case.id"),
        title=_text(case, "case.title"),
        site=_text(case, "case.site"),
        asset=_text(case, "case.asset"),
        occurred=_day(case.get("occurred"), "case.occurred"),
        side=str(side),
        knowledge=_text(record, "record.knowledge"),
        program=str(_table(record.get("versions", {}), "record.versions").get("rca", "")),
        mechanisms=_chances(verdict.get("mechanisms"), "verdict.mechanisms"),
        prior=_chances(verdict.get("prior", {}), "verdict.prior"),
        causes=_causes(top.get("causes")),
        signs=_signs(top.get("evidence")),
        numbers=_numbers(machine),
        words={
            WORDS[k]: str(v) for k, v in machine.items() if k in WORDS and isinstance(v, str) and v
        },
        downtime_h=_downtime(descriptor.get("downtime")),
        cost=read_cost(str(descriptor.get("cost") or "")),
        invented=bool(top.get("invented")) or "(invented)" in str(case.get("site", "")),
        actions=tuple(_action(a, n) for n, a in enumerate(_rows(top.get("actions"), "actions"))),
        source=source,
        sha256=sha256,
        ended=ended,
    )


def _table(plain: object, name: str) -> Mapping[str, Any]:
    if not isinstance(plain, dict):
        raise ArchiveError(f"{name}: found {_kind(plain)}, expected a table of names and values")
    return plain


def _rows(plain: object, name: str) -> list[Any]:
    if not isinstance(plain, list):
        raise ArchiveError(f"{name}: found {_kind(plain)}, expected a list")
    return plain


def _kind(plain: object) -> str:
    return "nothing" if plain is None else f"{type(plain).__name__} {str(plain)[:40]!r}"


def _text(table: Mapping[str, Any], path: str) -> str:
    value = table.get(path.rsplit(".", 1)[1])
    if not isinstance(value, str):
        raise ArchiveError(f"{path}: found {_kind(value)}, expected a text")
    return value


def _day(value: object, name: str) -> date | None:
    if value is None or value == "":
        return None
    try:
        return datetime.fromisoformat(str(value)).date()
    except ValueError as error:
        raise ArchiveError(
            f"{name}: found {value!r}, expected a date such as 2026-03-06"
        ) from error


def _chances(plain: object, name: str) -> dict[str, float]:
    table = _table(plain, name)
    for key, value in table.items():
        if not _is_number(value) or not 0 <= value <= 1:
            raise ArchiveError(f"{name}.{key}: found {value!r}, expected a probability, 0 to 1")
    return {str(k): float(v) for k, v in table.items()}


def _is_number(value: object) -> bool:
    return (
        isinstance(value, int | float) and not isinstance(value, bool) and isfinite(float(value))
    )


def _causes(plain: object) -> dict[str, float]:
    rows = [_table(row, "causes") for row in _rows(plain, "causes")]
    return _chances({str(r.get("cause")): r.get("probability") for r in rows}, "causes")


def _signs(plain: object) -> dict[str, int]:
    """Each two-state sign by the odds of all its findings together; see ``SEEN``."""
    leaning: dict[str, float] = {}
    for number, row in enumerate(_rows(plain, "evidence")):
        item = _table(row, f"evidence[{number}]")
        node = item.get("node")
        if not isinstance(node, str):
            continue
        likelihood = item.get("likelihood")
        if isinstance(likelihood, dict) and likelihood:
            if set(likelihood) != {"no", "yes"}:
                continue  # more than two states: compared as a condition, not as a sign
            yes, no = (likelihood[state] for state in ("yes", "no"))
            if not (_is_number(yes) and _is_number(no) and yes > 0 and no > 0):
                raise ArchiveError(f"evidence[{number}].likelihood: found {likelihood!r}")
            step = log10(yes / no)
        else:  # results written before likelihoods were kept
            step = -1.0 if item.get("absent") is True else 1.0
        leaning[node] = leaning.get(node, 0.0) + step
    edge = log10(SEEN)
    return {n: 1 if v > 0 else -1 for n, v in sorted(leaning.items()) if abs(v) >= edge}


def _numbers(machine: Mapping[str, Any]) -> dict[str, float]:
    return {NUMBERS[k][0]: float(v) for k, v in machine.items() if k in NUMBERS and _is_number(v)}


def _downtime(reading: object) -> float | None:
    if not isinstance(reading, dict) or not _is_number(reading.get("value")):
        return None
    return float(reading["value"]) / 3600.0


def _action(plain: object, number: int) -> PastAction:
    row = _table(plain, f"actions[{number}]")
    return PastAction(
        id=str(row.get("id", "")),
        kind=str(row.get("kind", "")),
        text=str(row.get("text", "")),
        cause=str(row.get("cause", "")),
        owner=str(row.get("owner", "")),
        status=str(row.get("status", "")),
        due=_day(row.get("due"), f"actions[{number}].due"),
        done=_day(row.get("done"), f"actions[{number}].done"),
        proof=str(row.get("proof", "")),
        reason=str(row.get("reason", "")),
        objections=tuple(map(str, row.get("objections") or ())),
    )
