"""Panels of the suction side."""

from rca.base.panel import Card, Column, FigureRef, Panel, Section, Table
from rca.case.model import Case
from rca.figures.numbers import bar, celsius, share, with_u
from rca.figures.panels_suction_inverse import panels_inverse
from rca.suction.check import InletState, SuctionCheck, transducer_error
from rca.suction.measured import MeasuredInlet, Regime
from rca.suction.reservoir_air import ReservoirAir
from rca.suction.tornado import COLDEST

BUDGET_LIMITS = (
    "Steady flow at full displacement; pulsation of the flow is not in it, so short dips lie "
    "below these values.",
    "Losses: Darcy and Weisbach with 64/Re below Re 2100 and Churchill (1977) above; fittings by "
    "Hooper's two-coefficient method (1981); strainer in proportion to flow and viscosity.",
    "Uncertainties are standard uncertainties: 15 % on line losses, 35 % on the rated strainer "
    "loss, both common practice without a source.",
)
AIR_LIMITS = (
    "Equilibrium release by Henry's law with the Bunsen coefficient; the rate is first order with "
    "a time constant of 0.1 to 10 s, a range of common practice without a source.",
)


def panels_suction(case: Case, check: SuctionCheck) -> Section:
    """The section of the suction side."""
    panels = [_budget(case, check)]
    if check.measured is not None:
        panels.append(_measured(check, check.measured))
        panels += panels_inverse(check)
    panels.append(_air(check))
    if check.reservoir is not None:
        panels.append(_reservoir(check.reservoir))
    return Section(stage="suction", title="Suction side", panels=tuple(panels))


def _budget(case: Case, check: SuctionCheck) -> Panel:
    question = "What pressure should stand at the pump inlet with the line as described, clean?"
    if check.normal is None or check.cold is None:
        missing = ", ".join(check.missing) or "the flow or the temperature"
        return Panel(
            key="suction.budget",
            title="Pressure budget",
            question=question,
            answer=f"Not computed; missing: {missing}.",
            status="not assessed",
        )
    warm, cold = check.normal, check.cold
    limit = f"; the limit is {bar(check.limit)} bar(a)" if check.limit is not None else ""
    return Panel(
        key="suction.budget",
        title="Pressure budget",
        question=question,
        answer=(
            f"{with_u(warm.pressure.mean, warm.pressure.sd, scale=1e-5)} bar(a) at "
            f"{celsius(warm.temperature)} \u00b0C and "
            f"{with_u(cold.pressure.mean, cold.pressure.sd, scale=1e-5)} bar(a) at a start with "
            f"{celsius(cold.temperature)} \u00b0C{limit}."
        ),
        status="within the limit" if warm.below_limit < 0.5 else "below the limit",
        paragraphs=(f"Limit: {check.limit_source}.", *_cold_words(check), *_pulsation(check)),
        tables=(_parts(warm, cold), _inputs(case)),
        figures=(
            FigureRef(
                name="suction-budget",
                caption="Pressure budget of the clean line, warm"
                + ("; below it, what the record shows beyond." if check.inverse else "."),
                alt=f"Of the air's {bar(check.atmosphere)} bar, "
                f"{bar(warm.pressure.mean)} bar(a) remain at the pump inlet of the clean line.",
            ),
            FigureRef(
                name="suction-temperature",
                caption="Inlet pressure over oil temperature: computed for the clean line, and "
                "recorded while running, older points paler.",
                alt=f"The clean line falls to {bar(cold.pressure.mean)} bar(a) at "
                f"{celsius(cold.temperature)} degrees Celsius.",
            ),
            *_swings(check),
        ),
        limits=BUDGET_LIMITS,
        card=Card(
            verification=(3, "held against published friction and fitting values in the tests"),
            validation=(2, "held against this unit's own record where there is one"),
            input_pedigree=(2, "geometry as stated in case.toml, not measured for this report"),
            range_of_use=(3, "laminar to turbulent, oil above its pour point"),
            uncertainty=(3, "quasi-random draws of losses, viscosity, weather"),
            robustness=(3, "the answer moves little within the stated uncertainties"),
        ),
    )


def _cold_words(check: SuctionCheck) -> tuple[str, ...]:
    said = []
    if check.coldest_clean is not None and check.coldest_clean > COLDEST:
        said.append(
            f"At full flow the clean line holds the limit down to {celsius(check.coldest_clean)} "
            "\u00b0C of the oil."
        )
    if check.coldest_found is not None:
        said.append(
            f"The line as found at the end of the record holds it from "
            f"{celsius(check.coldest_found)} \u00b0C upwards."
        )
    return tuple(said)


def _pulsation(check: SuctionCheck) -> tuple[str, ...]:
    if check.pulsation_bound is None:
        return ()
    return (
        f"The pistons' own pulsation would dip the inlet by at most "
        f"{bar(check.pulsation_bound)} bar if the oil column were rigid (Newton's second law, "
        "ideal piston kinematics); oil, hose and released air give way, so the true dip is a "
        "fraction of that and is read from a fast record of the inlet.",
    )


