"""Evidence from the records, but for the inlet pressure itself (see ``from_suction``)."""

from rca.case.model import Case
from rca.case.series import AlignedRecord
from rca.evidence.item import Basis, EvidenceItem, Group, Node, NotAssessed
from rca.records.check import RecordCheck

HOT = 343.15  # [K], 70 degC; bulk oil above it ages fast, common practice
OVER = 1.10  # share of nominal speed or rated pressure that counts as beyond


def from_records(
    case: Case, check: RecordCheck, aligned: AlignedRecord | None
) -> tuple[EvidenceItem | NotAssessed, ...]:
    """Items on speed and temperature; ``from_discharge`` speaks of pressure and its rise."""
    duty = check.duty
    speed = case.pump.maximum_speed or case.pump.speed
    return (
        _level(
            "overspeed",
            Node.OVERSPEED,
            duty.speed_p95 if duty else None,
            speed.value * OVER if speed else None,
            "shaft speed",
            "1/s",
            aligned,
            1.0,
        ),
        _level(
            "bulk_hot",
            Node.BULK_HOT,
            duty.temperature_p95 if duty else None,
            HOT,
            "oil temperature",
            "K",
            aligned,
            1.0,
        ),
        _worse_cold(check, aligned),
    )


def _level(
    key: str,
    node: Node,
    value: float | None,
    limit: float | None,
    quantity: str,
    unit: str,
    aligned: AlignedRecord | None,
    scale: float,
) -> EvidenceItem | NotAssessed:
    series = aligned.series.get(quantity) if aligned is not None else None
    if value is None or limit is None or series is None:
        return NotAssessed(key=f"record.{key}", node=node, missing=f"a record of {quantity}")
    beyond = value > limit
    return EvidenceItem(
        key=f"record.{key}",
        node=node,
        likelihood={"no": 0.05, "yes": 0.9} if beyond else {"no": 0.95, "yes": 0.1},
        statement=(
            f"While running, the 95 % point of {quantity} is {value * scale:.4g} {unit}; held "
            f"against {limit * scale:.4g} {unit}."
        ),
        sources=(series.source,),
        group=Group.OPERATION,
        common_cause=f"sensor of {quantity}",
        basis=Basis.MEASURED,
        absent=not beyond,
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
