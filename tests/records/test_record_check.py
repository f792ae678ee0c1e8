"""What the records show, on records whose truth is known because they were made that way."""

from dataclasses import replace

import numpy as np
import pytest

from rca.base.errors import OutOfRangeError
from rca.base.source import Source
from rca.case.model import Case
from rca.case.series import AlignedRecord, FloatArray, Series
from rca.evidence.from_records import from_records
from rca.evidence.item import EvidenceItem, NotAssessed
from rca.records.bursts import burst_finding, fastest_rise, fastest_rise_course
from rca.records.check import RecordCheck, check_records, usable

SOURCE = Source(file="made.csv", locator="made")
SIZE = 2000
TURNS = 1480 / 60


def record(**values: FloatArray) -> AlignedRecord:
    """A record of one-second bins; underscores of the names stand for spaces."""
    series = {}
    for name, value in values.items():
        quantity = name.replace("_", " ")
        series[quantity] = Series(
            quantity=quantity, unit="SI", mean=value, low=value, high=value, source=SOURCE
        )
    return AlignedRecord(time_s=np.arange(SIZE) + 0.5, bin_s=1.0, series=series)


def healthy() -> dict[str, FloatArray]:
    """A running machine with a living inlet sensor."""
    wave = 0.01e5 * np.sin(np.arange(SIZE))
    return {"inlet_pressure": 0.95e5 + wave, "shaft_speed": np.full(SIZE, TURNS)}


def judged(case: Case, aligned: AlignedRecord) -> RecordCheck:
    """The check with a limit of 0.80 bar absolute."""
    return check_records(case, usable(case, aligned), (), limit=0.80e5)


def test_two_dips_are_two_events_with_their_duration_and_depth(small_case: Case) -> None:
    """Seven and three seconds below the limit."""
    values = healthy()
    values["inlet_pressure"][100:107] = 0.60e5
    values["inlet_pressure"][900:903] = 0.50e5
    check = judged(small_case, record(**values))
    assert [(e.start_s, e.duration_s, e.lowest) for e in check.events] == [
        (100.0, 7.0, 0.60e5),
        (900.0, 3.0, 0.50e5),
    ]


def test_no_event_at_standstill(small_case: Case) -> None:
    """A drained line of a standing pump says nothing about running."""
    values = healthy()
    values["shaft_speed"][100:300] = 0.0
    values["inlet_pressure"][150:200] = 0.60e5
    assert judged(small_case, record(**values)).events_total == 0


def test_a_gap_is_no_start(small_case: Case) -> None:
    """One stop and one hole in the record: one start."""
    values = healthy()
    values["shaft_speed"][100:200] = 0.0
    for channel in values.values():
        channel[1000:1200] = np.nan
    duty = judged(small_case, record(**values)).duty
    assert duty is not None
    assert duty.starts == 1


def test_one_spike_costs_one_bin_and_not_the_channel(small_case: Case) -> None:
    """A pressure below zero absolute can't be; it is left out, said, and no event."""
    values = healthy()
    values["inlet_pressure"][500] = -3.0e5
    aligned = record(**values)
    kept = usable(small_case, aligned).get("inlet pressure")
    assert kept is not None
    assert np.isnan(kept.mean[500])
    assert judged(small_case, aligned).events_total == 0


def test_gauge_taken_for_absolute_is_set_aside(small_case: Case) -> None:
    """Samples around -0.1 bar 'absolute' are a gauge reading."""
    values = healthy()
    values["inlet_pressure"] -= 1.05e5
    series = usable(small_case, record(**values)).series["inlet pressure"]
    assert not series.usable
    assert "gauge" in series.remark


def test_vapour_at_the_port_is_not_taken_for_a_gauge(small_case: Case) -> None:
    """A port near zero absolute with a small sensor error keeps its channel."""
    values = healthy()
    values["inlet_pressure"] = 0.03e5 + 0.02e5 * np.sin(np.arange(SIZE))
    assert usable(small_case, record(**values)).get("inlet pressure") is not None


