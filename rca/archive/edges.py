"""Values that lie near a threshold of the verdict, named when the report is issued.

A value at an edge can change the side or a word by a change nobody would call one. The auditor
should hear that from the report, not find it.
"""

import math
from collections.abc import Iterator, Mapping
from typing import Any

from rca.archive.quantities import tolerance_of
from rca.verdict.explain import CHANCE, SCALE
from rca.verdict.side import CLEAR, HELD, NEITHER, OPEN, OTHER

NEAR = 3.0  # tolerances
SIDES = ("suction", "discharge")
TOUCHED = ("vapour cavitation", "gaseous cavitation", "aeration", "micro-dieseling")


def edges(results: Mapping[str, Any]) -> list[dict[str, Any]]:
    """For each value of the verdict the threshold it lies nearest to; for items where near.

    ``near`` says it lies within three tolerances of it; ``inside_band`` that the threshold lies
    within the 5 to 95 % band over the bounds of the knowledge's numbers.
    """
    verdict = results["verdict"]
    bands = verdict.get("robustness", {})
    found = [_edge(*one, bands) for one in _thresholds(results)]
    nearest: dict[str, dict[str, Any]] = {}
    for edge in sorted(found, key=lambda e: abs(e["distance"])):
        nearest.setdefault(edge["quantity"], edge)
    told = [e for e in nearest.values() if e["near"] or e["quantity"].startswith("verdict/")]
    return sorted(told, key=lambda e: (e["tolerances"], e["quantity"]))


def _thresholds(results: Mapping[str, Any]) -> Iterator[tuple[str, float, float, str]]:
    """Quantity, value, limit and what the limit decides."""
    sides = results["verdict"]["sides"]
    for name in SIDES:
        for limit, what in (
            (HELD, "held"),
            (OPEN, "left out of 'both'"),
            (CLEAR, "not involved"),
        ):
            yield f"verdict/sides/{name}", sides[name], limit, f"whether the side is {what}"
        for limit, _ in CHANCE[:-1]:
            yield f"verdict/sides/{name}", sides[name], limit, "the word for the probability"
    yield "verdict/sides/neither", sides["neither"], NEITHER, "whether neither side is held"
    for name, value in results["verdict"]["mechanisms"].items():
        if name not in TOUCHED:
            what = "whether another mechanism makes 'neither'"
            yield f"verdict/mechanisms/{name}", value, OTHER, what
    for item in results["evidence"]:
        ratio = item.get("likelihood_ratio")
        if "key" in item and isinstance(ratio, float) and ratio > 0:
            for limit, _ in SCALE:
                name = f"evidence/{item['key']}/likelihood_ratio"
                yield name, ratio, limit, "the word for the support"


def _edge(
    quantity: str, value: float, limit: float, decides: str, bands: Mapping[str, Any]
) -> dict[str, Any]:
    tolerance = tolerance_of(quantity).width(value)
    distance = value - limit
    band = bands.get(quantity.rsplit("/", 1)[-1]) if quantity.startswith("verdict/sides") else None
    return {
        "quantity": quantity,
        "value": value,
        "limit": limit,
        "decides": decides,
        "distance": distance,
        "distance_log10_odds": _log_odds(value) - _log_odds(limit) if limit < 1 else None,
        "tolerances": abs(distance) / tolerance,
        "near": abs(distance) <= NEAR * tolerance,
        "inside_band": bool(band and band["p05"] <= limit <= band["p95"]),
    }


def _log_odds(p: float) -> float:
    inside = min(max(p, 1e-15), 1 - 1e-15)
    return math.log10(inside / (1 - inside))
