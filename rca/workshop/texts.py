"""Texts and tables of the sample case; every name, place and number in them is invented."""

import numpy as np

CASE = """# Sample case. The site, the people, the machine and all data are invented.
format = 1

[case]
id = "HC-2026-014"
title = "Main pump failed on the daylight press"
site = "Harrow Creek panel mill (invented)"
asset = "HPU-3 pump A"
occurred = 2026-03-06T04:12:00+01:00
investigator = "A. Example"
reviewer = "B. Example"
client = "Harrow Creek panel mill, maintenance (invented)"
question = "Which mechanism destroyed the valve plate, and what let it start?"
altitude = "340 m"
downtime = "41 h"
cost = "EUR 38 400, estimate: pump, oil, lost production"
may_run = "On the spare pump only, with a new strainer fitted, inlet pressure watched and the unit stopped below 0.80 bar(a)."
severity = "production stop, nobody hurt"
out_of_scope = ["liability", "the control of the press"]

[pump]
kind = "axial piston"
displacement = "100 cm3/rev"
speed = "1480 rpm"
elements = 9
discharge_pressure = "210 bar(g)"
relief_pressure = "240 bar(g)"
inlet_pressure_min = "0.80 bar(a)"
transition_angle = "12 deg"

[reservoir]
oil_volume = "630 L"
level_above_inlet = "0.4 m"
oil_depth = "0.55 m"
return_below_surface = true
baffle = true
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
[[suction_line]]
part = "fitting"
form = "long-radius bend"
bore = "50 mm"
count = 2
[[suction_line]]
part = "valve"
form = "butterfly valve"
bore = "50 mm"

[fluid]
class = "mineral"
iso_vg = 46
viscosity_40 = "46.1 mm2/s"
viscosity_100 = "6.8 mm2/s"
density_15 = "872 kg/m3"
flash_point = "214 degC"
temperature = "50 degC"
coldest_start = "7 degC"

[[oil_reports]]
file = "oil/lab-export.csv"
laboratory = "laboratory A (invented)"
sample_point = "return line before the filter"
[[oil_reports]]
file = "oil/lab-b-2026.xlsx"
laboratory = "laboratory B (invented)"
sample_point = "return line before the filter"

[[records]]
file = "pressure/slow.csv"
time = { column = "Timestamp", zone = "Europe/Vienna", offset = "-42 s +/- 2 s", offset_method = "clock of the panel read against a radio clock on 2026-03-09" }
channels = [
  { column = "P_SUCT", quantity = "inlet pressure", unit = "bar(a)" },
  { column = "P_DIS", quantity = "discharge pressure", unit = "bar(g)" },
  { column = "T_OIL", quantity = "oil temperature", unit = "degC" },
  { column = "N", quantity = "shaft speed", unit = "rpm" },
  { column = "LEVEL", quantity = "reservoir level", unit = "m" },
]
[[records]]
file = "pressure/slow-until-february.parquet"
time = { column = "Timestamp", zone = "Europe/Vienna", offset = "-42 s +/- 2 s", offset_method = "clock of the panel read against a radio clock on 2026-03-09" }
channels = [
  { column = "P_SUCT", quantity = "inlet pressure", unit = "bar(a)" },
  { column = "P_DIS", quantity = "discharge pressure", unit = "bar(g)" },
  { column = "T_OIL", quantity = "oil temperature", unit = "degC" },
  { column = "N", quantity = "shaft speed", unit = "rpm" },
  { column = "LEVEL", quantity = "reservoir level", unit = "m" },
]
[[records]]
file = "pressure/fast-1.parquet"
time = { start = 2026-03-03T14:10:00+01:00, rate = "50 kHz" }
channels = [
  { column = "P_DIS", quantity = "discharge pressure", unit = "bar(g)" },
  { column = "P_SUCT", quantity = "inlet pressure", unit = "bar(a)" },
]
[[records]]
file = "pressure/fast-2.parquet"
time = { start = 2026-03-05T09:32:00+01:00, rate = "50 kHz" }
channels = [
  { column = "P_DIS", quantity = "discharge pressure", unit = "bar(g)" },
  { column = "P_SUCT", quantity = "inlet pressure", unit = "bar(a)" },
]

[[excluded]]
file = "oil/lab-export.csv"
where = "sample 25-0417"
reason = "taken from the drain, with settled water in it"

[report]
distribution = ["plant manager", "maintenance", "maker of the pump"]
standards = [
  { name = "ASTM E678, evaluation of scientific or technical data", deviation = "no outside peer review", effect = "the reviewer is of the same company" },
]
limits = ["Parts were opened at the mill; nothing was sectioned.", "The relief valve was looked at and not tested on a bench."]
dissent_asked = "A. Example, B. Example and C. Example on 2026-03-13"
stopped = "Data exhausted: who released the roof work without a cover on the reservoir is not on record."
exposure = "C. Example read the parts on 2026-03-09 knowing of the noise and of the clogged strainer."
place = "workshop of the mill"
received = 2026-03-06
issued = 2026-03-13
approver = "F. Example"
signatories = [
  { role = "Investigator", name = "A. Example", qualification = "hydraulics engineer, 11 years", relationship = "employed by the group that owns the mill" },
  { role = "Reviewer", name = "B. Example", qualification = "reliability engineer, 7 years", relationship = "none with the mill" },
  { role = "Approved for issue", name = "F. Example", qualification = "", relationship = "" },
]

[[barriers]]
name = "inlet pressure on the panel, with an alarm at 0.80 bar(a)"
state = "bypassed"
note = "shown, alarm switched off since commissioning"
[[barriers]]
name = "strainer inspection at the yearly oil change"
state = "outside its range"
note = "the mesh closed within fourteen weeks"
[[barriers]]
name = "oil analysis every quarter"
state = "failed"
note = "colour and soot of February were reported and not acted upon"
[[barriers]]
name = "low-level switch of the reservoir"
state = "worked"

[[other_units]]
unit = "HPU-1"
looked = 2026-03-12
found = "strainer a quarter closed, inlet 0.86 bar(a) while running"
[[other_units]]
unit = "HPU-2"

[[sought]]
what = "trend of the motor current"
asked = "control room"
outcome = "overwritten after 14 days"
effect = "torque before the failure is not known"
"""

