"""Bulk modulus, density under pressure, and what free air does to them."""

from collections.abc import Callable

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from rca.base.errors import OutOfRangeError
from rca.physics.bulk_modulus import (
    density_under_pressure,
    dowson_higginson_ratio,
    hayward_isothermal_secant_modulus,
    hayward_secant_modulus,
    heat_capacity_ratio,
    secant_from_tangent,
    tangent_modulus,
)
from rca.physics.effective_modulus import (
    Form,
    effective_modulus,
    mixture_sound_speed,
    modulus_span,
)
from rca.physics.fluid_class import CLASSES
from rca.physics.viscosity import kinematic_viscosity

BAR = 1e5


@pytest.mark.outside_value(
    source="component maker's table of moduli: MIL-H-5606 1.79 GPa, mineral oil at 40-50 degC "
    "1.6-1.8 GPa (Hayward 1970)"
)
def test_hayward_at_working_temperature() -> None:
    nu_20 = kinematic_viscosity(293.15, 46e-6, 6.8e-6)
    assert 1.55e9 < hayward_secant_modulus(1e5, 318.15, nu_20) < 1.8e9
    assert hayward_secant_modulus(1e5, 293.15, 25e-6) == pytest.approx(1.79e9, rel=0.05)


@pytest.mark.outside_value(source="Hayward's rule by hand: 100 mm2/s, 20 degC, 0 and 350 bar")
def test_hayward_by_hand() -> None:
    assert hayward_secant_modulus([0.0, 350e5], 293.15, 100e-6) == pytest.approx([1.87e9, 2.066e9])
    assert hayward_isothermal_secant_modulus(0.0, 293.15, 100e-6) == pytest.approx(1.60e9)


@pytest.mark.outside_value(
    source="identity K_s/K_T = 1 + beta^2 T K_s/(rho cp) by hand: 1.184; Hayward's two rules give "
    "their own ratio near it"
)
def test_isentropic_over_isothermal() -> None:
    ratio = heat_capacity_ratio(
        1.7e9, expansion=7.5e-4, temperature=323.0, density=850.0, heat_capacity=1980.0
    )
    # by hand 5.625e-7 * 323 * 1.7e9 / 1.683e6 = 0.1835
    assert ratio == pytest.approx(1.1835, abs=1e-3)
    two = hayward_secant_modulus(0.0, 323.15, 100e-6) / hayward_isothermal_secant_modulus(
        0.0, 323.15, 100e-6
    )
    assert two == pytest.approx(1.1835, abs=0.04)


@pytest.mark.outside_value(source="n-dodecane, CoolProp (Lemmon and Huber 2004): same identity")
def test_the_identity_on_a_reference_fluid() -> None:
    props = pytest.importorskip("CoolProp.CoolProp").PropsSI
    where = ("T", 323.15, "P", 1e5, "n-Dodecane")
    rho, cp, sound, beta, kappa = (
        props(x, *where)
        for x in ("D", "C", "A", "ISOBARIC_EXPANSION_COEFFICIENT", "ISOTHERMAL_COMPRESSIBILITY")
    )
    ratio = heat_capacity_ratio(
        rho * sound**2, expansion=beta, temperature=323.15, density=rho, heat_capacity=cp
    )
    assert ratio == pytest.approx(rho * sound**2 * kappa, rel=1e-4)


@pytest.mark.outside_value(
    source="n-dodecane, CoolProp (Lemmon and Huber 2004): growth of the isentropic modulus with "
    "pressure and its fall with temperature"
)
def test_slopes_on_a_reference_fluid() -> None:
    props = pytest.importorskip("CoolProp.CoolProp").PropsSI

    def modulus(t: float, p: float) -> float:
        where = ("T", t, "P", p, "n-Dodecane")
        return float(props("D", *where) * props("A", *where) ** 2)

    base = modulus(323.15, 1e5)
    ours = tangent_modulus([350e5, 1e5], [323.15, 333.15], base)
    assert ours[0] == pytest.approx(modulus(323.15, 350e5), rel=0.04)
    assert ours[1] == pytest.approx(modulus(333.15, 1e5), rel=0.04)


