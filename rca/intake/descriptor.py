"""``case.toml`` to the typed parts of a case."""

import tomllib
from dataclasses import dataclass
from zoneinfo import ZoneInfo, available_timezones

from rca.base.errors import Problem, Severity
from rca.base.units import UnitError, channel_scale
from rca.case.commission import Commission
from rca.case.model import (
    Breather,
    Channel,
    Excluded,
    Fluid,
    Header,
    OilReportFile,
    Pump,
    RecordFile,
    Reservoir,
    SuctionPart,
    TimeAxis,
)
from rca.case.vocabulary import FITTING_FORMS, QUANTITIES, FluidClass, PartKind, PumpKind
from rca.intake.commission import read_commission
from rca.intake.getters import Findings, Table
from rca.intake.toml_lines import key_lines
from rca.intake.words import mend_word
from rca.physics.atmosphere import standard_atmosphere


@dataclass(frozen=True, slots=True, kw_only=True)
class Descriptor:
    """The typed parts of ``case.toml``."""

    header: Header
    pump: Pump
    reservoir: Reservoir
    suction_line: tuple[SuctionPart, ...]
    fluid: Fluid
    oil_reports: tuple[OilReportFile, ...]
    records: tuple[RecordFile, ...]
    excluded: tuple[Excluded, ...]
    commission: Commission


def read_descriptor(content: bytes, sha256: str) -> tuple[Descriptor | None, list[Problem]]:
    """The descriptor, or None where it can't be read as TOML at all; and every problem found."""
    findings = Findings(sha256=sha256)
    try:
        text = content.decode("utf-8-sig")
        plain = tomllib.loads(text)
    except UnicodeDecodeError as error:
        findings.add(
            "",
            f"bytes that are not UTF-8 at offset {error.start}",
            "UTF-8 text",
            "Save the file as UTF-8.",
        )
        return None, findings.problems
    except tomllib.TOMLDecodeError as error:
        findings.add(
            "",
            f"a TOML syntax error: {error}",
            "TOML 1.0",
            "Texts and quantities stand in quotes, dates do not.",
        )
        return None, findings.problems
    findings.lines = key_lines(text)
    top = Table(plain, "", findings)
    version = top.integer("format", low=1, high=1)
    if version is None and "format" not in plain:
        findings.add("format", "nothing", "format = 1", "Add the line  format = 1  at the top.")
    header = _header(top.table("case"), findings)
    descriptor = Descriptor(
        header=header,
        pump=_pump(top.table("pump")),
        reservoir=_reservoir(top.table("reservoir")),
        suction_line=tuple(
            _part(table, number) for number, table in enumerate(top.tables("suction_line"))
        ),
        fluid=_fluid(top.table("fluid")),
        oil_reports=tuple(_oil_report(table) for table in top.tables("oil_reports")),
        records=tuple(_record(table) for table in top.tables("records")),
        excluded=tuple(_excluded(table) for table in top.tables("excluded")),
        commission=read_commission(top),
    )
    top.done()
    return descriptor, findings.problems


def _header(table: Table, findings: Findings) -> Header:
    altitude = table.quantity("altitude", "length")
    if altitude is not None and not -500.0 <= altitude.value <= 6000.0:
        table.wrong("altitude", altitude.text, "-500 m to 6000 m", "Check number and unit.")
        altitude = None
    if altitude is not None:
        findings.atmosphere = float(standard_atmosphere(altitude.value))
    ambient = table.positive("ambient_pressure", "pressure")
    if ambient is not None:
        findings.atmosphere = ambient.value
    scope = table.raw("out_of_scope") or []
    if not isinstance(scope, list) or not all(isinstance(one, str) for one in scope):
        table.wrong("out_of_scope", scope, "a list of texts", 'Write  out_of_scope = ["..."]')
        scope = []
    header = Header(
        id=table.text("id", required=True),
        title=table.text("title", required=True),
        site=table.text("site"),
        asset=table.text("asset"),
        occurred=table.moment("occurred"),
        investigator=table.text("investigator"),
        reviewer=table.text("reviewer"),
        question=table.text("question"),
        altitude=altitude,
        ambient_pressure=ambient,
        client=table.text("client"),
        downtime=table.positive("downtime", "time"),
        cost=table.text("cost"),
        may_run=table.text("may_run"),
        severity=table.text("severity"),
        knowledge=table.text("knowledge"),
        out_of_scope=tuple(scope),
    )
    if header.investigator and header.investigator == header.reviewer:
        findings.add(
            "case.reviewer",
            f"{header.reviewer!r}, who is also the investigator",
            "somebody else",
            "A reviewer does not review his own work.",
            Severity.WARNING,
        )
    table.done()
    return header