FINDINGS = """id,component,zone,sign,extent,photo,note,by,date
F01,valve plate,inlet kidney,pitting,severe,p02-inlet-kidney.jpg,"rough clean craters along the closing edge, up to 0.9 mm",C. Example,2026-03-09
F02,valve plate,transition land,burn mark,moderate,p03-transition-land.jpg,dark field on the land towards the discharge kidney,C. Example,2026-03-09
F03,valve plate,transition land,pitting,slight,p03-transition-land.jpg,few pits under the dark field,C. Example,2026-03-09
F04,cylinder block,cylinder bore,pitting,moderate,p04-cylinder-bore.jpg,inside all nine bores,C. Example,2026-03-09
F05,press cylinder 2,piston seal,charred seal,severe,p05-piston-seal.jpg,"edge burnt in five places, black powder beside it",C. Example,2026-03-09
F06,press cylinder 2,cylinder,carbon deposit,moderate,p05-piston-seal.jpg,black crust in the seal groove,C. Example,2026-03-09
F07,slippers,slipper,smeared metal,slight,,two of nine show bronze on the plate,C. Example,2026-03-09
F08,swash plate,swash plate,scoring,none,,,C. Example,2026-03-09
F09,return filter,return filter,spark mark,none,p09-return-filter.jpg,medium unfolded and looked through on a lamp,C. Example,2026-03-09
F10,return filter,return filter,burn mark,none,p09-return-filter.jpg,,C. Example,2026-03-09
F11,housing,housing,corrosion,none,,,C. Example,2026-03-09
F12,bearing,bearing,fatigue spalling,none,,,C. Example,2026-03-09
F13,reservoir,reservoir,foam,moderate,p08-oil-glass.jpg,a hand's breadth at the return after the stop,D. Example,2026-03-06
F14,reservoir,reservoir,milky oil,slight,p08-oil-glass.jpg,cleared from below within six minutes,D. Example,2026-03-06
F15,relief valve,relief valve,jet erosion,none,,seat and poppet clean,C. Example,2026-03-10
F16,servo valve,servo valve,varnish,slight,,light brown film on the spool,C. Example,2026-03-10
F17,pump,piston seal,hardened seal,none,,,C. Example,2026-03-10
"""
NOTES = """# Notes from the bench (as written)

Monday 9 March. Opened pump A with C. The classic cavitation job, whole plate eaten. Drive coupling
fine. Black dust in cylinder 2 smells burnt, somebody said diesel effect. Strainer was like felt,
we put it aside in a bag. Oil looks like coffee.
"""
HISTORY = """date,kind,text
2024-03-12,commissioned,unit refilled after the move to hall 2
2025-01-14,oil change,"630 L, same grade, flushed with 60 L"
2025-01-14,filter change,return filter
2025-07-21,laboratory change,contract moved to laboratory B
2025-09-02,top-up,22 L after a hose burst on cylinder 4
2025-11-17,filter change,return filter
2025-12-08,dust work,roof of the hall opened for a new duct
2026-02-09,steady noise,operators hear the pump louder since Monday
2026-02-23,steady noise,"gravel sound, worst on Monday morning"
2026-03-06,failure,pump A lost pressure and was stopped
2026-03-06,no air leak found,all suction joints foamed with the spare pump running
2026-03-06,oil level checked,between the marks
2026-03-07,strainer found clogged,"felt of fibres and fines, more than half the mesh closed"
2026-03-07,breather found free,blown through by mouth without effort
"""
CUSTODY = """exhibit,description,from,to,when,seal,condition
EX1,pump A complete,unit HPU-3,D. Example,2026-03-06T15:20+01:00,none,oily and closed with plugs
EX1,pump A complete,D. Example,store room 4,2026-03-06T16:00+01:00,S-1107,sealed crate
EX1,pump A complete,store room 4,C. Example,2026-03-09T08:30+01:00,S-1107 broken by C. Example,as sealed
EX2,suction strainer,unit HPU-3,D. Example,2026-03-07T10:05+01:00,bag B-22,wet
EX2,suction strainer,C. Example,A. Example,2026-03-11T09:00+01:00,bag B-22,dry and stiff
EX3,oil bottle 26-0310,unit HPU-3,laboratory B,2026-03-07T11:40+01:00,S-1109,full and cold
"""
ACTIONS = """id,kind,text,cause,owner,due,done,status,verified_by,verify
A1,containment,"Run on the spare pump with inlet pressure watched; stop below 0.80 bar(a)",suction strainer clogged,D. Example,2026-03-07,2026-03-07,implemented,B. Example,min(inlet pressure) >= 0.80 bar(a) for 14 d after done
A2,correction,"Fit a new suction strainer and clean the reservoir floor",suction strainer clogged,C. Example,2026-03-13,2026-03-11,implemented,B. Example,min(inlet pressure) >= 0.85 bar(a) for 30 d after done
A3,corrective,"Fit an inlet vacuum switch that stops the drive at 0.80 bar(a)",suction strainer clogged,E. Example,2026-04-30,,planned,B. Example,min(inlet pressure) >= 0.80 bar(a) for 90 d after done
A4,corrective,"Put strainer inspection into the eight-week service",suction strainer clogged,D. Example,2026-04-15,,in progress,A. Example,p05(inlet pressure) >= 0.85 bar(a) for 112 d after done
A5,preventive,"Cover the reservoir while the roof is open; look at HPU-1 and HPU-2",dirt ingress,D. Example,2026-03-20,,proposed,D. Example,
A6,corrective,"Heat the reservoir to 20 degC before a Monday start",cold or too viscous oil,E. Example,2026-05-29,,planned,B. Example,min(oil temperature) >= 20 degC for 60 d after done
"""
PHOTOS = """file,exhibit,taken,by,view,zone,scale,caption
p01-valve-plate.jpg,EX1,2026-03-09T09:05+01:00,C. Example,overall,valve plate,20 mm bar,Generated picture: valve plate as removed
p02-inlet-kidney.jpg,EX1,2026-03-09T09:16+01:00,C. Example,close,inlet kidney,10 mm bar,Generated picture: closing edge of the inlet kidney
p03-transition-land.jpg,EX1,,C. Example,close,transition land,10 mm bar,Generated picture: land between inlet and discharge kidney
p04-cylinder-bore.jpg,EX1,2026-03-09T09:38+01:00,C. Example,close,cylinder bore,5 mm bar,Generated picture: bore 3 of the cylinder block
p05-piston-seal.jpg,EX4,2026-03-09T09:49+01:00,C. Example,mid,piston seal,10 mm bar,Generated picture: piston seal of press cylinder 2
p06-strainer.jpg,EX2,2026-03-09T10:00+01:00,C. Example,close,strainer,10 mm bar,Generated picture: mesh of the suction strainer
p07-patch.jpg,EX3,2026-03-09T10:11+01:00,A. Example,close,reservoir,10 mm bar,Generated picture: membrane patch of bottle 26-0310
p08-oil-glass.jpg,EX3,2026-03-09T10:22+01:00,D. Example,mid,reservoir,20 mm bar,Generated picture: oil in a glass one minute after drawing
p09-return-filter.jpg,EX5,2026-03-09T10:33+01:00,C. Example,mid,return filter,10 mm bar,Generated picture: medium of the return filter
"""
README = """This case is invented: the site, the people, the machine and all of its data.

It was made by a script that is kept with the program (python -m rca.workshop.sample_case). The
records come from a small model of a power unit, the oil results from a random draw about a
course of ageing, the photographs are drawn.
"""
FILES = {
    "README.txt": README,
    "teardown/findings.csv": FINDINGS,
    "teardown/notes.md": NOTES,
    "history.csv": HISTORY,
    "custody.csv": CUSTODY,
    "actions.csv": ACTIONS,
    "photos/photos.csv": PHOTOS,
}

