"""Rayleigh, Blake, ramp geometry."""

import numpy as np
import pytest

from rca.base.errors import OutOfRangeError
from rca.physics.collapse import (
    RAYLEIGH_FACTOR,
    Inertia,
    blake_threshold,
    inertia,
    ramp_time,
    rayleigh_collapse_time,
)


@pytest.mark.outside_value(source="Rayleigh, Phil. Mag. 34 (1917) 94-98: 0.91468 R sqrt(rho/dp)")
def test_collapse_time():
    assert rayleigh_collapse_time(1e-3, 1e5, 860.0) == pytest.approx(84.82e-6, rel=1e-3)


@pytest.mark.outside_value(source="closed form sqrt(pi/6) Gamma(5/6)/Gamma(4/3), SciPy's gamma")
def test_rayleigh_factor():
    from scipy.special import gamma

    exact = np.sqrt(np.pi / 6) * gamma(5 / 6) / gamma(4 / 3)
    assert pytest.approx(exact, rel=2e-6) == RAYLEIGH_FACTOR


@pytest.mark.outside_value(
    source="Blake 1949; Brennen 1995 ch. 2: at 2 sigma/R = 0.6 p0 the values are exact by hand"
)
def test_blake():
    pressure, radius = blake_threshold(1e-6, surface_tension=0.03, pressure=1e5)
    # 2 sigma/R = 6e4 Pa, p_g = 1.6e5 Pa: p = -(2/3) 6e4 sqrt(6e4/4.8e5) = -14142 Pa = -1e5 sqrt(2)/10
    assert pressure == pytest.approx(-1e5 * np.sqrt(2) / 10, rel=1e-3)
    assert radius == pytest.approx(2.828e-6, rel=1e-3)


@pytest.mark.outside_value(
    source="static equilibrium at the critical radius is an extremum of the liquid pressure (identity)"
)
def test_blake_is_the_minimum_of_the_equilibrium_curve():
    r0, sigma, p0 = 5e-6, 0.03, 1e5
    gas = p0 + 2 * sigma / r0
    radius = np.geomspace(1.5 * r0, 20 * r0, 200001)
    liquid = gas * (r0 / radius) ** 3 - 2 * sigma / radius
    pressure, critical = blake_threshold(r0, surface_tension=sigma, pressure=p0)
    assert pressure == pytest.approx(liquid.min(), rel=1e-6)
    assert critical == pytest.approx(radius[np.argmin(liquid)], rel=1e-3)


@pytest.mark.outside_value(source="geometry: 10 degrees at 1500 rpm last 10/(6 1500) s")
def test_ramp_time():
    assert ramp_time(np.radians(10), 25.0) == pytest.approx(1.1111e-3, rel=1e-4)
    assert ramp_time(np.radians(10), 50.0) == pytest.approx(0.5556e-3, rel=1e-4)


@pytest.mark.parametrize(("ratio", "kind"), [(20.0, Inertia.QUASI_STATIC), (6.0, Inertia.BETWEEN), (1.0, Inertia.INERTIAL)])  # fmt: skip
def test_inertia_bands(ratio, kind):
    assert inertia(ratio * 1e-5, 1e-5) is kind


@pytest.mark.parametrize("call", [
    lambda: rayleigh_collapse_time(float("nan"), 1e5, 860.0),
    lambda: blake_threshold(1e-6, surface_tension=0.0, pressure=1e5),
    lambda: ramp_time(0.0, 25.0), lambda: inertia(0.0, 1.0),
], ids=[f"refusal {i}" for i in range(4)])  # fmt: skip
def test_refusals(call):
    with pytest.raises(OutOfRangeError):
        call()
