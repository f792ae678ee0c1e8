"""The front matter: what failed, who asked, under which rules, on which machine."""

from typing import Any

from rca.base.source import Reading
from rca.case.model import Case
from rca.figures.numbers import written
from rca.report.catalogue import Reader

Rows = tuple[tuple[str, str], ...]


def title_facts(case: Case, reader: Reader) -> Rows:
    """What failed, when, and what it cost."""
    header = case.header
    hours = f"{header.downtime.value / 3600:.0f} h" if header.downtime is not None else ""
    rows = (
        ("Failed", reader.moment(header.occurred)),
        ("Unit", header.asset),
        ("Site", header.site),
        ("Downtime", hours),
        ("Cost", header.cost),
        ("Severity", header.severity),
    )
    return _labelled(rows, reader)


def scope(case: Case, reader: Reader) -> Rows:
    """The commission; what is not stated says so."""
    header, given = case.header, case.commission
    t = reader.frame
    days = (
        (t("failed"), header.occurred.date() if header.occurred else None),
        (t("first exhibit received"), given.received),
        (t("last parts read"), max((f.when for f in case.findings if f.when), default=None)),
        (t("issued"), given.issued),
    )
    rows = (
        ("Asked by", header.client),
        ("Question", header.question),
        ("Not part of it", "; ".join(header.out_of_scope) or t("nothing stated")),
        ("Limits of the instruction", " ".join(given.limits) or t("nothing stated")),
        ("Investigator", header.investigator),
        ("Reviewer", header.reviewer),
        ("Dates", "; ".join(f"{name} {reader.day(day)}" for name, day in days)),
        ("Examined at", given.place),
        ("Known before the parts were read", given.exposure),
        ("Why the search ended", given.stopped),
        ("Sent to", ", ".join(given.distribution)),
    )
    return _labelled(rows, reader)


def standards(case: Case, reader: Reader) -> tuple[tuple[str, str, str], ...]:
    """Each standard claimed with its deviation and what that does to the result."""
    none = reader.frame("none recorded")
    return tuple(
        (c.name, c.deviation or none, c.effect or "\u2014") for c in case.commission.standards
    )


def equipment(case: Case, reader: Reader) -> tuple[tuple[str, str, str], ...]:
    """The machine as stated: name, value, where it comes from."""
    pump, tank, fluid = case.pump, case.reservoir, case.fluid
    kinds = (
        ("Pump", reader.word(pump.kind.value) if pump.kind else "", "pump.kind"),
        ("Maker and model", " ".join(x for x in (pump.maker, pump.model) if x), "pump.maker"),
        ("Pistons, vanes or teeth", str(pump.elements or ""), "pump.elements"),
        ("Fluid", _fluid(case), "fluid.class"),
    )
    readings: tuple[tuple[str, Reading | None], ...] = (
        ("Displacement", pump.displacement),
        ("Speed", pump.speed),
        ("Discharge pressure", pump.discharge_pressure),
        ("Relief pressure", pump.relief_pressure),
        ("Lowest inlet pressure allowed", pump.inlet_pressure_min),
        ("Transition angle", pump.transition_angle),
        ("Oil in the reservoir", tank.oil_volume),
        ("Oil above the pump inlet", tank.level_above_inlet),
        ("Viscosity at 40 \u00b0C", fluid.viscosity_40),
        ("Viscosity at 100 \u00b0C", fluid.viscosity_100),
        ("Flash point", fluid.flash_point),
        ("Normal oil temperature", fluid.temperature),
        ("Coldest start", fluid.coldest_start),
        ("Altitude", case.header.altitude),
    )
    rows = [(reader.frame(n), v or reader.frame("not recorded"), "") for n, v, _ in kinds]
    rows += [(reader.frame(name), *_reading(reading, reader)) for name, reading in readings]
    return tuple(rows)


def _reading(reading: Reading | None, reader: Reader) -> tuple[str, str]:
    if reading is None:
        return reader.frame("not recorded"), ""
    where = reading.source.locator.rsplit("(", 1)[-1].rstrip(")") if reading.source else ""
    return reader.number(written(reading.text)), f"{reader.word(reading.origin.value)}, {where}"


def _fluid(case: Case) -> str:
    fluid = case.fluid
    parts: tuple[Any, ...] = (
        fluid.fluid_class.value if fluid.fluid_class else "",
        f"ISO VG {fluid.iso_vg}" if fluid.iso_vg else "",
        fluid.name,
    )
    return " ".join(str(x) for x in parts if x)


def _labelled(rows: tuple[tuple[str, str], ...], reader: Reader) -> Rows:
    missing = reader.frame("not recorded")
    return tuple((reader.frame(name), value or missing) for name, value in rows)
