"""A new case folder that already passes the check, with every key explained."""

from pathlib import Path

from rca.base.errors import ArchiveError
from rca.intake.evidence_tables import ACTIONS, CUSTODY, FINDINGS, HISTORY
from rca.intake.photos import COLUMNS as PHOTOS

DESCRIPTOR = """# The descriptor. Quantities stand in quotes with their unit; dates do not.
# A pressure says whether it is absolute, "0.85 bar(a)", or gauge, "210 bar(g)".
# An uncertainty may follow: "0.82 bar(a) +/- 0.03 bar". Lines that begin with # are not read.
format = 1

[case]
id = "{id}"
title = "Say in one line what failed"
site = ""
asset = ""
# occurred = 2026-03-06T04:12:00+01:00     # with its zone
investigator = ""
reviewer = ""                              # somebody else than the investigator
question = "Which mechanism damaged the pump, and what let it start?"
# altitude = "340 m"                       # sets the air pressure; "ambient_pressure" wins
# may_run = "Not before ..."               # your own words on running the unit now
# knowledge = "site-knowledge.toml"        # numbers of your site over the shipped ones

[pump]
# kind = "axial piston"                    # gear, vane, axial piston, radial piston, screw
# displacement = "100 cm3/rev"
# speed = "1480 rpm"
# elements = 9                             # pistons, vanes or teeth
# discharge_pressure = "210 bar(g)"
# inlet_pressure_min = "0.80 bar(a)"       # the maker's limit
# transition_angle = "12 deg"              # from inlet to discharge pressure

[reservoir]
# oil_volume = "630 L"
# level_above_inlet = "0.4 m"              # negative where the pump sits higher
# [reservoir.breather]
# rated_flow = "900 L/min"
# rated_loss = "0.03 bar"

# The suction line, in flow order from the reservoir to the pump:
# [[suction_line]]
# part = "strainer"                        # strainer, pipe, hose, fitting, valve
# rated_flow = "250 L/min"
# rated_loss = "0.03 bar"
# rated_viscosity = "30 mm2/s"
# [[suction_line]]
# part = "pipe"
# bore = "50 mm"
# length = "1.8 m"

[fluid]
# class = "mineral"                        # mineral, PAO, ester, phosphate ester, water glycol
# iso_vg = 46
# viscosity_40 = "46.1 mm2/s"
# viscosity_100 = "6.8 mm2/s"
# flash_point = "214 degC"
# temperature = "50 degC"                  # normal, at the pump inlet

# [[oil_reports]]
# file = "oil/lab-export.csv"
# sample_point = "return line before the filter"

# [[records]]
# file = "pressure/slow.csv"
# time = {{ column = "Timestamp", zone = "Europe/Vienna", offset = "0 s" }}
# channels = [
#   {{ column = "P_SUCT", quantity = "inlet pressure", unit = "bar(a)" }},
# ]

# [[excluded]]                             # evidence set aside on purpose
# file = "oil/lab-export.csv"
# where = "sample 26-0117"
# reason = "taken from the drain"

# [report]                                 # what only people can state; all of it optional
# language = "en"                          # or "de"
# paper = "A4"                             # or "Letter"
# standards = [{{ name = "ASTM E678", deviation = "", effect = "" }}]
# limits = ["Nothing was sectioned."]      # of the instruction
# dissent = []                             # another opinion, as its author wrote it
# dissent_asked = "who was asked for one, and when"
# stopped = "why the search for causes ended where it did"
# exposure = "what the examiner knew before reading the parts"
# place = "where the parts were examined"
# received = 2026-03-06
# issued = 2026-03-13
# approver = ""
# distribution = ["plant manager"]
# signatories = [{{ role = "Investigator", name = "A. B.", qualification = "" }}]

# [[barriers]]                             # a control that should have prevented or detected it
# name = "low inlet pressure alarm"
# state = "bypassed"                       # worked, failed, bypassed, absent, outside its range
# note = ""
# [[other_units]]                          # of the same build, oil or duty
# unit = "HPU-1"
# looked = 2026-03-12
# found = ""
# [[sought]]                               # asked for and not obtained
# what = "trend of the motor current"
# asked = "control room"
# outcome = "overwritten"
# effect = "torque before the failure is not known"
# [[altering_tests]]                       # tests that altered evidence
# test = "section through the valve plate"
# exhibit = "EX1"
# when = 2026-03-12
# state_before = "photos/p01.jpg"
# notified = "maker of the pump, insurer"
# retained = "other half of the plate"
"""
_TABLES = {
    "photos/photos.csv": PHOTOS,
    "teardown/findings.csv": FINDINGS,
    "custody.csv": CUSTODY,
    "history.csv": HISTORY,
    "actions.csv": ACTIONS,
}


def make_case(folder: Path) -> None:
    """Make the folder with a descriptor, empty tables and places for the evidence.

    Raises ArchiveError where the folder exists and is not empty, or can't be written.
    """
    if folder.exists() and (not folder.is_dir() or any(folder.iterdir())):
        raise ArchiveError(f"{folder} exists already; nothing was changed. Name a new folder.")
    name = "".join(c for c in folder.name if c.isalnum() or c in "-_. ") or "new-case"
    try:
        for place in ("oil", "pressure", "photos", "teardown"):
            (folder / place).mkdir(parents=True)
        (folder / "case.toml").write_text(DESCRIPTOR.format(id=name), encoding="utf-8")
        for file, columns in _TABLES.items():
            (folder / file).write_text(",".join(columns) + "\n", encoding="utf-8")
    except OSError as error:
        raise ArchiveError(f"{folder} can't be written ({error.strerror})") from error
