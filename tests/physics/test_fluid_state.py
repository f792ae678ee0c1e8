"""One call for all properties: the class, the measured values that win, the refusals."""

import pytest

from rca.base.errors import OutOfRangeError
from rca.physics.fluid_class import CLASSES
from rca.physics.fluid_state import fluid_state


@pytest.mark.outside_value(
    source="mineral hydraulic oil VG 46 at 50 degC, handbook ranges: 845-855 kg/m3, 29-31 mm2/s, "
    "1.6-1.8 GPa isentropic, K_s/K_T 1.15-1.2, 1.95-2.03 kJ/(kg K), 0.128-0.135 W/(m K)"
)
def test_a_mineral_oil() -> None:
    oil = fluid_state("mineral", 323.15, nu_40=46e-6, nu_100=6.8e-6)
    assert 845 < oil.density < 855
    assert oil.viscosity == pytest.approx(30e-6, rel=0.03)
    assert 1.6e9 < oil.isentropic_modulus < 1.8e9
    assert 1.14 < oil.isentropic_modulus / oil.isothermal_modulus < 1.2
    assert 1950 < oil.heat_capacity < 2030
    assert 0.128 < oil.conductivity < 0.135
    assert oil.vapour_pressure[2] < 1.0
    assert "viscosity" not in oil.class_values
    assert "density" in oil.class_values


@pytest.mark.outside_value(
    source="Dowson and Higginson 1966: mineral oil 1.9 to 2.1 % denser at 350 bar"
)
def test_under_pressure() -> None:
    low, high = (fluid_state("mineral", 323.15, p) for p in (1e5, 351e5))
    assert high.density / low.density == pytest.approx(1.020, abs=0.003)
    assert high.isentropic_modulus > low.isentropic_modulus + 0.35e9


@pytest.mark.parametrize("name", sorted(CLASSES))
def test_every_class(name: str) -> None:
    state = fluid_state(name, 323.15, iso_vg=46)
    assert state.viscosity is not None
    low, middle, high = state.vapour_pressure
    assert 0 < low < middle < high < 20e3
    assert 1.3e9 < state.isothermal_modulus <= state.isentropic_modulus


def test_measured_values_win() -> None:
    state = fluid_state(
        "ester", 323.15, density_15=985.0, bulk_modulus=2.0e9, flash_point=540.0, bunsen=0.07
    )
    assert state.density == pytest.approx(985 / (1 + 7.5e-4 * 35), rel=1e-3)
    assert state.isentropic_modulus == pytest.approx(2.0e9, rel=0.01)
    assert state.bunsen == 0.07
    assert state.viscosity is None
    assert state.class_values == ("viscosity",)


def test_refusals() -> None:
    for bad in (("mineral", float("nan")), ("mineral", 500.0), ("olive oil", 323.0)):
        with pytest.raises(OutOfRangeError):
            fluid_state(*bad)
    with pytest.raises(OutOfRangeError):
        fluid_state("mineral", 323.15, 2e8)
