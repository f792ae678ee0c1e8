"""Base rates that could feed priors, with n and the reasons not to trust them yet."""

from dataclasses import dataclass

import numpy as np

from rca.compare.incident import TOOK_PART
from rca.compare.table import IncidentTable
from rca.stats.event_rate import Estimate, base_rate, share

ENOUGH = 30  # cases of known cause before a base rate should move a prior; common practice
CAUTION = (
    "Only investigated failures are in these numbers, and what was found leaned on the priors "
    "used then. Where a report stores its priors they are taken out again; a count is not "
    "corrected. A cause confirmed by repair is worth more than any of them."
)


@dataclass(frozen=True, slots=True, kw_only=True)
class BaseRate:
    """How often a mechanism took part, or a cause was the main one."""

    kind: str  # "mechanism" or "cause"
    name: str
    n: int
    counted: Estimate  # share more likely than not, Jeffreys' interval
    learned: Estimate | None  # with the prior taken out; None where it is not stored
    learned_n: int
    mean_prior: float | None


def base_rates(table: IncidentTable) -> tuple[BaseRate, ...]:
    """Base rates of all mechanisms and causes; the table holds one knowledge version."""
    found = []
    for k, name in enumerate(table.mechanism_names):
        p, prior = table.mechanisms[:, k], table.prior[:, k]
        known = np.isfinite(p)
        usable = known & (prior > 0) & (prior < 1)
        found.append(
            BaseRate(
                kind="mechanism",
                name=name,
                n=int(known.sum()),
                counted=share(int((p[known] >= TOOK_PART).sum()), max(int(known.sum()), 1)),
                learned=base_rate(p[usable].tolist(), prior[usable].tolist())
                if usable.any()
                else None,
                learned_n=int(usable.sum()),
                mean_prior=float(prior[usable].mean()) if usable.any() else None,
            )
        )
    causes = np.array(table.main_causes, dtype=object)
    for name in sorted(set(table.main_causes)):
        found.append(
            BaseRate(
                kind="cause",
                name=name,
                n=len(table),
                counted=share(int((causes == name).sum()), len(table)),
                learned=None,
                learned_n=0,
                mean_prior=None,
            )
        )
    order = sorted(found, key=lambda r: (r.kind != "mechanism", -r.counted.value, r.name))
    return tuple(order)
