"""The shipped table of ignition delays: provenance, a rerun of some points, other computations."""

import hashlib
import json
from importlib import resources

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from rca.base.errors import OutOfRangeError
from rca.discharge.delay import P_RANGE, T_RANGE, delay_table, delays, ignition_delay
from rca.physics.bubble_notes import log_delay

BARS = (10, 30, 50, 80, 120, 170, 250, 350)
# microseconds, n-dodecane and air, phi 1
OTHER = {
    650: (26300, 12000, 8660, 6450, 5030, 4080, 3240, 2650),
    700: (9030, 3070, 2050, 1460, 1100, 875, 683, 553),
    750: (5850, 1340, 761, 485, 342, 259, 194, 153),
    800: (4970, 945, 465, 254, 159, 110, 75.7, 56.6),
    850: (4430, 795, 383, 197, 111, 69.0, 42.7, 28.7),
    900: (4630, 722, 335, 174, 99.4, 59.9, 33.6, 20.8),
    1000: (1860, 664, 360, 185, 99.8, 58.9, 33.9, 21.3),
    1100: (389, 183, 126, 88.2, 63.7, 47.0, 32.3, 22.4),
    1200: (101, 52.9, 38.0, 27.7, 20.9, 16.4, 12.6, 9.9),
    1300: (34.5, 18.6, 13.8, 10.3, 7.9, 6.3, 4.8, 3.9),
}


@pytest.mark.outside_value(
    source="independent computation with Cantera and the mechanism of Wang et al. 2014, argon in "
    "the air, another ignition criterion"
)
@pytest.mark.parametrize("kelvin", sorted(OTHER))
def test_against_another_computation(kelvin: int) -> None:
    ours = ignition_delay(float(kelvin), np.array(BARS) * 1e5) * 1e6
    assert ours == pytest.approx(OTHER[kelvin], rel=0.03)


@pytest.mark.outside_value(
    source="n-dodecane at 170 bar, phi 0.5: 444, 165, 105, 66 and 22 us by another computation"
)
def test_lean_mixture() -> None:
    t = [750.0, 850.0, 1000.0, 1100.0, 1200.0]
    ours = ignition_delay(t, 170e5, phi=0.5) * 1e6
    assert ours == pytest.approx([444, 165, 105, 66, 22], rel=0.04)


@pytest.mark.outside_value(
    source="air of 33 % oxygen, 170 bar: 31, 28 and 12 us at 850, 1000, 1200 K by another "
    "computation"
)
def test_oxygen_rich_air() -> None:
    ours = ignition_delay([850.0, 1000.0, 1200.0], 170e5, oxygen=0.33) * 1e6
    assert ours == pytest.approx([31, 28, 12], rel=0.08)


@pytest.mark.outside_value(source="Cantera rerun by the shipped script, three cheap points")
def test_rerun_of_some_points() -> None:
    pytest.importorskip("cantera")
    from rca.workshop.ignition_table import ignition_delay_of, mechanism_file

    table = delay_table()
    if hashlib.sha256(mechanism_file().read_bytes()).hexdigest() != table.mechanism_sha256:
        pytest.skip("the installed library ships another version of the mechanism")
    for t, bar, phi, oxygen in ((850.0, 170, 1.0, 0.2095), (1200.0, 350, 2.0, 0.35)):
        again = ignition_delay_of(t, bar, phi, oxygen)
        assert ignition_delay(t, bar * 1e5, phi=phi, oxygen=oxygen) == pytest.approx(
            again, rel=0.01
        )


@pytest.mark.outside_value(
    source="Stringer et al. 1969 and Wolfer 1938 in Heywood, ICE Fundamentals, table 10.3 (from "
    "memory): sprays of diesel, evaporation included, are slower than vapour of dodecane"
)
def test_of_the_order_of_diesel_correlations() -> None:
    stringer = 0.0405e-3 * 50**-0.757 * np.exp(5473 / 850)
    wolfer = 0.44e-3 * 48**-1.19 * np.exp(4650 / 770)
    assert 0.2 < ignition_delay(850.0, 50e5) / stringer < 1.0
    assert 0.2 < ignition_delay(770.0, 48e5) / wolfer < 1.0


@pytest.mark.outside_value(
    source="range of pressure exponents of heavy alkanes: about -0.6 hot, -1.1 to -1.6 in the "
    "plateau"
)
def test_pressure_exponent() -> None:
    def exponent(t: float) -> float:
        a, b = ignition_delay([t, t], [80e5, 250e5])
        return float(np.log(b / a) / np.log(250 / 80))

    assert -0.8 < exponent(1300.0) < -0.5
    assert -1.6 < exponent(900.0) < -1.1


def test_provenance_is_complete() -> None:
    raw = json.loads(
        resources.files("rca.discharge").joinpath("ignition_delay.json").read_text("utf-8")
    )
    for key in ("mechanism", "phase", "mechanism_source", "library", "made_by", "definition"):
        assert raw[key]
    assert len(raw["mechanism_sha256"]) == 64
    table = delay_table()
    shape = (table.oxygen.size, table.phi.size, table.temperature.size, table.pressure.size)
    assert table.log_delay.shape == shape
    assert np.all(np.isfinite(table.log_delay))


@pytest.mark.property
@given(
    t=st.floats(*T_RANGE), p=st.floats(P_RANGE[0], 400e5), phi=st.floats(0.5, 2.0),
    oxygen=st.floats(0.2095, 0.34),
)  # fmt: skip
def test_more_pressure_and_more_oxygen_ignite_sooner(
    t: float, p: float, phi: float, oxygen: float
) -> None:
    here = float(ignition_delay(t, p, phi=phi, oxygen=oxygen))
    assert ignition_delay(t, 1.1 * p, phi=phi, oxygen=oxygen) < here
    assert ignition_delay(t, p, phi=phi, oxygen=oxygen + 0.01) < here


def test_the_kernel_s_grid_follows_the_delay() -> None:
    grid = delays()
    rng = np.random.default_rng(0)
    for t, p in zip(rng.uniform(610, 1490, 60), rng.uniform(11e5, 440e5, 60), strict=True):
        got = np.exp(log_delay(1 / t, np.log(p), grid.log_delay, grid.frame))
        assert got == pytest.approx(float(ignition_delay(t, p)), rel=0.04)


@pytest.mark.parametrize(
    ("t", "p", "more"),
    [
        (550.0, 50e5, {}), (900.0, 5e5, {}), (float("nan"), 50e5, {}), (900.0, 50e5, {"phi": 0.1}),
        (900.0, 50e5, {"oxygen": 1.0}),
    ],
)  # fmt: skip
def test_refuses(t: float, p: float, more: dict[str, float]) -> None:
    with pytest.raises(OutOfRangeError, match="tabulated"):
        ignition_delay(t, p, **more)
