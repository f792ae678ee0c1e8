"""What a simulated failure leaves behind, and what somebody makes of it: items of evidence.

Each mechanism leaves each sign with a probability drawn anew for every case from the range of its
grade: T typical, P possible, U unlikely, X next to never. Ranges are wide, and one grade in ten
slips to its neighbour, so that no case follows the verdict's own numbers. Grades after the
sources in DEVELOPERS.md; a look may miss, see what is not there, misplace it, or never happen.
"""

from dataclasses import replace
from datetime import UTC, date, datetime, timedelta

import numpy as np

from rca.base.source import Source
from rca.case.model import Finding, HistoryEvent
from rca.case.oil import OilSample, OilValue
from rca.case.series import AlignedRecord, Series
from rca.case.vocabulary import ZONE_SIDES, Extent, Sign
from rca.damage.check import check_damage
from rca.discharge.model import DischargeCheck, FuelPath, RiseTime, Spread, Status
from rca.evidence.from_damage import from_damage
from rca.evidence.from_discharge import from_discharge
from rca.evidence.from_history import from_history
from rca.evidence.from_oil import from_oil
from rca.evidence.from_statements import from_statements
from rca.evidence.from_suction import from_suction
from rca.evidence.item import EvidenceItem, NotAssessed
from rca.oil.check import check_oil
from rca.suction.check import check_suction
from rca.suction.measured import NEAR_VAPOUR, MeasuredInlet, Regime
from rca.workshop.simulated_truth import Truth

RANGES = {"T": (0.40, 0.90), "P": (0.06, 0.40), "U": (0.005, 0.06), "X": (0.0005, 0.01)}
ORDER = "TPUX"
SLIP = 0.1
VC, GR, AI, CI = "vapour cavitation", "gaseous cavitation", "aeration", "micro-dieseling"
JE, ESD, HOT, OX = "jet cavitation", "electrostatic discharge", "hot spot", "oxidation"
PW, WA, ST = "abrasive wear", "water contamination", "lubrication starvation"
EC, OP = "electrochemical erosion", "over-pressure"
Grades = dict[str, str]
# (zone, sign): grades of the mechanisms; a mechanism that is not named is U
DAMAGE: dict[tuple[str, Sign], Grades] = {
    ("inlet kidney", Sign.PITTING): {VC: "T", GR: "P", AI: "P", PW: "P", WA: "P", ESD: "X"},
    ("cylinder bore", Sign.PITTING): {VC: "T", GR: "P", AI: "P", ESD: "X", HOT: "X", OX: "X"},
    ("transition land", Sign.PITTING): {JE: "T", VC: "P", GR: "P", AI: "P", CI: "P", PW: "P"},
    ("transition land", Sign.JET_EROSION): {JE: "T", EC: "P", PW: "P"},
    ("transition land", Sign.BURN_MARK): {CI: "T", HOT: "P", WA: "X", EC: "X"},
    ("piston seal", Sign.CHARRED_SEAL): {CI: "T", HOT: "P", WA: "X", EC: "X"},
    ("piston seal", Sign.HARDENED_SEAL): {HOT: "T", OX: "T", CI: "P", WA: "P"},
    ("relief valve", Sign.HEAT_TINT): {HOT: "T", CI: "P"},
    ("return filter", Sign.SPARK_MARK): {ESD: "T", PW: "X", WA: "X"},
    ("valve plate", Sign.SCORING): {PW: "T", WA: "P", ST: "P"},
    ("slipper", Sign.SMEARED_METAL): {ST: "T", VC: "P", GR: "P", AI: "P", OP: "P", HOT: "P"},
    ("housing", Sign.CORROSION): {WA: "T", OX: "P", EC: "P"},
    ("housing", Sign.FRACTURE): {OP: "T", CI: "P"},
    ("servo valve", Sign.VARNISH): {ESD: "T", HOT: "T", OX: "T", CI: "P", AI: "P", WA: "P"},
    ("servo valve", Sign.JET_EROSION): {EC: "T", PW: "P", JE: "P", VC: "P"},
    ("reservoir", Sign.FOAM): {AI: "T", GR: "P", OX: "P", WA: "P"},
    ("reservoir", Sign.MILKY_OIL): {AI: "T", GR: "P", WA: "T"},
}
# property: (grades, rise where the sign is there, noise, usual level)
OIL: dict[str, tuple[Grades, float, float, float]] = {
    "colour": ({CI: "T", HOT: "T", ESD: "P", OX: "P", WA: "P", AI: "P"}, 4.0, 0.4, 1.0),
    "soot": ({CI: "T", ESD: "P", HOT: "P"}, 4.0, 0.3, 0.3),
    "nitration": ({CI: "T", ESD: "P"}, 4.0, 0.5, 0.4),
    "oxidation": ({OX: "T", WA: "T", ESD: "P", CI: "P", HOT: "P"}, 8.0, 0.6, 0.8),
    "acid_number": ({OX: "T", WA: "T", ESD: "P", HOT: "P"}, 0.9, 0.06, 0.42),
    "Si": ({PW: "T", WA: "P"}, 30.0, 2.0, 2.0),
    "Fe": ({PW: "T", ST: "T", VC: "P", JE: "P", GR: "P", WA: "P", OP: "P"}, 40.0, 3.0, 4.0),
    "Cu": ({VC: "T", JE: "T", ST: "T", PW: "P", GR: "P", WA: "P", OP: "P"}, 18.0, 2.0, 2.0),
}
UNITS = {"colour": "ASTM D1500", "soot": "A/cm", "nitration": "A/cm", "oxidation": "A/cm",
         "acid_number": "mgKOH/g", "water": "mg/kg"}  # fmt: skip