def _pump(table: Table) -> Pump:
    pump = Pump(
        kind=table.word("kind", PumpKind),
        maker=table.text("maker"),
        model=table.text("model"),
        displacement=table.positive("displacement", "displacement"),
        speed=table.positive("speed", "speed"),
        elements=table.integer("elements", low=1, high=60),
        discharge_pressure=table.quantity("discharge_pressure", "pressure"),
        inlet_pressure_min=table.quantity("inlet_pressure_min", "pressure"),
        transition_angle=table.positive("transition_angle", "angle"),
        volumetric_efficiency=table.positive("volumetric_efficiency", "ratio"),
        maximum_speed=table.positive("maximum_speed", "speed"),
        relief_pressure=table.quantity("relief_pressure", "pressure"),
        case_pressure_max=table.quantity("case_pressure_max", "pressure"),
    )
    table.done()
    return pump


def _reservoir(table: Table) -> Reservoir:
    breather = None
    if "breather" in table.plain:
        inner = table.table("breather")
        flow = inner.positive("rated_flow", "flow")
        loss = inner.positive("rated_loss", "pressure difference")
        if flow is not None and loss is not None:
            breather = Breather(rated_flow=flow, rated_loss=loss)
        elif flow is None and "rated_flow" not in inner.plain:
            inner.wrong("rated_flow", None, "a flow", 'Add  rated_flow = "900 L/min"')
        elif loss is None and "rated_loss" not in inner.plain:
            inner.wrong(
                "rated_loss", None, "a pressure difference", 'Add  rated_loss = "0.03 bar"'
            )
        inner.done()
    reservoir = Reservoir(
        oil_volume=table.positive("oil_volume", "volume"),
        level_above_inlet=table.quantity("level_above_inlet", "length"),
        return_flow=table.positive("return_flow", "flow"),
        oil_depth=table.positive("oil_depth", "length"),
        return_below_surface=table.flag("return_below_surface"),
        baffle=table.flag("baffle"),
        level_swing=table.quantity("level_swing", "flow"),
        breather=breather,
    )
    table.done(also=("breather",))
    return reservoir


def _part(table: Table, index: int) -> SuctionPart:
    kind = table.word("part", PartKind)
    if kind is None:
        if "part" not in table.plain:
            table.wrong("part", None, "what the part is", 'Add  part = "pipe"')
        kind = PartKind.PIPE
    part = SuctionPart(
        index=index,
        part=kind,
        label=table.text("label"),
        form=table.text("form"),
        bore=table.positive("bore", "length"),
        length=table.positive("length", "length"),
        roughness=table.quantity("roughness", "length"),
        count=table.integer("count", low=1, high=1000) or 1,
        loss_coefficient=table.number("loss_coefficient", low=0.0, high=1e4),
        laminar_coefficient=table.number("laminar_coefficient", low=0.0, high=1e6),
        outlet_bore=table.positive("outlet_bore", "length"),
        rated_flow=table.positive("rated_flow", "flow"),
        rated_loss=table.positive("rated_loss", "pressure difference"),
        rated_viscosity=table.positive("rated_viscosity", "kinematic viscosity"),
    )
    _check_part(table, part)
    table.done()
    return part


def _check_part(table: Table, part: SuctionPart) -> None:
    needed: dict[PartKind, tuple[str, ...]] = {
        PartKind.STRAINER: ("rated_flow", "rated_loss", "rated_viscosity"),
        PartKind.PIPE: ("bore", "length"),
        PartKind.HOSE: ("bore", "length"),
        PartKind.FITTING: ("bore", "form"),
        PartKind.VALVE: ("bore",),
    }
    for key in needed[part.part]:
        if key not in table.plain:
            table.findings.add(
                table.at(key),
                "nothing",
                f"the {key.replace('_', ' ')} of a {part.part.value}",
                f'Add  {key} = "..."  or leave the part out; its loss can\'t be computed.',
            )
    if part.form and part.loss_coefficient is None and part.form not in FITTING_FORMS:
        table.findings.add(
            table.at("form"),
            repr(part.form),
            f"one of {', '.join(FITTING_FORMS)}, or any word with its own loss_coefficient",
            mend_word(part.form, FITTING_FORMS),
        )