OIL_HEADER_A = [
    "Sample No",
    "Sampled",
    "Machine hours",
    "Type",
    "Visc 40 [mm2/s]",
    "Visc 100 [mm2/s]",
    "TAN [mgKOH/g]",
    "Water [mg/kg]",
    "Colour [D1500]",
    "Oxidation [A/cm]",
    "Nitration [A/cm]",
    "Soot [A/cm]",
    "Fe [mg/kg]",
    "Cu [mg/kg]",
    "Pb [mg/kg]",
    "Cr [mg/kg]",
    "Si [mg/kg]",
    "Al [mg/kg]",
    "Zn [mg/kg]",
    "P [mg/kg]",
    "ISO 4406",
    "Comment",
]
OIL_HEADER_B = [
    "Lab no",
    "Date sampled",
    "Unit hours",
    "Kind",
    "KV40 [cSt]",
    "KV100 [cSt]",
    "Acid number [mgKOH/g]",
    "Water [ppm]",
    "Color [ASTM D1500]",
    "Oxidation [A/cm]",
    "Nitration [A/cm]",
    "Soot [A/cm]",
    "Iron [ppm]",
    "Copper [ppm]",
    "Lead [ppm]",
    "Chromium [ppm]",
    "Silicon [ppm]",
    "Aluminium [ppm]",
    "Zinc [ppm]",
    "Phosphorus [ppm]",
    "Cleanliness code",
    "Flash point [degC]",
    "Air release [min]",
    "Ferrous index",
]

