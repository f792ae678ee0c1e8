"""Panels of the discharge side: heat, fuel, ignition, consequences; final words and numbers."""

from rca.base.panel import Card, Column, FigureRef, Panel, Section, Table
from rca.case.model import Case
from rca.discharge.delay import PUBLISHED_TO, delay_table
from rca.discharge.model import DischargeCheck, FuelPath, Population, Spread, Status, Trace
from rca.figures.discharge import CORE_MAP, HISTORY, INFLUENCES, SHARES
from rca.physics.consequences import Budget

ICE = 273.15  # [K]

HEAT_CARD = Card(
    verification=(
        3,
        "Grid and step refined until nothing moves; adiabatic, isothermal, small-amplitude and "
        "Rayleigh limits reproduced; energy closes.",
    ),
    validation=(
        1,
        "No measured gas temperature in a bubble inside a pump is known; parts of the model are "
        "validated elsewhere (small oscillations, air properties).",
    ),
    input_pedigree=(
        1,
        "Pressures and speed from the case; bubble sizes are common practice, not measured.",
    ),
    range_of_use=(
        2,
        "Inside the range of the equations; ignition delays above about 60 bar go beyond "
        "published experiments.",
    ),
    uncertainty=(3, "Quasi-Monte-Carlo over all named inputs, with the margin of 0.5 to 1.5."),
    robustness=(2, "Bubble radius dominates; the other inputs change the answer little."),
)
FUEL_CARD = Card(
    verification=(3, "Closed form, checked by hand."),
    validation=(1, "Flash-point anchor only; no vapour measurement of this oil."),
    input_pedigree=(1, "Flash point of the class unless the laboratory measured one."),
    range_of_use=(2, "Vapour path only; liquid thrown into the gas is outside any calculation."),
    uncertainty=(2, "Sampled over flash point, heat of vaporisation and dense-gas enhancement."),
    robustness=(2, "A flash point lowered by solvent or fuel would change the answer."),
)


def panels_discharge(case: Case, check: DischargeCheck) -> Section:
    """The section of the discharge side; one panel saying why where it could not be computed."""
    del case
    if check.hot is None or check.fuel is None or check.ignition is None:
        return Section(stage="discharge", title="Discharge side", panels=(_not_computed(check),))
    panels = [_heat(check), _fuel(check.fuel), _ignition(check)]
    if check.budget is not None:
        panels.append(_consequences(check.budget, check.air_fraction or 0.0))
    if check.high_pressure is not None:
        panels.append(_pressure(check))
    return Section(stage="discharge", title="Discharge side", panels=tuple(panels))


def celsius(kelvin: float) -> str:
    """A temperature in whole degrees Celsius."""
    return f"{kelvin - ICE:.0f} °C"


def _range(spread: Spread, factor: float = 1.0, offset: float = 0.0, digits: int = 3) -> str:
    low, high = ((v * factor + offset) for v in (spread.p05, spread.p95))
    return f"{low:.{digits}g} to {high:.{digits}g}"


def _not_computed(check: DischargeCheck) -> Panel:
    return Panel(
        key="discharge.heat",
        title="Can a bubble stay hot under compression?",
        question="Does entrained air stay hot long enough to ignite oil?",
        answer=f"Not looked at: {', '.join(check.missing)} missing.",
        status="not looked at",
    )


