"""Small invented case folders, and the way from a folder to a verdict without notebooks."""

import csv
import random
from collections.abc import Callable, Sequence
from datetime import datetime, timedelta
from pathlib import Path

from rca.case.site import local_atmosphere
from rca.damage.check import check_damage
from rca.discharge.check import check_discharge
from rca.evidence.from_damage import from_damage
from rca.evidence.from_discharge import from_discharge
from rca.evidence.from_history import from_history
from rca.evidence.from_oil import from_oil
from rca.evidence.from_records import from_records
from rca.evidence.from_statements import from_statements
from rca.evidence.from_suction import from_suction
from rca.evidence.item import EvidenceItem, NotAssessed
from rca.intake.oil_reports import read_oil_reports
from rca.intake.read import load_case, site_knowledge
from rca.intake.record_files import read_records
from rca.oil.check import check_oil
from rca.records.check import check_records, usable
from rca.suction.check import check_suction, inlet_limit
from rca.verdict.model import VerdictCheck
from rca.verdict.weigh import weigh

TITLES = ("Sample No", "Sampled", "Machine hours", "Type")
UNITS = {
    "Visc 40": "mm2/s", "TAN": "mgKOH/g", "Water": "mg/kg", "Colour": "D1500",
    "Oxidation": "A/cm", "Nitration": "A/cm", "Soot": "A/cm", "Fe": "mg/kg", "Cu": "mg/kg",
    "Si": "mg/kg", "Al": "mg/kg", "ISO 4406": "",
}  # fmt: skip
NEW = dict(zip(UNITS, (46.2, 0.40, 45, 0.5, 0, 0, 0, 0, 0, 1, 0, "16/14/11"), strict=True))
QUIET = dict(zip(UNITS, (46.0, 0.42, 80, 1.0, 0.6, 0.3, 0.2, 4, 2, 2, 1, "17/15/12"), strict=True))
Row = tuple[str, str, str, str]  # component, zone, sign, extent


def folder(
    path: Path,
    *,
    kind: str = "axial piston",
    pressure: int = 210,
    fluid: str = "mineral",
    altitude: int = 100,
    cold: int = 10,
    findings: Sequence[Row] = (),
    history: Sequence[tuple[str, str]] = (),
    oil: dict[str, object] | None = None,
    inlet: Callable[[bool, float], float] | None = None,
    notes: str = "",
) -> Path:
    """A case folder; ``inlet`` gives the inlet pressure [bar(a)] from (running, oil [degC])."""
    for name in ("oil", "pressure", "teardown"):
        (path / name).mkdir(parents=True)
    text = _descriptor(kind, pressure, fluid, altitude, cold)
    if oil is not None:
        _oil(path / "oil/lab.csv", oil)
        text += (
            '[[oil_reports]]\nfile = "oil/lab.csv"\nlaboratory = "L"\nsample_point = "return"\n'
        )
    if inlet is not None:
        _record(path / "pressure/slow.csv", inlet, cold, pressure)
        text += _CHANNELS
    (path / "case.toml").write_text(text, encoding="utf-8")
    (path / "teardown/notes.md").write_text(notes, encoding="utf-8")
    rows = [
        (f"F{n:02d}", *row, "", "", "C. Example", "2026-03-09")
        for n, row in enumerate(findings, 1)
    ]
    _table(
        path / "teardown/findings.csv", "id component zone sign extent photo note by date", rows
    )
    _table(path / "history.csv", "date kind text", [(d, k, "") for d, k in history])
    return path


_CHANNELS = """[[records]]
file = "pressure/slow.csv"
time = { column = "Timestamp", zone = "UTC" }
channels = [
  { column = "P_SUCT", quantity = "inlet pressure", unit = "bar(a)" },
  { column = "T_OIL", quantity = "oil temperature", unit = "degC" },
  { column = "N", quantity = "shaft speed", unit = "rpm" },
]
"""