EARLIER = (
    (
        "HC-2023-007",
        "Vane pump noisy, cartridge changed",
        "HPU-1 pump B",
        "2023-05-11",
        "suction",
        (0.86, 0.12, 0.10, 0.12),
        {"aeration": 0.82},
        "air leak on the suction side",
    ),
    (
        "HC-2024-003",
        "Pump failed after the winter stop",
        "HPU-3 pump A",
        "2024-01-08",
        "suction",
        (0.88, 0.20, 0.17, 0.09),
        {"gaseous cavitation": 0.80},
        "cold or too viscous oil",
    ),
    (
        "HC-2024-019",
        "Dark oil and charred rod seals",
        "HPU-2 pump A",
        "2024-10-02",
        "both",
        (0.84, 0.87, 0.74, 0.03),
        {"aeration": 0.80, "micro-dieseling": 0.87},
        "return flow aerates the reservoir",
    ),
    (
        "HC-2025-011",
        "Slippers scored",
        "HPU-2 pump B",
        "2025-04-23",
        "neither",
        (0.15, 0.05, 0.03, 0.83),
        {"abrasive wear": 0.91},
        "dirt ingress",
    ),
    (
        "HC-2025-022",
        "Relief valve stuck, shaft broken",
        "HPU-1 pump A",
        "2025-09-30",
        "neither",
        (0.12, 0.04, 0.02, 0.86),
        {"over-pressure": 0.93},
        "relief valve set or stuck",
    ),
)