def _swings(check: SuctionCheck) -> tuple[FigureRef, ...]:
    if not check.swings_warm or not check.swings_cold:
        return ()
    warm, cold = check.swings_warm[0], check.swings_cold[0]
    words = (
        f"Warm, {warm.name} moves the clean line's inlet most, by {bar(warm.width, digits=3)} bar "
        f"from 5 to 95 %; at the cold start {cold.name}, by {bar(cold.width, digits=3)} bar."
    )
    return (
        FigureRef(
            name="suction-swings",
            caption="How far each uncertain input moves the clean line's inlet: hatched at its "
            "5 % point, filled at its 95 % point.",
            alt=words,
        ),
    )


def _parts(warm: InletState, cold: InletState) -> Table:
    cold_losses = {name: (loss, u) for name, loss, u in cold.parts}
    return Table(
        name="suction-parts",
        title="Losses by part",
        columns=(
            Column(title="Part"),
            Column(title="Warm loss", unit="bar", numeric=True),
            Column(title="Cold loss", unit="bar", numeric=True),
        ),
        rows=tuple(
            (
                name,
                with_u(loss, u, scale=1e-5),
                with_u(*cold_losses.get(name, (float("nan"), None)), scale=1e-5),
            )
            for name, loss, u in warm.parts
        ),
        note="Value \u00b1 standard uncertainty.",
    )


def _inputs(case: Case) -> Table:
    pump, fluid = case.pump, case.fluid
    known = (
        ("displacement", pump.displacement),
        ("speed", pump.speed),
        ("altitude", case.header.altitude),
        ("viscosity at 40 \u00b0C", fluid.viscosity_40),
        ("viscosity at 100 \u00b0C", fluid.viscosity_100),
        ("density at 15 \u00b0C", fluid.density_15),
        ("oil temperature", fluid.temperature),
        ("level above the inlet", case.reservoir.level_above_inlet),
    )
    return Table(
        name="suction-inputs",
        title="Inputs",
        columns=(Column(title="Input"), Column(title="Value"), Column(title="Where from")),
        rows=tuple(
            (name, r.text, f"{r.origin.value}, {r.source.locator if r.source else ''}")
            for name, r in known
            if r is not None
        ),
    )


def _measured(check: SuctionCheck, measured: MeasuredInlet) -> Panel:
    last = measured.last or measured.warm
    answer = "The record holds too few running samples to say."
    if last is not None:
        answer = (
            f"{bar(last.median)} bar(a) in the last tenth of the warm running time "
            f"(\u00b1 {bar(measured.sensor_u, digits=3)} bar)"
        )
        if measured.shortfall is not None:
            answer += f"; {bar(measured.shortfall)} bar below the clean line"
        answer += "."
    notes = []
    if measured.offset is not None:
        notes.append(
            f"At standstill the transducer reads {bar(measured.offset, digits=3)} bar against "
            "air and head; its uncertainty is taken from that."
        )
    error = transducer_error(check)
    if error is not None:
        notes.append(
            f"At the end of the record the transducer reads {bar(abs(error.p50))} bar too "
            f"{'low' if error.p50 > 0 else 'high'} ({bar(error.p05)} to {bar(error.p95)} bar, "
            "low counted positive); the evidence uses the corrected pressure."
        )
    if measured.drift_per_week is not None:
        notes.append(
            f"Against the clean line the loss grows by {bar(measured.drift_per_week, digits=3)} "
            "bar a week (median of all slopes between pieces)."
        )
    return Panel(
        key="suction.measured",
        title="Measured inlet pressure",
        question="What pressure stood at the pump inlet, and how did it develop?",
        answer=answer,
        status="below the limit"
        if last and check.limit and last.median < check.limit
        else "within the limit",
        paragraphs=tuple(notes),
        tables=(_regimes(measured),),
        figures=(
            (
                FigureRef(
                    name="suction-development",
                    caption="Warm, running inlet pressure in twelve pieces of the record, and the "
                    "clean line at the same temperatures.",
                    alt=f"The measured inlet pressure goes from "
                    f"{bar(measured.pieces[0].measured)} to {bar(measured.pieces[-1].measured)} "
                    "bar(a).",
                ),
            )
            if measured.pieces
            else ()
        ),
        limits=(
            "Limit applied by simple acceptance: a median below the limit counts as below; the "
            "probability beside it carries the uncertainty.",
        ),
    )


def _regimes(measured: MeasuredInlet) -> Table:
    def row(name: str, r: Regime | None) -> tuple[str, ...]:
        if r is None:
            return (name, "not seen", "", "", "", "")
        return (
            name,
            f"{r.hours:.0f}" if r.hours >= 20 else f"{r.hours:.1f}",
            bar(r.median),
            f"{bar(r.p05)} to {bar(r.p95)}",
            bar(r.lowest),
            f"{100 * r.below_limit:.0f}",
        )

    return Table(
        name="suction-regimes",
        title="Inlet pressure by state of the machine",
        columns=(
            Column(title="State"),
            Column(title="Time", unit="h", numeric=True),
            Column(title="Median", unit="bar(a)", numeric=True),
            Column(title="5 to 95 %", unit="bar(a)", numeric=True),
            Column(title="Lowest", unit="bar(a)", numeric=True),
            Column(title="Below the limit", unit="% of time", numeric=True),
        ),
        rows=(
            row("warm, running", measured.warm),
            row("last tenth of it", measured.last),
            row("cold, running", measured.cold),
        ),
    )


