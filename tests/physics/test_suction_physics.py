"""The physics of the suction side against standards, handbook forms and reference libraries."""

import fluids
import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from rca.base.errors import OutOfRangeError
from rca.physics.atmosphere import standard_atmosphere
from rca.physics.dissolved_air import (
    carried_over_diameter,
    henry_coefficient,
    ostwald_d2779,
    oxygen_share_dissolved,
    released_ratio,
    released_share_in_time,
    stokes_rise,
    void_fraction,
)
from rca.physics.fluid_class import CLASSES, class_values, density
from rca.physics.line_losses import (
    breather_loss,
    darcy_friction,
    entry_loss,
    fitting_coefficient,
    pipe_loss,
    reducer_coefficient,
    strainer_loss,
)
from rca.physics.viscosity import grade_viscosities, kinematic_viscosity, walther_constants


@pytest.mark.outside_value(source="ISO 2533:1975, standard atmosphere by geopotential height")
@pytest.mark.parametrize(
    ("height", "pressure"),
    [
        (0, 101325.0),
        (500, 95460.8),
        (1000, 89874.6),
        (2000, 79495.2),
        (3000, 70108.5),
        (5000, 54019.9),
    ],
)
def test_atmosphere_is_the_standard_one(height: float, pressure: float) -> None:
    assert standard_atmosphere(height) == pytest.approx(pressure, abs=1.0)


def test_atmosphere_refuses_what_it_does_not_cover() -> None:
    for height in (12000.0, -600.0, float("nan")):
        with pytest.raises(OutOfRangeError, match="ISO 2533"):
            standard_atmosphere(height)


@pytest.mark.outside_value(
    source="table of a public implementation of ASTM D341 and D2270 (viscosities at 40, 100 and "
    "60 degC); it uses other constants, so the tolerance is 1 %"
)
@pytest.mark.parametrize(
    ("nu_40", "nu_100", "nu_60"),
    [
        (70, 11.1, 32.920),
        (120, 20.9, 59.514),
        (68, 8.6, 28.646),
        (30, 4.24, 13.106),
    ],
)
def test_viscosity_at_60_degrees(nu_40: float, nu_100: float, nu_60: float) -> None:
    nu = kinematic_viscosity(333.15, nu_40 * 1e-6, nu_100 * 1e-6)
    assert float(nu) * 1e6 == pytest.approx(nu_60, rel=0.011)


@pytest.mark.outside_value(source="ASTM D341: hand calculation of A and B for 46 and 6.8 mm2/s")
def test_walther_constants_by_hand() -> None:
    a, b = walther_constants(46e-6, 313.15, 6.8e-6, 373.15)
    assert (a, b) == (pytest.approx(9.41799, abs=2e-4), pytest.approx(3.68444, abs=1e-4))
    assert kinematic_viscosity(273.15, 46e-6, 6.8e-6) * 1e6 == pytest.approx(577.3, rel=2e-3)


@pytest.mark.outside_value(source="ASTM D341-03: the two low-range forms invert each other")
def test_viscosity_returns_its_anchors_below_two() -> None:
    assert kinematic_viscosity(373.15, 5e-6, 1.0e-6) * 1e6 == pytest.approx(1.0, abs=3e-4)


@pytest.mark.outside_value(source="ISO 3448:1992, grade 46: 41.4 to 50.6 mm2/s at 40 degC")
def test_grade_mid_point_lies_in_its_band() -> None:
    nu_40, nu_100 = grade_viscosities(46)
    assert 41.4e-6 <= nu_40 <= 50.6e-6
    assert nu_100 < nu_40


@pytest.mark.outside_value(source="fluids library, Colebrook and Churchill; its documented values")
@pytest.mark.parametrize(("re", "rough"), [(1e4, 1e-3), (1e5, 1e-4), (1e6, 1e-5), (4000, 0.0)])
def test_friction_agrees_with_the_reference_library(re: float, rough: float) -> None:
    assert darcy_friction(re, rough) == pytest.approx(
        fluids.friction.Churchill_1977(re, rough), rel=1e-6
    )
    assert darcy_friction(re, rough) == pytest.approx(
        fluids.friction.Colebrook(re, rough), rel=0.03
    )


@pytest.mark.outside_value(source="Hagen and Poiseuille, exact: 64/Re")
def test_friction_is_laminar_where_the_flow_is() -> None:
    assert darcy_friction(500.0, 0.001) == pytest.approx(0.128)


@pytest.mark.property
@given(re=st.floats(1.0, 2000.0), rough=st.floats(0.0, 0.05))
def test_roughness_does_not_matter_in_laminar_flow(re: float, rough: float) -> None:
    assert darcy_friction(re, rough) == pytest.approx(64.0 / re)


@pytest.mark.outside_value(source="Hagen and Poiseuille: 128 mu L Q / (pi D^4)")
@pytest.mark.parametrize("nu", [46e-6, 577.3e-6])
def test_pipe_loss_by_hand(nu: float) -> None:
    flow, bore, length, rho = 100 / 60e3, 0.05, 2.0, 870.0
    exact = 128 * nu * rho * length * flow / (np.pi * bore**4)
    loss = pipe_loss(np.array(flow), bore, length, 5e-5, np.array(nu), rho)
    assert loss == pytest.approx(exact, rel=1e-9)


