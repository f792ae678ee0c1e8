"""Evidence from the suction side: measured and computed inlet pressure, released air."""

from dataclasses import replace

import numpy as np
from scipy.stats import norm

from rca.base.source import Origin, Reading, Source
from rca.case.model import Case
from rca.case.series import AlignedRecord
from rca.evidence.from_suction_inverse import from_inverse
from rca.evidence.item import Basis, EvidenceItem, Group, Node, NotAssessed
from rca.suction.check import RELEASED_MATTERS, SuctionCheck, transducer_error
from rca.suction.measured import NEAR_VAPOUR, Regime

MISREAD = 0.03  # share of records that are wrong in a way no check of ours sees; judgement
STRAIN = (
    0.06e5  # [Pa], shortfall against the clean line at which a restriction is as likely as not
)
SEA_LEVEL = 101325.0  # [Pa], ISO 2533
Items = list[EvidenceItem | NotAssessed]


def from_suction(
    case: Case, check: SuctionCheck, aligned: AlignedRecord | None
) -> tuple[EvidenceItem | NotAssessed, ...]:
    """Items on the inlet pressure and what it does to the air in the oil."""
    items: Items = [*_measured(check, aligned), *_computed(case, check)]
    items.append(_released(check, aligned))
    items.append(_reservoir(case, check))
    items.append(_cold(check))
    items.append(_too_small(case, check))
    items.append(_thin_air(case, check, aligned))
    items += from_inverse(check, aligned)
    items += _restriction(check, aligned)
    return tuple(items)


def _source(aligned: AlignedRecord | None) -> tuple[Source, ...]:
    series = aligned.series.get("inlet pressure") if aligned is not None else None
    return (series.source,) if series is not None else ()


def _states(mean: float, u: float, limit: float, *, trust: float) -> dict[str, float]:
    """P(this reading | true state) for the three states of the inlet.

    The true pressure lies about the reading with standard deviation u; each state's share of that
    distribution, mixed with a share of readings that say nothing.
    """
    near = float(norm.cdf(NEAR_VAPOUR, mean, u))
    low = float(norm.cdf(limit, mean, u)) - near
    shares = {"healthy": 1.0 - near - low, "low": low, "near vapour": near}
    return {
        k: float(np.clip(trust * v + (1 - trust) / 3, 0.002, 0.998)) for k, v in shares.items()
    }


def _measured(check: SuctionCheck, aligned: AlignedRecord | None) -> Items:
    measured = check.measured
    if measured is None or check.limit is None:
        return [
            NotAssessed(
                key="inlet.measured",
                node=Node.INLET_PRESSURE,
                missing="a usable record of the inlet pressure while the pump runs",
            )
        ]
    regime = measured.last or measured.warm or measured.cold
    if regime is None:
        return []
    u = float(np.hypot(measured.sensor_u, 0.02e5))
    median, words = regime.median, _regime_words(regime, check.limit, measured.cold)
    error = transducer_error(check)
    if error is not None:
        median, u = median + error.p50, max(error.sd, 0.01e5)
        regime = replace(
            regime,
            below_limit=regime.below_limit if regime.p05 + error.p50 < check.limit else 0.0,
        )
        words += (
            f" At rest the transducer reads {abs(error.p50) / 1e5:.2f} bar too "
            f"{'low' if error.p50 > 0 else 'high'}; corrected {median / 1e5:.2f} bar(a)."
        )
    return [
        EvidenceItem(
            key="inlet.measured",
            node=Node.INLET_PRESSURE,
            likelihood=_with_starts(
                _states(median, u, check.limit, trust=1 - MISREAD),
                regime,
                measured.cold if error is None else None,
                measured.warm.hours if measured.warm is not None else regime.hours,
            ),
            statement=words,
            sources=_source(aligned),
            group=Group.INLET,
            common_cause="sensor of the inlet pressure",
            basis=Basis.MEASURED,
            reading=Reading(value=median, unit="Pa", u=u, origin=Origin.MEASURED),
            limit=Reading(value=check.limit, unit="Pa"),
            absent=median >= check.limit,
        )
    ]


