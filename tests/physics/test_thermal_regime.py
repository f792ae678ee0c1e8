"""Peclet screen, conductivity, Prosperetti's exponent."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from rca.base.errors import OutOfRangeError
from rca.physics.thermal_regime import (
    air_conductivity,
    air_diffusivity,
    contact_temperature,
    core_fraction,
    dilute_air_conductivity,
    mean_fraction,
    peclet,
    radius_at_peclet,
    small_amplitude_exponent,
)


@pytest.mark.outside_value(source="CoolProp, air transport of Lemmon and Jacobsen 2004, at 100 Pa")
@pytest.mark.parametrize("t", [280.0, 300.0, 600.0, 1000.0, 1245.0, 1800.0])
def test_conductivity_against_coolprop(t):
    props = pytest.importorskip("CoolProp.CoolProp").PropsSI
    assert air_conductivity(t) == pytest.approx(props("L", "T", t, "P", 100.0, "Air"), rel=2e-3)
    assert dilute_air_conductivity(np.array(t)) == air_conductivity(t)


@pytest.mark.outside_value(
    source="Incropera and DeWitt, Fundamentals of Heat and Mass Transfer, Table A.4 (from memory)"
)
@pytest.mark.parametrize(("t", "k"), [(300.0, 26.3e-3), (500.0, 40.7e-3), (1000.0, 66.7e-3)])
def test_conductivity_of_the_handbook(t, k):
    assert air_conductivity(t) == pytest.approx(k, rel=0.03)


@pytest.mark.outside_value(source="Cantera 3.2, air.yaml, 1 bar 40 degC and 0.6 bar 60 degC")
@pytest.mark.parametrize(("t", "p", "alpha"), [(313.15, 1e5, 2.44e-5), (333.15, 0.6e5, 4.52e-5)])
def test_diffusivity(t, p, alpha):
    assert air_diffusivity(t, p) == pytest.approx(alpha, rel=0.01)


@pytest.mark.outside_value(
    source="arithmetic on the definition with alpha 2.44e-5 m2/s: R0 = sqrt(Pe alpha t_r)"
)
@pytest.mark.parametrize(
    ("number", "microns"), [(0.1, 49.4), (2.0, 221), (10.0, 494), (30.0, 855)]
)
def test_radius_at_a_peclet_number(number, microns):
    radius = radius_at_peclet(number, 1e-3, 313.15, 1e5)
    assert radius * 1e6 == pytest.approx(microns, rel=0.005)
    assert peclet(radius, 1e-3, 313.15, 1e5) == pytest.approx(number)


@pytest.mark.outside_value(
    source="Prosperetti, J. Acoust. Soc. Am. 61 (1977) 17-27: limits 1 and gamma; chi = 0.1 evaluated by hand"
)
@pytest.mark.parametrize(("chi", "kappa"), [(1e3, 1.0), (10, 1.0), (1, 1.0014), (0.1, 1.0867), (0.01, 1.285), (1e-4, 1.388)])  # fmt: skip
def test_small_amplitude_exponent(chi, kappa):
    assert small_amplitude_exponent(chi) == pytest.approx(kappa, abs=1e-3)


@pytest.mark.outside_value(source="exact limit: adiabatic as chi -> 0")
def test_small_amplitude_exponent_goes_to_gamma():
    assert small_amplitude_exponent(1e-9) == pytest.approx(1.4, abs=1e-3)


@pytest.mark.outside_value(
    source="Carslaw and Jaeger: two half-spaces in contact; effusivities 66 and 467 W s^0.5/(m2 K) by hand"
)
def test_contact_temperature():
    found = contact_temperature(1245.0, 313.15, gas_effusivity=66.0, liquid_effusivity=467.0)
    assert found == pytest.approx(428.5, abs=1.0)


@pytest.mark.property
@given(a=st.floats(1e-3, 1e5), factor=st.floats(1.001, 10))
def test_fractions_rise_with_peclet_and_stay_in_bounds(a, factor):
    for fraction in (core_fraction, mean_fraction):
        assert 0 < fraction(a) <= fraction(a * factor) <= 1
    assert mean_fraction(a) <= core_fraction(a)


@pytest.mark.parametrize("call", [
    lambda: air_conductivity(float("nan")), lambda: air_conductivity(5000.0),
    lambda: air_diffusivity(300.0, 0.0), lambda: peclet(-1e-4, 1e-3, 300.0, 1e5),
    lambda: radius_at_peclet(0.0, 1e-3, 300.0, 1e5), lambda: core_fraction(float("nan")),
    lambda: mean_fraction(0.0), lambda: small_amplitude_exponent(0.0),
    lambda: contact_temperature(0.0, 300.0, gas_effusivity=1.0, liquid_effusivity=1.0),
], ids=[f"refusal {i}" for i in range(9)])  # fmt: skip
def test_refusals(call):
    with pytest.raises(OutOfRangeError):
        call()


@pytest.mark.outside_value(
    source="independent computation of the conduction model by another program, shares of the adiabatic rise"
)
@pytest.mark.parametrize(("number", "core", "mean"), [(0.1, 0.112, 0.047), (1, 0.371, 0.162), (3, 0.582, 0.262), (10, 0.897, 0.419), (30, 1.0, 0.603), (100, 1.0, 0.760), (1000, 1.0, 0.918), (1e4, 1.0, 0.974)])  # fmt: skip
def test_shares_of_the_adiabatic_rise(number, core, mean):
    assert core_fraction(number) == pytest.approx(core, abs=0.02)
    assert mean_fraction(number) == pytest.approx(mean, abs=0.02)


@pytest.mark.parametrize(("p1", "t0", "p2"), [(0.6e5, 333.15, 172e5), (1e5, 333.15, 350e5)])
@pytest.mark.parametrize("number", [0.1, 1.0, 10.0])
def test_the_shares_hold_for_other_pressures_within_their_stated_spread(p1, t0, p2, number):
    from rca.physics.bubble import bubble_batch
    from rca.physics.compression import adiabatic_end_temperature
    from rca.physics.thermal_regime import SURROGATE_SPREAD

    radius = radius_at_peclet(number, 1e-3, t0, p1)
    core = bubble_batch(radius, t0, p1, p2, 1e-3, inertial=False).core[0]
    share = (core - t0) / (adiabatic_end_temperature(t0, p1, p2) - t0)
    assert core_fraction(number) == pytest.approx(share, abs=SURROGATE_SPREAD)
