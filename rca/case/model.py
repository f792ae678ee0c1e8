"""The typed case: what ``case.toml`` and the evidence tables say, in SI, frozen.

``None`` means "not recorded" and nothing else. Pressures are absolute [Pa]; speeds are turns per
second [1/s]; displacement is volume a turn [m3]. Every number is a ``Reading`` that keeps its
text, its standard uncertainty and its place in the evidence.
"""

from dataclasses import dataclass, field
from datetime import date, datetime

from rca.base.source import Reading, Source
from rca.case.commission import Commission
from rca.case.vocabulary import (
    ActionKind,
    Extent,
    FluidClass,
    PartKind,
    PumpKind,
    Side,
    Sign,
)


@dataclass(frozen=True, slots=True, kw_only=True)
class Header:
    """The [case] table."""

    id: str
    title: str
    site: str = ""
    asset: str = ""
    occurred: datetime | None = None
    investigator: str = ""
    reviewer: str = ""
    question: str = ""
    altitude: Reading | None = None  # [m]
    ambient_pressure: Reading | None = None  # [Pa]; wins over the altitude
    client: str = ""
    downtime: Reading | None = None  # [s]
    cost: str = ""  # as stated, with currency and basis
    may_run: str = ""  # the engineer's own statement on running the unit now, with conditions
    severity: str = ""
    out_of_scope: tuple[str, ...] = ()
    knowledge: str = ""  # file with the site's own numbers over the shipped knowledge


@dataclass(frozen=True, slots=True, kw_only=True)
class Pump:
    """The [pump] table."""

    kind: PumpKind | None = None
    maker: str = ""
    model: str = ""
    displacement: Reading | None = None  # [m3 a turn]
    speed: Reading | None = None  # [1/s]
    elements: int | None = None  # pistons, vanes or teeth
    discharge_pressure: Reading | None = None  # [Pa, absolute]
    inlet_pressure_min: Reading | None = None  # [Pa, absolute], the maker's limit
    transition_angle: Reading | None = None  # [rad]
    volumetric_efficiency: Reading | None = None  # [-]
    maximum_speed: Reading | None = None  # [1/s]
    relief_pressure: Reading | None = None  # [Pa, absolute]
    case_pressure_max: Reading | None = None  # [Pa, absolute]


@dataclass(frozen=True, slots=True, kw_only=True)
class Breather:
    """The [reservoir.breather] table: a loss at a rated air flow."""

    rated_flow: Reading  # [m3/s of air]
    rated_loss: Reading  # [Pa]


@dataclass(frozen=True, slots=True, kw_only=True)
class Reservoir:
    """The [reservoir] table."""

    oil_volume: Reading | None = None  # [m3]
    level_above_inlet: Reading | None = None  # [m], negative where the pump sits higher
    return_flow: Reading | None = None  # [m3/s]
    oil_depth: Reading | None = None  # [m]
    return_below_surface: bool | None = None
    baffle: bool | None = None
    level_swing: Reading | None = None  # [m3/s], net outflow while cylinders extend
    breather: Breather | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class SuctionPart:
    """One [[suction_line]] table, in flow order from the reservoir to the pump."""

    index: int
    part: PartKind
    label: str = ""
    form: str = ""  # of a fitting or valve
    bore: Reading | None = None  # [m]
    length: Reading | None = None  # [m]
    roughness: Reading | None = None  # [m]
    count: int = 1
    loss_coefficient: float | None = None  # turbulent K [-]
    laminar_coefficient: float | None = None  # K1 in K = K1/Re + K [-]
    outlet_bore: Reading | None = None  # [m], of a reducer
    rated_flow: Reading | None = None  # [m3/s], of a strainer
    rated_loss: Reading | None = None  # [Pa]
    rated_viscosity: Reading | None = None  # [m2/s]


@dataclass(frozen=True, slots=True, kw_only=True)
class Fluid:
    """The [fluid] table; measured values win over class defaults."""

    fluid_class: FluidClass | None = None
    name: str = ""
    iso_vg: int | None = None
    viscosity_40: Reading | None = None  # [m2/s]
    viscosity_100: Reading | None = None  # [m2/s]
    density_15: Reading | None = None  # [kg/m3]
    bunsen_coefficient: Reading | None = None  # [-]
    autoignition_temperature: Reading | None = None  # [K]
    flash_point: Reading | None = None  # [K]
    temperature: Reading | None = None  # [K], normal, at the pump inlet
    coldest_start: Reading | None = None  # [K]
    air_release: Reading | None = None  # [s], ASTM D3427 / ISO 9120
    conductivity: Reading | None = None  # [S/m]
    vapour_pressure: Reading | None = None  # [Pa, absolute], at the fluid temperature


