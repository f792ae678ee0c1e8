"""The lumped bubble: limits, SciPy on the same equations, and the bound it is used as."""

import numpy as np
import pytest
from scipy.integrate import solve_ivp

from rca.base.errors import OutOfRangeError
from rca.physics.bubble import OilSide, bubble_batch, gas_table, parameter_rows
from rca.physics.compression import AIR_GAS_CONSTANT, adiabatic_end_temperature
from rca.physics.lumped import lumped_batch
from rca.physics.thermal_regime import radius_at_peclet

T0, P1, P2, RISE = 313.15, 1e5, 172.25e5, 1e-3
NUMBERS = (0.1, 1.0, 3.0, 10.0, 30.0)


def radii(numbers=NUMBERS):
    return np.array([radius_at_peclet(n, RISE, T0, P1) for n in numbers])


@pytest.mark.outside_value(
    source="isentropic ideal gas, NASA TM-4513, when conduction is switched off"
)
def test_adiabatic_limit():
    peaks = lumped_batch(
        1e-4, T0, P1, P2, RISE, conduction_factor=1e-9, tolerance=1e-5, oil=OilSide(tension=1e-9)
    )
    assert peaks.mean[0] == pytest.approx(float(adiabatic_end_temperature(T0, P1, P2)), abs=1.5)


@pytest.mark.outside_value(source="isothermal limit, R ~ p^(-1/3)")
def test_isothermal_limit():
    peaks = lumped_batch(1e-5, T0, P1, P2, 1.0, oil=OilSide(tension=1e-9))
    assert peaks.mean[0] - T0 < 3.0
    assert peaks.radius_min[0] == pytest.approx(1e-5 * (P1 / P2) ** (1 / 3), rel=2e-3)


@pytest.mark.outside_value(source="SciPy solve_ivp (BDF, rtol 1e-8) on the same equations")
@pytest.mark.parametrize("radius", [1e-4, 5e-4])
def test_against_scipy(radius):
    from rca.physics.lumped_kernel import lumped_rate

    oil = OilSide()
    par = parameter_rows(radius, T0, oil, conduction_factor=1.0, delay_factor=1.0, stop_below=0.0, tolerance=1e-4, ramp_end=RISE, stop_at_ignition=False)  # fmt: skip
    mass = (P1 + 2 * oil.tension / radius) * radius**3 / (AIR_GAS_CONSTANT * T0)
    slope = (P2 - P1) / RISE

    def rate(t, y):
        dy = np.empty(3)
        lumped_rate(y, P1 + slope * t, slope, par, mass, gas_table(), dy)
        return dy

    other = solve_ivp(rate, (0, RISE), [radius, 0.0, T0], method="BDF", rtol=1e-8, atol=1e-12)
    assert other.success
    peaks = lumped_batch(radius, T0, P1, P2, RISE, hold=1e-9, tolerance=1e-5)
    assert peaks.mean[0] == pytest.approx(other.y[2].max(), abs=0.3)


def test_it_stays_near_the_resolved_mean_and_is_no_bound():
    resolved = bubble_batch(radii(), T0, P1, P2, RISE, inertial=True, tolerance=1e-4)
    lumped = lumped_batch(radii(), T0, P1, P2, RISE)
    assert np.all(np.abs(lumped.mean - resolved.mean) < 30)
    assert lumped.mean[0] > resolved.mean[0]
    assert lumped.mean[-1] < resolved.mean[-1]


def test_the_default_tolerance_is_good_to_half_a_per_cent_of_the_rise():
    quick = lumped_batch(radii(), T0, P1, P2, RISE)
    tight = lumped_batch(radii(), T0, P1, P2, RISE, tolerance=1e-6)
    assert quick.mean == pytest.approx(tight.mean, abs=0.005 * 932)


@pytest.mark.parametrize("bad", [{"radius": float("nan")}, {"p_end": 1e4}, {"rise_time": -1.0}, {"hold": 0.0}], ids=str)  # fmt: skip
def test_refuses_bad_input(bad):
    good = {"radius": 1e-4, "temperature": T0, "p_start": P1, "p_end": P2, "rise_time": RISE}
    with pytest.raises(OutOfRangeError):
        lumped_batch(**{**good, **bad})


@pytest.mark.outside_value(
    source="order conditions of Rosenbrock methods, exact solution of a linear stiff problem and of y' = -y^2"
)
def test_the_integrators_have_their_stated_order():
    from rca.physics import rosenbrock as rb

    def step(rate, jac, by_time, t, y, h, method):
        if method == "rodas":
            gamma, stage, couple, nodes, d = (rb.RODAS_GAMMA, rb.RODAS_STAGE, rb.RODAS_COUPLING, rb.RODAS_NODES, rb.RODAS_TIME)  # fmt: skip
            weights = np.append(rb.RODAS_STAGE[5, :5], 1.0)
        else:  # a W-method: any Jacobian, here a wrong one; time enters through the stages only
            gamma, stage, couple, nodes, d = rb.GAMMA, rb.STAGE, rb.COUPLING, rb.NODES, np.zeros(4)
            weights = rb.NEW
        u = []
        for i in range(len(nodes)):
            trial = y + sum(stage[i, j] * u[j] for j in range(i))
            right = rate(t + nodes[i] * h, trial) + sum(couple[i, j] * u[j] for j in range(i)) / h
            right += d[i] * h * by_time(t, y)
            u.append(right * h * gamma / (1 - h * gamma * jac(t, y)))
        return y + sum(w * x for w, x in zip(weights, u, strict=True))

    def error(method, steps, wrong):
        # y' = -y^2 + cos t + sin^2 t, y(0) = 0: y = sin t
        y, h = 0.0, 1.0 / steps
        for n in range(steps):
            y = step(lambda t, v: -v * v + np.cos(t) + np.sin(t) ** 2,
                     lambda t, v: wrong * -2 * v,
                     lambda t, v: -np.sin(t) + 2 * np.sin(t) * np.cos(t), n * h, y, h, method)  # fmt: skip
        return abs(y - np.sin(1.0))

    for method, order, wrong in (("rodas", 4, 1.0), ("w", 3, 1.0), ("w", 3, 0.3)):
        found = np.log2(error(method, 40, wrong) / error(method, 80, wrong))
        assert found == pytest.approx(order, abs=0.35)
