"""An invented power unit: enough physics of its own to make honest records for the sample case.

Kept apart from ``rca.physics`` on purpose: the records must not be made by the formulas that
later judge them. Losses here are linear in viscosity, the oil's viscosity is a Vogel fit, and the
strainer's resistance grows as dirt gathers.
"""

from dataclasses import dataclass
from datetime import UTC, datetime, timedelta
from zoneinfo import ZoneInfo

import numpy as np
import numpy.typing as npt

FloatArray = npt.NDArray[np.float64]
ZONE = ZoneInfo("Europe/Vienna")
FAILURE = datetime(2026, 3, 6, 4, 12, tzinfo=ZONE)
START = datetime(2026, 1, 5, 0, 0, tzinfo=ZONE)
STEP_S = 30.0
AIR_BAR = 0.973  # at 340 m
CLOGGING_WEEKS = 9.0


@dataclass(frozen=True, slots=True, kw_only=True)
class Log:
    """What the logger stored, true time in seconds since 1970 UTC."""

    time: FloatArray
    inlet_bar: FloatArray
    discharge_bar: FloatArray  # gauge
    oil_degc: FloatArray
    speed_rpm: FloatArray
    level_m: FloatArray


def viscosity(t: FloatArray) -> FloatArray:
    """Kinematic viscosity [mm2/s] of the invented VG 46 oil at t [degC], a Vogel fit."""
    return np.asarray(0.0655 * np.exp(880.0 / (t + 94.2)))


def resistance(day: FloatArray) -> FloatArray:
    """Strainer resistance against clean, growing faster towards the end."""
    weeks = day / 7.0
    return np.asarray(1.0 + 17.0 * np.clip(weeks / CLOGGING_WEEKS, 0.0, 1.2) ** 2.2)


def run(seed: int) -> Log:
    """Nine weeks of the unit up to its failure."""
    rng = np.random.default_rng(seed)
    start, end = START.timestamp(), FAILURE.timestamp()
    time = np.arange(start, end, STEP_S)
    running = _shifts(time)
    temperature = _temperature(time, running, rng)
    cycle = 0.5 + 0.5 * np.sign(np.sin(2 * np.pi * time / 95.0))
    speed = np.where(running, 1480.0 + rng.normal(0, 2.5, time.size), 0.0)
    discharge = np.where(running, 35.0 + 175.0 * cycle + rng.normal(0, 1.5, time.size), 0.0)
    flow = speed * 0.1 * (1.0 - 0.02 * cycle)  # L/min
    nu = viscosity(temperature)
    share = flow / 148.0
    clean = 0.0185 * share * nu / 30.0
    line = 0.0185 * share * nu / 30.0 + 0.013 * share**2
    day = (time - start) / 86400.0
    level = 0.40 - 0.03 * cycle * running + rng.normal(0, 0.002, time.size)
    inlet = AIR_BAR + 0.0848 * level - resistance(day) * clean - line
    inlet = np.maximum(inlet, 0.06)
    weather = 0.008 * np.sin(2 * np.pi * day / 6.3)
    measured = inlet + weather + 0.006 + rng.normal(0, 0.004, time.size)
    return Log(
        time=time,
        inlet_bar=measured,
        discharge_bar=np.maximum(discharge, 0.0),
        oil_degc=temperature + rng.normal(0, 0.15, time.size),
        speed_rpm=np.asarray(np.round(np.maximum(speed, 0.0), 1), dtype=np.float64),
        level_m=level,
    )


def burst(seed: int, *, rate_hz: float = 50_000.0, seconds: float = 2.0) -> dict[str, FloatArray]:
    """A fast record: ripple of nine pistons, a press valve that closes twice, a pressure step."""
    rng = np.random.default_rng(seed)
    t = np.arange(int(rate_hz * seconds)) / rate_hz
    base = 9 * 1480 / 60
    ripple = sum(
        amp * np.sin(2 * np.pi * base * k * t + phase)
        for k, amp, phase in ((1, 4.2, 0.1), (2, 1.9, 1.1), (3, 0.8, 2.0), (4, 0.3, 0.4))
    )
    level = np.full_like(t, 38.0)
    for begin, step, tau in ((0.55, 172.0, 0.0011), (1.2, -172.0, 0.02), (1.6, 172.0, 0.0013)):
        level += np.where(t > begin, step * (1 - np.exp(-np.maximum(t - begin, 0) / tau)), 0.0)
    spikes = np.zeros_like(t)
    for place in rng.integers(2000, t.size - 2000, 40):
        spikes[place : place + 40] += rng.uniform(4, 16) * np.exp(-np.arange(40) / 8.0)
    discharge = level + ripple * (level / 210.0) + spikes + rng.normal(0, 0.5, t.size)
    inlet = 0.71 + 0.02 * np.sin(2 * np.pi * base * t) + rng.normal(0, 0.006, t.size)
    return {"P_DIS": discharge, "P_SUCT": inlet}


def stamp(seconds: float) -> str:
    """A logger stamp in local time without zone, as cheap loggers write it."""
    return datetime.fromtimestamp(seconds, tz=ZONE).strftime("%Y-%m-%d %H:%M:%S")


def _shifts(time: FloatArray) -> npt.NDArray[np.bool_]:
    """Monday 05:00 to Friday 22:00 round the clock, the weekend off."""
    offset = 3600.0  # winter time throughout
    local = time + offset
    weekday = (np.floor(local / 86400.0) + 3) % 7  # 1970-01-01 was a Thursday
    hour = (local % 86400.0) / 3600.0
    return np.asarray(
        ((weekday > 0) | (hour >= 5)) & ((weekday < 4) | ((weekday == 4) & (hour < 22)))
    )


def _temperature(
    time: FloatArray, running: npt.NDArray[np.bool_], rng: np.random.Generator
) -> FloatArray:
    """Oil temperature: warms with 50 min, cools with 9 h to a cold hall."""
    hall = 9.0 + 3.0 * np.sin(2 * np.pi * time / (86400 * 21.0)) + rng.normal(0, 0.02, time.size)
    out = np.empty_like(time)
    now = 14.0
    for k, on in enumerate(running):
        target, tau = (50.5, 3000.0) if on else (hall[k], 32400.0)
        now += (target - now) * STEP_S / tau
        out[k] = now
    return out


def utc(seconds: float) -> str:
    """A moment in UTC, ISO 8601."""
    return (datetime.fromtimestamp(0, tz=UTC) + timedelta(seconds=seconds)).isoformat()
