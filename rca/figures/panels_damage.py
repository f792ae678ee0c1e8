"""Panels of the damage."""

from rca.base.counted import counted
from rca.base.panel import Column, FigureRef, Panel, Section, Table
from rca.case.vocabulary import Extent, Side
from rca.damage.check import DamageCheck


def panels_damage(check: DamageCheck) -> Section:
    """The section of the physical findings: what was seen, where, how much."""
    found = [o for o in check.observations if o.extent is not Extent.NONE]
    absent = len(check.observations) - len(found)

    def count(side: Side) -> int:
        return sum(o.side is side for o in found)

    if not check.observations:
        answer = "No finding is on record."
    else:
        answer = (
            f"{counted(len(found), 'sign')} found: {count(Side.INLET)} on inlet-side zones, "
            f"{count(Side.DISCHARGE)} on discharge-side zones, {count(Side.NEITHER)} on zones of "
            f"neither side; {absent} looked for and absent."
        )
    tables = []
    if check.observations:
        tables.append(
            Table(
                name="damage-findings",
                title="Findings",
                columns=(
                    Column(title="Id"),
                    Column(title="Component"),
                    Column(title="Zone"),
                    Column(title="Side"),
                    Column(title="Sign"),
                    Column(title="Extent"),
                    Column(title="Note as written"),
                    Column(title="Photo"),
                ),
                rows=tuple(
                    (
                        o.id,
                        o.component,
                        o.zone,
                        o.side.value,
                        o.sign.value,
                        "looked for, absent" if o.extent is Extent.NONE else o.extent.value,
                        o.note,
                        o.photo.split("-")[0],
                    )
                    for o in check.observations
                ),
                note="Notes are shown as written and carry no weight.",
                shown=60,
            )
        )
    if check.unweighed:
        tables.append(
            Table(
                name="damage-unweighed",
                title="Findings shown without weight",
                columns=(Column(title="Id"), Column(title="Words"), Column(title="Why")),
                rows=tuple((u.id, u.words, u.reason) for u in check.unweighed),
            )
        )
    return Section(
        stage="damage",
        title="Physical findings",
        panels=(
            Panel(
                key="damage.findings",
                title="Findings at the teardown",
                question="What was seen, on which zone, and what was looked for and absent?",
                answer=answer,
                paragraphs=tuple(f"Contradiction: {c}." for c in check.contradictions),
                tables=tuple(tables),
                figures=(
                    FigureRef(
                        name="damage-map",
                        caption="Zones with the most severe finding of each; a neutral drawing, "
                        "not to scale.",
                        alt=answer,
                    ),
                )
                if check.observations
                else (),
            ),
        ),
    )
