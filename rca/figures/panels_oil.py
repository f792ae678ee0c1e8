"""The oil section of the report: latest sample, trends, what could not be read."""

from rca.base.panel import Column, Panel, Section, Table
from rca.case.model import Case
from rca.figures.panels_oil_trends import trends_panel
from rca.oil.check import OilCheck
from rca.oil.judge import Judged
from rca.oil.words import property_label, property_name, unit_text

TITLE = "Oil analysis"
ROUTINE_NOTE = (
    "Routine values that stay flat do not show that no combustion of bubbles and no spark "
    "discharge took place: viscosity, acid number and infrared oxidation usually miss both."
)


def panels_oil(case: Case, check: OilCheck | None) -> Section:
    """The panels of the oil section; one panel that says so where there is no usable sample."""
    if check is None:
        return Section(stage="oil", title=TITLE, panels=(_nothing(case),))
    panels = [_latest(check), _combinations(check), trends_panel(check)]
    left_out = (check.excluded, check.unread, check.undated, check.later)
    if any(left_out) or check.other_points or check.other_assets:
        panels.append(_left_out(check))
    panels.append(_precision(check))
    return Section(stage="oil", title=TITLE, panels=tuple(panels))


def _nothing(case: Case) -> Panel:
    named = ", ".join(one.file for one in case.oil_reports)
    answer = (
        f"No usable sample could be read from {named}."
        if named
        else "The case folder holds no laboratory report of the oil."
    )
    return Panel(
        key="oil.none",
        title="Oil samples",
        question="What does the oil show?",
        answer=f"{answer} The oil was not looked at; that weighs neither way.",
        status="not assessed",
    )


def _latest(check: OilCheck) -> Panel:
    beyond = [one for one in _ordered(check) if one.beyond()]
    out = [
        one
        for one in sorted(check.judged.values(), key=lambda one: -abs(one.stands_out or 0.0))
        if one.stands_out is not None and abs(one.stands_out) >= 1.0
    ]
    rows = [_latest_row(one) for one in _ordered(check)]
    answer = _latest_answer(check, beyond, out)
    return Panel(
        key="oil.latest",
        title="The latest sample against limits and new oil",
        question="Does the oil differ from new oil by more than the tests scatter?",
        answer=answer,
        status="beyond" if beyond else "within",
        paragraphs=tuple(p for p in (_timing(check), _darkening(check)) if p),
        tables=(
            Table(
                name="oil-latest",
                title=f"Sample {check.latest} of {check.latest_date}",
                columns=(
                    Column(title="Property"),
                    Column(title="Result", numeric=True),
                    Column(title="New", numeric=True),
                    Column(title="Change", numeric=True),
                    Column(title="Noise floor", numeric=True),
                    Column(title="Limit"),
                    Column(title="Judged"),
                ),
                rows=tuple(row for row, _ in rows),
                marks=tuple(mark for _, mark in rows),
                note=(
                    "The noise floor is R of the method at this level, widened where the value "
                    "for new oil is not measured. A change inside it is no change."
                ),
            ),
            _limits_table(check),
        ),
        limits=_latest_limits(check),
    )


def _latest_answer(check: OilCheck, beyond: list[Judged], out: list[Judged]) -> str:
    changed = ", ".join(
        f"{property_name(one.property)} {one.change:+.3g} {unit_text(one.unit)}".strip()
        for one in out[:6]
        if one.change is not None
    )
    first = (
        f"{len(beyond)} of {len(check.judged)} properties pass a limit"
        f" ({', '.join(property_name(one.property) for one in beyond)})."
        if beyond
        else f"None of {len(check.judged)} properties passes a limit."
    )
    second = (
        f"Beyond the scatter of the tests: {changed}."
        if changed
        else "No property differs from new oil by more than its test scatters."
    )
    return f"{first} {second}"


def _latest_row(one: Judged) -> tuple[tuple[str, ...], str]:
    beyond = any(c.crossed for c in one.crossings)
    outside = one.stands_out is not None and abs(one.stands_out) >= 1.0
    if beyond:
        word, mark = "beyond limit", "beyond"
    elif outside:
        word, mark = "changed", "near"
    elif one.stands_out is None:
        word, mark = ("nothing to compare" if one.new is None else "limit of detection"), ""
    else:
        word, mark = "no change shown", ""
    return (
        property_label(one.property, one.unit),
        one.text,
        f"{one.new:.4g}" if one.new is not None else "–",
        f"{one.change:+.3g}" if one.change is not None else "–",
        f"{one.noise:.2g}",
        "; ".join(c.words for c in one.crossings) or "none known",
        word,
    ), mark


def _limits_table(check: OilCheck) -> Table:
    rows, marks = [], []
    for one in _ordered(check):
        for c in one.crossings:
            state = {True: "passed", False: "kept", None: "can't be told"}[c.crossed]
            rows.append((property_name(one.property), c.words, c.basis, state, c.source, c.flag))
            marks.append("beyond" if c.crossed else "")
    return Table(
        name="oil-limits",
        title="Limits applied, with their sources",
        columns=tuple(
            Column(title=t) for t in ("Property", "Limit", "Basis", "State", "Source", "Known how")
        ),
        rows=tuple(rows),
        marks=tuple(marks),
        note="A limit is a warning level to be read with the trend, not proof of a fault.",
    )


