"""Small bubbles in oil: exact forms by hand, definitions, a diffusion equation solved outright."""

from collections.abc import Callable

import numpy as np
import pytest
from scipy.integrate import solve_ivp

from rca.base.errors import OutOfRangeError
from rca.physics.bubbles_in_oil import (
    carried_air_after_dwell,
    clean_rise,
    diffusive_release_time,
    dissolution_time,
    dissolved_air_mass,
    nucleus_radius,
    ostwald_from_bunsen,
    release_time_at,
)
from rca.physics.dissolved_air import (
    henry_coefficient,
    ostwald_d2779,
    oxygen_share_dissolved,
    released_ratio,
    stokes_rise,
)


@pytest.mark.outside_value(
    source="Stokes and Hadamard-Rybczynski by hand, d 0.05 to 1 mm, nu 46 and 30 mm2/s, mm/s"
)
@pytest.mark.parametrize(
    ("mm", "nu", "rigid", "clean"),
    [
        (0.05, 46, 0.030, 0.044), (0.1, 46, 0.118, 0.178), (0.2, 46, 0.4738, 0.7106),
        (0.5, 46, 2.96, 4.44), (1.0, 46, 11.8, 17.8), (0.2, 30, 0.726, 1.090),
        (0.5, 30, 4.54, 6.81),
    ],
)  # fmt: skip
def test_rise(mm: float, nu: float, rigid: float, clean: float) -> None:
    assert 1e3 * stokes_rise(mm * 1e-3, nu * 1e-6) == pytest.approx(rigid, rel=0.02)
    assert 1e3 * clean_rise(mm * 1e-3, nu * 1e-6) == pytest.approx(clean, rel=0.02)


@pytest.mark.outside_value(
    source="Epstein and Plesset limit by hand, D 5e-10 m2/s, L 0.1: 0.72, 8.1, 25 and 100 s"
)
def test_dissolution() -> None:
    times = dissolution_time([8.5e-6, 28.5e-6, 50e-6, 100e-6], diffusivity=5e-10, ostwald=0.1)
    assert times == pytest.approx([0.72, 8.1, 25, 100], rel=0.01)


@pytest.mark.outside_value(
    source="Epstein and Plesset 1950, eq. with the history term, solved by SciPy: the limit is the "
    "leading order for small L"
)
def test_dissolution_against_the_whole_equation() -> None:
    r0, d, ostwald = 50e-6, 5e-10, 0.01

    def rate(t: float, y: list[float]) -> list[float]:
        return [-d * ostwald * (1 / y[0] + 1 / np.sqrt(np.pi * d * t))]

    def gone(_: float, y: list[float]) -> float:
        return y[0] - 0.05 * r0

    gone.terminal = True  # type: ignore[attr-defined]
    found = solve_ivp(rate, (1e-3, 1e4), [r0], events=gone, rtol=1e-8, atol=1e-12)
    limit = float(dissolution_time(r0, diffusivity=d, ostwald=ostwald))
    assert found.t[-1] == pytest.approx(limit, rel=0.2)
    assert found.t[-1] < limit


@pytest.mark.outside_value(source="1/(4 pi R D N) by hand: 1 % of 50 um 167 s; 0.1 % of 5 um 17 s")
def test_release_by_diffusion() -> None:
    times = diffusive_release_time([50e-6, 5e-6], [0.01, 0.001], diffusivity=5e-10)
    assert times == pytest.approx([167, 16.7], rel=0.01)


@pytest.mark.outside_value(source="2 sigma/dp by hand: 6, 3, 1.5 and 0.75 um")
def test_nuclei() -> None:
    radii = nucleus_radius(0.03, 1e5, [0.9e5, 0.8e5, 0.6e5, 0.2e5]) * 1e6
    assert radii == pytest.approx([6.0, 3.0, 1.5, 0.75])
    assert np.isinf(nucleus_radius(0.03, 1e5, 1e5))


