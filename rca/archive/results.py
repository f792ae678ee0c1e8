"""``results.json``: what the report, the auditor's rerun and the comparison read.

It holds no clock time and no path, so that the same case under the same versions gives the same
bytes; times live in ``record.json``.
"""

import json
from collections.abc import Mapping, Sequence
from importlib.resources import files
from typing import Any

import jsonschema

from rca.archive.codec import to_plain
from rca.archive.store import StageResult, Store
from rca.base.errors import ArchiveError
from rca.case.model import Case

FORMAT = 1
UNITS = (
    "SI throughout. Pressure: Pa, absolute, a difference where the name says drop, loss, "
    "depression, offset or shortfall. Temperature: K. Flow: m3/s. Kinematic viscosity: m2/s. "
    "Time: s; names in _s count from 1970-01-01 UTC; hours and days where the name says so. "
    "Air: volume share at the pressure of the place, 0 to 1. Probabilities and shares: 0 to 1. "
    "An oil property has its unit beside it."
)
CHECKS = ("suction", "discharge", "oil", "records", "damage")


def assemble(case: Case, store: Store, *, record: Mapping[str, Any]) -> dict[str, Any]:
    """The results of a finished run, as plain JSON.

    Raises ArchiveError where a stage is missing or the outcome does not fit the schema.
    """
    stages = {name: store.read(name) for name in store.stages()}
    verdict = stages["verdict"].check
    header = case.header
    results: dict[str, Any] = {
        "format": FORMAT,
        "units": UNITS,
        "case": {
            "id": header.id,
            "title": header.title,
            "asset": header.asset,
            "site": header.site,
            "occurred": header.occurred.isoformat() if header.occurred else None,
            "descriptor": to_plain(header),
            "machine": _machine(case),
        },
        "commission": to_plain(case.commission),
        "verdict": verdict["verdict"],
        "causes": verdict["causes"],
        "evidence": verdict["evidence"],
        "not_assessed": [to_plain(n) for s in stages.values() for n in s.not_assessed],
        "checks": {name: stages[name].check or {} for name in stages if name in CHECKS},
        "other_checks": {
            name: stage.check
            for name, stage in stages.items()
            if name not in {*CHECKS, "verdict", "actions"}
        },
        "gaps": _gaps(case, list(stages.values())),
        "actions": stages["actions"].check["actions"] if "actions" in stages else [],
        "limits": sorted({text for s in stages.values() for text in _limits(s)}),
        "record": dict(record),
    }
    validate(results)
    return results


def validate(results: Mapping[str, Any]) -> None:
    """Hold results against the shipped schema.

    Raises ArchiveError naming the key, what was found and what was expected.
    """
    validator = jsonschema.Draft202012Validator(schema())
    errors = sorted(validator.iter_errors(results), key=lambda e: list(map(str, e.path)))
    if errors:
        raise ArchiveError(
            "results.json does not fit its schema:\n"
            + "\n".join(f"{'.'.join(map(str, e.path)) or '(top)'}: {e.message}" for e in errors)
        )


def schema() -> dict[str, Any]:
    """The JSON Schema of ``results.json``."""
    text = files("rca.archive").joinpath("results.schema.json").read_text(encoding="utf-8")
    plain: dict[str, Any] = json.loads(text)
    return plain


def _machine(case: Case) -> dict[str, str | float | None]:
    """What the comparison of cases holds side by side, in SI; None where not recorded."""
    pump, fluid = case.pump, case.fluid
    numbers = {
        "displacement_m3": pump.displacement,
        "speed_per_s": pump.speed,
        "discharge_pressure_pa": pump.discharge_pressure,
        "oil_volume_m3": case.reservoir.oil_volume,
        "oil_temperature_k": fluid.temperature,
        "viscosity_40_m2_per_s": fluid.viscosity_40,
        "altitude_m": case.header.altitude,
    }
    words = {
        "pump_kind": pump.kind.value if pump.kind else None,
        "fluid_class": fluid.fluid_class.value if fluid.fluid_class else None,
    }
    return words | {name: r.value if r is not None else None for name, r in numbers.items()}


def _gaps(case: Case, stages: Sequence[StageResult]) -> list[Any]:
    gaps = {gap.key: gap for gap in (*case.gaps, *(g for s in stages for g in s.gaps))}
    return [to_plain(gaps[key]) for key in sorted(gaps)]


def _limits(stage: StageResult) -> list[str]:
    return [text for s in stage.sections for p in s.panels for text in p.limits]