def _latest_limits(check: OilCheck) -> tuple[str, ...]:
    said = []
    if not check.reference:
        said.append(
            "No new-oil sample is on record; values of case.toml or usual values stand in, with "
            "a wider noise floor. Changes err towards not shown."
        )
    if check.fluid_class not in ("mineral", "PAO", ""):
        said.append(
            "Most published limits are for mineral oil and were not applied to "
            f"{check.fluid_class}."
        )
    if not check.fluid_class:
        said.append("The class of fluid is not stated; limits for mineral oil were applied.")
    return tuple(said)


def _timing(check: OilCheck) -> str:
    parts = []
    if check.days_before_failure is not None:
        days = check.days_before_failure
        parts.append(
            f"The sample was drawn {days} days before the failure."
            if days >= 0
            else f"The sample was drawn {-days} days after the failure."
        )
    if check.oil_hours is not None:
        parts.append(f"The oil had run {check.oil_hours:.0f} h.")
    if check.point:
        parts.append(f"Sample point: {check.point}.")
    return " ".join(parts)


def _darkening(check: OilCheck) -> str:
    dark = check.darkening
    if dark is None:
        return "The colour of the oil is not on record."
    change = (
        f"Colour {dark.text} (ASTM D1500) against {dark.new:g} ({dark.new_from}): "
        f"{dark.change:+.1f} units."
    )
    if dark.step_days is not None:
        since = "the oil change" if dark.step_from == "fill" else f"sample {dark.step_from}"
        return f"{change} Most of it came within {dark.step_days} days after {since}."
    return change


def _combinations(check: OilCheck) -> Panel:
    most = [
        p
        for p in check.pictures
        if len(p.fits) >= 2
        and len(p.fits) > len(p.does_not_fit)
        and any(not sign.endswith("flat") for sign in p.fits)
    ]
    named = "; ".join(
        f"{p.name} ({len(p.fits)} of {len(p.fits) + len(p.does_not_fit)} tested signs)"
        for p in most
    )
    answer = (
        f"More signs shown than not: {named}."
        if named
        else "No picture has two signs shown and fewer not shown."
    )
    return Panel(
        key="oil.combinations",
        title="Which results go together",
        question="Which pictures do the results fit, and what would part them?",
        answer=answer,
        status="described",
        tables=(
            Table(
                name="oil-combinations",
                title="Signs by picture",
                columns=tuple(
                    Column(title=t) for t in ("Picture", "Fits", "Not shown", "Not tested")
                ),
                rows=tuple(
                    (
                        p.name,
                        ", ".join(p.fits) or "–",
                        ", ".join(p.does_not_fit) or "–",
                        ", ".join(p.not_tested) or "–",
                    )
                    for p in check.pictures
                ),
                note=(
                    "A sign not shown is no proof of absence; the weighing is done with all "
                    "other evidence, not here."
                ),
            ),
        ),
        paragraphs=(ROUTINE_NOTE,),
    )


def _left_out(check: OilCheck) -> Panel:
    rows = [("sample", name, f"set aside: {reason}") for name, reason in check.excluded]
    rows += [("sample", name, "no usable day of sampling") for name in check.undated]
    rows += [("sample", name, "drawn from oil put in after the failure") for name in check.later]
    rows += [
        ("sample point", name, "metals and counts of another point are not mixed in")
        for name in check.other_points
    ]
    rows += [("machine", name, "not the machine of this case") for name in check.other_assets]
    rows += [
        (f"{cell.source.file}, {cell.source.locator}", cell.text, cell.reason)
        for cell in check.unread
    ]
    return Panel(
        key="oil.left-out",
        title="What was set aside or could not be read",
        question="Which results carry no weight here, and why?",
        answer=(
            f"Samples set aside: {len(check.excluded)}; cells not read: {len(check.unread)}; "
            f"samples without a usable date: {len(check.undated)}."
        ),
        status="set aside",
        tables=(
            Table(
                name="oil-left-out",
                title="Kept as received, not used",
                columns=(Column(title="Place"), Column(title="As written"), Column(title="Why")),
                rows=tuple(rows),
                marks=tuple("set aside" for _ in rows),
            ),
        ),
    )


def _precision(check: OilCheck) -> Panel:
    rows = tuple(
        (
            property_name(one.property),
            f"{one.noise:.2g} {unit_text(one.unit)}".strip(),
            one.noise_source,
            one.noise_flag,
            one.noise_note,
        )
        for one in _ordered(check)
    )
    weak = sum(row[3] != "published" for row in rows)
    return Panel(
        key="oil.precision",
        title="How far the tests scatter",
        question="From which change on is a change real?",
        answer=(
            f"The noise floor of {len(rows)} properties is listed; {weak} rest on memory or "
            "common practice and are to be checked against the laboratory's own figures."
        ),
        tables=(
            Table(
                name="oil-precision",
                title="Noise floor at the level of the latest sample",
                columns=(
                    Column(title="Property"),
                    Column(title="Noise floor", numeric=True),
                    Column(title="Method"),
                    Column(title="Known how"),
                    Column(title="Note"),
                ),
                rows=rows,
                note="R: two results of two laboratories differ by more in one case of twenty.",
            ),
        ),
    )


def _ordered(check: OilCheck) -> list[Judged]:
    """Those beyond a limit first, then by how far they stand out."""
    return sorted(
        check.judged.values(),
        key=lambda one: (not one.beyond(), -abs(one.stands_out or 0.0), one.property),
    )
