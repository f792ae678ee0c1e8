"""Evidence from the oil reports.

A change is weighed against its noise floor: under "no" the result scatters about the new oil with
the reproducibility of its method, but for a share of other causes; under "yes" it is raised by an
unknown amount, but for a share of cases the test would miss. So a change inside R weighs little
either way, a clean routine value never clears anything, and no single result decides. The
shares are judgement, with the reason beside each; they are not fitted to anything.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from math import exp, log, log2

from scipy.stats import exponnorm, norm

from rca.base.source import Reading
from rca.case.model import Case
from rca.case.vocabulary import FluidClass
from rca.evidence.item import Basis, EvidenceItem, Group, Node, NotAssessed
from rca.oil.check import OilCheck
from rca.oil.darkening import DARK, FAST_DAYS, Darkening
from rca.oil.judge import Judged
from rca.oil.words import property_name, unit_text

Found = EvidenceItem | NotAssessed
SD_OF_CHANGE = 1 / 1.96  # of the difference of two results, in units of R
USUAL_RISE = 2.5  # mean rise under "yes", in units of the need; judgement
HALF_TRUST_DAYS = 365.0  # an older sample says less about the day of the failure; judgement
YOUNG_OIL_HOURS = 50.0
LEAST_FRESH = 0.5


@dataclass(frozen=True, slots=True)
class _Rule:
    """How properties speak of one node."""

    node: Node
    properties: tuple[str, ...]
    direction: int  # +1 a rise, -1 a fall, 0 either
    miss: float  # P(test stays quiet | present)
    other: float  # P(test is raised | absent), each property: other causes, interferences
    need: float = 1.0  # R a real change usually exceeds
    together: bool = False  # all properties have to move


_RULES = (
    # infrared sees soot late: fine carbon of a few hundredths of a per cent is under its noise
    _Rule(Node.SOOT, ("soot",), 1, 0.40, 0.05),
    # amine additives and water overlap the band
    _Rule(Node.NITRATION, ("nitration",), 1, 0.35, 0.08),
    _Rule(Node.OXIDATION_PRODUCTS, ("oxidation", "acid_number"), 1, 0.20, 0.06),
    _Rule(Node.VISCOSITY_UP, ("viscosity_40",), 1, 0.10, 0.04, 3.0),
    _Rule(Node.VISCOSITY_DOWN, ("viscosity_40",), -1, 0.10, 0.04, 3.0),
    _Rule(Node.FLASH_DOWN, ("flash_point",), -1, 0.25, 0.05),
    # voltammetry is made for zinc-free oils
    _Rule(Node.ANTIOXIDANT_LOSS, ("antioxidant_remaining",), -1, 0.15, 0.08, 2.0),
    _Rule(Node.VARNISH_PATCH, ("patch_colour",), 1, 0.15, 0.08, 2.0),
    # plasma sees particles up to about 5 µm only; silicon is antifoam and sealant too
    _Rule(Node.DIRT, ("Si", "Al"), 1, 0.30, 0.08, together=True),
    _Rule(Node.COARSE_IRON, ("ferrous_index",), 1, 0.20, 0.06),
    _Rule(Node.AIR_RELEASE_SLOW, ("air_release", "foam_tendency"), 1, 0.20, 0.06),
    # additives also deplete, and laboratories differ
    _Rule(Node.WRONG_FLUID, ("Zn", "P", "Ca", "Mg", "Mo", "B"), 0, 0.20, 0.03, 2.0),
    _Rule(Node.CHLORINE, ("Cl",), 1, 0.20, 0.06),
)
# usual level of a wear metal in service [mg/kg], about a quarter of the limits of the programme
# named in the limits file; tin like chromium: judgement
_USUAL_METAL = {"Fe": 5.0, "Cu": 2.5, "Pb": 2.0, "Cr": 1.2, "Sn": 1.2}
_SPREAD_USUAL, _SPREAD_WORN = 0.7, 1.0  # standard deviations of the logarithm; judgement
_WORN = 8.0  # times the usual level, the middle of what unusual wear leaves; judgement
_WEAR_MISS, _WEAR_OTHER = 0.25, 0.05  # quiet though worn (fresh oil, fine filters); other sources
_SILICON_ALONE = 0.30  # in place of the share of other causes where aluminium was not tested


def from_oil(case: Case, check: OilCheck | None) -> tuple[EvidenceItem | NotAssessed, ...]:
    """Items for the oil nodes; a node whose property was never tested is not assessed."""
    judged = check.judged if check is not None else {}
    fresh = _freshness(check) if check is not None else 1.0
    found: list[Found] = [_by_rule(rule, judged, fresh) for rule in _RULES]
    found += _colour(check, fresh)
    found += _counts(judged, fresh)
    found.append(_wear(judged, fresh))
    found.append(_water(case, judged))
    found.append(_conductivity(judged))
    return tuple(found)


def _freshness(check: OilCheck) -> float:
    """Share of what the oil held at the failure that the latest sample can show."""
    days = max(check.days_before_failure or 0, 0)
    fresh = exp(-log(2.0) * days / HALF_TRUST_DAYS)
    if check.oil_hours is not None and check.oil_hours < YOUNG_OIL_HOURS:
        fresh *= LEAST_FRESH
    return max(fresh, LEAST_FRESH)


def _by_rule(rule: _Rule, judged: dict[str, Judged], fresh: float) -> Found:
    key = f"oil.{rule.node.name.lower()}"
    tested = [judged[name] for name in rule.properties if name in judged]
    known = [one for one in tested if one.stands_out is not None]
    if not known:
        names = " or ".join(property_name(name).lower() for name in rule.properties[:3])
        why = "of the new oil to compare with" if tested else "was not tested"
        return NotAssessed(key=key, node=rule.node, missing=f"{names} {why}")
    strengths = [_directed(rule, one) / rule.need for one in known]
    strength = min(strengths) if rule.together else max(strengths)
    chosen = known[strengths.index(strength)]
    other = rule.other if rule.together else 1.0 - (1.0 - rule.other) ** len(known)
    if rule.together and len(known) < len(rule.properties):
        other = _SILICON_ALONE
    quiet = 1.0 - (1.0 - rule.miss) * fresh
    likelihood = change_likelihood(strength, chosen.op, miss=quiet, other=other)
    return _item(key, rule.node, chosen, likelihood, absent=strength < 1.0, known=known)


def change_likelihood(strength: float, op: str, *, miss: float, other: float) -> dict[str, float]:
    """Likelihoods of a change of ``strength`` noise floors, scaled to add up to 1.

    ``op`` ">" means at least that much, "<" at most. Only the ratio has a meaning; it is bounded
    by (1 - miss)/other upwards and miss/(1 - other) downwards.
    """
    rise = USUAL_RISE / SD_OF_CHANGE
    bounded = min(max(strength, -3.0), 40.0)
    if op == ">":
        noise = float(norm.sf(bounded, scale=SD_OF_CHANGE))
        raised = float(exponnorm.sf(bounded, rise, scale=SD_OF_CHANGE))
    elif op == "<":
        noise = float(norm.cdf(bounded, scale=SD_OF_CHANGE))
        raised = float(exponnorm.cdf(bounded, rise, scale=SD_OF_CHANGE))
    else:
        noise = float(norm.pdf(bounded, scale=SD_OF_CHANGE))
        raised = float(exponnorm.pdf(bounded, rise, scale=SD_OF_CHANGE))
    no = (1.0 - other) * noise + other * raised
    yes = miss * noise + (1.0 - miss) * raised
    return {"no": no / (no + yes), "yes": yes / (no + yes)}


def _directed(rule: _Rule, one: Judged) -> float:
    change = one.stands_out or 0.0
    return abs(change) if rule.direction == 0 else rule.direction * change


def _item(
    key: str,
    node: Node,
    one: Judged,
    likelihood: dict[str, float],
    *,
    absent: bool,
    known: Sequence[Judged] = (),
) -> EvidenceItem:
    others = [k for k in known if k is not one]
    more = f" Also {', '.join(_short(k) for k in others)}." if others else ""
    new = (
        f"; {one.new_from}: {one.new:.4g}, change {one.change:+.3g}, noise floor {one.noise:.2g}"
        if one.new is not None and one.change is not None
        else ""
    )
    return EvidenceItem(
        key=key,
        node=node,
        likelihood=likelihood,
        statement=f"{_short(one)} in sample {one.sample} of {one.sampled}{new}.{more}",
        sources=tuple(k.source for k in (one, *others)),
        group=Group.OIL,
        common_cause=f"bottle {one.sample}",
        basis=Basis.LABORATORY,
        reading=Reading(value=one.value, unit=one.unit, u=one.noise / 2.7718),
        absent=absent,
    )


def _short(one: Judged) -> str:
    return f"{property_name(one.property)} {one.text} {unit_text(one.unit)}".strip()


def _colour(check: OilCheck | None, fresh: float) -> list[Found]:
    dark = check.darkening if check is not None else None
    if check is None or dark is None:
        missing = "colour of the used oil (ASTM D1500)"
        return [
            NotAssessed(key="oil.dark_fast", node=Node.OIL_DARK_FAST, missing=missing),
            NotAssessed(key="oil.dark_slow", node=Node.OIL_DARK_SLOW, missing=missing),
        ]
    fast, slow = _speed(dark, fresh)
    # dark oil with flat routine values is no item of its own: the darkness weighs here, and the
    # flat acid number, oxidation and viscosity weigh against oxidation by themselves
    return [
        _colour_item("oil.dark_fast", Node.OIL_DARK_FAST, dark, fast),
        _colour_item("oil.dark_slow", Node.OIL_DARK_SLOW, dark, slow),
    ]


def _speed(dark: Darkening, fresh: float) -> tuple[dict[str, float], dict[str, float]]:
    """(fast, slow) likelihoods; colour alone never says why, so they stay moderate."""
    if dark.change < DARK / 2:
        quiet = 0.15 + 0.35 * (1.0 - fresh)
        return {"no": 0.9, "yes": quiet}, {"no": 0.8, "yes": quiet + 0.1}
    if dark.change < DARK:
        return {"no": 0.5, "yes": 0.4}, {"no": 0.45, "yes": 0.5}
    if dark.gradual:
        return {"no": 0.6, "yes": 0.15}, {"no": 0.12, "yes": 0.8}
    if dark.step_days is None or dark.step_days > FAST_DAYS:
        return {"no": 0.3, "yes": 0.45}, {"no": 0.3, "yes": 0.6}
    if dark.step_days <= 60:
        return {"no": 0.07, "yes": 0.85}, {"no": 0.6, "yes": 0.25}
    return {"no": 0.15, "yes": 0.7}, {"no": 0.45, "yes": 0.4}


def _colour_item(
    key: str, node: Node, dark: Darkening, likelihood: dict[str, float]
) -> EvidenceItem:
    when = ""
    if dark.step_days is not None:
        since = "the fill" if dark.step_from == "fill" else f"sample {dark.step_from}"
        when = f"; most of the change came within {dark.step_days} days after {since}"
    return EvidenceItem(
        key=key,
        node=node,
        likelihood=likelihood,
        statement=(
            f"Colour {dark.text} (ASTM D1500) in sample {dark.sample}; {dark.new_from}: "
            f"{dark.new:g}{when}."
        ),
        sources=(dark.source,),
        group=Group.OIL,
        common_cause=f"bottle {dark.sample}",
        basis=Basis.LABORATORY,
        absent=likelihood["no"] > likelihood["yes"],
    )


def _counts(judged: dict[str, Judged], fresh: float) -> list[Found]:
    """Particle counts beside the metals: raised by dirt, but by water, air and wear as well."""
    for name in ("cleanliness_code", "particles_6", "particles_4"):
        one = judged.get(name)
        if one is None:
            continue
        codes = one.value if name == "cleanliness_code" else log2(max(one.value, 0.01) / 0.01)
        # 18 is the limit quoted for HM oils; one code either way is noise
        likelihood = change_likelihood(
            (codes - 18.0) / 2.0, "=", miss=1.0 - 0.75 * fresh, other=0.2
        )
        return [_item("oil.dirt.counts", Node.DIRT, one, likelihood, absent=codes <= 18.0)]
    return []


def _wear(judged: dict[str, Judged], fresh: float) -> Found:
    """Wear metals against what running machines usually show: a few mg/kg say nothing is wrong.

    Level, not change, is weighed: every oil in service holds some metal, so a rise from new oil
    beyond the noise is no sign by itself.
    """
    known = [judged[name] for name in _USUAL_METAL if name in judged]
    if not known:
        return NotAssessed(key="oil.wear_metals", node=Node.WEAR_METALS, missing="wear metals")
    quiet = 1.0 - (1.0 - _WEAR_MISS) * fresh
    other = 1.0 - (1.0 - _WEAR_OTHER) ** len(known)
    ratios = []
    for one in known:
        usual, worn = _metal_densities(one)
        ratios.append((quiet * usual + (1.0 - quiet) * worn, (1 - other) * usual + other * worn))
    strongest = max(range(len(known)), key=lambda k: ratios[k][0] / ratios[k][1])
    yes, no = ratios[strongest]
    likelihood = {"no": no / (no + yes), "yes": yes / (no + yes)}
    chosen = known[strongest]
    return _item(
        "oil.wear_metals", Node.WEAR_METALS, chosen, likelihood, absent=no > yes, known=known
    )


def _metal_densities(one: Judged) -> tuple[float, float]:
    """(usual, worn) probability densities of a metal's rise over the new oil."""
    base = one.new if one.new is not None and one.new_is_measured else 0.0
    middle = log(_USUAL_METAL[one.property])
    at = log(max(one.value - base, 0.2 * _USUAL_METAL[one.property]))
    law = {"=": norm.pdf, "~": norm.pdf, "<": norm.cdf, ">": norm.sf}[one.op]
    usual = float(law(at, middle, _SPREAD_USUAL))
    worn = float(law(at, middle + log(_WORN), _SPREAD_WORN))
    return usual, worn


