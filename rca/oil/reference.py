"""What the oil was when new: the new-oil sample, else the case, else what any new oil has."""

from collections.abc import Sequence
from dataclasses import dataclass
from datetime import date

from rca.base.source import Origin
from rca.case.model import Case
from rca.case.oil import OilSample
from rca.oil.precision import PER_SD, certain, noise_floor

# value and standard uncertainty of new mineral hydraulic oil; common practice, no source.
# Acid number, nitration and oxidation depend on the additives and have no value here.
_ANY_NEW_OIL = {
    "soot": (0.0, 0.3),
    "colour": (1.5, 0.6),
    "antioxidant_remaining": (100.0, 3.0),
    "ferrous_index": (2.0, 3.0),
    "insolubles": (0.01, 0.02),
    "patch_colour": (8.0, 4.0),
    "Fe": (1.0, 1.0),
    "Cu": (0.5, 0.8),
    "Pb": (0.5, 1.0),
    "Cr": (0.2, 0.5),
    "Sn": (0.3, 1.0),
    "Al": (0.5, 1.0),
    "Si": (3.0, 3.0),
    "Cl": (10.0, 10.0),
}


@dataclass(frozen=True, slots=True, kw_only=True)
class Reference:
    """A property of the new oil; ``u`` is its standard uncertainty beyond one test's scatter."""

    value: float
    u: float
    origin: Origin
    text: str  # where it comes from, in words


def new_oil_samples(samples: Sequence[OilSample], laboratory: str) -> tuple[OilSample, ...]:
    """New-oil samples that are not set aside, the best to compare with first.

    One of the laboratory of the latest used sample comes before the others, then the latest.
    """
    new = [s for s in samples if s.new_oil and not s.excluded]
    new.sort(key=lambda s: (s.laboratory == laboratory, s.sampled or date.min), reverse=True)
    return tuple(new)


def reference_of(
    name: str, case: Case, new: Sequence[OilSample], fill: Sequence[OilSample]
) -> Reference | None:
    """What stands for new oil: a new-oil sample, case.toml, a class, or the fill's first sample.

    The first sample of a fill (where there are two or more) errs low: what was lost before it is
    not seen.
    """
    for one in new:
        measured = certain(one.values.get(name))
        if measured is not None:
            return Reference(
                value=measured, u=0.0, origin=Origin.LABORATORY, text=f"new oil, sample {one.id}"
            )
    stated = _stated(name, case)
    if stated is not None:
        return stated
    if name in _ANY_NEW_OIL:
        value, u = _ANY_NEW_OIL[name]
        return Reference(
            value=value, u=u, origin=Origin.DEFAULT, text="usual in new oil (no source)"
        )
    first = next((s for s in fill[:-1] if certain(s.values.get(name)) is not None), None)
    value_first = certain(first.values[name]) if first is not None else None
    if first is None or value_first is None:
        return None
    return Reference(
        value=value_first,
        u=noise_floor(name, value_first).R / PER_SD,
        origin=Origin.LABORATORY,
        text=f"first sample of the fill, {first.id} (not new oil)",
    )


def _stated(name: str, case: Case) -> Reference | None:
    fluid = case.fluid
    readings = {
        "viscosity_40": (fluid.viscosity_40, 1e6, 0.0),
        "viscosity_100": (fluid.viscosity_100, 1e6, 0.0),
        "flash_point": (fluid.flash_point, 1.0, -273.15),
        "air_release": (fluid.air_release, 1.0 / 60.0, 0.0),
        "conductivity": (fluid.conductivity, 1e12, 0.0),
    }
    reading, factor, offset = readings.get(name, (None, 1.0, 0.0))
    if reading is not None:
        return Reference(
            value=reading.value * factor + offset,
            u=(reading.u or 0.0) * factor,
            origin=reading.origin,
            text="case.toml, [fluid]",
        )
    if name == "viscosity_40" and fluid.iso_vg is not None:
        grade = float(fluid.iso_vg)
        return Reference(  # ISO 3448: the grade lies within 10 % of its number
            value=grade, u=0.1 * grade / 3**0.5, origin=Origin.STATED, text="ISO VG grade, ±10 %"
        )
    return None
