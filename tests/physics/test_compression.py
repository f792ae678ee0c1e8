"""Compression heating against air tables, Cantera, CoolProp and identities."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from rca.base.errors import OutOfRangeError
from rca.physics.compression import (
    AIR_MOLE_FRACTIONS,
    adiabatic_end_temperature,
    air_enthalpy,
    air_heat_capacity,
    air_internal_energy,
    constant_gamma_end_temperature,
    effective_exponent,
    pressure_for_end_temperature,
    reduced_entropy,
)

ATM170 = 170 * 101325.0
KGF = 98066.5  # [Pa] kgf/cm2
AIR_TABLE = (
    "Moran and Shapiro, Fundamentals of Engineering Thermodynamics, Table A-22 (from memory)"
)
CANTERA = "Cantera 3.2, nasa_gas.yaml thermodynamic data, ideal gas"


def _cantera_air():
    ct = pytest.importorskip("cantera")
    species = {s.name: s for s in ct.Species.list_from_file("nasa_gas.yaml")}
    gas = ct.Solution(thermo="ideal-gas", species=[species[n] for n in ("O2", "N2", "Ar")])
    gas.X = list(AIR_MOLE_FRACTIONS)
    return gas


@pytest.mark.outside_value(source=AIR_TABLE)
@pytest.mark.parametrize(("t", "relative_pressure"), [(400, 3.806), (600, 16.28), (800, 47.75), (1000, 114.0), (1200, 238.0), (1300, 330.9), (1400, 450.5)])  # fmt: skip
def test_relative_pressure_of_the_air_table(t, relative_pressure):
    ratio = np.exp(reduced_entropy(t) - reduced_entropy(300.0))
    assert ratio == pytest.approx(relative_pressure / 1.3860, rel=4e-3)


@pytest.mark.outside_value(source=AIR_TABLE)
@pytest.mark.parametrize(("t", "energy", "enthalpy"), [(600, 220.7, 306.8), (1000, 544.9, 745.9), (1200, 719.3, 977.6)])  # fmt: skip
def test_energy_and_enthalpy_of_the_air_table(t, energy, enthalpy):
    assert (air_internal_energy(t) - air_internal_energy(300.0)) / 1e3 == pytest.approx(
        energy, abs=0.6
    )
    assert (air_enthalpy(t) - air_enthalpy(300.0)) / 1e3 == pytest.approx(enthalpy, abs=0.9)


@pytest.mark.outside_value(source=CANTERA)
@pytest.mark.parametrize("t", [250.0, 300.0, 700.0, 999.0, 1001.0, 1500.0, 2500.0])
def test_heat_capacity_enthalpy_entropy_against_cantera(t):
    gas = _cantera_air()
    gas.TP = 300.0, 1e5
    h0, s0 = gas.enthalpy_mass, gas.entropy_mass
    gas.TP = t, 1e5
    assert air_heat_capacity(t) == pytest.approx(gas.cp_mass, rel=2e-4)
    assert air_enthalpy(t) - air_enthalpy(300.0) == pytest.approx(
        gas.enthalpy_mass - h0, rel=2e-4, abs=20
    )
    r = gas.cp_mass - gas.cv_mass
    assert (reduced_entropy(t) - reduced_entropy(300.0)) == pytest.approx((gas.entropy_mass - s0) / r, rel=2e-4, abs=1e-4)  # fmt: skip


@pytest.mark.outside_value(source=CANTERA)
@pytest.mark.parametrize(("p1", "celsius"), [(1.0e5, 40), (0.8e5, 50), (0.6e5, 60)])
def test_end_temperature_is_cantera_s_isentrope(p1, celsius):
    gas = _cantera_air()
    gas.TP = celsius + 273.15, p1
    gas.SP = gas.entropy_mass, ATM170
    assert adiabatic_end_temperature(celsius + 273.15, p1, ATM170) == pytest.approx(gas.T, abs=0.3)


@pytest.mark.outside_value(
    source="Lemmon et al., J. Phys. Chem. Ref. Data 29 (2000) 331, air equation of state as in CoolProp"
)
def test_real_gas_is_three_kelvin_hotter():
    props = pytest.importorskip("CoolProp.CoolProp").PropsSI
    entropy = props("S", "T", 313.15, "P", 1e5, "Air")
    real = props("T", "S", entropy, "P", ATM170, "Air")
    ours = float(adiabatic_end_temperature(313.15, 1e5, ATM170))
    assert real == pytest.approx(1247.8, abs=1.0)
    assert ours == pytest.approx(real, abs=4.0)


@pytest.mark.outside_value(
    source="Cantera 3.2 with its air.yaml (other nitrogen polynomials), isentrope to 170 atm"
)
@pytest.mark.parametrize(("p1", "celsius", "kelvin"), [(1.0e5, 40, 1245.3), (0.8e5, 50, 1349.8), (0.6e5, 50, 1446.1)])  # fmt: skip
def test_hundred_and_seventy_atmospheres(p1, celsius, kelvin):
    assert adiabatic_end_temperature(celsius + 273.15, p1, ATM170) == pytest.approx(
        kelvin, abs=2.0
    )


@pytest.mark.outside_value(
    source="perfect-gas isentropic relation against Cantera's variable heat capacity"
)
def test_constant_gamma_overshoots_by_118_kelvin():
    trap = constant_gamma_end_temperature(313.15, 1e5, ATM170)
    assert trap - adiabatic_end_temperature(313.15, 1e5, ATM170) == pytest.approx(118.0, abs=2.0)


@pytest.mark.outside_value(
    source="Lohrentz, Oelhydraulik und Pneumatik 18 (1974) 175-180, table as reproduced in trade texts (from memory)"
)
@pytest.mark.parametrize(("kgf", "celsius"), [(70, 766), (140, 994), (210, 1145)])
def test_the_trade_s_table_is_constant_gamma_arithmetic(kgf, celsius):
    trap = float(constant_gamma_end_temperature(311.15, 101325.0, kgf * KGF)) - 273.15
    true = float(adiabatic_end_temperature(311.15, 101325.0, kgf * KGF)) - 273.15
    assert trap == pytest.approx(celsius, abs=5.0)
    assert true < celsius - 50


@pytest.mark.outside_value(source="Cantera 3.2, isentropes from 311.15 K and 1 atm")
@pytest.mark.parametrize(("kgf", "celsius"), [(70, 710), (140, 895), (210, 1016)])
def test_the_same_table_with_variable_heat_capacity(kgf, celsius):
    true = float(adiabatic_end_temperature(311.15, 101325.0, kgf * KGF)) - 273.15
    assert true == pytest.approx(celsius, abs=2.0)


@pytest.mark.outside_value(source="identity (n - 1)/n = ln(T2/T1)/ln(p2/p1)")
def test_effective_exponent():
    assert effective_exponent(313.15, 1245.3, 172.25) == pytest.approx(1.3663, abs=5e-4)


@pytest.mark.property
@given(t=st.floats(270, 500), ratio=st.floats(1.0, 400), more=st.floats(1.01, 2))
def test_more_compression_and_warmer_start_are_hotter(t, ratio, more):
    end = adiabatic_end_temperature(t, 1e5, ratio * 1e5)
    assert end >= t - 1e-9
    assert adiabatic_end_temperature(t, 1e5, ratio * more * 1e5) > end
    assert adiabatic_end_temperature(t + 1, 1e5, ratio * 1e5) > end


@pytest.mark.parametrize("bad", [{"t_start": float("nan")}, {"p_start": -0.2e5}, {"p_end": 0.5e5}, {"p_end": float("inf")}, {"t_start": 100.0}, {"p_end": 1e20}])  # fmt: skip
def test_refuses_what_it_cannot_take(bad):
    with pytest.raises(OutOfRangeError):
        adiabatic_end_temperature(**{"t_start": 313.0, "p_start": 1e5, "p_end": 2e7, **bad})


def test_others_refuse_too():
    with pytest.raises(OutOfRangeError, match="TM-4513"):
        air_heat_capacity(7000.0)
    with pytest.raises(OutOfRangeError):
        constant_gamma_end_temperature(300.0, 1e5, 2e7, gamma=1.0)
    with pytest.raises(OutOfRangeError):
        effective_exponent(300.0, 900.0, 1.0)


@pytest.mark.outside_value(
    source="Cantera 3.2, air.yaml (other nitrogen polynomials), isentropes to 170 atm; constant gamma"
)
@pytest.mark.parametrize(("bar", "celsius", "kelvin", "constant"), [
    (1.0, 40, 1245.3, 1090), (1.0, 50, 1279.0, 1134), (1.0, 60, 1312.5, 1177),
    (0.8, 40, 1314.5, 1180), (0.8, 50, 1349.8, 1227), (0.8, 60, 1384.9, 1273),
    (0.6, 40, 1408.6, 1305), (0.6, 50, 1446.1, 1355), (0.6, 60, 1483.3, 1405),
])  # fmt: skip
def test_nine_starts(bar, celsius, kelvin, constant):
    t = celsius + 273.15
    assert adiabatic_end_temperature(t, bar * 1e5, ATM170) == pytest.approx(kelvin, abs=2.0)
    trap = float(constant_gamma_end_temperature(t, bar * 1e5, ATM170)) - 273.15
    assert trap == pytest.approx(constant, abs=1.0)


@pytest.mark.outside_value(
    source="Cantera 3.2 air, isentrope from 1 bar and 50 degC, 10 to 350 bar"
)
def test_end_temperature_over_pressure():
    bars = np.array([10, 20, 50, 100, 150, 200, 250, 300, 350])
    kelvin = [616.0, 742.2, 941.3, 1119.7, 1236.7, 1326.0, 1399.1, 1461.3, 1515.8]
    assert adiabatic_end_temperature(323.15, 1e5, bars * 1e5) == pytest.approx(kelvin, abs=2.0)


@pytest.mark.outside_value(
    source="Cantera 3.2 air: pressure for an ideal temperature from 1.0 and 0.6 bar, 50 degC"
)
def test_pressure_for_a_temperature():
    t = [700.0, 800.0, 900.0, 1000.0, 1273.0]
    bars = pressure_for_end_temperature(323.15, 1e5, t) / 1e5
    assert bars == pytest.approx([16.1, 26.6, 41.9, 63.5, 169], rel=6e-3)
    low = pressure_for_end_temperature(323.15, 0.6e5, t) / 1e5
    assert low == pytest.approx([9.6, 16.0, 25.2, 38.1, 101], rel=8e-3)
    back = adiabatic_end_temperature(323.15, 1e5, bars * 1e5)
    assert back == pytest.approx(t, abs=1e-4)
    for bad in ((323.15, 1e5, 300.0), (323.15, -1e5, 800.0), (float("nan"), 1e5, 800.0)):
        with pytest.raises(OutOfRangeError):
            pressure_for_end_temperature(*bad)