@pytest.mark.outside_value(source="fluids library, Hooper's two-coefficient fittings (1981)")
@pytest.mark.parametrize("re", [73.5, 1e3, 1e5])
def test_fittings_agree_with_the_reference_library(re: float) -> None:
    ours = fitting_coefficient("check valve", np.array(re), 0.0508)
    theirs = fluids.fittings.Hooper2K(Di=2.0, Re=re, K1=1500, Kinfty=1.5)
    assert ours == pytest.approx(theirs, rel=1e-6)


def test_an_elbow_at_a_cold_start_is_not_its_handbook_value() -> None:
    cold = float(fitting_coefficient("short-radius bend", np.array(73.5), 0.0508))
    warm = float(fitting_coefficient("short-radius bend", np.array(1e5), 0.0508))
    assert cold > 20 * warm


def test_an_unknown_fitting_is_refused() -> None:
    with pytest.raises(OutOfRangeError, match="loss_coefficient"):
        fitting_coefficient("elbow of my own", np.array(100.0), 0.05)


@pytest.mark.outside_value(source="Borda and Carnot, exact for a sudden widening")
def test_reducer_widening() -> None:
    k = reducer_coefficient(np.array(1e9), 0.05, 0.10)
    assert k == pytest.approx((1 - 0.25) ** 2, rel=1e-5)


@pytest.mark.outside_value(source="creeping flow: loss in proportion to flow and viscosity, exact")
def test_strainer_scales_with_flow_and_viscosity() -> None:
    kw = {"rated_flow": 1e-3, "rated_loss": 3e3, "rated_nu": 30e-6}
    loss = strainer_loss(np.array(2e-3), np.array(90e-6), **kw)
    assert loss == pytest.approx(6 * 3e3)
    assert strainer_loss(np.array(1e-3), np.array(30e-6), open_share=0.5, **kw) > 5 * 3e3


def test_breather_and_entry_are_zero_without_flow() -> None:
    assert breather_loss(np.array(-1.0), rated_flow=1.0, rated_loss=1.0) == 0.0
    assert entry_loss(np.array(0.0), 0.05, 1.0, np.array(46e-6), 870.0) == 0.0


@pytest.mark.outside_value(source="definition of the Bunsen coefficient; CODATA gas constant")
def test_henry_from_bunsen() -> None:
    assert henry_coefficient(0.09) == pytest.approx(3.963e-5, rel=1e-3)


@pytest.mark.outside_value(source="ASTM D2779-92(2020): at 273 K and 850 kg/m3 it returns Lo")
def test_ostwald_identity() -> None:
    assert ostwald_d2779(273.0, 850.0) == pytest.approx(0.098, rel=5e-3)


@pytest.mark.outside_value(
    source="ASTM D3612 Ostwald coefficients, air mixed: 0.115 (from memory)"
)
def test_ostwald_agrees_with_insulating_oil() -> None:
    assert ostwald_d2779(298.15, 855.0) == pytest.approx(0.115, rel=0.06)


def test_ostwald_refuses_esters() -> None:
    with pytest.raises(OutOfRangeError, match="630 to 900"):
        ostwald_d2779(313.0, 920.0)


@pytest.mark.outside_value(source="ASTM D2779 constants mixed by hand: 35.0 % oxygen at 298 K")
def test_released_air_is_rich_in_oxygen() -> None:
    assert oxygen_share_dissolved(298.15) == pytest.approx(0.350, abs=0.01)


@pytest.mark.outside_value(source="Henry and Bunsen by hand: 0.09, 0.6 bar, 50 degC -> 0.0733")
def test_released_ratio_by_hand() -> None:
    v = released_ratio(0.6e5, bunsen=0.09, temperature=323.15)
    assert v == pytest.approx(0.0733, rel=5e-3)
    assert void_fraction(v) == pytest.approx(0.0683, rel=5e-3)


@pytest.mark.property
@given(p=st.floats(1e3, 2e5), more=st.floats(1.0, 1e5))
def test_less_air_comes_out_at_more_pressure(p: float, more: float) -> None:
    kw = {"bunsen": 0.09, "temperature": 323.15}
    assert released_ratio(p + more, **kw) <= released_ratio(p, **kw)
    assert released_ratio(101325.0 + more, **kw) == 0.0


@pytest.mark.outside_value(source="first-order release: 1 - 1/e after one time constant, exact")
def test_release_in_time() -> None:
    assert released_share_in_time(2.0, 2.0) == pytest.approx(1 - np.exp(-1))


@pytest.mark.outside_value(source="Stokes 1851 by hand: 0.2 mm in 46 mm2/s rises 0.474 mm/s")
def test_bubbles_rise_as_stokes_says() -> None:
    assert stokes_rise(0.2e-3, 46e-6) == pytest.approx(0.4738e-3, rel=1e-3)
    d = carried_over_diameter(0.4, 150.0, 46e-6)
    assert stokes_rise(d, 46e-6) == pytest.approx(0.4 / 150.0)


@pytest.mark.outside_value(
    source="Backe, Grundlagen der Oelhydraulik, 1974: mineral oil 8-10 vol %"
)
def test_class_values_are_in_the_published_range() -> None:
    assert 0.08 <= class_values("mineral").bunsen <= 0.10
    assert 0.08 <= class_values("phosphate ester").bunsen <= 0.09
    assert not class_values("water glycol").flammable_vapour
    assert len(CLASSES) == 5


@pytest.mark.outside_value(source="definition of the coefficient of cubic expansion")
def test_density_falls_with_temperature() -> None:
    assert density(288.15, 872.0, 7e-4) == 872.0
    assert density(338.15, 872.0, 7e-4) == pytest.approx(872 / 1.035)