@pytest.mark.outside_value(
    source="definitions by hand: Bunsen 0.09 is 3.963e-5 mol/(m3 Pa), 0.1163 kg/m3 at 1 atm, "
    "Ostwald 0.1065 at 50 degC"
)
def test_definitions() -> None:
    assert henry_coefficient(0.09) == pytest.approx(3.963e-5, rel=1e-3)
    assert dissolved_air_mass(0.09, 101325.0) == pytest.approx(0.1163, rel=1e-3)
    assert ostwald_from_bunsen(0.09, 323.15) == pytest.approx(0.1065, abs=1e-4)


@pytest.mark.outside_value(
    source="released volume by hand, saturated at 1.01325 bar, 50 degC, Bunsen 0.09 and 0.07"
)
@pytest.mark.parametrize(
    ("bar", "at_9", "at_7"),
    [
        (0.9, 0.0134, 0.0104), (0.8, 0.0284, 0.0221), (0.7, 0.0476, 0.0371),
        (0.6, 0.0733, 0.0570), (0.5, 0.1093, 0.0850), (0.3, 0.253, 0.197), (0.1, 0.972, 0.756),
    ],
)  # fmt: skip
def test_released_volume(bar: float, at_9: float, at_7: float) -> None:
    for bunsen, expected in ((0.09, at_9), (0.07, at_7)):
        ours = released_ratio(bar * 1e5, bunsen=bunsen, temperature=323.15)
        assert ours == pytest.approx(expected, rel=6e-3)


@pytest.mark.outside_value(
    source="ASTM D2779 by hand, air at 850 and 870 kg/m3; ASTM D3612 table (insulating oil, 25 "
    "degC): air mix 0.115; oxygen share 0.33-0.35"
)
def test_solubility() -> None:
    for celsius, raw, corrected in (
        (0, 0.0981, 0.0831), (25, 0.1144, 0.0969), (50, 0.1303, 0.1104), (100, 0.1604, 0.1358),
    ):  # fmt: skip
        t = celsius + 273.15
        assert ostwald_d2779(t, 850.0) == pytest.approx(raw * 7.70 * 0.130, rel=3e-3)
        assert ostwald_d2779(t, 870.0) == pytest.approx(corrected, rel=3e-3)
    assert ostwald_d2779(298.15, 855.0) == pytest.approx(0.115, rel=0.06)
    share = oxygen_share_dissolved()
    assert share == pytest.approx(0.350, abs=0.01)
    d3612 = 0.2095 * 0.179 / (0.2095 * 0.179 + 0.7905 * 0.0968)
    assert share == pytest.approx(d3612, abs=0.03)


@pytest.mark.outside_value(source="ASTM D3427: at the air release time the air is down to 0.2 %")
def test_air_release_time_ends_at_a_fifth_of_a_per_cent() -> None:
    assert carried_air_after_dwell(0.10, 600.0, 600.0) == pytest.approx(0.002)
    assert carried_air_after_dwell(0.10, 60.0, 600.0) > 0.05


@pytest.mark.outside_value(
    source="Stokes: the same depth takes twice as long at twice the viscosity"
)
def test_release_time_follows_viscosity() -> None:
    assert release_time_at(300.0, 60e-6, 30e-6) == pytest.approx(600.0)


def test_refusals() -> None:
    nan = float("nan")
    calls: tuple[Callable[[], object], ...] = (
        lambda: clean_rise(5e-3, 30e-6),
        lambda: clean_rise(nan, 30e-6),
        lambda: dissolution_time(1e-4, diffusivity=5e-10, ostwald=0.1, saturation=1.0),
        lambda: diffusive_release_time(1e-4, 0.5, diffusivity=5e-10),
        lambda: nucleus_radius(nan, 1e5, 9e4),
        lambda: dissolved_air_mass(-0.09, 1e5),
        lambda: ostwald_from_bunsen(0.09, 0.0),
        lambda: carried_air_after_dwell(0.9, 60.0, 600.0),
        lambda: release_time_at(300.0, 600e-6, 30e-6),
    )
    for bad in calls:
        with pytest.raises(OutOfRangeError):
            bad()