def oil_rows(rng: np.random.Generator) -> tuple[list[list[object]], list[list[object]]]:
    """Rows of both laboratories; the last fill darkens, sooty, with routine values flat."""

    def near(value: float, share: float) -> float:
        return float(value * (1 + share * rng.normal()))

    a: list[list[object]] = [
        [
            "24-NEW",
            "2024-03-01",
            "",
            "new oil",
            46.1,
            6.8,
            0.41,
            45,
            0.5,
            0.0,
            0.0,
            0.0,
            0,
            0,
            0,
            0,
            1,
            0,
            420,
            350,
            "16/14/11",
            "reference of the delivery",
        ],
    ]
    for k, (day, hours) in enumerate(
        (
            ("2024-05-14", 14210),
            ("2024-08-20", 15420),
            ("2024-11-19", 16590),
            ("2025-02-18", 17720),
            ("2025-04-17", 18390),
            ("2025-06-24", 19210),
        )
    ):
        fresh = k if k < 3 else k - 3
        drain = day == "2025-04-17"
        a.append(
            [
                f"{day[2:4]}-{day[5:7]}{day[8:]}",
                day,
                hours,
                "used",
                round(near(46.0, 0.003), 1),
                round(near(6.8, 0.004), 2),
                round(near(0.40, 0.04), 2),
                2400 if drain else int(near(85, 0.15)),
                1.0 + 0.5 * (fresh > 1),
                round(0.6 + 0.5 * fresh, 1),
                round(0.3 + 0.2 * fresh, 1),
                round(0.2 + 0.1 * fresh, 1),
                int(near(4 + 2 * fresh, 0.1)),
                int(near(2 + fresh, 0.1)),
                1,
                "<1",
                int(near(3, 0.2)),
                "<1",
                int(near(415, 0.02)),
                int(near(345, 0.02)),
                ("17/15/12", "17/15/12", "18/16/13")[fresh],
                "drain" if drain else "",
            ]
        )
    b: list[list[object]] = [
        [
            "25-NEW",
            "2025-07-25",
            None,
            "new oil",
            46.2,
            6.8,
            0.40,
            50,
            0.5,
            0.0,
            0.0,
            0.0,
            0,
            0,
            0,
            0,
            1,
            0,
            418,
            352,
            "16/14/11",
            214,
            6.0,
            2,
        ],
    ]
    course = (
        ("2025-08-26", 19960, 1.5, 0.5, 0.6, 7, 4, 6.2, 0),
        ("2025-10-21", 20640, 1.5, 0.6, 0.8, 8, 4, 6.4, 0),
        ("2025-12-02", 21150, 2.0, 0.7, 1.0, 9, 5, 6.8, 1),
        ("2026-01-20", 21690, 2.5, 1.6, 2.0, 12, 7, 7.0, 5),
        ("2026-02-17", 22040, 4.5, 3.4, 3.9, 15, 10, 7.6, 6),
        ("2026-03-10", 22260, 6.5, 5.6, 5.8, 21, 16, 8.2, 6),
    )
    for day, hours, colour, soot, nitration, fe, cu, release, si in course:
        b.append(
            [
                f"26-{day[5:7]}{day[8:]}" if day > "2026" else f"25-{day[5:7]}{day[8:]}",
                day,
                hours,
                "used",
                round(near(46.0, 0.003), 1),
                round(near(6.78, 0.003), 2),
                round(near(0.42, 0.03), 2),
                int(near(95, 0.1)),
                colour,
                round(near(1.5, 0.1), 1),
                nitration,
                soot,
                fe,
                cu,
                2,
                "<1",
                3 + si,
                "<1" if si < 5 else 2,
                int(near(414, 0.02)),
                int(near(347, 0.02)),
                "18/16/13" if si < 5 else "19/17/13",
                211,
                release,
                int(3 + si),
            ]
        )
    return a, b
