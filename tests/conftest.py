"""Fixtures shared by all tests."""

import os
from pathlib import Path

# Before NumPy is loaded: several test processes share the cores already.
os.environ.setdefault("OMP_NUM_THREADS", "1")

import pytest

from rca.base.source import Reading, Source
from rca.case.model import Breather, Case, Fluid, Header, Pump, Reservoir, SuctionPart
from rca.case.vocabulary import FluidClass, PartKind, PumpKind

ROOT = Path(__file__).resolve().parent.parent


def reading(value: float, unit: str, u: float | None = None) -> Reading:
    """A stated value in SI."""
    return Reading(value=value, unit=unit, u=u, source=Source(file="case.toml", locator="test"))


@pytest.fixture
def sample_dir() -> Path:
    """The sample case folder of the checkout."""
    return ROOT / "sample_case"


@pytest.fixture
def small_case() -> Case:
    """The machine of the design's example, without evidence: 148 L/min, VG 46, 50 mm line."""
    return Case(
        header=Header(id="T-1", title="Test case", altitude=reading(340.0, "m")),
        pump=Pump(
            kind=PumpKind.AXIAL_PISTON,
            displacement=reading(100e-6, "m3"),
            speed=reading(1480 / 60, "1/s"),
            elements=9,
            discharge_pressure=reading(211e5, "Pa"),
            inlet_pressure_min=reading(0.80e5, "Pa"),
            transition_angle=reading(0.20944, "rad"),
        ),
        reservoir=Reservoir(
            oil_volume=reading(0.630, "m3"),
            level_above_inlet=reading(0.4, "m"),
            breather=Breather(rated_flow=reading(0.015, "m3/s"), rated_loss=reading(3e3, "Pa")),
        ),
        suction_line=(
            SuctionPart(
                index=0,
                part=PartKind.STRAINER,
                rated_flow=reading(250 / 60e3, "m3/s"),
                rated_loss=reading(3e3, "Pa"),
                rated_viscosity=reading(30e-6, "m2/s"),
            ),
            SuctionPart(
                index=1,
                part=PartKind.PIPE,
                bore=reading(0.050, "m"),
                length=reading(1.8, "m"),
                roughness=reading(0.05e-3, "m"),
            ),
            SuctionPart(
                index=2,
                part=PartKind.FITTING,
                form="long-radius bend",
                bore=reading(0.050, "m"),
                count=2,
            ),
        ),
        fluid=Fluid(
            fluid_class=FluidClass.MINERAL,
            iso_vg=46,
            viscosity_40=reading(46.1e-6, "m2/s"),
            viscosity_100=reading(6.8e-6, "m2/s"),
            density_15=reading(872.0, "kg/m3"),
            temperature=reading(323.15, "K"),
        ),
    )
