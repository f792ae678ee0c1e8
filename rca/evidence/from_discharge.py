"""Evidence from the discharge side: hot bubbles, fuel, fast rise, pressure above rating."""

import math

from rca.base.source import Reading, Source
from rca.case.model import Case
from rca.discharge.model import DischargeCheck, FuelPath, Status
from rca.evidence.item import Basis, EvidenceItem, Group, Node, NotAssessed

# Likelihood ratios a computed answer may reach. The spherical bubble keeps its heat too well, so
# the model may argue against hot bubbles more strongly than for them; judgement.
MOST_AGAINST, MOST_FOR = 1 / 20, 3.0
# Share of the entrained air that must stay hot for anything to show: burning a twentieth of one
# per cent of entrained air blackens an oil within some thousand passes; judgement.
RELEVANT_SHARE = 0.05
FAST_RISE = 3e-3  # [s] and
HIGH_PRESSURE = 100e5  # [Pa]: where the rise is called fast and high; common practice, no source
SEEN_OVER, SEEN_UNDER = 10.0, 0.3  # a record that shows excess pressure, or none; judgement
COMMON_CAUSE = "description of the pump"


def from_discharge(case: Case, check: DischargeCheck) -> tuple[EvidenceItem | NotAssessed, ...]:
    """Items on the nodes that the discharge check looks at; none where it could not look."""
    return (
        _hot(case, check),
        _fuel(case, check),
        _fast(case, check),
        _over(check),
    )


def pair(ratio: float) -> dict[str, float]:
    """P(finding | no), P(finding | yes) with the given likelihood ratio yes over no."""
    yes = ratio / (1.0 + ratio)
    return {"no": 1.0 - yes, "yes": yes}


def _bounded(share: float, low: float, high: float) -> float:
    """Odds of a share, held between two likelihood ratios."""
    if share <= 0.0:
        return low
    return high if share >= 1.0 else min(max(share / (1.0 - share), low), high)


def _sources(*readings: Reading | None) -> tuple[Source, ...]:
    known = tuple(dict.fromkeys(r.source for r in readings if r is not None and r.source))
    return known or (Source(file="case.toml", locator="pump and fluid, as far as described"),)


def _hot(case: Case, check: DischargeCheck) -> EvidenceItem | NotAssessed:
    if check.possible is None or check.indeterminate is None or check.hot is None:
        return NotAssessed(
            key="discharge.hot_bubbles",
            node=Node.HOT_BUBBLES,
            missing="; ".join(check.missing) or "a usable discharge check",
        )
    share = check.possible + 0.5 * check.indeterminate
    ratio = min(max(share / RELEVANT_SHARE, MOST_AGAINST), MOST_FOR)
    rest = 1.0 - check.possible - check.indeterminate
    return EvidenceItem(
        key="discharge.hot_bubbles",
        node=Node.HOT_BUBBLES,
        likelihood=pair(ratio),
        statement=(
            f"Computed for this pump: {check.possible:.0%} of the entrained air sits in bubbles "
            f"that stay hot past the ignition delay with a margin of 1.5 in radius, "
            f"{check.indeterminate:.0%} within the margin, {rest:.0%} loses its heat in time."
        ),
        sources=_sources(
            check.discharge_pressure,
            check.temperature,
            case.pump.transition_angle,
            case.pump.speed,
        ),
        group=Group.COMPRESSION,
        common_cause=COMMON_CAUSE,
        basis=Basis.COMPUTED,
        absent=check.hot is Status.EXCLUDED,
    )


def _fuel(case: Case, check: DischargeCheck) -> EvidenceItem | NotAssessed:
    fuel = check.fuel
    if fuel is None:
        return NotAssessed(
            key="discharge.fuel_path",
            node=Node.FUEL_PATH,
            missing="; ".join(check.missing) or "a usable discharge check",
        )
    return EvidenceItem(
        key="discharge.fuel_path",
        node=Node.FUEL_PATH,
        likelihood=pair(_fuel_ratio(fuel)),
        statement=_fuel_words(fuel),
        sources=_sources(fuel.flash_point, case.fluid.temperature),
        group=Group.COMPRESSION,
        common_cause="fluid as described",
        basis=Basis.COMPUTED,
        reading=fuel.flash_point,
        absent=fuel.status is Status.EXCLUDED,
    )