def _with_starts(
    likelihood: dict[str, float], warm: Regime, cold: Regime | None, warm_hours: float
) -> dict[str, float]:
    """Times below the limit count towards "low" and "near vapour", though the median holds.

    Of cold starts by the hours they add up to: an hour near vapour, or ten below the limit, make
    that state about half as probable a description as the warm one; so do three hundredths of all
    running, since a record of a few days stands for the starts of months. Of warm running by its
    share: a tenth of the time does the same. Judgement.
    """
    low, near = likelihood["low"], likelihood["near vapour"]
    low = max(low, 0.9 * warm.below_limit / (warm.below_limit + 0.1))
    near = max(near, 0.9 * warm.near_vapour / (warm.near_vapour + 0.03))
    if cold is not None:
        running = warm_hours + cold.hours
        hours = cold.hours * cold.below_limit
        low = max(low, 0.9 * hours / (hours + min(10.0, 0.03 * running)))
        hours = cold.hours * cold.near_vapour
        near = max(near, 0.9 * hours / (hours + min(1.0, 0.01 * running)))
    return likelihood | {"low": low, "near vapour": near}


def _regime_words(regime: Regime, limit: float, cold: Regime | None) -> str:
    words = (
        f"Measured inlet pressure in the last part of the record, warm and running: median "
        f"{regime.median / 1e5:.2f} bar(a), 5 to 95 % {regime.p05 / 1e5:.2f} to "
        f"{regime.p95 / 1e5:.2f} bar(a); limit {limit / 1e5:.2f} bar(a)."
    )
    if regime.median >= limit and regime.below_limit > 0.01:
        words += f" Below the limit for {100 * regime.below_limit:.0f} % of that time."
    if cold is not None and cold.hours * cold.below_limit >= 0.5:
        words += (
            f" With cold oil below the limit for {cold.hours * cold.below_limit:.1f} h of "
            f"{cold.hours:.1f} h."
        )
    if cold is not None and cold.near_vapour > 0.0:
        words += (
            f" With cold oil below {NEAR_VAPOUR / 1e5:.2f} bar(a) for "
            f"{cold.hours * cold.near_vapour:.1f} h."
        )
    return words


def _computed(case: Case, check: SuctionCheck) -> Items:
    state = check.normal
    if state is None or check.limit is None:
        missing = ", ".join(check.missing) or "the inlet limit"
        return [NotAssessed(key="inlet.computed", node=Node.INLET_PRESSURE, missing=missing)]
    # A clean line that is already too low is telling; one that is healthy says little about the
    # state it was in when the pump failed.
    trust = 0.75 if state.below_limit > 0.5 else 0.25
    return [
        EvidenceItem(
            key="inlet.computed",
            node=Node.INLET_PRESSURE,
            likelihood=_states(
                state.pressure.mean, max(state.pressure.sd, 1e3), check.limit, trust=trust
            ),
            statement=(
                f"Computed inlet pressure of the line as described, clean and warm: "
                f"{state.pressure.mean / 1e5:.2f} ± {state.pressure.sd / 1e5:.2f} bar(a); limit "
                f"{check.limit / 1e5:.2f} bar(a)."
            ),
            sources=_descriptor(case),
            group=Group.INLET,
            common_cause="pressure budget",
            basis=Basis.COMPUTED,
            reading=Reading(
                value=state.pressure.mean,
                unit="Pa",
                u=state.pressure.sd,
                origin=Origin.CALCULATED,
            ),
            absent=state.below_limit < 0.5,
        )
    ]


def _released(check: SuctionCheck, aligned: AlignedRecord | None) -> EvidenceItem | NotAssessed:
    regime = check.measured and (check.measured.last or check.measured.warm)
    state = check.normal
    if regime:
        level, sources, basis = regime.released, _source(aligned), Basis.MEASURED
        if transducer_error(check) is not None and check.paths:  # the reading is off
            level = check.paths[-1].stations[-1].released.p50
        common, trust = "sensor of the inlet pressure", 0.85
    elif state is not None:
        level, sources, basis = state.released.p50, (), Basis.COMPUTED
        common, trust = "pressure budget", 0.4
    else:
        return NotAssessed(
            key="air.released", node=Node.RELEASED_AIR, missing="the inlet pressure"
        )
    # the time constant of release is uncertain over two decades: one and a half in log terms
    share = float(norm.cdf(np.log(max(level, 1e-6) / RELEASED_MATTERS) / 1.0))
    yes = trust * share + (1 - trust) / 2
    return EvidenceItem(
        key="air.released",
        node=Node.RELEASED_AIR,
        likelihood={
            "no": float(np.clip(1 - yes, 0.02, 0.98)),
            "yes": float(np.clip(yes, 0.02, 0.98)),
        },
        statement=(
            f"Air released by the time the oil reaches the pump: about {100 * level:.1f} % of the "
            "oil's volume at inlet pressure (finite-rate release)."
        ),
        sources=sources or (Source(file="case.toml", locator="suction_line, fluid"),),
        group=Group.AIR,
        common_cause=common,
        basis=basis,
        reading=Reading(value=level, unit="-", origin=Origin.CALCULATED),
        absent=share < 0.5,
    )


