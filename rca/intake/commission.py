"""``[report]``, ``[[barriers]]``, ``[[other_units]]``, ``[[sought]]``, ``[[altering_tests]]``."""

from datetime import date, datetime

from rca.case.commission import (
    AlteringTest,
    Barrier,
    BarrierState,
    Claim,
    Commission,
    OtherUnit,
    Signatory,
    Sought,
)
from rca.intake.getters import Table
from rca.intake.words import mend_word

LANGUAGES = ("en", "de")
PAPERS = ("A4", "Letter")


def read_commission(top: Table) -> Commission:
    """What people state about the report itself; all of it may be missing."""
    table = top.table("report")
    commission = Commission(
        language=_one_of(table, "language", LANGUAGES),
        paper=_one_of(table, "paper", PAPERS),
        distribution=_texts(table, "distribution"),
        standards=tuple(map(_claim, table.tables("standards"))),
        limits=_texts(table, "limits"),
        dissent=_texts(table, "dissent"),
        dissent_asked=table.text("dissent_asked"),
        stopped=table.text("stopped"),
        exposure=table.text("exposure"),
        place=table.text("place"),
        received=_day(table, "received"),
        issued=_day(table, "issued"),
        approver=table.text("approver"),
        signatories=tuple(map(_signatory, table.tables("signatories"))),
        barriers=tuple(map(_barrier, top.tables("barriers"))),
        other_units=tuple(map(_other_unit, top.tables("other_units"))),
        sought=tuple(map(_sought, top.tables("sought"))),
        altering_tests=tuple(map(_altering_test, top.tables("altering_tests"))),
    )
    table.done()
    return commission


def _one_of(table: Table, key: str, known: tuple[str, ...]) -> str:
    """One of the known words; the first where the key is not given."""
    value = table.text(key)
    if not value:
        return known[0]
    folded = {one.casefold(): one for one in known}
    if value.casefold() not in folded:
        table.wrong(key, value, f"one of {', '.join(known)}", mend_word(value, list(known)))
        return known[0]
    return folded[value.casefold()]


def _texts(table: Table, key: str) -> tuple[str, ...]:
    value = table.raw(key)
    if value is None:
        return ()
    if not isinstance(value, list) or not all(isinstance(one, str) for one in value):
        table.wrong(key, value, "a list of texts", f'Write  {key} = ["..."]')
        return ()
    return tuple(one.strip() for one in value if one.strip())


def _day(table: Table, key: str) -> date | None:
    value = table.raw(key)
    if value is None:
        return None
    if isinstance(value, datetime):
        return value.date()
    if not isinstance(value, date):
        table.wrong(key, value, "a TOML date", f"Write  {key} = 2026-03-20  without quotes.")
        return None
    return value


def _claim(table: Table) -> Claim:
    claim = Claim(
        name=table.text("name", required=True),
        deviation=table.text("deviation"),
        effect=table.text("effect"),
    )
    table.done()
    return claim


def _signatory(table: Table) -> Signatory:
    signatory = Signatory(
        role=table.text("role", required=True),
        name=table.text("name", required=True),
        qualification=table.text("qualification"),
        relationship=table.text("relationship"),
    )
    table.done()
    return signatory


def _barrier(table: Table) -> Barrier:
    barrier = Barrier(
        name=table.text("name", required=True),
        state=table.word("state", BarrierState) or BarrierState.UNKNOWN,
        note=table.text("note"),
        source=table.source("name"),
    )
    table.done()
    return barrier


def _other_unit(table: Table) -> OtherUnit:
    unit = OtherUnit(
        unit=table.text("unit", required=True),
        found=table.text("found"),
        looked=_day(table, "looked"),
        source=table.source("unit"),
    )
    table.done()
    return unit


def _sought(table: Table) -> Sought:
    sought = Sought(
        what=table.text("what", required=True),
        asked=table.text("asked"),
        outcome=table.text("outcome"),
        effect=table.text("effect"),
        source=table.source("what"),
    )
    table.done()
    return sought


def _altering_test(table: Table) -> AlteringTest:
    test = AlteringTest(
        test=table.text("test", required=True),
        exhibit=table.text("exhibit"),
        when=_day(table, "when"),
        state_before=table.text("state_before"),
        notified=table.text("notified"),
        retained=table.text("retained"),
        source=table.source("test"),
    )
    table.done()
    return test
