"""Delay integral, temperature for a delay and critical radius against another computation."""

import numpy as np
import pytest

from rca.base.errors import OutOfRangeError
from rca.discharge.critical import critical_radius, delay_integral, temperature_for_delay
from rca.discharge.delay import delays, ignition_delay
from rca.physics.bubble import bubble_history

MS = np.array([0.03, 0.1, 0.3, 1.0, 3.0, 10.0]) * 1e-3


@pytest.mark.outside_value(
    source="independent computation: core of the conduction model, Livengood-Wu, n-dodecane phi 1, "
    "linear ramp then hold; radius in um (kinetics file of Wang et al. 2014)"
)
@pytest.mark.parametrize(
    ("bar", "celsius", "p2", "microns"),
    [
        (1.0, 50, 100, (122, 145, 185, 285, 439, 720)),
        (1.0, 50, 172, (78, 100, 144, 228, 351, 574)),
        (1.0, 50, 250, (61, 83, 124, 197, 304, 494)),
        (1.0, 50, 350, (49, 72, 109, 173, 266, 430)),
        (0.6, 60, 100, (113, 160, 207, 316, 482, 777)),
        (0.6, 60, 172, (82, 114, 163, 256, 390, 624)),
        (0.6, 60, 250, (67, 95, 141, 222, 337, 540)),
        (0.6, 60, 350, (55, 83, 125, 195, 296, 472)),
    ],
)
def test_table_of_critical_radii(
    bar: float, celsius: float, p2: float, microns: tuple[float, ...]
) -> None:
    ours = critical_radius(MS, inlet=bar * 1e5, temperature=celsius + 273.15, discharge=p2 * 1e5)
    assert ours * 1e6 == pytest.approx(microns, rel=0.06)


@pytest.mark.outside_value(
    source="independent computation with the same mechanism: temperature for a delay, phi 1"
)
@pytest.mark.parametrize(
    ("ms", "kelvin"),
    [
        (10.0, (695, 646, 634, 625, 614)), (1.0, (1038, 736, 710, 696, 680)),
        (0.3, (1118, 1021, 770, 744, 723)), (0.1, (1201, 1118, 1068, 810, 771)),
    ],
)  # fmt: skip
def test_temperature_for_a_delay(ms: float, kelvin: tuple[float, ...]) -> None:
    ours = [temperature_for_delay(ms * 1e-3, bar * 1e5) for bar in (10, 50, 100, 170, 350)]
    assert ours == pytest.approx(kelvin, abs=15.0)


@pytest.mark.outside_value(source="identity: at constant state the integral is t/tau")
def test_integral_at_constant_state() -> None:
    tau = float(ignition_delay(900.0, 100e5))
    t = np.linspace(0, 2 * tau, 11)
    found = delay_integral(t, np.full(11, 900.0), np.full(11, 100e5))
    assert found == pytest.approx(t / tau)
    assert np.all(delay_integral(t, np.full(11, 400.0), np.full(11, 100e5)) == 0.0)


def test_integral_agrees_with_the_one_inside_the_bubble_model() -> None:
    history = bubble_history(
        3e-4, 323.15, [0, 1e-3, 3e-3], [1e5, 172e5, 172e5], inertial=False, delays=delays(),
        tolerance=1e-5,
    )  # fmt: skip
    outside = delay_integral(history.time, history.core, history.pressure)[-1]
    assert outside == pytest.approx(float(history.peaks.delay_integral[0]), rel=0.05)


@pytest.mark.property
def test_faster_higher_and_better_conducting() -> None:
    def at(rise: np.ndarray | float, bar: float, factor: float = 1.0) -> np.ndarray:
        return critical_radius(
            rise, inlet=1e5, temperature=323.15, discharge=bar * 1e5, conduction_factor=factor
        )

    radii = at(MS, 200)
    assert np.all(np.diff(radii) > 0)
    assert np.all(at(MS, 300) < radii)
    assert np.all(at(MS, 200, 1.3) > radii)
    assert np.isinf(at(1.0, 20)[0])


def test_refusals() -> None:
    with pytest.raises(OutOfRangeError):
        delay_integral([0.0, 1.0], [900.0], [1e7])
    with pytest.raises(OutOfRangeError):
        delay_integral([0.0, 1.0], [900.0, float("nan")], [1e7, 1e7])
    with pytest.raises(OutOfRangeError):
        delay_integral([0.0, 1.0], [900.0, 1700.0], [1e7, 1e7])
    with pytest.raises(OutOfRangeError):
        temperature_for_delay(-1.0, 1e7)
    with pytest.raises(OutOfRangeError, match="no temperature"):
        temperature_for_delay(1e-9, 1e7)
    with pytest.raises(OutOfRangeError):
        critical_radius(-1e-3, inlet=1e5, temperature=323.0, discharge=2e7)