def _fluid(table: Table) -> Fluid:
    fluid = Fluid(
        fluid_class=table.word("class", FluidClass),
        name=table.text("name"),
        iso_vg=table.integer("iso_vg", low=2, high=3200),
        viscosity_40=table.positive("viscosity_40", "kinematic viscosity"),
        viscosity_100=table.positive("viscosity_100", "kinematic viscosity"),
        density_15=table.positive("density_15", "density"),
        bunsen_coefficient=table.positive("bunsen_coefficient", "ratio"),
        autoignition_temperature=table.quantity("autoignition_temperature", "temperature"),
        flash_point=table.quantity("flash_point", "temperature"),
        temperature=table.quantity("temperature", "temperature"),
        coldest_start=table.quantity("coldest_start", "temperature"),
        air_release=table.positive("air_release", "time"),
        conductivity=table.positive("conductivity", "conductivity"),
        vapour_pressure=table.positive("vapour_pressure", "pressure"),
    )
    low, high = fluid.viscosity_100, fluid.viscosity_40
    if low is not None and high is not None and not low.value < high.value:
        table.wrong(
            "viscosity_100",
            low.text,
            f"less than viscosity_40 ({high.text})",
            "The two may be exchanged.",
        )
    table.done()
    return fluid


def _oil_report(table: Table) -> OilReportFile:
    columns = table.raw("columns") or {}
    if not isinstance(columns, dict) or not all(isinstance(v, str) for v in columns.values()):
        table.wrong(
            "columns",
            columns,
            "a table of header and property",
            'Write  columns = { "Visc 40" = "viscosity_40 [mm2/s]" }',
        )
        columns = {}
    decimal = table.text("decimal")
    if decimal not in ("", ".", ","):
        table.wrong("decimal", decimal, 'either "." or ","', 'Write  decimal = ","')
        decimal = ""
    report = OilReportFile(
        file=table.text("file", required=True),
        source=table.source("file"),
        sample_point=table.text("sample_point"),
        laboratory=table.text("laboratory"),
        zone=_zone(table, "zone"),
        columns=dict(columns),
        decimal=decimal,
        day_first=table.flag("day_first"),
        sheet=table.text("sheet"),
    )
    table.done()
    return report


def _record(table: Table) -> RecordFile:
    inner = table.table("time")
    offset = inner.quantity("offset", "time")
    start = inner.moment("start")
    rate = inner.raw("rate")
    rate_hz = None
    if rate is not None:
        reading = inner.positive("rate", "speed")
        rate_hz = reading.value if reading else None
    axis = TimeAxis(
        column=inner.text("column"),
        zone=_zone(inner, "zone"),
        offset_s=offset.value if offset else 0.0,
        offset_u_s=offset.u if offset else None,
        offset_method=inner.text("offset_method"),
        drift_ppm=inner.number("drift_ppm", low=-1e5, high=1e5) or 0.0,
        start=start,
        rate_hz=rate_hz,
    )
    if not axis.column and (axis.start is None or axis.rate_hz is None):
        inner.wrong(
            "column",
            None,
            "the time column, or both start and rate",
            'Write  time = { column = "Timestamp", zone = "Europe/Vienna" }  or  '
            'time = { start = 2026-03-02T06:00:00+01:00, rate = "20 kHz" }',
        )
    inner.done()
    record = RecordFile(
        file=table.text("file", required=True),
        time=axis,
        channels=tuple(c for c in map(_channel, table.tables("channels")) if c is not None),
        source=table.source("file"),
    )
    table.done()
    return record


def _channel(table: Table) -> Channel | None:
    column = table.text("column", required=True)
    quantity = table.text("quantity", required=True)
    unit = table.text("unit", required=True)
    label = table.text("label")
    table.done()
    if quantity and quantity not in QUANTITIES:
        table.findings.add(
            table.at("quantity"),
            repr(quantity),
            f"one of {', '.join(QUANTITIES)}",
            mend_word(quantity, QUANTITIES),
        )
        return None
    if not (column and quantity and unit):
        return None
    try:
        channel_scale(quantity, unit)
    except UnitError as error:
        table.findings.add(
            table.at("unit"), error.found, f"{error.expected} for {quantity}", error.mend
        )
        return None
    return Channel(column=column, quantity=quantity, unit=unit, label=label)


def _excluded(table: Table) -> Excluded:
    excluded = Excluded(
        file=table.text("file", required=True),
        where=table.text("where"),
        reason=table.text("reason", required=True),
    )
    table.done()
    return excluded


def _zone(table: Table, key: str) -> str:
    name = table.text(key)
    if not name:
        return ""
    zones = available_timezones()
    if name not in zones:
        table.findings.add(
            table.at(key),
            f"the unknown time zone {name!r}",
            "a zone of the IANA database such as 'Europe/Vienna', or 'UTC'",
            mend_word(name, sorted(zones)),
        )
        return ""
    return str(ZoneInfo(name))
