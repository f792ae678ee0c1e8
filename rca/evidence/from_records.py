"""Evidence from the records, but for the inlet pressure itself (see ``from_suction``)."""

from collections.abc import Callable
from dataclasses import dataclass

from scipy.stats import norm

from rca.case.model import Case
from rca.case.series import AlignedRecord
from rca.evidence.item import Basis, EvidenceItem, Group, Node, NotAssessed
from rca.records.check import RecordCheck

HOT = 343.15  # [K], 70 degC; bulk oil above it ages fast, common practice
LOST = 0.05  # share of the delivery whose loss is noticed; common practice, no source
OVER = 1.10  # share of nominal speed or rated pressure that counts as beyond


@dataclass(frozen=True, slots=True)
class _Held:
    """A recorded level and the limit it is held against, with how they are written."""

    key: str
    node: Node
    quantity: str
    value: float | None
    limit: float | None
    doubt: float  # standard uncertainty of the comparison
    show: Callable[[float], str]


def from_records(
    case: Case, check: RecordCheck, aligned: AlignedRecord | None
) -> tuple[EvidenceItem | NotAssessed, ...]:
    """Items on speed, temperature and delivery; ``from_discharge`` speaks of pressure."""
    duty = check.duty
    speed = case.pump.maximum_speed or case.pump.speed
    fastest = speed.value * OVER if speed else None
    return (
        _level(
            _Held(
                "overspeed",
                Node.OVERSPEED,
                "shaft speed",
                duty.speed_p95 if duty else None,
                fastest,
                0.02 * (fastest or 1.0),
                lambda v: f"{60.0 * v:.0f} rpm",
            ),
            aligned,
        ),
        _level(
            _Held(
                "bulk_hot",
                Node.BULK_HOT,
                "oil temperature",
                duty.temperature_p95 if duty else None,
                HOT,
                3.0,
                lambda v: f"{v - 273.15:.0f} °C",
            ),
            aligned,
        ),
        _worse_cold(check, aligned),
        _flow_loss(check, aligned),
    )


def _level(held: _Held, aligned: AlignedRecord | None) -> EvidenceItem | NotAssessed:
    series = aligned.series.get(held.quantity) if aligned is not None else None
    if held.value is None or held.limit is None or series is None:
        return NotAssessed(
            key=f"record.{held.key}", node=held.node, missing=f"a record of {held.quantity}"
        )
    share = float(norm.cdf((held.value - held.limit) / held.doubt))
    return EvidenceItem(
        key=f"record.{held.key}",
        node=held.node,
        likelihood={"no": 0.95 - 0.9 * share, "yes": 0.1 + 0.8 * share},
        statement=(
            f"While running, the 95 % point of {held.quantity} is {held.show(held.value)}; held "
            f"against {held.show(held.limit)}."
        ),
        sources=(series.source,),
        group=Group.OPERATION,
        common_cause=f"sensor of {held.quantity}",
        basis=Basis.MEASURED,
        absent=share < 0.5,
    )


def _worse_cold(check: RecordCheck, aligned: AlignedRecord | None) -> EvidenceItem | NotAssessed:
    share, base = check.events_cold_share, check.cold_share_of_running
    if share is None or base is None or aligned is None:
        return NotAssessed(
            key="record.worse_cold",
            node=Node.WORSE_COLD,
            missing="low-pressure events with the oil temperature beside them",
        )
    worse = share > 2.0 * base and share > 0.5
    return EvidenceItem(
        key="record.worse_cold",
        node=Node.WORSE_COLD,
        likelihood={"no": 0.1, "yes": 0.85} if worse else {"no": 0.85, "yes": 0.25},
        statement=(
            f"{100 * share:.0f} % of the time below the inlet limit fell on cold oil, which made "
            f"up {100 * base:.0f} % of the running time."
        ),
        sources=(aligned.series["inlet pressure"].source,),
        group=Group.OPERATION,
        common_cause="sensor of the inlet pressure",
        basis=Basis.MEASURED,
        absent=not worse,
    )


def _flow_loss(check: RecordCheck, aligned: AlignedRecord | None) -> EvidenceItem | NotAssessed:
    """Delivery at the end against the beginning of the record; a control may set it back too."""
    delivery = check.delivery
    series = aligned.series.get("flow") if aligned is not None else None
    if delivery is None or series is None:
        return NotAssessed(
            key="record.flow_loss",
            node=Node.FLOW_LOSS,
            missing="records of flow and shaft speed beside the displacement",
        )
    lost = 1.0 - delivery.last / delivery.first if delivery.first > 0.0 else 0.0
    share = float(norm.cdf((lost - LOST) / max(0.5 * delivery.spread, 0.01)))
    return EvidenceItem(
        key="record.flow_loss",
        node=Node.FLOW_LOSS,
        likelihood={"no": 0.9 - 0.7 * share, "yes": 0.2 + 0.65 * share},
        statement=(
            f"Recorded flow over displacement times speed is {delivery.last:.2f} at the end of "
            f"the record and was {delivery.first:.2f} at its beginning."
        ),
        sources=(series.source,),
        group=Group.OPERATION,
        common_cause="sensor of flow",
        basis=Basis.MEASURED,
        absent=share < 0.5,
    )
