"""Quantity by quantity: issued against recomputed, each with its class."""

import math
import re
from collections.abc import Mapping
from typing import Any

from rca.archive.quantities import Leaf, quantities, tolerance_of
from rca.rerun.model import Difference, RunClass

_NUMBER = re.compile(r"[+\-−]?\d+(?:\.\d+)?(?:e[+-]?\d+)?")
VERDICT = ("verdict/side",)
RANKED = ("causes", "verdict/next_tests")
LAST_PLACE = 1.000001


def compare(
    issued: Mapping[str, Any], recomputed: Mapping[str, Any]
) -> tuple[tuple[Difference, ...], dict[str, int]]:
    """All differences, worst first, and how many quantities fell into each class."""
    before, after = quantities(issued), quantities(recomputed)
    found = [_missing(name, before, after) for name in sorted(set(before) ^ set(after))]
    counts = {one.name: 0 for one in RunClass}
    for name in before:
        if name not in after:
            continue
        difference = compared(name, before[name], after[name])
        if difference is None:
            counts[RunClass.IDENTICAL.name] += 1
        else:
            found.append(difference)
    found += _rankings(issued, recomputed)
    for one in found:
        counts[one.run_class.name] += 1
    order = sorted(found, key=lambda d: (-d.run_class, -(d.ratio or 0.0), d.quantity))
    return tuple(order), counts


def compared(name: str, issued: Leaf, recomputed: Leaf) -> Difference | None:
    """The difference of one quantity; None where it is the same to the last bit."""
    if type(issued) is type(recomputed) and issued == recomputed:
        return None
    if _is_number(issued) and _is_number(recomputed):
        return _numbers(name, issued, recomputed)
    if name in VERDICT:
        found = RunClass.VERDICT
    elif isinstance(issued, str) and isinstance(recomputed, str):
        found = _texts(issued, recomputed)
    else:
        found = RunClass.BAND  # a flag, or a value where there was none
    return Difference(quantity=name, issued=issued, recomputed=recomputed, run_class=found)


def _numbers(name: str, issued: Any, recomputed: Any) -> Difference | None:
    if float(issued) == float(recomputed):
        return None
    whole = type(issued) is int and type(recomputed) is int
    rule = tolerance_of(name)
    width = 0.0 if whole else rule.width(float(issued))
    distance = abs(float(recomputed) - float(issued))
    within = distance <= width
    return Difference(
        quantity=name,
        issued=issued,
        recomputed=recomputed,
        run_class=RunClass.WITHIN if within else RunClass.OUTSIDE,
        rule="count" if whole else rule.name,
        tolerance=width,
        ratio=distance / width if width else math.inf,
    )


def _texts(issued: str, recomputed: str) -> RunClass:
    """A text that differs by one in the last printed place of a number has not changed."""
    if _NUMBER.sub("#", issued) != _NUMBER.sub("#", recomputed):
        return RunClass.BAND
    pairs = zip(_NUMBER.findall(issued), _NUMBER.findall(recomputed), strict=True)
    if all(_printed_alike(a, b) for a, b in pairs):
        return RunClass.WITHIN
    return RunClass.OUTSIDE


def _printed_alike(issued: str, recomputed: str) -> bool:
    places = max(len(x.partition(".")[2].split("e")[0]) for x in (issued, recomputed))
    a, b = (float(x.replace("−", "-")) for x in (issued, recomputed))
    scale = 10.0 ** math.floor(math.log10(abs(a))) if "e" in issued and a else 1.0
    return abs(a - b) <= LAST_PLACE * 10.0**-places * scale


def _missing(name: str, before: Mapping[str, Leaf], after: Mapping[str, Leaf]) -> Difference:
    gone = name in before
    return Difference(
        quantity=name,
        issued=before[name] if gone else "not there",
        recomputed="not there" if gone else after[name],
        run_class=RunClass.NOT_COMPARABLE,
    )


def _rankings(issued: Mapping[str, Any], recomputed: Mapping[str, Any]) -> list[Difference]:
    """Order of causes and of next tests; another leading cause is another answer."""
    found = []
    for path in RANKED:
        before, after = _ranking(issued, path), _ranking(recomputed, path)
        if before == after or set(before) != set(after):
            continue
        leading = path == "causes" and before[:1] != after[:1]
        found.append(
            Difference(
                quantity=f"{path} (order)",
                issued=", ".join(before),
                recomputed=", ".join(after),
                run_class=RunClass.VERDICT if leading else RunClass.BAND,
            )
        )
    return found


def _ranking(results: Mapping[str, Any], path: str) -> list[str]:
    node: Any = results
    for part in path.split("/"):
        node = node.get(part, []) if isinstance(node, Mapping) else []
    return [str(row.get("cause") or row.get("name")) for row in node if isinstance(row, Mapping)]


def _is_number(value: Leaf) -> bool:
    return isinstance(value, int | float) and not isinstance(value, bool)