@dataclass(frozen=True, slots=True, kw_only=True)
class Channel:
    """One column of a record and what it holds."""

    column: str
    quantity: str  # one of vocabulary.QUANTITIES
    unit: str  # as written; a pressure with (a) or (g)
    label: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class TimeAxis:
    """How a record's time column is to be read; true time = stamp + offset (+ drift)."""

    column: str = ""
    zone: str = ""  # an IANA name, or "UTC"
    offset_s: float = 0.0
    offset_u_s: float | None = None  # standard uncertainty of the offset
    offset_method: str = ""  # how the offset was found
    drift_ppm: float = 0.0  # seconds of error per million seconds since the first sample
    start: datetime | None = None  # for a record without a time column
    rate_hz: float | None = None  # for a record without a time column


@dataclass(frozen=True, slots=True, kw_only=True)
class RecordFile:
    """One [[records]] table: a file and its channels; the samples themselves stay in the file."""

    file: str
    time: TimeAxis
    channels: tuple[Channel, ...]
    source: Source


@dataclass(frozen=True, slots=True, kw_only=True)
class OilReportFile:
    """One [[oil_reports]] table: a laboratory file and how to read what it doesn't say itself."""

    file: str
    source: Source
    sample_point: str = ""
    laboratory: str = ""
    zone: str = ""
    columns: dict[str, str] = field(default_factory=dict)  # header -> "property [unit]"
    decimal: str = ""  # "." or ","; "" lets the reader decide from the whole file
    day_first: bool | None = None
    sheet: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class Excluded:
    """Evidence set aside on purpose, with the reason; shown in the report."""

    file: str
    where: str
    reason: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Photo:
    """One row of photos/photos.csv with what the file itself says."""

    file: str
    source: Source
    exhibit: str = ""
    taken: datetime | None = None
    taken_from: str = ""  # "photos.csv" or "EXIF"
    by: str = ""
    view: str = ""  # overall, mid or close
    zone: str = ""
    scale: str = ""  # as written, e.g. "10 mm bar" or "12.5 px/mm"
    caption: str = ""
    width: int = 0  # [px], upright
    height: int = 0
    orientation: int = 1  # EXIF value 1..8
    device: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class Finding:
    """One row of teardown/findings.csv."""

    id: str
    source: Source
    component: str
    zone: str  # as written
    sign: Sign | None  # None where the word is not in the vocabulary
    sign_text: str  # as written
    extent: Extent | None
    side: Side | None  # the side of the zone; None where the zone is unknown
    photo: str = ""
    note: str = ""
    by: str = ""
    when: date | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class CustodyRow:
    """One hand-over of one exhibit."""

    exhibit: str
    source: Source
    description: str = ""
    handed_from: str = ""
    handed_to: str = ""
    when: datetime | None = None
    seal: str = ""
    condition: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class HistoryEvent:
    """One row of history.csv."""

    when: datetime | date
    kind: str
    text: str
    source: Source


@dataclass(frozen=True, slots=True, kw_only=True)
class Action:
    """One row of actions.csv, as written."""

    id: str
    kind: ActionKind | None
    text: str
    source: Source
    cause: str = ""
    owner: str = ""
    due: date | None = None
    done: date | None = None
    status: str = ""
    verified_by: str = ""
    verify: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class EvidenceFile:
    """One file of the case folder, as received."""

    file: str
    size: int  # [bytes]
    sha256: str
    role: str  # descriptor, oil report, record, photo, findings, notes, custody, history, ...


@dataclass(frozen=True, slots=True, kw_only=True)
class Gap:
    """Something that was not there to look at, and what that costs."""

    key: str  # stable, e.g. "record.inlet-pressure"
    missing: str  # what is missing, in words
    cost: str  # what the verdict loses by it
    kind: str = "not looked"  # "not looked", "lost" or "not recorded"


@dataclass(frozen=True, slots=True, kw_only=True)
class Case:
    """Everything the case folder says; the samples of the records stay in their files."""

    header: Header
    pump: Pump = field(default_factory=Pump)
    reservoir: Reservoir = field(default_factory=Reservoir)
    suction_line: tuple[SuctionPart, ...] = ()
    fluid: Fluid = field(default_factory=Fluid)
    oil_reports: tuple[OilReportFile, ...] = ()
    records: tuple[RecordFile, ...] = ()
    excluded: tuple[Excluded, ...] = ()
    photos: tuple[Photo, ...] = ()
    findings: tuple[Finding, ...] = ()
    notes: str = ""
    custody: tuple[CustodyRow, ...] = ()
    history: tuple[HistoryEvent, ...] = ()
    actions: tuple[Action, ...] = ()
    files: tuple[EvidenceFile, ...] = ()
    gaps: tuple[Gap, ...] = ()
    commission: Commission = field(default_factory=Commission)