# cause: kind of entry where it is found, and where it is looked for and not found
HISTORY = {
    "suction strainer clogged": ("strainer found clogged", "strainer found clean"),
    "breather plugged": ("breather found plugged", "breather found free"),
    "suction line restricted": ("suction line found pinched", ""),
    "air leak on the suction side": ("air leak found", "no air leak found"),
    "low oil level": ("low oil level", "oil level checked"),
    "return flow aerates the reservoir": ("return found above level", ""),
    "relief valve set or stuck": ("relief valve fault", ""),
    "cooler failure": ("cooler fault", ""),
    "drive or coupling failure": ("coupling fault", ""),
    "throttling hot spot": ("throttle found hot", ""),
}
HEARD = {"steady noise": {VC: "T", GR: "T", AI: "P", JE: "P"},
         "erratic noise": {AI: "T", GR: "P", CI: "P", VC: "P"},
         "clicks at the filter": {ESD: "T"}}  # fmt: skip
# share of possible looks that happened, by how much was kept
RICHNESS = {"poor": 0.15, "usual": 0.5, "rich": 0.9}
FAILED = date(2026, 3, 6)
Found = tuple[tuple[EvidenceItem, ...], tuple[NotAssessed, ...]]


def draw_items(rng: np.random.Generator, truth: Truth, richness: str) -> Found:
    """Items and gaps as the checks make them of what was looked at."""
    share = RICHNESS[richness]
    case = replace(
        truth.case,
        header=replace(
            truth.case.header, occurred=datetime(FAILED.year, FAILED.month, FAILED.day, tzinfo=UTC)
        ),
        findings=_findings(rng, truth, share),
        history=_history(rng, truth, share),
    )
    told: list[EvidenceItem | NotAssessed] = [*from_history(case), *from_statements(case)]
    told += from_damage(check_damage(case))
    samples = _samples(rng, truth) if rng.random() < share else ()
    told += from_oil(case, check_oil(case, samples)) if samples else from_oil(case, None)
    check = check_suction(case, None, seed=1, samples=64)
    record = None
    if rng.random() < share:
        check = replace(check, measured=_measured(rng, truth, check.limit or 0.8e5))
        record = _record()
    told += from_suction(case, check, record)
    told += from_discharge(case, _discharge(rng, truth))
    items = sorted(
        (i for i in told if isinstance(i, EvidenceItem)), key=lambda i: (i.group, i.key)
    )
    return tuple(items), tuple(n for n in told if isinstance(n, NotAssessed))


