"""Which side came first, and one cause taken away: by hand-made dates and the physics' own laws."""

from datetime import date
from types import SimpleNamespace
from typing import Any

import numpy as np
import pytest

from rca.physics.compression import adiabatic_end_temperature
from rca.suction.counterfactual import Change, Counterfactual
from rca.suction.spread import Spread
from rca.verdict.order import UNKNOWN, order_of
from rca.verdict.without import for_cause, without_causes

DAY = 86400.0
EPOCH = date(1970, 1, 1)


def seconds(day: date) -> float:
    return (day - EPOCH).days * DAY


def inlet(*pieces: tuple[date, float], limit: float = 0.8e5) -> Any:
    """A suction check with one piece a day: the pressure [Pa] and its lack under the clean line."""
    made = tuple(
        SimpleNamespace(
            start_s=seconds(d), end_s=seconds(d) + DAY / 2, measured=p, viscous_excess=0.95e5 - p
        )
        for d, p in pieces
    )
    return SimpleNamespace(measured=SimpleNamespace(pieces=made), limit=limit)


def oil(**series: list[tuple[date, float]]) -> Any:
    points = tuple(
        SimpleNamespace(property=name, fill=0, excluded=False, sampled=d, value=v, sample=f"S{n}")
        for name, rows in series.items()
        for n, (d, v) in enumerate(rows)
    )
    return SimpleNamespace(points=points, fill=0, judged={})


JAN, FEB, MAR, APR, MAY = (date(2026, m, 1) for m in range(1, 6))
FALLING = inlet((JAN, 0.95e5), (FEB, 0.75e5), (MAR, 0.72e5))


def test_a_low_inlet_before_the_last_clear_oil_is_first() -> None:
    dark = oil(soot=[(JAN, 0.2), (APR, 0.3), (MAY, 5.0)], colour=[(JAN, 1), (APR, 1), (MAY, 6)])
    assert order_of(FALLING, dark).first == "suction"


def test_burnt_oil_before_the_inlet_falls_is_first() -> None:
    low = inlet((MAR, 0.95e5), (APR, 0.95e5), (MAY, 0.7e5))
    dark = oil(soot=[(JAN, 0.2), (FEB, 5.0)], colour=[(JAN, 1), (FEB, 6)])
    assert order_of(low, dark).first == "discharge"


def test_overlapping_spans_are_not_told_apart() -> None:
    dark = oil(soot=[(JAN, 0.2), (MAR, 5.0)], colour=[(JAN, 1), (MAR, 6)])
    found = order_of(FALLING, dark)
    assert found.first == UNKNOWN
    assert "overlap" in found.why


@pytest.mark.parametrize("missing", ["inlet", "oil", "both"])
def test_without_dates_nothing_is_said(missing: str) -> None:
    dark = oil(soot=[(JAN, 0.2), (MAR, 5.0)])
    found = order_of(
        None if missing in ("inlet", "both") else FALLING,
        None if missing in ("oil", "both") else dark,
    )
    assert found.first == UNKNOWN
    assert found.why.startswith("Not known")


def test_an_inlet_that_recovered_has_not_fallen_for_good() -> None:
    back = inlet((JAN, 0.95e5), (FEB, 0.7e5), (MAR, 0.95e5))
    assert order_of(back, oil(soot=[(JAN, 0.2), (MAR, 5.0)])).suction is None


def spread(x: float) -> Spread:
    return Spread(mean=x, sd=0.0, p05=x, p50=x, p95=x)


def changed(before: float, after: float, releases: float) -> Counterfactual:
    return Counterfactual(
        change=Change.CLEAN_STRAINER, cause="suction strainer clogged", temperature=323.15,
        flow=2.4e-3, before=spread(before), after=spread(after), gain=spread(after - before),
        released_before=spread(0.03), released_after=spread(0.001), limit=0.8e5,
        margin=after - 0.8e5, air_margin=0.0, below_limit_before=1.0,
        below_limit=float(after < 0.8e5), releases_before=1.0, releases=releases,
        starved_before=0.0, starved=0.0, identified=True, basis="test",
    )  # fmt: skip


def discharge() -> Any:
    value = SimpleNamespace
    return SimpleNamespace(
        temperature=value(value=323.15), discharge_pressure=value(value=211e5), map=None,
        rise_time=None, ignition="not excluded", populations=(),
    )  # fmt: skip


@pytest.mark.outside_value(source="isentropic ideal gas: T2 grows with the logarithm of p2/p1")
def test_a_better_inlet_takes_away_the_air_and_hardly_the_heat() -> None:
    suction: Any = SimpleNamespace(counterfactuals=(changed(0.6e5, 0.95e5, 0.0),))
    row = for_cause(without_causes(suction, discharge()), "suction strainer clogged")
    assert row is not None
    assert row.bubble_before is not None
    assert row.bubble_after is not None
    assert row.bubble_after < row.bubble_before
    ideal = (0.6 / 0.95) ** (0.3 / 1.3)  # gamma about 1.3 at these temperatures
    assert row.bubble_after / row.bubble_before == pytest.approx(ideal, abs=0.04)
    assert "inlet healthy" in row.still
    assert "carried air only" in row.still


def test_a_starved_pump_has_no_bubble_temperature() -> None:
    suction: Any = SimpleNamespace(counterfactuals=(changed(0.05e5, 0.7e5, 0.9),))
    (row,) = without_causes(suction, discharge())
    assert row.bubble_before is None
    assert row.bubble_after == pytest.approx(
        float(np.asarray(adiabatic_end_temperature(323.15, 0.7e5, 211e5)))
    )
    assert "air still released" in row.still


def test_without_checks_there_is_nothing_to_take_away() -> None:
    assert without_causes(None, None) == ()
