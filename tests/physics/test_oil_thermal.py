"""Heat, surface and vapour of oils against other forms, reference fluids and hand calculation."""

from collections.abc import Callable

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from rca.base.errors import OutOfRangeError
from rca.physics.oil_thermal import (
    isentropic_heating,
    petroleum_conductivity,
    petroleum_heat_capacity,
    petroleum_latent_heat,
    surface_tension,
    throttling_heating,
)
from rca.physics.vapour import (
    LEAN_SHARE,
    class_vapour_pressure,
    dense_gas_enhancement,
    stoichiometric_drop_ratio,
    stoichiometric_fraction,
    vapour_equivalence,
    vapour_pressure_from_flash,
    water_vapour_pressure,
)

BTU_PER_LB_F = 4186.8  # [J/(kg K)]
BTU_IN = 0.1442279  # Btu in/(h ft2 degF) [W/(m K)]


@pytest.mark.outside_value(
    source="Cragoe, NBS Misc. Publ. 97 (1929), the same tables in British units: c = (0.388 + "
    "0.00045 tF)/sqrt(d), k = 0.813 (1 - 0.0003 (tF - 32))/d"
)
@pytest.mark.parametrize("celsius", [0.0, 50.0, 120.0])
@pytest.mark.parametrize("density", [780.0, 870.0, 950.0])
def test_cragoe_in_british_units(celsius: float, density: float) -> None:
    fahrenheit, d = 1.8 * celsius + 32, density / 999.0
    c = (0.388 + 0.00045 * fahrenheit) / np.sqrt(d) * BTU_PER_LB_F
    k = 0.813 * (1 - 0.0003 * (fahrenheit - 32)) / d * BTU_IN
    assert petroleum_heat_capacity(celsius + 273.15, density) == pytest.approx(c, rel=2e-3)
    assert petroleum_conductivity(celsius + 273.15, density) == pytest.approx(k, rel=2e-3)


@pytest.mark.outside_value(
    source="Cragoe by hand for a relative density of 0.87 at 50 degC: 1.989 kJ/(kg K), 0.131 "
    "W/(m K), 267 kJ/kg"
)
def test_cragoe_by_hand() -> None:
    rho = 0.87 * 999.0
    assert petroleum_heat_capacity(323.15, rho) == pytest.approx(1989.0, abs=3.0)
    assert petroleum_conductivity(323.15, rho) == pytest.approx(0.131, abs=5e-4)
    assert petroleum_latent_heat(323.15, rho) == pytest.approx(267e3, rel=5e-3)


@pytest.mark.outside_value(
    source="n-dodecane, CoolProp (Lemmon and Huber 2004; Huber et al. 2004)"
)
def test_cragoe_against_a_reference_fluid() -> None:
    props = pytest.importorskip("CoolProp.CoolProp").PropsSI
    where = ("T", 323.15, "P", 1e5, "n-Dodecane")
    rho_15 = props("D", "T", 288.71, "P", 1e5, "n-Dodecane")
    assert petroleum_heat_capacity(323.15, rho_15) == pytest.approx(props("C", *where), rel=0.07)
    assert petroleum_conductivity(323.15, rho_15) == pytest.approx(props("L", *where), rel=0.18)


@pytest.mark.outside_value(
    source="by hand, 200 bar at 50 degC, beta 7.5e-4, rho 860, cp 1950: 2.9 K isentropic, 9.0 K "
    "throttled, 11.9 K by dp/(rho cp)"
)
def test_heating() -> None:
    state = {"temperature": 323.15, "expansion": 7.5e-4, "density": 860.0, "heat_capacity": 1950.0}
    pressed, throttled = isentropic_heating(200e5, **state), throttling_heating(200e5, **state)
    assert pressed == pytest.approx(2.88, abs=0.02)
    assert throttled == pytest.approx(9.0, abs=0.06)
    assert pressed + throttled == pytest.approx(11.93, abs=0.02)


@pytest.mark.outside_value(
    source="n-hexadecane 27.5 mN/m at 20 degC, 25.0 at 50 degC (Jasper, J. Phys. Chem. Ref. Data 1 "
    "(1972) 841, from memory)"
)
def test_surface_tension() -> None:
    assert surface_tension(323.15, 27.5e-3) == pytest.approx(25.0e-3, rel=0.03)


@pytest.mark.outside_value(source="stoichiometry: n-heptane 1.87 %, n-dodecane 1.12 %, C20 0.68 %")
@pytest.mark.parametrize(("n", "share"), [(7, 0.0187), (12, 0.0112), (16, 0.0085), (20, 0.0068)])
def test_stoichiometric_fraction(n: int, share: float) -> None:
    assert stoichiometric_fraction(n) == pytest.approx(share, rel=0.01)


def _alkane(cas: str, temperature: float) -> float:
    """Vapour pressure by the Perry 8th ed. correlation of the chemicals library."""
    from chemicals import vapor_pressure
    from chemicals.dippr import EQ101

    row = vapor_pressure.Psat_data_Perrys2_8.loc[cas]
    value = EQ101(temperature, *(row[f"C{i}"] for i in range(1, 6)))  # type: ignore[no-untyped-call]
    return float(value)