def _left(rng: np.random.Generator, grades: Grades, mechanisms: frozenset[str]) -> bool:
    """Whether the sign is there: by one of the mechanisms, or by something else."""
    absent = 1.0 - rng.uniform(0.005, 0.08)
    for mechanism in sorted(mechanisms):
        place = ORDER.index(grades.get(mechanism, "U"))
        if rng.random() < SLIP:
            place = int(np.clip(place + rng.choice([-1, 1]), 0, 3))
        absent *= 1.0 - rng.uniform(*RANGES[ORDER[place]])
    return bool(rng.random() > absent)


def _findings(rng: np.random.Generator, truth: Truth, share: float) -> tuple[Finding, ...]:
    found = []
    if rng.random() > share + 0.3:  # no teardown at all
        return ()
    for n, ((zone, sign), grades) in enumerate(DAMAGE.items(), start=1):
        there = _left(rng, grades, truth.mechanisms)
        if rng.random() > share * (1.2 if there else 0.8):
            continue
        seen = rng.random() < (rng.uniform(0.7, 0.97) if there else rng.uniform(0.005, 0.08))
        extent = (
            Extent(str(rng.choice(["slight", "moderate", "severe"], p=[0.3, 0.4, 0.3])))
            if seen
            else Extent.NONE
        )
        if seen and not there:
            extent = Extent.SLIGHT if rng.random() < 0.7 else Extent.MODERATE
        place = "valve plate" if rng.random() < 0.04 else zone
        found.append(
            Finding(
                id=f"F{n:02d}",
                source=Source(file="teardown/findings.csv", locator=f"line {n}"),
                component=zone,
                zone=place,
                sign=sign,
                sign_text=sign.value,
                extent=extent,
                side=ZONE_SIDES[place],
                by="A. Observer",
            )
        )
    return tuple(found)


def _history(rng: np.random.Generator, truth: Truth, share: float) -> tuple[HistoryEvent, ...]:
    kinds = []
    for cause, (yes, no) in HISTORY.items():
        present = cause in truth.causes
        if rng.random() > share * (1.1 if present else 0.7):
            continue
        found = rng.random() < (rng.uniform(0.7, 0.97) if present else rng.uniform(0.005, 0.06))
        kinds.append(yes if found else no)
    for kind, grades in HEARD.items():
        if _left(rng, grades, truth.mechanisms) and rng.random() < share:
            kinds.append(kind)
    day = FAILED - timedelta(days=10)
    return tuple(
        HistoryEvent(
            when=day, kind=k, text="", source=Source(file="history.csv", locator=f"line {n}")
        )
        for n, k in enumerate((k for k in kinds if k), start=2)
    )


def _samples(rng: np.random.Generator, truth: Truth) -> tuple[OilSample, ...]:
    there = {p: _left(rng, g, truth.mechanisms) for p, (g, *_) in OIL.items()}
    rises = {p: float(np.exp(0.5 * rng.normal())) * rise for p, (_, rise, *_) in OIL.items()}
    days = (FAILED - timedelta(days=400), FAILED - timedelta(days=120), FAILED)
    made = [_sample(rng, n, day, there, rises) for n, day in enumerate(days)]
    wet = WA in truth.mechanisms and rng.random() < 0.9
    water = float(np.exp(np.log(1400 if wet else 80) + 0.6 * rng.normal()))
    made[-1].values["water"] = _value("water", water)
    return tuple(made)