@pytest.mark.outside_value(
    source="Dowson and Higginson 1966 against a modulus linear in pressure (isothermal 1.5 GPa)"
)
@pytest.mark.parametrize("bar", [50, 200, 400])
def test_density_under_pressure(bar: float) -> None:
    ours = float(density_under_pressure(860.0, bar * 1e5, 1.5e9)) / 860.0
    assert ours == pytest.approx(float(dowson_higginson_ratio(bar * 1e5)), abs=0.003)


@pytest.mark.outside_value(
    source="n-dodecane, CoolProp (Lemmon and Huber 2004), 323.15 K, 400 bar"
)
def test_density_of_a_reference_fluid() -> None:
    props = pytest.importorskip("CoolProp.CoolProp").PropsSI
    where = ("T", 323.15, "P", 1e5, "n-Dodecane")
    rho, kappa = props("D", *where), props("ISOTHERMAL_COMPRESSIBILITY", *where)
    there = props("D", "T", 323.15, "P", 400e5, "n-Dodecane")
    assert density_under_pressure(rho, 400e5, 1 / kappa) == pytest.approx(there, rel=0.003)


@pytest.mark.outside_value(source="Hayward 1970: the secant grows half as fast as the tangent")
def test_secant() -> None:
    assert secant_from_tangent(1.7e9, 0.0) == pytest.approx(1.7e9)
    grown = (float(secant_from_tangent(1.7e9, 350e5)) - 1.7e9) / 350e5
    assert grown == pytest.approx(5.6, abs=0.4)


@pytest.mark.outside_value(
    source="parallel form by hand: K 1.6 GPa, 0.1, 1 and 5 % air at 1 bar, no dissolution, MPa"
)
@pytest.mark.parametrize(
    ("air", "n", "expected"),
    [
        (0.001, 1.0, (94.1, 1379, 1590, 1597, 1599)),
        (0.001, 1.4, (128.8, 1311, 1578, 1593, 1598)),
        (0.01, 1.0, (9.94, 612, 1503, 1575, 1594)),
        (0.01, 1.4, (13.88, 497, 1403, 1535, 1580)),
        (0.05, 1.0, (2.00, 171, 1198, 1477, 1567)),
        (0.05, 1.4, (2.80, 128, 925, 1310, 1499)),
    ],
)
def test_compression_only(air: float, n: float, expected: tuple[float, ...]) -> None:
    p = np.array([1, 10, 50, 100, 200]) * 1e5
    ours = effective_modulus(p, air, 1.6e9, exponent=n, reference_pressure=BAR) / 1e6
    assert ours == pytest.approx(expected, rel=6e-3)


@pytest.mark.outside_value(source="definition -V dp/dV, by differences of the volumes themselves")
@pytest.mark.parametrize("bar", [1.5, 4.0, 30.0])
def test_forms_obey_the_definition(bar: float) -> None:
    p0, p, a, k, ostwald = 1e5, bar * 1e5, 0.02, 1.6e9, 0.09 * 323.15 / 273.15
    v0 = a / (1 - a)

    def stiffening(x: float) -> float:
        return float((1 + 11 * (x - p0) / k) ** (-1 / 11) + v0 * (p0 / x) ** (1 / 1.4))

    def gradual(x: float) -> float:
        s = (x - p0) / (100e5 - p0)
        return float(
            1 - (x - p) / k + v0 * (p0 / x) ** (1 / 1.4) * (1 - 10 * s**3 + 15 * s**4 - 6 * s**5)
        )

    def equilibrium(x: float) -> float:
        return 1 - (x - p) / k + max(0.0, (v0 + ostwald) * p0 / x - ostwald)

    for form, volume in (
        (Form.STIFFENING, stiffening), (Form.GRADUAL, gradual), (Form.EQUILIBRIUM, equilibrium),
    ):  # fmt: skip
        h = 1e-4 * p
        slope = (volume(p + h) - volume(p - h)) / (2 * h)
        ours = float(effective_modulus(p, a, k, form=form, reference_pressure=BAR))
        assert ours == pytest.approx(-volume(p) / slope, rel=1e-4)