def _descriptor(kind: str, pressure: int, fluid: str, altitude: int, cold: int) -> str:
    return f"""format = 1
[case]
id = "T"
title = "invented"
occurred = 2026-03-06T04:12:00+01:00
altitude = "{altitude} m"
[pump]
kind = "{kind}"
displacement = "100 cm3/rev"
speed = "1480 rpm"
elements = 9
discharge_pressure = "{pressure} bar(g)"
inlet_pressure_min = "0.80 bar(a)"
[reservoir]
oil_volume = "630 L"
level_above_inlet = "0.4 m"
[reservoir.breather]
rated_flow = "900 L/min"
rated_loss = "0.03 bar"
[[suction_line]]
part = "strainer"
rated_flow = "250 L/min"
rated_loss = "0.03 bar"
rated_viscosity = "30 mm2/s"
[[suction_line]]
part = "pipe"
bore = "50 mm"
length = "1.8 m"
roughness = "0.05 mm"
[fluid]
class = "{fluid}"
iso_vg = 46
viscosity_40 = "46.1 mm2/s"
viscosity_100 = "6.8 mm2/s"
temperature = "50 degC"
coldest_start = "{cold} degC"
"""


def _oil(path: Path, last: dict[str, object]) -> None:
    head = [*TITLES, *(f"{n} [{u}]" if u else n for n, u in UNITS.items())]
    with path.open("w", newline="", encoding="utf-8") as out:
        table = csv.writer(out, delimiter=";")
        table.writerow(head)
        table.writerow(["N0", "2025-01-10", "", "new oil", *NEW.values()])
        table.writerow(["U1", "2025-11-01", "3000", "used", *QUIET.values()])
        table.writerow(["U2", "2026-02-20", "3600", "used", *(QUIET | last).values()])


def _record(path: Path, inlet: Callable[[bool, float], float], cold: int, pressure: int) -> None:
    del pressure
    rng = random.Random(1)
    start = datetime(2026, 3, 2)
    with path.open("w", encoding="utf-8") as out:
        out.write("Timestamp,P_SUCT,T_OIL,N\n")
        for k in range(2 * 24 * 60):
            now = start + timedelta(minutes=k)
            hour = now.hour + now.minute / 60
            on = 6 <= hour < 22
            oil = 50.0 - (50.0 - cold) * max(0.0, 1 - (hour - 6)) if on else float(cold)
            p = inlet(on, oil) + rng.gauss(0, 0.008)
            out.write(f"{now:%Y-%m-%d %H:%M:%S},{p:.3f},{oil:.1f},{1480 if on else 0}\n")


def _table(path: Path, head: str, rows: Sequence[Sequence[str]]) -> None:
    with path.open("w", newline="", encoding="utf-8") as out:
        table = csv.writer(out)
        table.writerow(head.split())
        table.writerows(rows)


def verdict_of(path: Path) -> VerdictCheck:
    """From the folder to the verdict, through every check."""
    case = load_case(path)
    reading = read_oil_reports(path, case)
    oil = check_oil(case, reading.samples) if reading.samples else None
    aligned = None
    if case.records:
        found = read_records(path, case, atmosphere=local_atmosphere(case)).aligned
        aligned = usable(case, found) if found is not None else None
    records = check_records(case, aligned, (), limit=inlet_limit(case)[0])
    suction = check_suction(case, aligned, seed=1, samples=64)
    at_port = suction.measured and (suction.measured.last or suction.measured.warm)
    inlet = (at_port.median, 2e3) if at_port else None
    discharge = check_discharge(
        case, inlet, at_port.released if at_port else None, None, seed=1, samples=64
    )
    damage = check_damage(case)
    told: list[EvidenceItem | NotAssessed] = [
        *from_history(case), *from_statements(case), *from_oil(case, oil),
        *from_records(case, records, aligned), *from_suction(case, suction, aligned),
        *from_discharge(case, discharge), *from_damage(damage),
    ]  # fmt: skip
    items = sorted(
        (i for i in told if isinstance(i, EvidenceItem)), key=lambda i: (i.group, i.key)
    )
    seen = {i.node for i in items}
    missing = [n for n in told if isinstance(n, NotAssessed) and n.node not in seen]
    return weigh(
        items, missing, site_knowledge(path, case), seed=1, draws=8,
        contradictions=damage.contradictions, suction=suction, discharge=discharge, oil=oil,
    )  # fmt: skip