def _heat(check: DischargeCheck) -> Panel:
    hot, ideal, rise = check.hot, check.adiabatic, check.rise_time
    assert hot is not None
    assert ideal is not None
    assert rise is not None
    possible, between = check.possible or 0.0, check.indeterminate or 0.0
    lead = {
        Status.SUPPORTED: "Yes, for most of the entrained air",
        Status.NOT_EXCLUDED: "For part of the entrained air it can't be ruled out",
        Status.EXCLUDED: "No: the bubbles lose their heat in time",
    }[hot]
    return Panel(
        key="discharge.heat",
        title="Can a bubble stay hot under compression?",
        question="Does entrained air stay hot long enough to ignite oil?",
        answer=(
            f"{lead}: {possible:.0%} of it sits in bubbles that stay hot past the ignition delay, "
            f"{between:.0%} is indeterminate, {1 - possible - between:.0%} loses its heat in time."
        ),
        status=hot.value,
        paragraphs=(
            f"Without any heat loss the air would reach {celsius(ideal.p50)} "
            f"({celsius(ideal.p05)} to {celsius(ideal.p95)}). Arithmetic with a constant heat "
            f"capacity would say {celsius(check.constant_gamma or 0.0)}, which is too hot.",
            f"The pressure rises within {rise.spread.p50 * 1e3:.2g} ms "
            f"({_range(rise.spread, 1e3, digits=2)} ms): {rise.basis}. In that time a bubble "
            "loses heat to the oil, the more the smaller it is.",
            *_assumed(check),
        ),
        tables=(_populations(check.populations),),
        figures=_heat_figures(check),
        limits=(
            "Spherical bubbles: deformation, jets and break-up cool further, so core temperatures "
            "err high.",
            "A rise that starts abruptly lets the bubble overtake the line pressure at its very "
            "start: the mean, not the core, may then be up to 130 K warmer than shown.",
            *_beyond(check.populations),
            "Bubble sizes are the usual ranges for air out of solution and for air carried in; "
            "nobody measured them in this pump.",
            _delay_words(check),
            "Thermally possible: 1.5 times the critical radius or more; excluded: under 0.5.",
        ),
        card=HEAT_CARD,
    )


def _delay_words(check: DischargeCheck) -> str:
    table, pressure = delay_table(), check.discharge_pressure
    bar = pressure.value / 1e5 if pressure is not None else 0.0
    beyond = (
        f"published experiments end near {PUBLISHED_TO / 1e5:.0f} bar, so at this machine's "
        f"{bar:.0f} bar absolute it is an extrapolation"
        if bar > PUBLISHED_TO / 1e5
        else "within the pressures of published experiments"
    )
    return (
        f"Ignition delay of stoichiometric n-dodecane vapour, tabulated with {table.library} and "
        f"the mechanism {table.mechanism}: {beyond}. A mixture half as rich ignites up to three "
        "times later, one twice as rich up to twice as soon; evaporation and mixing lengthen the "
        "delay."
    )


def _beyond(populations: tuple[Population, ...]) -> tuple[str, ...]:
    share = sum(p.weight * p.beyond for p in populations)
    if share == 0.0:
        return ()
    return (
        f"In {share:.1%} of the samples a spherical collapse would pass 6000 K, where the model "
        "ends; real bubbles break up before. These count by the line pressure alone.",
    )


def _assumed(check: DischargeCheck) -> tuple[str, ...]:
    return (f"Assumed: {'; '.join(check.assumed)}.",) if check.assumed else ()


def _populations(rows: tuple[Population, ...]) -> Table:
    return Table(
        name="discharge-bubbles",
        title="Bubbles of the two origins under this pump's pressure rise",
        columns=(
            Column(title="origin"),
            Column(title="share of the air", unit="%", numeric=True),
            Column(title="radius, 5 to 95 %", unit="mm", numeric=True),
            Column(title="Péclet number, median", numeric=True),
            Column(title="peak core, 5 to 95 %", unit="°C", numeric=True),
            Column(title="peak mean, median", unit="°C", numeric=True),
            Column(title="peak oil surface, 95 %", unit="°C", numeric=True),
            Column(title="overtakes the line pressure", unit="%", numeric=True),
        ),
        rows=tuple(
            (
                p.origin,
                f"{p.weight:.0%}".rstrip("%"),
                _range(p.radius, 1e3, digits=2),
                f"{p.peclet.p50:.2g}",
                f"{p.core.p05 - ICE:.0f} to {p.core.p95 - ICE:.0f}",
                f"{p.mean.p50 - ICE:.0f}",
                f"{p.wall.p95 - ICE:.0f}",
                f"{p.inertial:.0%}".rstrip("%"),
            )
            for p in rows
        ),
        note=(
            "Radius at the inlet; 5 to 95 % of the sampled bubbles. Bubbles that overtake the "
            "line pressure collapse by inertia and get hotter than the line pressure alone makes "
            "them."
        ),
    )