def _reservoir(case: Case, check: SuctionCheck) -> EvidenceItem | NotAssessed:
    """Time of the oil in the reservoir against what its air needs; says nothing of a leak."""
    found = check.reservoir
    if found is None:
        return NotAssessed(
            key="air.reservoir",
            node=Node.CARRIED_AIR,
            missing="the oil volume of the reservoir and the flow through it",
        )
    # a tenth of the air left over is usual and says nothing; most of it left over says a little
    kept = float(np.clip((found.remaining - 0.1) / 0.5, -0.2, 1.0))
    return EvidenceItem(
        key="air.reservoir",
        node=Node.CARRIED_AIR,
        likelihood={"no": 0.5 - 0.2 * kept, "yes": 0.5 + 0.2 * kept},
        statement=(
            f"The oil stays about {found.dwell / 60:.1f} min in the reservoir; its air needs "
            f"{found.release_time / 60:.1f} min to come out"
            f"{'' if found.release_stated else ' (usual value)'}, so about "
            f"{100 * found.remaining:.0f} % of what enters goes round again, bubbles below "
            f"{1e3 * found.kept_diameter:.1f} mm."
        ),
        sources=_descriptor(case),
        group=Group.AIR,
        common_cause="reservoir as described",
        basis=Basis.COMPUTED,
        reading=Reading(value=found.remaining, unit="-", origin=Origin.CALCULATED),
        absent=kept <= 0.0,
    )


def _cold(check: SuctionCheck) -> EvidenceItem | NotAssessed:
    cold = check.cold
    measured = check.measured.cold if check.measured is not None else None
    if measured is not None and check.limit is not None:
        hours = measured.hours * measured.below_limit
        share = max(measured.below_limit, hours / (hours + 2.0))
        words = (
            f"With cold oil the measured inlet pressure is below the limit for "
            f"{100 * measured.below_limit:.0f} % of {measured.hours:.1f} h; "
            f"lowest {measured.lowest / 1e5:.2f} bar(a)."
        )
    elif cold is not None:
        share = cold.below_limit
        words = (
            f"At the coldest start the computed inlet pressure of the clean line is "
            f"{cold.pressure.mean / 1e5:.2f} ± {cold.pressure.sd / 1e5:.2f} bar(a)."
        )
    else:
        return NotAssessed(
            key="inlet.cold", node=Node.COLD_OIL, missing="the oil temperature at start"
        )
    # a clean line that holds at the cold start clears the cold oil of being the cause
    clean = cold.below_limit if cold is not None else 0.5
    yes = 0.15 + 0.7 * share * (0.6 + 0.4 * clean)
    # an inlet that is low warm as well says nothing of the cold
    warm = _low_when_warm(check)
    yes = yes * (1.0 - warm) + 0.5 * warm
    return EvidenceItem(
        key="inlet.cold",
        node=Node.COLD_OIL,
        likelihood={"no": 1 - yes, "yes": yes},
        statement=words,
        sources=(Source(file="case.toml", locator="suction_line, fluid"),),
        group=Group.INLET,
        common_cause="cold starts",
        basis=Basis.MEASURED if measured is not None else Basis.COMPUTED,
        absent=yes < 0.5,
    )


def _low_when_warm(check: SuctionCheck) -> float:
    """Share of the warm running below the limit, measured where it was, else computed."""
    measured = check.measured
    regime = measured and (measured.last or measured.warm)
    if regime:
        return regime.below_limit
    return check.normal.below_limit if check.normal is not None else 0.0


