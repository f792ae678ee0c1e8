"""Small oscillations: closed limits, and the free decay of the resolved bubble."""

import numpy as np
import pytest

from rca.base.errors import OutOfRangeError
from rca.physics.bubble import OilSide, bubble_history
from rca.physics.small_oscillation import small_oscillation, thermal_transfer
from rca.physics.thermal_regime import air_diffusivity, small_amplitude_exponent

T0, P1 = 313.15, 1e5
GAMMA = 1.3995  # of air at T0, NASA TM-4513


@pytest.mark.outside_value(
    source="Prosperetti 1977: chi 10 to 1e-4 evaluated by hand; limits 1 and gamma"
)
def test_exponents() -> None:
    chi = np.array([1e6, 10.0, 1.0, 0.3, 0.1, 0.03, 0.01, 1e-3, 1e-4])
    kappa = [1.0, 1.0, 1.0014, 1.015, 1.087, 1.209, 1.285, 1.363, 1.388]
    assert thermal_transfer(chi).real / 3 == pytest.approx(kappa, abs=1e-3)
    assert thermal_transfer(chi[1:]).real / 3 == pytest.approx(small_amplitude_exponent(chi[1:]))


@pytest.mark.outside_value(
    source="Prosperetti 1977, both limits: Im(Phi) -> (gamma - 1)/(5 gamma chi) isothermal; "
    "9/2 gamma (gamma - 1) sqrt(2 chi) adiabatic"
)
def test_damping_in_both_limits() -> None:
    g = 1.4
    slow, fast = 1e3, 1e-6
    assert thermal_transfer(slow, gamma=g).imag == pytest.approx(
        (g - 1) / (5 * g * slow), rel=1e-3
    )
    expected = 4.5 * g * (g - 1) * np.sqrt(2 * fast)
    assert thermal_transfer(fast, gamma=g).imag == pytest.approx(expected, rel=0.01)


@pytest.mark.outside_value(
    source="Minnaert, Phil. Mag. 16 (1933) 235: 3.26 m/s over the radius, air in water at 1 atm"
)
def test_resonance_of_a_bubble_in_water() -> None:
    found = small_oscillation(
        1e-3, 2 * np.pi * 3260, pressure=101325.0, gas_diffusivity=2.1e-5, density=1000.0,
        viscosity=1e-3, tension=0.072, sound_speed=1480.0,
    )  # fmt: skip
    assert float(found.resonance) / (2 * np.pi) == pytest.approx(3260, rel=0.02)
    # logarithmic decrement about 0.1 for a millimetre bubble, thermal losses leading
    assert found.thermal > found.acoustic > found.viscous
    assert 2 * np.pi * float(found.damping / found.resonance) == pytest.approx(0.1, rel=0.5)


@pytest.mark.outside_value(
    source="Prosperetti, J. Acoust. Soc. Am. 61 (1977) 17-27: frequency and decay of free "
    "oscillations against the resolved model"
)
@pytest.mark.parametrize("radius", [1e-4, 4e-4])
def test_free_decay_of_the_resolved_bubble(radius: float) -> None:
    oil = OilSide(conductivity=1e3, heat_capacity=1e6, viscosity=2e-3, tension=1e-6)
    liquid = {
        "pressure": P1, "gas_diffusivity": float(air_diffusivity(T0, P1)),
        "density": oil.density, "viscosity": oil.viscosity, "tension": oil.tension,
        "sound_speed": oil.sound_speed, "gamma": GAMMA,
    }  # fmt: skip
    omega = float(np.sqrt(3 * GAMMA * P1 / oil.density)) / radius
    for _ in range(5):
        omega = float(small_oscillation(radius, omega, **liquid).resonance)
    expected = small_oscillation(radius, omega, **liquid)
    period = 2 * np.pi / omega
    end = 6.5 * period
    history = bubble_history(
        radius, T0, [0.0, 1e-3 * period, end], [P1, 1.004 * P1, 1.004 * P1], oil=oil,
        inertial=True, ramp_end=end, tolerance=1e-6, grid=(96, 12),
    )  # fmt: skip
    at = np.linspace(0.8 * period, end, 3000)
    swing = np.interp(at, history.time, history.radius)
    # fit offset, slow drift and a decaying wave
    from scipy.optimize import least_squares

    def misfit(x: np.ndarray) -> np.ndarray:
        a, b, c, d, damping, frequency = x
        wave = a * np.cos(frequency * at / period) + b * np.sin(frequency * at / period)
        return np.asarray(
            1e4 * (swing / radius - 1)
            - (c + d * at / period + wave * np.exp(-damping * at / period))
        )

    guess = [10.0, 0.0, -10.0, 0.0, float(expected.damping) * period, 2 * np.pi]
    found = least_squares(misfit, guess).x
    assert found[5] / (2 * np.pi) == pytest.approx(1.0, abs=0.03)
    assert found[4] / period == pytest.approx(float(expected.damping), rel=0.08)


def test_refusals() -> None:
    with pytest.raises(OutOfRangeError):
        thermal_transfer(0.0)
    with pytest.raises(OutOfRangeError):
        thermal_transfer(float("nan"))
    liquid = {"density": 860.0, "viscosity": 0.03, "tension": 0.03, "sound_speed": 1400.0}
    for r, w, p in ((1e-3, 1e6, 1e5), (-1e-3, 1e3, 1e5), (1e-3, 1e3, float("nan"))):
        with pytest.raises(OutOfRangeError):
            small_oscillation(r, w, pressure=p, gas_diffusivity=2e-5, **liquid)
