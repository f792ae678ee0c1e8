"""Viscosity index and pressure-viscosity against the standard's examples and tables."""

import numpy as np
import pytest
from chemicals import viscosity as reference
from hypothesis import given
from hypothesis import strategies as st

from rca.base.errors import OutOfRangeError
from rca.physics.pressure_viscosity import (
    MEASURED,
    barus_factor,
    roelands_exponent,
    roelands_factor,
    so_klaus_coefficient,
    wooster_coefficient,
)
from rca.physics.viscosity import kinematic_viscosity
from rca.physics.viscosity_index import (
    reference_viscosities,
    viscosity_at_100,
    viscosity_index,
)


@pytest.mark.outside_value(source="ASTM D2270, worked examples of Procedures A and B")
@pytest.mark.parametrize(
    ("nu_40", "nu_100", "index"),
    [(73.30, 8.86, 92), (22.83, 5.05, 156), (53.47, 7.80, 111)],
)
def test_examples_of_the_standard(nu_40: float, nu_100: float, index: int) -> None:
    assert round(float(viscosity_index(nu_40 * 1e-6, nu_100 * 1e-6))) == index


@pytest.mark.outside_value(
    source="viscosity indices at 40/100 degC of a public implementation of ASTM D2270"
)
@pytest.mark.parametrize(
    ("nu_40", "nu_100", "index"),
    [(70, 11.1, 150), (120, 20.9, 200), (68, 8.6, 96), (30, 4.24, -25)],
)
def test_other_oils(nu_40: float, nu_100: float, index: int) -> None:
    found = float(viscosity_index(nu_40 * 1e-6, nu_100 * 1e-6))
    assert found == pytest.approx(index, abs=1.0)


@pytest.mark.outside_value(source="ASTM D2270 Table 1 as in the chemicals library, all entries")
def test_reference_oils_of_table_1() -> None:
    low, high = reference_viscosities(np.array(reference.VI_nus) * 1e-6)
    assert np.max(np.abs(low * 1e6 / np.array(reference.VI_Ls) - 1)) < 1.5e-3
    assert np.max(np.abs(high * 1e6 / np.array(reference.VI_Hs) - 1)) < 1.5e-3


@pytest.mark.outside_value(source="chemicals.viscosity.viscosity_index over a grid of oils")
def test_grid_against_the_reference_library() -> None:
    for nu_100 in (2.5, 4.1, 5.4, 6.8, 8.7, 11.2, 14.7, 30.0, 65.0, 90.0):
        for ratio in (3.5, 5.0, 6.5, 8.0):
            ours = float(viscosity_index(ratio * nu_100 * 1e-6, nu_100 * 1e-6))
            theirs = reference.viscosity_index(ratio * nu_100 * 1e-6, nu_100 * 1e-6) or 0.0
            assert ours == pytest.approx(theirs, abs=max(0.7, 0.006 * abs(theirs)))


@pytest.mark.property
@given(nu_40=st.floats(15e-6, 400e-6), index=st.floats(20, 180))
def test_inverse(nu_40: float, index: float) -> None:
    assert viscosity_index(nu_40, viscosity_at_100(nu_40, index)) == pytest.approx(index, abs=0.5)


def test_index_refuses() -> None:
    for bad in ((10e-6, 1.9e-6), (5e-6, 6e-6), (46e-6, float("nan"))):
        with pytest.raises(OutOfRangeError):
            viscosity_index(*bad)
    with pytest.raises(OutOfRangeError, match="no oil"):
        viscosity_at_100(46e-6, 5000.0)


@pytest.mark.outside_value(source="Barus' law by hand, 200 bar and 350 bar")
@pytest.mark.parametrize(
    ("alpha", "at_200", "at_350"),
    [(15e-9, 1.350, 1.690), (20e-9, 1.492, 2.014), (25e-9, 1.649, 2.399)],
)
def test_barus(alpha: float, at_200: float, at_350: float) -> None:
    factor = barus_factor([200e5, 350e5], alpha)
    assert factor == pytest.approx([at_200, at_350], abs=1e-3)


@pytest.mark.outside_value(source="Roelands' law by hand, mu0 0.04 Pa s, Z 0.6, 200 and 350 bar")
def test_roelands() -> None:
    factor = roelands_factor([200e5, 350e5], 0.04, z=0.6)
    assert factor == pytest.approx([1.473, 1.951], abs=3e-3)


@pytest.mark.outside_value(source="identity: both laws have the slope alpha at zero pressure")
def test_both_laws_start_alike() -> None:
    z = roelands_exponent(20e-9, 0.04)
    assert roelands_factor(1e5, 0.04, z=z) == pytest.approx(
        float(barus_factor(1e5, 20e-9)), rel=1e-5
    )


@pytest.mark.outside_value(
    source="Stachowiak and Batchelor, Engineering Tribology, table 2.3: measured coefficients and "
    "viscosities (viscosities from memory)"
)
@pytest.mark.parametrize(
    ("oil", "viscosities"),
    [
        ("spindle oil", (18.6e-3, 6.3e-3, 2.4e-3)),
        ("light machine oil", (45e-3, 12e-3, 3.9e-3)),
        ("medicinal white oil", (107e-3, 23.3e-3, 6.4e-3)),
        ("heavy machine oil", (153e-3, 34e-3, 9.1e-3)),
    ],
)
def test_estimates_against_measured(oil: str, viscosities: tuple[float, ...]) -> None:
    assert wooster_coefficient(viscosities) == pytest.approx(MEASURED[oil], rel=0.32)


@pytest.mark.outside_value(
    source="Stachowiak and Batchelor, table 2.3: hydraulic grades of mineral oil 20-28 GPa^-1 near "
    "40 degC, 13-18 near 100 degC"
)
def test_so_and_klaus_for_a_hydraulic_oil() -> None:
    nu = kinematic_viscosity(np.array([313.15, 373.15]), 46e-6, 6.8e-6)
    alpha = so_klaus_coefficient(nu, [860.0, 822.0], 3.684)
    assert 20e-9 < alpha[0] < 28e-9
    assert 12e-9 < alpha[1] < 18e-9


def test_pressure_viscosity_refuses() -> None:
    with pytest.raises(OutOfRangeError):
        barus_factor(0.2e9, 20e-9)
    with pytest.raises(OutOfRangeError):
        barus_factor(float("nan"), 20e-9)
    with pytest.raises(OutOfRangeError):
        roelands_factor(1e7, 1e-5)
    with pytest.raises(OutOfRangeError):
        wooster_coefficient(5.0)
    with pytest.raises(OutOfRangeError):
        so_klaus_coefficient(46e-6, 86.0, 3.7)
    with pytest.raises(OutOfRangeError):
        roelands_exponent(-1.0, 0.03)
