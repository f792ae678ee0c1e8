"""Invented results in the shape of ``results.json``, with known truths planted in them."""

from datetime import date, timedelta
from typing import Any

import numpy as np

from rca.case.vocabulary import MECHANISMS

KNOWLEDGE = "2026.12-9 sha256:invented"
PRIOR = 0.1
# What each invented cause shows, hides and leads to.
KINDS: dict[str, dict[str, Any]] = {
    "suction strainer clogged": {
        "side": "suction",
        "mechanism": "gaseous cavitation",
        "seen": (
            "strainer found clogged",
            "pitting on inlet-side zones",
            "steady whine or gravel noise",
        ),
        "absent": ("air leak found on the suction side", "spark marks"),
    },
    "air leak on the suction side": {
        "side": "suction",
        "mechanism": "aeration",
        "seen": ("air leak found on the suction side", "foam on the reservoir"),
        "absent": ("strainer found clogged", "corrosion"),
    },
    "return flow aerates the reservoir": {
        "side": "discharge",
        "mechanism": "micro-dieseling",
        "seen": ("burning on discharge-side parts", "soot in the oil", "foam on the reservoir"),
        "absent": ("pitting on inlet-side zones", "air leak found on the suction side"),
    },
    "dirt ingress": {
        "side": "neither",
        "mechanism": "abrasive wear",
        "seen": ("scratches or embedded particles", "dirt in the oil", "wear metals up"),
        "absent": ("soot in the oil", "foam on the reservoir"),
    },
}


def item(number: int, node: str, *, seen: bool) -> dict[str, Any]:
    """One stored item of evidence."""
    yes = 0.9 if seen else 0.05
    return {
        "id": f"E{number:02d}",
        "key": f"made.{number}",
        "node": node,
        "statement": "invented",
        "source": {"file": "invented.csv", "locator": f"row {number}", "sha256": ""},
        "group": "damage",
        "basis": "teardown",
        "common_cause": f"look {number}",
        "absent": not seen,
        "likelihood": {"no": 0.95 if not seen else 0.05, "yes": yes},
        "likelihood_ratio": 3.0,
        "favours": "suction",
    }


def results(
    case: str,
    *,
    cause: str = "suction strainer clogged",
    day: date | None = date(2024, 5, 1),
    asset: str = "P-1",
    site: str = "invented works",
    downtime_h: float | None = None,
    cost: str = "",
    actions: tuple[dict[str, Any], ...] = (),
    knowledge: str = KNOWLEDGE,
) -> dict[str, Any]:
    """One finished case."""
    kind = KINDS[cause]
    mechanisms = dict.fromkeys(MECHANISMS, 0.05) | {kind["mechanism"]: 0.9}
    descriptor: dict[str, Any] = {"cost": cost, "downtime": None}
    if downtime_h is not None:
        descriptor["downtime"] = {"value": downtime_h * 3600.0, "unit": "s", "u": None}
    nodes = [(n, True) for n in kind["seen"]] + [(n, False) for n in kind["absent"]]
    return {
        "format": 1,
        "invented": "made for a test",
        "case": {
            "id": case,
            "title": f"invented case {case}",
            "asset": asset,
            "site": site,
            "occurred": f"{day}T06:00:00+01:00" if day else None,
            "descriptor": descriptor,
            "machine": {
                "pump_kind": "axial piston",
                "discharge_pressure_pa": 211e5,
                "fluid_class": "mineral",
            },
        },
        "verdict": {
            "side": kind["side"],
            "sides": {"suction": 0.5, "discharge": 0.5, "both": 0.1, "neither": 0.1},
            "mechanisms": mechanisms,
            "prior": dict.fromkeys(MECHANISMS, PRIOR),
            "sensitivity": [],
            "next_tests": [],
        },
        "causes": [
            {"cause": c, "probability": 0.85 if c == cause else 0.05, "evidence": []}
            for c in KINDS
        ],
        "evidence": [item(k, n, seen=s) for k, (n, s) in enumerate(nodes, start=1)],
        "checks": {name: {} for name in ("suction", "discharge", "oil", "records", "damage")},
        "actions": list(actions),
        "limits": [],
        "record": {"inputs": {}, "versions": {"rca": "0.0.0"}, "knowledge": knowledge, "seed": 0},
    }


def action(
    number: int, *, due: date | None, done: date | None = None, **more: Any
) -> dict[str, Any]:
    """One stored action."""
    return {
        "id": f"A{number}",
        "kind": "corrective",
        "text": "invented action",
        "cause": "",
        "owner": "A. Example",
        "status": "implemented" if done else "planned",
        "due": due.isoformat() if due else None,
        "done": done.isoformat() if done else None,
        "proof": "not yet provable",
        "reason": "invented",
    } | more


def many(
    n: int, *, seed: int = 1, machines: int = 200, years: float = 8.0
) -> list[dict[str, Any]]:
    """n cases over some years; incidents grow rarer as a power law with exponent 0.7."""
    rng = np.random.default_rng(seed)
    first = date(2018, 1, 1)
    ages = np.sort(rng.uniform(0, 1, n) ** (1 / 0.7))
    names = list(KINDS)
    out = []
    for k, age in enumerate(ages):
        day = first + timedelta(days=int(age * years * 365))
        done = day + timedelta(days=14) if rng.random() < 0.6 else None
        cost = f"EUR {rng.integers(1, 90)} 000" if rng.random() < 0.5 else ""
        out.append(
            results(
                f"INV-{k:05d}",
                cause=names[int(rng.choice(len(names), p=[0.45, 0.25, 0.2, 0.1]))],
                day=day,
                asset=f"P-{int(rng.integers(machines)):03d}",
                site=f"invented works {int(rng.integers(6)) + 1}",
                downtime_h=float(rng.gamma(2, 10)) if rng.random() < 0.7 else None,
                cost=cost,
                actions=(action(1, due=day + timedelta(days=30), done=done),),
            )
        )
    return out