@pytest.mark.outside_value(
    source="Henry's law: 2 % free air is in solution at p0 (1 + v0/L) in saturated oil"
)
def test_equilibrium_is_stiff_once_the_air_is_gone() -> None:
    v0, ostwald = 0.02 / 0.98, 0.09 * 323.15 / 273.15
    gone = 1e5 * (1 + v0 / ostwald)
    soft, stiff = effective_modulus(
        [0.99 * gone, 1.01 * gone], 0.02, 1.6e9, form=Form.EQUILIBRIUM, reference_pressure=BAR
    )
    assert soft < 2e6
    assert stiff == pytest.approx(1.6e9)


@pytest.mark.property
@given(
    p=st.floats(1.02e5, 4e7), a=st.floats(0, 0.2), n=st.floats(1.0, 1.4),
    form=st.sampled_from([Form.COMPRESSION, Form.GRADUAL]),
)  # fmt: skip
def test_air_softens_never_stiffens(p: float, a: float, n: float, form: Form) -> None:
    k = float(effective_modulus(p, a, 1.6e9, form=form, exponent=n))
    # with all gas compressed to nothing the mixture is the liquid
    assert k <= 1.6e9 * (1 + 2 * a)
    assert (
        k
        >= float(effective_modulus(p, min(1.5 * a + 0.01, 0.5), 1.6e9, form=form, exponent=n))
        * 0.999
    )


@pytest.mark.outside_value(source="limit: no air or high pressure gives the liquid's own modulus")
def test_limits() -> None:
    for form in Form:
        assert effective_modulus(2e5, 0.0, 1.6e9, form=form) == pytest.approx(1.6e9, rel=2e-3)
    assert effective_modulus(9e7, 0.01, 1.6e9) == pytest.approx(1.6e9, rel=1e-3)
    low, high = modulus_span(30e5, 0.01, 1.6e9)
    assert low < effective_modulus(30e5, 0.01, 1.6e9, exponent=1.2) < high


@pytest.mark.outside_value(
    source="Brennen, Cavitation and Bubble Dynamics, ch. 6: water with half its volume air at 1 "
    "bar carries sound at about 20 m/s (isothermal), 24 m/s (adiabatic)"
)
def test_sound_in_bubbly_water() -> None:
    water = {"liquid_modulus": 2.2e9, "liquid_density": 1000.0, "gas_density": 1.2}
    assert mixture_sound_speed(1e5, 0.5, exponent=1.0, **water) == pytest.approx(20, abs=0.5)
    assert mixture_sound_speed(1e5, 0.5, exponent=1.4, **water) == pytest.approx(23.7, abs=0.5)
    assert mixture_sound_speed(1e5, 0.0, **water) == pytest.approx(1483, abs=3)


def test_class_values_are_moduli_of_oils() -> None:
    for values in CLASSES.values():
        assert 1.4e9 < float(tangent_modulus(1e5, 323.15, values.bulk_modulus)) < 3.6e9


def test_refusals() -> None:
    nan = float("nan")
    calls: tuple[Callable[[], object], ...] = (
        lambda: effective_modulus(0.5e5, 0.01, 1.6e9),
        lambda: effective_modulus(2e5, 0.7, 1.6e9),
        lambda: effective_modulus(2e5, nan, 1.6e9),
        lambda: effective_modulus(2e5, 0.01, 1.6e9, exponent=2.0),
        lambda: tangent_modulus(2e8, 323.0, 1.6e9),
        lambda: tangent_modulus(1e5, 500.0, 1.6e9),
        lambda: tangent_modulus(1e5, 323.0, nan),
        lambda: hayward_secant_modulus(1e5, 323.0, 1e-6),
        lambda: secant_from_tangent(-1.0, 1e5),
        lambda: density_under_pressure(nan, 1e5, 1.6e9),
        lambda: dowson_higginson_ratio(1e9),
        lambda: mixture_sound_speed(1e5, 1.5, liquid_modulus=1e9, liquid_density=900.0),
        lambda: heat_capacity_ratio(
            1e9, expansion=nan, temperature=300.0, density=1.0, heat_capacity=1.0
        ),
    )
    for bad in calls:
        with pytest.raises(OutOfRangeError):
            bad()