def _too_small(case: Case, check: SuctionCheck) -> EvidenceItem | NotAssessed:
    """A line too low clean, warm and at sea level was too small from the day it was built."""
    state = check.normal
    if state is None or check.limit is None:
        missing = ", ".join(check.missing) or "the inlet limit"
        return NotAssessed(key="inlet.design", node=Node.LINE_TOO_SMALL, missing=missing)
    sea = state.pressure.mean + SEA_LEVEL - check.atmosphere
    below = float(norm.cdf(check.limit, sea, max(state.pressure.sd, 1e3)))
    return EvidenceItem(
        key="inlet.design",
        node=Node.LINE_TOO_SMALL,
        likelihood={"no": 0.95 - 0.9 * below, "yes": 0.1 + 0.85 * below},
        statement=(
            f"Clean and warm, with the air of sea level, the line as described is computed at "
            f"{sea / 1e5:.2f} ± {state.pressure.sd / 1e5:.2f} bar(a); limit "
            f"{check.limit / 1e5:.2f} bar(a)."
        ),
        sources=_descriptor(case),
        group=Group.INLET,
        common_cause="pressure budget",
        basis=Basis.COMPUTED,
        absent=below < 0.5,
    )


def _thin_air(
    case: Case, check: SuctionCheck, aligned: AlignedRecord | None
) -> EvidenceItem | NotAssessed:
    """Would the inlet hold at sea level, and not here?"""
    regime = check.measured and (check.measured.last or check.measured.warm)
    state = check.normal
    if check.limit is None or (not regime and state is None):
        missing = "the inlet pressure, measured or computed, and its limit"
        return NotAssessed(key="inlet.air", node=Node.THIN_AIR, missing=missing)
    if regime:
        mean, sd, sources, basis = regime.median, 0.03e5, _source(aligned), Basis.MEASURED
    else:
        assert state is not None
        mean, sd = state.pressure.mean, max(state.pressure.sd, 1e3)
        sources, basis = _descriptor(case), Basis.COMPUTED
    missing_air = SEA_LEVEL - check.atmosphere
    here = float(norm.cdf(check.limit, mean, sd))
    there = float(norm.cdf(check.limit, mean + missing_air, sd))
    decides = max(here - there, 0.0)
    return EvidenceItem(
        key="inlet.air",
        node=Node.THIN_AIR,
        likelihood={"no": 0.98 - 0.96 * decides, "yes": 0.05 + 0.93 * decides},
        statement=(
            f"The air at the site is {check.atmosphere / 1e5:.2f} bar(a), "
            f"{missing_air / 1e5:.2f} bar under sea level; warm inlet {mean / 1e5:.2f} bar(a), "
            f"limit {check.limit / 1e5:.2f} bar(a)."
        ),
        sources=sources or _descriptor(case),
        group=Group.INLET,
        common_cause="sensor of the inlet pressure" if regime else "pressure budget",
        basis=basis,
        absent=decides < 0.5,
    )


def _restriction(check: SuctionCheck, aligned: AlignedRecord | None) -> Items:
    """Measured far below the clean line: something in the line or the tank was restricted."""
    measured = check.measured
    if measured is None or measured.shortfall is None:
        return []
    error = transducer_error(check)
    shortfall = measured.shortfall - (error.p50 if error is not None else 0.0)
    z = (shortfall - STRAIN) / max(measured.sensor_u if error is None else error.sd, 0.02e5)
    share = float(norm.cdf(z))
    drift = measured.drift_per_week
    growing = (
        f", growing by {drift / 1e5:.3f} bar a week" if drift is not None and drift > 500 else ""
    )
    yes = 0.05 + 0.85 * share
    return [
        EvidenceItem(
            key="inlet.shortfall",
            node=Node.INLET_SHORTFALL,
            likelihood={"no": 0.95 - 0.75 * share, "yes": yes},
            statement=(
                f"At the end of the record the warm inlet pressure is "
                f"{shortfall / 1e5:.2f} bar below that of the clean line{growing}."
            ),
            sources=_source(aligned),
            group=Group.INLET,
            common_cause="sensor of the inlet pressure",
            basis=Basis.MEASURED,
            reading=Reading(value=shortfall, unit="Pa", u=measured.sensor_u),
            absent=share < 0.5,
        )
    ]


def _descriptor(case: Case) -> tuple[Source, ...]:
    digest = next((f.sha256 for f in case.files if f.file == "case.toml"), "")
    return (
        Source(file="case.toml", locator="pump, reservoir, suction_line, fluid", sha256=digest),
    )