def _heat_figures(check: DischargeCheck) -> tuple[FigureRef, ...]:
    refs = []
    if check.map is not None:
        refs.append(
            FigureRef(
                name=CORE_MAP,
                caption="Peak core temperature over bubble radius and rise time of the pressure, "
                "with the band of ignition and the region of this pump.",
                alt=f"Of this pump's entrained air {check.possible or 0:.0%} lies where ignition "
                f"is thermally possible, {check.excluded or 0:.0%} where the heat is lost.",
            )
        )
    if check.trace is not None:
        one = check.trace
        refs.append(
            FigureRef(
                name=HISTORY,
                caption=f"History of one carried-in bubble, {one.radius_0 * 1e3:.2g} mm in radius "
                f"at the inlet: temperatures, gas pressure (solid), line pressure (dashed), "
                f"radius.{_measured(one)}",
                alt=f"The core peaks at {celsius(max(one.core))}, the mean at "
                f"{celsius(max(one.mean))}, the oil surface at {celsius(max(one.wall))}.",
            )
        )
    if check.populations:
        refs.append(
            FigureRef(
                name=SHARES,
                caption="Shares of the bubbles' gas in the three bands, by origin; in brackets "
                "the share of the entrained air.",
                alt="; ".join(
                    f"{p.origin}: {p.possible:.0%} thermally possible, {p.excluded:.0%} loses its "
                    "heat in time"
                    for p in check.populations
                ),
            )
        )
    if check.influences:
        first = check.influences[0]
        refs.append(
            FigureRef(
                name=INFLUENCES,
                caption="Peak core temperature with one input at its 5 % and 95 % point and all "
                "others at their middle; right, the share of its scatter that the input explains.",
                alt=f"{first.name} matters most: {celsius(first.low)} to {celsius(first.high)}.",
            )
        )
    return tuple(refs)


def _measured(one: Trace) -> str:
    if one.linear_core is None:
        return ""
    return (
        " The line pressure follows the recorded rise; an even rise of the same length would "
        f"give a peak core of {celsius(one.linear_core)}."
    )


def _fuel(fuel: FuelPath) -> Panel:
    answer = {
        Status.SUPPORTED: "Vapour from the oil surface alone can reach the lean limit.",
        Status.NOT_EXCLUDED: "Not by vapour; only as liquid thrown into the gas, which can "
        "neither be shown nor excluded.",
        Status.EXCLUDED: "No: a water-based fluid.",
    }[fuel.status]
    if fuel.status is Status.NOT_EXCLUDED and fuel.vapour >= 0.05:
        answer = "Possibly: vapour from the oil surface comes near the lean limit."
    numbers: tuple[str, ...] = ()
    if fuel.lean_limit is not None and fuel.margin is not None and fuel.flash_point is not None:
        numbers = (
            f"With a flash point of {celsius(fuel.flash_point.value)} "
            f"({fuel.flash_point.origin.value}) the oil surface would have to reach "
            f"{celsius(fuel.lean_limit.p50)} ({celsius(fuel.lean_limit.p05)} to "
            f"{celsius(fuel.lean_limit.p95)}) for an ignitable vapour at the discharge pressure; "
            f"it falls short by {fuel.margin.p50:.0f} K ({fuel.margin.p05:.0f} to "
            f"{fuel.margin.p95:.0f} K). Probability that vapour suffices: {_small(fuel.vapour)}.",
        )
    return Panel(
        key="discharge.fuel",
        title="Is there fuel where the gas is hot?",
        question="Can oil reach the hot gas in a form that burns?",
        answer=answer,
        status=fuel.status.value,
        paragraphs=(*numbers, *fuel.reasons),
        limits=(
            "Clausius-Clapeyron from the flash point; heat of vaporisation 80 to 110 kJ/mol; "
            "dense gas raises the vapour pressure 1 to 30 times.",
            "A laboratory flash point lowered by solvent, fuel or cracking overrides the class "
            "value.",
        ),
        card=FUEL_CARD,
    )