def _water(case: Case, judged: dict[str, Judged]) -> Found:
    """Water, lognormal: usual in service 80 mg/kg, in trouble 1500 mg/kg; judgement."""
    one = judged.get("water")
    fluid = case.fluid.fluid_class
    if one is None or fluid is FluidClass.WATER_GLYCOL:
        missing = "water content" if one is None else "water belongs to this fluid"
        return NotAssessed(key="oil.water", node=Node.WATER, missing=missing)
    usual = 300.0 if fluid in (FluidClass.ESTER, FluidClass.PHOSPHATE_ESTER) else 80.0
    at = log(max(one.value, 1.0))
    law = {"=": norm.pdf, "~": norm.pdf, "<": norm.cdf, ">": norm.sf}[one.op]
    dry = float(law(at, log(usual), 0.7))
    wet = float(law(at, log(1500.0), 1.0))
    no, yes = 0.97 * dry + 0.03 * wet, 0.95 * wet + 0.05 * dry
    likelihood = {"no": no / (no + yes), "yes": yes / (no + yes)}
    return _item("oil.water", Node.WATER, one, likelihood, absent=no > yes)


def _conductivity(judged: dict[str, Judged]) -> Found:
    """Oils under about 35 to 100 pS/m can charge; the sources differ on where it starts."""
    one = judged.get("conductivity")
    if one is None:
        return NotAssessed(
            key="oil.conductivity", node=Node.LOW_CONDUCTIVITY, missing="conductivity of the oil"
        )
    low = 1.0 / (1.0 + (max(one.value, 0.1) / 60.0) ** 3)
    if (one.op == "<" and low < 0.5) or (one.op == ">" and low > 0.5):
        low = 0.5
    likelihood = {"no": 0.1 * low + 0.9 * (1 - low), "yes": 0.9 * low + 0.1 * (1 - low)}
    return _item("oil.conductivity", Node.LOW_CONDUCTIVITY, one, likelihood, absent=low < 0.5)
