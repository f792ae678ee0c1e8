"""An invented machine for the benchmarks."""

from rca.base.source import Reading
from rca.case.model import Case, Fluid, Header, Pump
from rca.case.vocabulary import FluidClass, PumpKind


def machine():
    """An axial piston pump at 211 bar absolute and 1480 rpm on VG 46."""

    def reading(value, unit):
        return Reading(value=value, unit=unit)

    return Case(
        header=Header(id="B-1", title="Benchmark"),
        pump=Pump(
            kind=PumpKind.AXIAL_PISTON,
            speed=reading(1480 / 60, "1/s"),
            discharge_pressure=reading(211e5, "Pa"),
            transition_angle=reading(0.20944, "rad"),
        ),
        fluid=Fluid(fluid_class=FluidClass.MINERAL, iso_vg=46, temperature=reading(323.15, "K")),
    )
