"""What the interactive page holds: every incident in short, packed with its own dictionaries."""

from typing import Any

import numpy as np

from rca.compare.check import Comparison
from rca.compare.incident import TOOK_PART
from rca.compare.similar import neighbours
from rca.compare.table import IncidentTable

NEAREST = 5
MOST_FOR_NEIGHBOURS = 20_000  # n squared; beyond it the page says that it has none


def explorer_data(table: IncidentTable, check: Comparison) -> dict[str, Any]:
    """Plain data of the page; numbers index the lists ``sites``, ``machines``, ``signs`` ..."""
    n = len(table)
    sites, machines = _codes(table.sites), _codes(table.machines)
    versions, causes = _codes(table.knowledge), _codes(table.main_causes)
    near = n <= MOST_FOR_NEIGHBOURS
    nearest, scores = neighbours(table, count=NEAREST) if near else (np.zeros((n, 0)),) * 2
    rows = [
        [
            table.ids[k],
            table.titles[k],
            sites[1][k],
            machines[1][k],
            d.isoformat() if (d := table.day(k)) else "",
            table.sides[k],
            [int(m) for m in np.flatnonzero(table.mechanisms[k] >= TOOK_PART)],
            causes[1][k],
            _number(table.downtime_h[k]),
            _number(table.cost[k]),
            table.currencies[k],
            versions[1][k],
            [int(s) for s in np.flatnonzero(table.signs[k] > 0)],
            [int(s) for s in np.flatnonzero(table.signs[k] < 0)],
            [
                [int(other), round(float(score), 2)]
                for other, score in zip(nearest[k], scores[k], strict=True)
                if other >= 0
            ],
            int(table.invented[k]),
        ]
        for k in range(n)
    ]
    return {
        "until": check.until.isoformat(),
        "sites": sites[0],
        "machines": machines[0],
        "versions": versions[0],
        "causes": causes[0],
        "mechanisms": list(table.mechanism_names),
        "signs": list(table.sign_names),
        "nearest": near,
        "rows": rows,
    }


def _codes(words: tuple[str, ...]) -> tuple[list[str], list[int]]:
    names = sorted(set(words))
    place = {name: k for k, name in enumerate(names)}
    return names, [place[word] for word in words]


def _number(value: float) -> float | None:
    return round(float(value), 2) if np.isfinite(value) else None