def _sample(
    rng: np.random.Generator, n: int, day: date, there: dict[str, bool], rises: dict[str, float]
) -> OilSample:
    values = {}
    for name, (_, _, noise, usual) in OIL.items():
        level = 0.4 * usual if n == 0 else usual
        grown = rises[name] * (1.0 if n == 2 else 0.1) if there[name] and n else 0.0
        x = max(level + grown + noise * rng.normal(), 0.0)
        values[name] = _value(name, round(2 * min(x, 8.0)) / 2 if name == "colour" else x)
    return OilSample(
        id=f"S{n}", sampled=day, point="return", laboratory="L", machine_hours=None,
        oil_hours=None, new_oil=n == 0, values=values,
    )  # fmt: skip


def _value(name: str, x: float) -> OilValue:
    return OilValue(
        property=name, op="=", value=x, unit=UNITS.get(name, "mg/kg"), text=f"{x:.2g}",
        source=Source(file="oil/lab.csv", locator="simulated"),
    )  # fmt: skip


def _measured(rng: np.random.Generator, truth: Truth, limit: float) -> MeasuredInlet:
    error = 0.02e5 * rng.normal()
    if rng.random() < 0.05:  # a transducer that is off and nobody saw it
        error += float(rng.choice([-1, 1])) * rng.uniform(0.1e5, 0.25e5)
    warm = _regime(truth.warm + error, 100.0, limit, truth)
    cold = _regime(truth.cold + error, truth.cold_hours, limit, truth)
    return MeasuredInlet(
        sensor_u=0.02e5, standstill=None, standstill_expected=None, offset=None, warm=warm,
        cold=cold, last=warm, pieces=(), predicted_warm=None, shortfall=None, drift_per_week=None,
    )  # fmt: skip


def _regime(pressure: float, hours: float, limit: float, truth: Truth) -> Regime:
    del truth
    p = max(pressure, 1e3)
    return Regime(
        hours=hours, median=p, p05=p - 0.03e5, p95=p + 0.03e5, lowest=max(p - 0.1e5, 0.0),
        below_limit=float(p < limit), near_vapour=float(p < NEAR_VAPOUR),
        released=max(0.09 * (1.0e5 - p) / p, 0.0) * 0.4,
    )  # fmt: skip


def _record() -> AlignedRecord:
    time = np.arange(2.0)
    source = Source(file="pressure/slow.csv", locator="P_SUCT")
    series = Series(
        quantity="inlet pressure", unit="Pa", mean=time, low=time, high=time, source=source
    )
    return AlignedRecord(time_s=time, bin_s=1.0, series={"inlet pressure": series})


def _discharge(rng: np.random.Generator, truth: Truth) -> DischargeCheck:
    """The check with its model's own error: shares off by a factor, fuel by a coin of its own."""
    share = float(np.clip(truth.hot_share * np.exp(0.6 * rng.normal()), 0.0, 1.0))
    glycol = truth.case.fluid.fluid_class is not None and (
        truth.case.fluid.fluid_class.value == "water glycol"
    )
    rise = 12.0 / 360.0 / (truth.case.pump.speed.value if truth.case.pump.speed else 25.0)
    spread = Spread(mean=rise, sd=0.4 * rise, p05=0.5 * rise, p50=rise, p95=2.0 * rise)
    return DischargeCheck(
        discharge_pressure=truth.case.pump.discharge_pressure,
        temperature=truth.case.fluid.temperature,
        rise_time=RiseTime(
            spread=spread, basis="simulated", measured=False, log_mean=float(np.log(rise)),
            log_sd=0.4,
        ),
        possible=0.5 * share, indeterminate=0.3 * share, excluded=1.0 - 0.8 * share,
        hot=Status.NOT_EXCLUDED,
        fuel=FuelPath(
            status=Status.EXCLUDED if glycol else Status.NOT_EXCLUDED, flash_point=None,
            lean_limit=None, margin=None, vapour=float(rng.beta(0.6, 3.0)), reasons=("simulated",),
        ),
    )  # fmt: skip