def _small(share: float) -> str:
    return "under 0.1 %" if share < 0.001 else f"{share:.1%}"


def _ignition(check: DischargeCheck) -> Panel:
    assert check.hot is not None
    assert check.fuel is not None
    assert check.ignition is not None
    answer = {
        Status.SUPPORTED: "Supported: the heat lasts and vapour is there.",
        Status.NOT_EXCLUDED: "Not excluded: physics alone neither shows nor rules out ignition "
        "here; the damage and the oil must decide.",
        Status.EXCLUDED: "Excluded by physics for the bubble sizes and the pressure rise "
        "considered.",
    }[check.ignition]
    return Panel(
        key="discharge.ignition",
        title="Could entrained air have ignited oil?",
        question="Heat, time, oxygen and fuel together: is micro-dieseling possible here?",
        answer=answer,
        status=check.ignition.value,
        paragraphs=(
            f"Heat and time: {check.hot.value}. Fuel: {check.fuel.status.value}. Air out of "
            "solution in fresh oil holds about a third of oxygen, which about halves the ignition "
            "delay; that is in the calculation.",
        ),
        limits=(
            "Ignition is called supported only where both heat and fuel are; excluded where "
            "either is.",
            "Trapped pockets (seal grooves, cylinders, accumulators) are larger than bubbles and "
            "outside this calculation.",
        ),
    )


def _consequences(budget: Budget, air: float) -> Panel:
    soot = f"{budget.soot_low * 1e3:.2g} to {budget.soot_high * 1e3:.2g} mg"
    return Panel(
        key="discharge.consequences",
        title="What would burning bubbles do to the oil?",
        question="Can the heat and the soot be noticed?",
        answer=(
            f"Not as heat: {budget.combustion_rise:.2g} K a pass at most, against "
            f"{budget.throttling_rise:.1f} K from throttling the oil itself. As soot: up to "
            f"{soot} per litre and pass, visible after hundreds of passes."
        ),
        paragraphs=(
            f"Taken for {air:.1%} of free air by volume at the inlet, every bubble burning all "
            "its oxygen: an upper bound. A hot tank points to leakage or relief losses, not to "
            "burning bubbles.",
        ),
        tables=(
            Table(
                name="discharge-budget",
                title="Heat and soot per litre of oil and pass",
                columns=(
                    Column(title="item"),
                    Column(title="energy", unit="J", numeric=True),
                    Column(title="bulk rise", unit="K", numeric=True),
                ),
                rows=(
                    (
                        "compressing the air without heat loss",
                        f"{budget.compression_heat * 1e-3:.3g}",
                        f"{budget.compression_rise:.2g}",
                    ),
                    (
                        "burning with all its oxygen",
                        f"{budget.combustion_heat * 1e-3:.3g}",
                        f"{budget.combustion_rise:.2g}",
                    ),
                    ("throttling the oil itself", "", f"{budget.throttling_rise:.2g}"),
                ),
            ),
        ),
        limits=("Soot yield 5 to 15 % of the fuel: common practice, no source.",),
    )


def _pressure(check: DischargeCheck) -> Panel:
    high = check.high_pressure
    assert high is not None
    beyond = high.peak.value > high.limit.value
    return Panel(
        key="discharge.pressure",
        title="Was the discharge pressure too high?",
        question="Did the discharge pressure exceed what the machine is set to?",
        answer=(
            f"{'Yes' if beyond else 'Not in the records'}: highest recorded "
            f"{high.peak.value / 1e5:.0f} bar absolute, limit {high.limit.value / 1e5:.0f} bar "
            f"absolute ({high.rule})."
        ),
        status="beyond" if beyond else "within",
    )