def _air(check: SuctionCheck) -> Panel:
    measured = check.measured and (check.measured.last or check.measured.warm)
    state = check.normal
    if measured:
        answer = (
            f"About {100 * measured.released:.1f} % of the oil's volume at the measured inlet "
            "pressure."
        )
    elif state is not None:
        answer = (
            f"{100 * state.released.p05:.2f} to {100 * state.released.p95:.2f} % of the oil's "
            "volume for the clean line."
        )
    else:
        answer = "Not computed; no inlet pressure is known."
    rows = []
    if state is not None:
        rows.append(
            ("clean line, computed", f"{100 * state.released.p50:.2f}", share(state.releases))
        )
    if measured:
        rows.append(("measured inlet, end of record", f"{100 * measured.released:.2f}", ""))
    residence = f"{check.residence:.1f} s" if check.residence is not None else "unknown"
    return Panel(
        key="suction.air",
        title="Air released before the pump",
        question="How much air comes out of solution by the time the oil reaches the pump?",
        answer=answer,
        status="supported" if (measured and measured.released > 0.01) else "not excluded",
        paragraphs=(f"Time of the oil in the suction line: {residence}.", *_nucleus(check)),
        tables=(
            Table(
                name="suction-air",
                title="Released air",
                columns=(
                    Column(title="State"),
                    Column(title="Gas per oil", unit="%", numeric=True),
                    Column(title="Probability above 1 %", numeric=True),
                ),
                rows=tuple(rows),
            ),
        )
        if rows
        else (),
        figures=_path_figure(check),
        limits=AIR_LIMITS,
        card=Card(
            verification=(3, "equilibrium and rate held against their exact limits in the tests"),
            validation=(1, "released air is not measured; nothing to hold it against"),
            input_pedigree=(2, "Bunsen coefficient of the class unless measured"),
            range_of_use=(3, "Henry's law below atmospheric pressure"),
            uncertainty=(3, "the time constant is spread over two decades"),
            robustness=(2, "the amount moves with the unknown rate more than with the pressure"),
        ),
    )


def _nucleus(check: SuctionCheck) -> tuple[str, ...]:
    if check.reservoir is None or check.reservoir.nucleus is None:
        return ()
    return (
        f"At this inlet pressure gas nuclei above {1e6 * check.reservoir.nucleus:.1f} \u00b5m "
        "radius grow; oil in service usually holds coarser ones (common practice).",
    )


def _reservoir(found: ReservoirAir) -> Panel:
    release = "" if found.release_stated else ", usual value of the grade's standard"
    clean = (
        f" ({1e3 * found.clean_diameter:.1f} mm with a clean surface)"
        if found.clean_diameter is not None
        else ""
    )
    return Panel(
        key="suction.reservoir",
        title="Air carried round by the reservoir",
        question="Does the oil stay long enough in the reservoir to give up its air?",
        answer=(
            f"It stays about {found.dwell / 60:.1f} min; its air needs "
            f"{found.release_time / 60:.1f} min to come out, so about "
            f"{100 * found.remaining:.0f} % of the air that enters goes round again."
        ),
        status="supported" if found.remaining > 0.5 else "not excluded",
        paragraphs=(
            f"Volume over flow is {found.ideal_dwell / 60:.1f} min; {_baffle(found)} gives the "
            f"oil part of it. Air release time at the oil's temperature: "
            f"{found.release_time / 60:.1f} min{release}.",
            f"Bubbles below {1e3 * found.kept_diameter:.1f} mm{clean} do not rise out of "
            f"{found.depth:.2f} m{'' if found.depth_stated else ' (depth assumed)'} in that time.",
        ),
        limits=(
            "Air release time after ASTM D3427 and ISO 9120, to 0.2 % air; decay between the ends "
            "of that test taken as exponential (judgement). Rise by Stokes, stiff surface.",
            "How much air enters is not known; a leak on the suction side adds air behind the "
            "reservoir and is not in this.",
        ),
    )


def _baffle(found: ReservoirAir) -> str:
    if found.baffle is None:
        return "a reservoir whose baffle is not stated, taken as without,"
    return "a baffled reservoir" if found.baffle else "a reservoir without a baffle"


def _path_figure(check: SuctionCheck) -> tuple[FigureRef, ...]:
    if not check.paths:
        return ()
    last = check.paths[-1]
    end = last.stations[-1]
    return (
        FigureRef(
            name="suction-path",
            caption="Pressure and released air after each part of the suction line, with 90 % "
            "band; dashed: at equilibrium.",
            alt=f"In the line {last.state.removesuffix(' line')}, "
            f"{100 * end.released.p50:.1f} % gas per oil reach the pump, "
            f"{100 * end.released.p05:.1f} to {100 * end.released.p95:.1f} %.",
        ),
    )