@pytest.mark.outside_value(
    source="n-alkanes: flash points and Perry 8th ed. vapour pressures of the chemicals library; "
    "lean limit 0.55 of stoichiometric"
)
@pytest.mark.parametrize(
    ("cas", "n", "flash"),
    [
        ("111-65-9", 8, 286.15), ("124-18-5", 10, 319.15), ("112-40-3", 12, 347.15),
        ("629-59-4", 14, 380.65), ("544-76-3", 16, 399.75),
    ],
)  # fmt: skip
def test_the_flash_point_anchor_on_pure_alkanes(cas: str, n: int, flash: float) -> None:
    lean = LEAN_SHARE * float(stoichiometric_fraction(n))
    flash = max(flash, 300.0)
    if n > 8:
        anchor = float(vapour_pressure_from_flash(flash, flash, lean_limit=lean))
        assert 0.5 < _alkane(cas, flash) / anchor < 2.0
    # 80 K below, heat of vaporisation 4.6 kJ/mol per carbon atom and 5 more
    cold = max(flash - 60.0, 270.0)
    away = vapour_pressure_from_flash(
        cold, flash, lean_limit=lean, vaporisation=5e3 + 4.6e3 * n
    ) / (lean * 101325.0)
    true = _alkane(cas, cold) / _alkane(cas, flash)
    assert 0.5 < float(away) / true < 2.0


@pytest.mark.outside_value(
    source="Clausius-Clapeyron by hand: flash point 215 degC, 100 kJ/mol give 9e-4 Pa at 50 degC; "
    "C22-C25 alkanes by Landolt-Boernstein lie there"
)
def test_mineral_oil_at_fifty_degrees() -> None:
    low, middle, high = class_vapour_pressure("mineral", 323.15)
    assert middle == pytest.approx(9e-4, rel=0.25)  # given to one digit
    assert low < 2e-4  # flash point 230 degC
    assert high > 4e-3  # 200 degC
    narrow = class_vapour_pressure("mineral", 323.15, flash_point=488.0)
    assert narrow[2] / narrow[0] < high / low


@pytest.mark.outside_value(source="IAPWS water as in CoolProp; 12.35 kPa at 50 degC")
def test_water() -> None:
    props = pytest.importorskip("CoolProp.CoolProp").PropsSI
    for t in (293.15, 323.15, 363.15):
        assert water_vapour_pressure(t) == pytest.approx(
            props("P", "T", t, "Q", 0, "Water"), rel=3e-3
        )
    low, middle, high = class_vapour_pressure("water glycol", 323.15)
    assert 8.5e3 < low < middle < high < 11.5e3


@pytest.mark.outside_value(source="Poynting by hand: V 4e-4 m3/mol, 172 bar, 400 K: about 8")
def test_enhancement() -> None:
    assert dense_gas_enhancement(172e5, 400.0) == pytest.approx(7.9, abs=0.2)


@pytest.mark.outside_value(
    source="n-eicosane at 50 degC, 0.047 Pa, in air at 1 bar: phi 7e-5, five decades too lean"
)
def test_vapour_is_far_too_lean() -> None:
    lean = LEAN_SHARE * float(stoichiometric_fraction(20))
    phi = vapour_equivalence(_alkane("112-95-8", 323.15), 1e5, lean_limit=lean)
    assert phi == pytest.approx(7e-5, rel=0.05)


@pytest.mark.outside_value(
    source="drop over bubble diameter for stoichiometry by hand: 72 g of fuel per m3 of air at 1 "
    "bar and 50 degC; 0.0438"
)
def test_one_drop_is_fuel_enough() -> None:
    assert stoichiometric_drop_ratio(1e5, 323.15) == pytest.approx(0.0438, rel=3e-3)


@pytest.mark.property
@given(t=st.floats(273, 373), more=st.floats(1, 100), flash=st.floats(420, 600))
def test_vapour_rises_with_temperature_and_falls_with_flash_point(
    t: float, more: float, flash: float
) -> None:
    here = vapour_pressure_from_flash(t, flash)
    assert vapour_pressure_from_flash(t + more, flash) > here
    assert vapour_pressure_from_flash(t, flash + 20) < here


def test_refusals() -> None:
    nan = float("nan")
    state = {"temperature": 323.0, "expansion": 7e-4, "density": 860.0, "heat_capacity": nan}
    calls: tuple[Callable[[], object], ...] = (
        lambda: petroleum_heat_capacity(700.0, 870.0),
        lambda: petroleum_conductivity(323.0, 1130.0),
        lambda: petroleum_latent_heat(nan, 870.0),
        lambda: surface_tension(323.0, 3.0),
        lambda: isentropic_heating(1e7, **state),
        lambda: throttling_heating(-1.0, **{**state, "heat_capacity": 2000.0}),
        lambda: stoichiometric_fraction(0),
        lambda: vapour_pressure_from_flash(323.0, 200.0),
        lambda: vapour_pressure_from_flash(nan, 488.0),
        lambda: class_vapour_pressure("olive oil", 323.0),
        lambda: water_vapour_pressure(400.0),
        lambda: dense_gas_enhancement(2e8, 400.0),
        lambda: vapour_equivalence(0.0, 1e5),
        lambda: stoichiometric_drop_ratio(-1e5, 323.0),
    )
    for bad in calls:
        with pytest.raises(OutOfRangeError):
            bad()


def test_spread_of_the_vapour_pressure_grows_away_from_the_flash_point() -> None:
    def width(t: float, flash: float) -> float:
        low, _, high = class_vapour_pressure("mineral", t, flash_point=flash)
        return float(high / low)

    assert width(323.15, 488.15) > width(423.15, 488.15) > width(488.0, 488.15) > 1.0
    for flash in (300.0, 323.15, 350.0):  # diluted with fuel
        assert width(323.15, flash) > 1.0
