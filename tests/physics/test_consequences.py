"""Heat and soot budgets."""

import pytest

from rca.base.errors import OutOfRangeError
from rca.physics.consequences import (
    FUEL_PER_AIR,
    HEAT_PER_AIR,
    energy_budget,
    halving_energy,
    halving_step,
    life_ratio,
)

STATE = {
    "air_fraction": 0.01, "inlet_pressure": 1e5, "inlet_temperature": 323.15,
    "discharge_pressure": 172.25e5, "oil_density": 860.0, "oil_heat_capacity": 1989.0,
    "oil_expansion": 7.5e-4,
}  # fmt: skip


@pytest.mark.outside_value(
    source="ideal gas, Cantera 3.2 internal energy (8.3 J) and combustion of n-dodecane limited by oxygen (31.9 J), per litre"
)
def test_energy_per_litre():
    budget = energy_budget(**STATE)
    assert budget.combustion_heat / 1e3 == pytest.approx(31.9, rel=0.02)
    assert budget.compression_heat / 1e3 == pytest.approx(8.3, rel=0.02)
    assert budget.combustion_rise == pytest.approx(0.019, rel=0.04)
    assert budget.compression_rise == pytest.approx(0.005, rel=0.04)
    assert budget.air_mass / 1e3 == pytest.approx(0.0108e-3, rel=0.01)


@pytest.mark.outside_value(source="isenthalpic throttling (1 - beta T) dp/(rho cp) by hand: 7.7 K")
def test_throttling_dwarfs_it():
    budget = energy_budget(**STATE)
    assert budget.throttling_rise == pytest.approx(7.7, rel=0.03)
    assert budget.throttling_rise / budget.combustion_rise > 300


@pytest.mark.outside_value(
    source="stoichiometry C12H26 + 18.5 O2 in air by hand: 1 kg of fuel to 15.0 kg of air"
)
def test_stoichiometry():
    assert pytest.approx(15.0, rel=0.005) == 1 / FUEL_PER_AIR
    assert pytest.approx(2.957, rel=0.01) == HEAT_PER_AIR / 1e6


@pytest.mark.outside_value(source="Arrhenius identity E = R ln2 T (T + 10)/10 by hand")
@pytest.mark.parametrize(("celsius", "kj"), [(40, 58.32), (60, 65.88), (80, 73.91), (100, 82.40)])
def test_ten_kelvin_rule(celsius, kj):
    assert halving_energy(celsius + 273.15) / 1e3 == pytest.approx(kj, rel=1e-3)


def test_no_air_no_heat():
    budget = energy_budget(**{**STATE, "air_fraction": 0.0})
    assert budget.combustion_heat == 0.0
    assert budget.soot_high == 0.0


@pytest.mark.parametrize("bad", [{"air_fraction": float("nan")}, {"air_fraction": -0.1}, {"discharge_pressure": 0.5e5}, {"oil_density": 0.0}])  # fmt: skip
def test_refusals(bad):
    with pytest.raises(OutOfRangeError):
        energy_budget(**{**STATE, **bad})
    with pytest.raises(OutOfRangeError):
        halving_energy(-1.0)


@pytest.mark.outside_value(
    source="Arrhenius by hand at 60 degC: 85, 100 and 120 kJ/mol halve the life in 7.7, 6.5, 5.4 K"
)
@pytest.mark.parametrize(("kj", "step"), [(85, 7.7), (100, 6.5), (120, 5.4)])
def test_halving_step(kj, step):
    assert halving_step(333.15, kj * 1e3) == pytest.approx(step, abs=0.06)
    assert life_ratio(333.15 + step, 333.15, activation_energy=kj * 1e3) == pytest.approx(
        0.5, abs=0.005
    )
    assert halving_energy(333.15, step=halving_step(333.15, kj * 1e3)) == pytest.approx(kj * 1e3)


@pytest.mark.outside_value(
    source="soot by hand: 0.72 mg of fuel a litre and pass at 1 % air of 1 bar, 5-15 % of it soot"
)
def test_soot_per_litre():
    budget = energy_budget(**STATE)
    # kg/m3 = g/L
    assert budget.soot_low * 1e3 == pytest.approx(0.036, rel=0.02)
    assert budget.soot_high * 1e3 == pytest.approx(0.108, rel=0.02)


def test_life_refuses():
    for bad in ((float("nan"), 333.0), (333.0, 900.0)):
        with pytest.raises(OutOfRangeError):
            life_ratio(*bad)
    with pytest.raises(OutOfRangeError):
        halving_step(333.0, -1.0)
    with pytest.raises(OutOfRangeError, match="no warming"):
        halving_step(333.0, 100.0)