def _fuel_ratio(fuel: FuelPath) -> float:
    """Water-based fluid: strongly against. Else from a little against (liquid only) to 3 for."""
    if fuel.status is Status.EXCLUDED:
        return 0.03
    return 0.8 * math.pow(MOST_FOR / 0.8, fuel.vapour)


def _fuel_words(fuel: FuelPath) -> str:
    if fuel.lean_limit is None or fuel.margin is None or fuel.flash_point is None:
        return " ".join(fuel.reasons)
    return (
        f"Flash point {fuel.flash_point.value - 273.15:.0f} °C ({fuel.flash_point.origin.value})"
        f": the bubble's wall would have to reach {fuel.lean_limit.p50 - 273.15:.0f} °C for an "
        f"ignitable vapour and falls short by {fuel.margin.p50:.0f} K (5 to 95 %: "
        f"{fuel.margin.p05:.0f} to {fuel.margin.p95:.0f} K); oil thrown into the gas as liquid "
        "was not looked at."
    )


def _fast(case: Case, check: DischargeCheck) -> EvidenceItem | NotAssessed:
    rise, pressure = check.rise_time, check.discharge_pressure
    if rise is None or pressure is None:
        return NotAssessed(
            key="discharge.fast_rise",
            node=Node.FAST_PRESSURE_RISE,
            missing="; ".join(check.missing) or "the discharge pressure",
        )
    fast = _below(math.log(FAST_RISE), rise.log_mean, rise.log_sd)
    high = 1.0 - _below(math.log(HIGH_PRESSURE), math.log(pressure.value), 0.3)
    return EvidenceItem(
        key="discharge.fast_rise",
        node=Node.FAST_PRESSURE_RISE,
        likelihood=pair(_bounded(fast * high, 1 / 20, 20.0 if rise.measured else 8.0)),
        statement=(
            f"The pressure rises to {pressure.value / 1e5:.0f} bar absolute in "
            f"{rise.spread.p50 * 1e3:.2g} ms (5 to 95 %: {rise.spread.p05 * 1e3:.2g} to "
            f"{rise.spread.p95 * 1e3:.2g} ms): {rise.basis}."
        ),
        sources=_sources(pressure, case.pump.transition_angle, case.pump.speed),
        group=Group.COMPRESSION,
        common_cause=COMMON_CAUSE,
        basis=Basis.MEASURED if rise.measured else Basis.STATED,
        reading=Reading(value=rise.spread.p50, unit="s", u=rise.spread.sd),
    )


def _below(limit: float, mean: float, sd: float) -> float:
    """Normal probability of lying below a limit."""
    return 0.5 * math.erfc((mean - limit) / (max(sd, 1e-9) * math.sqrt(2.0)))


def _over(check: DischargeCheck) -> EvidenceItem | NotAssessed:
    high = check.high_pressure
    if high is None:
        return NotAssessed(
            key="discharge.overpressure",
            node=Node.OVERPRESSURE,
            missing="a record of the discharge pressure and a setting to hold it against",
        )
    beyond = high.peak.value > high.limit.value
    return EvidenceItem(
        key="discharge.overpressure",
        node=Node.OVERPRESSURE,
        likelihood=pair(SEEN_OVER if beyond else SEEN_UNDER),
        statement=(
            f"Highest recorded discharge pressure {high.peak.value / 1e5:.0f} bar absolute; limit "
            f"{high.limit.value / 1e5:.0f} bar absolute ({high.rule})."
        ),
        sources=_sources(high.peak),
        group=Group.OPERATION,
        common_cause="sensor of the discharge pressure",
        basis=Basis.MEASURED,
        reading=high.peak,
        limit=high.limit,
        absent=not beyond,
    )
