"""Invented records of an inlet pressure whose cause is known, for the tests of the inverse.

The truth is stated in the unknowns of the inverse at warm, full flow; weather and sensor noise
are autocorrelated, and a few samples are wrong.
"""

from dataclasses import dataclass

import numpy as np

from rca.base.source import Source
from rca.case.model import Case
from rca.case.series import AlignedRecord, Series
from rca.physics.viscosity import kinematic_viscosity
from rca.suction.budget import oil_density

NU = (46.1e-6, 6.8e-6)
SOURCE = Source(file="pressure/invented.csv", locator="made for the tests")
BAR = 1e5
CLEAN = {"viscous": 0.036, "quadratic": 0.020, "depression": 0.0, "offset": 0.0}  # [bar]


@dataclass
class Truth:
    """What happens over the record; each value is (at the start, at the end) in bar."""

    name: str
    viscous: tuple[float, float] = (CLEAN["viscous"],) * 2
    quadratic: tuple[float, float] = (CLEAN["quadratic"],) * 2
    depression: tuple[float, float] = (0.0, 0.0)
    offset: tuple[float, float] = (0.0, 0.0)
    level_m: tuple[float, float] = (0.0, 0.0)  # change of the level; enters the pressure
    step_at: float | None = None  # share of the record at which the change happens at once
    warm: float = 50.0
    cold: float = 28.0
    days: float = 20.0
    step_s: float = 300.0
    two_speeds: bool = True
    one_temperature: bool = False
    rest: bool = True
    level_recorded: bool = True
    swing_m: float = 0.0  # quick swing of the level while running, peak to peak
    tank_bar_per_m: float = 0.0  # how far the tank follows it; a shut one some ten bar a metre
    noise: float = 400.0
    weather: float = 600.0


SCENARIOS = (
    Truth("clean line"),
    Truth("clogging strainer", viscous=(0.036, 0.26)),
    Truth("pinched line or half-closed valve", quadratic=(0.020, 0.17), step_at=0.6),
    Truth("plugged breather", depression=(0.0, 0.13)),
    Truth("sagging oil level", level_m=(0.0, -0.45)),
    Truth("cold oil", warm=24.0, cold=2.0),
    Truth("air leak"),
    Truth("drifted transducer", offset=(0.0, -0.12)),
)
EXPECTED = {
    "clean line": "normal vacuum",
    "air leak": "normal vacuum",
}


def course(pair: tuple[float, float], share: np.ndarray, step_at: float | None) -> np.ndarray:
    """From the first to the second value, straight or at once."""
    rise = share if step_at is None else (share >= step_at).astype(float)
    return pair[0] + (pair[1] - pair[0]) * rise


def record(case: Case, truth: Truth, *, seed: int) -> AlignedRecord:
    """The aligned record of one scenario."""
    rng = np.random.default_rng(seed)
    n = int(truth.days * 86400 / truth.step_s)
    time = 1.77e9 + truth.step_s * (np.arange(n) + 0.5)
    share = np.arange(n) / (n - 1)
    hour = (np.arange(n) * truth.step_s / 3600.0) % 24.0
    running = hour >= 6.0 if truth.rest else np.ones(n, dtype=bool)
    since = np.where(running, hour - (6.0 if truth.rest else 0.0), 0.0)
    warming = truth.warm - (truth.warm - truth.cold) * np.exp(-since / 1.2)
    temperature = np.where(running, warming, truth.cold)
    if truth.one_temperature:
        temperature = np.full(n, truth.warm)
    temperature = temperature + 273.15
    slow = truth.two_speeds & ((np.arange(n) // 7) % 3 == 0)
    speed = np.where(running, np.where(slow, 950.0, 1480.0), 0.0) / 60.0
    q0 = 1480 / 60 * case.pump.displacement.value
    q = speed * case.pump.displacement.value
    nu0, rho0 = float(kinematic_viscosity(323.15, *NU)), oil_density(case, 323.15)
    rho = rho0 * (1.0 + 7.2e-4 * (323.15 - 288.15)) / (1.0 + 7.2e-4 * (temperature - 288.15))
    u1 = kinematic_viscosity(temperature, *NU) / nu0 * rho / rho0 * q / q0
    u2 = rho / rho0 * (q / q0) ** 2

    def of(pair: tuple[float, float]) -> np.ndarray:
        return BAR * course(pair, share, truth.step_at)

    level = 0.4 + course(truth.level_m, share, None)
    quick = 0.5 * truth.swing_m * np.sign(np.sin(2 * np.pi * time / 900.0)) * running
    level = level + quick
    air = float(
        101325.0 * (1.0 - 2.25577e-5 * case.header.altitude.value) ** 5.25588
    )  # ISO 2533, written out once more
    still = air + rho * 9.80665 * level
    p = still + of(truth.offset) - of(truth.viscous) * u1 - of(truth.quadratic) * u2
    p = p - of(truth.depression) * running + BAR * truth.tank_bar_per_m * quick
    p = p + red(rng, n, truth.weather, 2 * 86400 / truth.step_s) + red(rng, n, truth.noise, 0.8)
    wrong = rng.random(n) < 0.001
    p[wrong] += rng.normal(0, 2e4, int(wrong.sum()))
    p = np.maximum(p, 0.05 * BAR)
    columns = {"inlet pressure": p, "oil temperature": temperature, "shaft speed": speed}
    if truth.level_recorded:
        columns["reservoir level"] = level + rng.normal(0, 0.002, n)
    return AlignedRecord(
        time_s=time,
        bin_s=truth.step_s,
        series={q: series(q, v) for q, v in columns.items()},
    )


def series(quantity: str, values: np.ndarray) -> Series:
    """One quantity without spread inside its bins."""
    return Series(
        quantity=quantity, unit="SI", mean=values, low=values, high=values, source=SOURCE
    )


def red(rng: np.random.Generator, n: int, sd: float, memory: float) -> np.ndarray:
    """Noise with a memory of so many samples; its standard deviation is ``sd``."""
    from scipy.signal import lfilter

    keep = float(np.exp(-1.0 / memory))
    drive = rng.normal(0, sd * np.sqrt(1 - keep**2), n)
    drive[0] = rng.normal(0, sd)
    return lfilter([1.0], [1.0, -keep], drive)