@pytest.mark.outside_value(source="first-order step: 10-90 % rise time is tau ln 9, exact")
def test_rise_time_of_a_first_order_step() -> None:
    """A step through a lag of 2 ms rises in 2 ms times ln 9."""
    rate, tau = 50_000.0, 2e-3
    time = np.arange(-0.05, 0.5, 1 / rate)
    values = 10e5 + 200e5 * np.where(time > 0, 1 - np.exp(-np.maximum(time, 0) / tau), 0.0)
    rise, size = fastest_rise(values, rate)
    assert rise == pytest.approx(tau * np.log(9), rel=0.02)
    assert size == pytest.approx(200e5, rel=0.02)
    course = np.array(fastest_rise_course(values, rate))
    assert course[0].tolist() == [0.0, 0.0]
    assert course[-1, 1] == 1.0
    there = np.interp(tau, course[:, 0], course[:, 1])
    assert there == pytest.approx(1 - np.exp(-1), abs=0.05)  # thinned to 48 points of a second


@pytest.mark.outside_value(source="a sine: crest sqrt 2, kurtosis 3/2, exact")
def test_a_sine_at_the_element_frequency() -> None:
    """All of the variance lies at elements times speed."""
    rate = 10_000.0
    time = np.arange(20_000) / rate
    values = 200e5 + 5e5 * np.sin(2 * np.pi * 9 * TURNS * time)
    found = burst_finding("discharge pressure", values, rate, SOURCE, speed=TURNS, elements=9)
    assert found.crest == pytest.approx(np.sqrt(2), rel=1e-3)
    assert found.kurtosis == pytest.approx(1.5, rel=1e-3)
    assert found.element_frequency == pytest.approx(222.0)
    assert found.element_share is not None
    assert found.element_share > 0.99
    assert not found.rise_resolved


def test_a_burst_too_short_is_refused() -> None:
    """No statistics of a handful of samples."""
    with pytest.raises(OutOfRangeError, match="64"):
        burst_finding("vibration", np.zeros(10), 1e4, SOURCE, speed=None, elements=None)


def test_a_coarse_thermometer_that_cools_overnight_is_alive(small_case: Case) -> None:
    """Whole degrees: 16 h on one value while running, another value at rest."""
    hours = np.arange(SIZE)  # bins of an hour
    running = hours % 24 < 16
    values = {
        "shaft_speed": np.where(running, TURNS, 0.0),
        "oil_temperature": np.where(running, 323.15, 298.15),
    }
    aligned = replace(record(**values), bin_s=3600.0)
    assert usable(small_case, aligned).get("oil temperature") is not None
    dead = replace(record(**values | {"oil_temperature": np.full(SIZE, 323.15)}), bin_s=3600.0)
    assert usable(small_case, dead).get("oil temperature") is None


def test_lost_delivery_is_seen_at_the_end_of_the_record(small_case: Case) -> None:
    """A tenth of the flow lost over the record."""
    size = small_case.pump.displacement
    assert size is not None
    full = size.value * TURNS
    fading = full * np.linspace(0.95, 0.855, SIZE)
    values = healthy() | {"flow": fading}
    lost = judged(small_case, record(**values)).delivery
    assert lost is not None
    assert lost.last / lost.first == pytest.approx(0.9, abs=0.01)
    steady = judged(small_case, record(**healthy() | {"flow": np.full(SIZE, 0.95 * full)}))
    items = {i.key: i for i in from_records(small_case, steady, record(**values))}
    worse = judged(small_case, record(**values))
    found = {i.key: i for i in from_records(small_case, worse, record(**values))}
    assert ratio(items["record.flow_loss"]) < 1 < ratio(found["record.flow_loss"])


def ratio(one: EvidenceItem | NotAssessed) -> float:
    """Likelihood ratio of an item."""
    assert isinstance(one, EvidenceItem)
    return one.likelihood["yes"] / one.likelihood["no"]
