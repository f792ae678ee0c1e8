"""An invented oil history to judge."""

from dataclasses import replace
from datetime import UTC, date, datetime, timedelta

import pytest

from rca.base.source import Source
from rca.case.model import HistoryEvent
from rca.case.oil import OilSample, OilValue

UNITS = {
    "viscosity_40": "mm2/s",
    "acid_number": "mgKOH/g",
    "water": "mg/kg",
    "colour": "D1500",
    "soot": "A/cm",
    "nitration": "A/cm",
    "oxidation": "A/cm",
}


def result(name, number, op="=", text=""):
    source = Source(file="oil/invented.csv", locator=f"line 2, {name}", sha256="cd" * 32)
    return OilValue(
        property=name,
        op=op,
        value=float(number),
        unit=UNITS.get(name, "mg/kg"),
        text=text or f"{'' if op == '=' else op}{number:g}",
        source=source,
    )


def sample(k, *, hours=None, new=False, laboratory="lab A", point="return line", **values):
    made = {}
    for name, number in values.items():
        made[name] = number if isinstance(number, OilValue) else result(name, number)
    return OilSample(
        id="NEW" if new else f"26-{k:02d}",
        sampled=None if new else date(2024, 1, 1) + timedelta(days=60 * k),
        point=point,
        laboratory=laboratory,
        machine_hours=None if new else (500.0 * k if hours is None else hours),
        oil_hours=None,
        new_oil=new,
        values=made,
        source=Source(file="oil/invented.csv", locator=f"line {k + 2}"),
    )


FRESH = {
    "viscosity_40": 46.1,
    "acid_number": 0.45,
    "water": 60,
    "colour": 1.0,
    "soot": 0.0,
    "nitration": 3.0,
    "oxidation": 5.0,
    "Fe": 1,
    "Cu": 0,
    "Si": 4,
    "Al": 0,
    "Zn": 400,
}


@pytest.fixture
def make_sample():
    return sample


@pytest.fixture
def make_result():
    return result


@pytest.fixture
def fresh():
    return dict(FRESH)


@pytest.fixture
def steady(fresh):
    """New oil and eight samples in which nothing moves."""
    return (sample(0, new=True, **fresh), *(sample(k, **fresh) for k in range(1, 9)))


@pytest.fixture
def oil_case(small_case):
    event = HistoryEvent(
        when=date(2023, 12, 1),
        kind="oil change",
        text="630 L",
        source=Source(file="history.csv", locator="line 2"),
    )
    header = replace(small_case.header, occurred=datetime(2025, 5, 10, 4, tzinfo=UTC))
    return replace(small_case, header=header, history=(event,))
