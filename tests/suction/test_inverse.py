"""Resistances out of a record: known truth, coverage, what can't be told, and odd records."""

from dataclasses import replace

import numpy as np
import pytest
from scipy.stats import binom, truncnorm

from rca.archive.codec import from_plain, to_plain
from rca.base.source import Reading
from rca.case.model import Case, SuctionPart
from rca.case.series import AlignedRecord
from rca.case.vocabulary import PartKind
from rca.evidence.from_suction import from_suction
from rca.evidence.from_suction_inverse import weighed
from rca.evidence.item import EvidenceItem, Node, NotAssessed
from rca.figures.panels_suction import panels_suction
from rca.suction.bounded_draws import bounded_mixture
from rca.suction.check import SuctionCheck, check_suction, transducer_error
from rca.suction.counterfactual import Change
from rca.suction.explanations import Explanation, explain
from rca.suction.inverse import estimate_resistances
from rca.suction.varying_fit import Course, fit_varying
from tests.suction.synthetic import EXPECTED, SCENARIOS, Truth, record, series

BAR = 1e5


def leading(case: Case, truth: Truth, seed: int = 1) -> tuple[str, float, tuple[str, ...]]:
    found = estimate_resistances(case, record(case, truth, seed=seed), seed=seed)
    assert not isinstance(found, str)
    told = explain(case, *found, seed=seed)
    return told.leading, told.leading_probability, told.between


def vague(sd: float = 1e7) -> tuple[Course, ...]:
    return (Course(mean=0.0, sd=sd, walk=sd, weight=1.0),)


# --- the regression itself -------------------------------------------------------------------


@pytest.mark.outside_value(source="ordinary least squares, numpy.linalg.lstsq")
def test_one_knot_and_no_prior_is_least_squares() -> None:
    rng = np.random.default_rng(3)
    x = np.column_stack([np.ones(400), rng.normal(size=400)])
    y = x @ [300.0, -40.0] + rng.normal(0, 5.0, 400)
    fit = fit_varying(np.arange(400.0), y, x, np.array([200.0]), (vague(), vague()))
    kept = fit.kept
    expected = np.linalg.lstsq(x[kept], y[kept], rcond=None)[0]
    assert fit.means[0] == pytest.approx(expected, rel=1e-6)
    cov = np.linalg.inv(x[kept].T @ x[kept]) * fit.noise**2 * fit.inflation
    assert fit.covariances[0] == pytest.approx(cov, rel=1e-4)


@pytest.mark.outside_value(
    source="variance of the mean of a first-order autoregressive series, (1 + r)/(1 - r); any "
    "text on time series"
)
def test_autocorrelated_noise_widens_by_the_exact_factor() -> None:
    rng = np.random.default_rng(5)
    r, n = 0.8, 40_000
    noise = np.empty(n)
    noise[0] = rng.normal()
    for k in range(1, n):
        noise[k] = r * noise[k - 1] + np.sqrt(1 - r * r) * rng.normal()
    fit = fit_varying(np.arange(float(n)), noise, np.ones((n, 1)), np.array([n / 2]), (vague(),))
    exact = (1 + r) / (1 - r)
    assert exact * 0.85 < fit.inflation < exact * 2.0  # the largest of many factors errs wide


def test_a_wrong_sample_does_not_move_the_fit() -> None:
    rng = np.random.default_rng(6)
    y = 100.0 + rng.normal(0, 1.0, 500)
    y[::50] = 1e5
    fit = fit_varying(np.arange(500.0), y, np.ones((500, 1)), np.array([250.0]), (vague(),))
    assert fit.means[0][0] == pytest.approx(100.0, abs=0.5)
    assert (~fit.kept).sum() == 10


def test_the_regression_refuses_what_is_not_finite() -> None:
    with pytest.raises(ValueError, match="finite"):
        fit_varying(
            np.arange(50.0), np.full(50, np.nan), np.ones((50, 1)), np.array([25.0]), (vague(),)
        )


@pytest.mark.outside_value(source="moments of the truncated normal, scipy.stats.truncnorm")
@pytest.mark.parametrize("mean", [1.0, 0.0, -2.0, -6.0])
def test_draws_at_a_bound_have_the_truncated_moments(mean: float) -> None:
    rng = np.random.default_rng(8)
    draws, distance = bounded_mixture(
        np.ones(1),
        np.array([[mean, 5.0]]),
        np.array([[[1.0, 0.0], [0.0, 4.0]]]),
        np.array([True, False]),
        8000,
        rng,
    )
    exact = truncnorm(-mean, np.inf, loc=mean)
    assert draws[:, 0].mean() == pytest.approx(exact.mean(), abs=0.04 * (1 + exact.mean()))
    assert draws[:, 0].std() == pytest.approx(exact.std(), rel=0.06)
    assert draws[:, 1].mean() == pytest.approx(5.0, abs=0.1)
    assert distance == pytest.approx(max(-mean, 0.0), abs=0.02)


def test_two_collinear_losses_share_what_only_their_sum_tells() -> None:
    """The sum is known to be 2, each is at least zero: each is then even between 0 and 2."""
    rng = np.random.default_rng(9)
    wide, narrow = 1e4, 1e-4
    cov = 0.5 * np.array([[wide + narrow, narrow - wide], [narrow - wide, wide + narrow]])
    draws, distance = bounded_mixture(
        np.ones(1), np.array([[40.0, -38.0]]), cov[None], np.array([True, True]), 6000, rng
    )
    assert draws.min() > -1e-6
    assert draws.sum(axis=1) == pytest.approx(2.0, abs=0.06)
    assert np.quantile(draws[:, 0], [0.05, 0.5, 0.95]) == pytest.approx([0.1, 1.0, 1.9], abs=0.06)
    assert distance < 1.0


# --- what it tells apart ---------------------------------------------------------------------


@pytest.mark.parametrize("truth", SCENARIOS[1:], ids=lambda t: t.name)
def test_each_cause_is_told_from_the_others(small_case: Case, truth: Truth) -> None:
    name, probability, _ = leading(small_case, truth)
    assert name == EXPECTED.get(truth.name, truth.name)
    assert probability > 0.7


@pytest.mark.parametrize(
    ("truth", "excited", "together"),
    [
        (2, {"two_speeds": False}, {Explanation.PINCHED_LINE, Explanation.PLUGGED_BREATHER}),
        (3, {"two_speeds": False}, {Explanation.PINCHED_LINE, Explanation.PLUGGED_BREATHER}),
        (3, {"rest": False}, {Explanation.PLUGGED_BREATHER, Explanation.DRIFTED_TRANSDUCER}),
        (7, {"rest": False}, {Explanation.PLUGGED_BREATHER, Explanation.DRIFTED_TRANSDUCER}),
        (
            4,
            {"level_recorded": False},
            {Explanation.SAGGING_LEVEL, Explanation.DRIFTED_TRANSDUCER},
        ),
        (
            1,
            {"two_speeds": False, "one_temperature": True},
            {Explanation.CLOGGED_STRAINER, Explanation.PINCHED_LINE, Explanation.PLUGGED_BREATHER},
        ),
    ],
)
def test_a_record_that_can_not_tell_says_so(
    small_case: Case, truth: int, excited: dict, together: set[Explanation]
) -> None:
    name, _, between = leading(small_case, replace(SCENARIOS[truth], **excited))
    assert name == "not identifiable"
    assert {e.value for e in together} <= set(between)


@pytest.mark.parametrize(
    ("truth", "tank", "said"),
    [
        (2, 0.0, Explanation.PINCHED_LINE),
        (3, 4.0, Explanation.PLUGGED_BREATHER),
    ],
)
def test_the_swing_of_the_level_tells_a_breather_from_a_pinch(
    small_case: Case, truth: int, tank: float, said: Explanation
) -> None:
    """With one speed neither is told (see above); with the tank's own breathing both are."""
    swinging = replace(
        SCENARIOS[truth], two_speeds=False, swing_m=0.03, tank_bar_per_m=tank, step_s=120.0, days=8
    )
    name, _, _ = leading(small_case, swinging)
    assert name == said.value


def test_one_temperature_leaves_the_viscous_loss_of_an_undescribed_line_open(
    small_case: Case,
) -> None:
    case = replace(small_case, suction_line=())
    truth = Truth("x", one_temperature=True, two_speeds=False, viscous=(0.2, 0.2))
    found = estimate_resistances(case, record(case, truth, seed=2), seed=2)
    assert not isinstance(found, str)
    inverse, _ = found
    assert not inverse.viscous.identified_at_end
    assert not inverse.quadratic.identified_at_end
    assert inverse.total.identified_at_end  # the sum is known all the same
    assert inverse.excitation.condition > 100
    assert inverse.excitation.viscosity_ratio == pytest.approx(1.0, abs=1e-6)


def test_intervals_cover_the_truth_as_often_as_they_say(small_case: Case) -> None:
    """Nine in ten of the 90 % intervals; a count that a fair coin of 0.9 gives 99.9 % of the time.

    Truths are drawn afresh each time, so no setting can be tuned to them.
    """
    hits = cases = 0
    for seed in range(6):
        rng = np.random.default_rng(1000 + seed)
        growth = [0.0, rng.uniform(0.05, 0.3)]
        truth = Truth(
            "drawn",
            viscous=(0.036, 0.036 + growth[rng.integers(2)]),
            quadratic=(0.02, 0.02 + rng.choice([0.0, rng.uniform(0.05, 0.2)])),
            depression=(0.004, 0.004 + rng.choice([0.0, rng.uniform(0.05, 0.15)])),
            step_s=600.0,
            weather=0.0,
        )
        found = estimate_resistances(small_case, record(small_case, truth, seed=seed), seed=seed)
        assert not isinstance(found, str)
        inverse, _ = found
        for track, value in (
            (inverse.viscous, truth.viscous),
            (inverse.quadratic, truth.quadratic),
            (inverse.depression, truth.depression),
        ):
            for place in (0, -1):
                hits += track.p05[place] <= value[place] * BAR <= track.p95[place]
                cases += 1
    assert hits >= binom.ppf(0.001, cases, 0.9), f"{hits} of {cases}"


def test_the_estimate_gives_the_resistance_in_plain_units(small_case: Case) -> None:
    truth = SCENARIOS[1]
    found = estimate_resistances(small_case, record(small_case, truth, seed=4), seed=4)
    assert not isinstance(found, str)
    inverse, _ = found
    a = inverse.viscous_resistance
    loss = a.p50 * inverse.reference_viscosity * inverse.reference_density * inverse.reference_flow
    assert loss / BAR == pytest.approx(truth.viscous[1], abs=0.015)
    assert a.p05 < a.p50 < a.p95


# --- odd records and odd machines ------------------------------------------------------------


def changed(aligned: AlignedRecord, **columns: np.ndarray) -> AlignedRecord:
    named = {k.replace("_", " "): v for k, v in columns.items()}
    return replace(aligned, series=aligned.series | {k: series(k, v) for k, v in named.items()})


def test_samples_that_are_missing_backward_or_starved_are_left_out_and_counted(
    small_case: Case,
) -> None:
    aligned = record(small_case, SCENARIOS[1], seed=5)
    p = aligned.series["inlet pressure"].mean.copy()
    n = aligned.series["shaft speed"].mean.copy()
    running = np.flatnonzero(n > 0)
    p[running[:50]] = np.nan
    p[running[100:140]] = 0.1 * BAR
    n[running[200:230]] *= -1.0
    found = estimate_resistances(
        small_case, changed(aligned, inlet_pressure=p, shaft_speed=n), seed=5
    )
    assert not isinstance(found, str)
    aside = found[0].set_aside
    assert (aside.not_recorded, aside.starved, aside.reversed) == (50, 40, 30)
    assert found[0].viscous.p50[-1] / BAR == pytest.approx(0.26, abs=0.02)
    assert any("reversed" in remark for remark in found[0].remarks)


@pytest.mark.parametrize(
    ("column", "value", "said"),
    [
        ("inlet_pressure", np.nan, "fewer than"),
        ("shaft_speed", 0.0, "fewer than"),
        ("oil_temperature", 1000.0, "fewer than"),
    ],
)
def test_a_record_without_usable_bins_says_why(
    small_case: Case, column: str, value: float, said: str
) -> None:
    aligned = record(small_case, SCENARIOS[0], seed=6)
    broken = changed(aligned, **{column: np.full(aligned.time_s.size, value)})
    found = estimate_resistances(small_case, broken, seed=6)
    assert isinstance(found, str)
    assert said in found
    check = check_suction(small_case, broken, seed=6, samples=64)
    assert check.inverse is None
    assert {n.change for n in check.not_computed} == set(Change)
    items = from_suction(small_case, check, broken)
    assert any(isinstance(i, NotAssessed) and i.node is Node.TANK_DEPRESSION for i in items)


def test_what_is_missing_is_named(small_case: Case) -> None:
    aligned = record(small_case, SCENARIOS[0], seed=6)
    fewer = replace(
        aligned, series={k: v for k, v in aligned.series.items() if k != "oil temperature"}
    )
    found = estimate_resistances(small_case, fewer, seed=1)
    assert isinstance(found, str)
    assert "oil temperature" in found


def hose_only(case: Case) -> Case:
    def value(v: float, unit: str) -> Reading:
        return Reading(value=v, unit=unit)

    hose = SuctionPart(
        index=0, part=PartKind.HOSE, bore=value(0.05, "m"), length=value(3.0, "m"), count=1
    )
    low = replace(case.reservoir, level_above_inlet=value(-0.8, "m"), breather=None)
    return replace(case, suction_line=(hose,), reservoir=low)


def test_a_hose_alone_below_the_pump_gets_its_budget_and_no_strainer(small_case: Case) -> None:
    case = hose_only(small_case)
    aligned = record(small_case, SCENARIOS[1], seed=7)
    sunk = aligned.series["inlet pressure"].mean - 870.0 * 9.80665 * 1.2
    check = check_suction(case, changed(aligned, inlet_pressure=sunk), seed=7, samples=64)
    assert check.inverse is not None
    assert check.explanations is not None
    assert [n.change for n in check.not_computed] == [Change.CLEAN_STRAINER]
    viscous = next(
        s for s in check.explanations.shares if s.explanation is Explanation.CLOGGED_STRAINER
    )
    assert viscous.cause == "suction line restricted"
    assert viscous.raised > 0.95
    free = next(c for c in check.counterfactuals if c.change is Change.FREE_LINE)
    assert free.gain.p50 > 0.15 * BAR


def test_a_head_space_on_record_is_the_breather(small_case: Case) -> None:
    """A plugged breather with one speed: not told without the head space, told with it."""
    truth = replace(SCENARIOS[3], two_speeds=False)
    aligned = record(small_case, truth, seed=8)
    share = np.linspace(0.0, 1.0, aligned.time_s.size)
    turning = aligned.series["shaft speed"].mean > 0
    air = 97304.0  # ISO 2533 at 340 m
    told = changed(aligned, headspace_pressure=air - 0.13 * BAR * share * turning)
    found = estimate_resistances(small_case, told, seed=8)
    assert not isinstance(found, str)
    explained = explain(small_case, *found, seed=8)
    assert explained.leading == Explanation.PLUGGED_BREATHER.value


# --- what becomes of it ----------------------------------------------------------------------


@pytest.fixture(scope="module")
def clogged() -> tuple[Truth, int]:
    return SCENARIOS[1], 11


def test_the_check_survives_storage_and_speaks(small_case: Case, clogged: tuple) -> None:
    truth, seed = clogged
    aligned = record(small_case, truth, seed=seed)
    check = check_suction(small_case, aligned, seed=1, samples=64)
    assert from_plain(SuctionCheck, to_plain(check)) == check
    mended = next(c for c in check.counterfactuals if c.change is Change.CLEAN_STRAINER)
    assert mended.gain.p50 / BAR == pytest.approx(0.26 - 0.036, abs=0.02)
    assert mended.released_after.p50 < mended.released_before.p50
    assert mended.below_limit is not None
    assert mended.below_limit < 0.05
    leak = next(c for c in check.counterfactuals if c.change is Change.LEAK_CLOSED)
    assert leak.gain.p50 == 0.0
    items = {i.key: i for i in from_suction(small_case, check, aligned)}
    viscous = items["inlet.viscous"]
    assert isinstance(viscous, EvidenceItem)
    assert viscous.likelihood["yes"] > 10 * viscous.likelihood["no"]
    for key in ("inlet.quadratic", "inlet.depression"):
        item = items[key]
        assert isinstance(item, EvidenceItem)
        assert item.likelihood["no"] > item.likelihood["yes"]
    words = " ".join(p.answer for p in panels_suction(small_case, check).panels)
    assert "clogging strainer" in words
    assert "nan" not in words


def test_a_drifted_transducer_does_not_make_a_low_inlet(small_case: Case) -> None:
    aligned = record(small_case, replace(SCENARIOS[7], offset=(0.0, -0.2)), seed=12)
    check = check_suction(small_case, aligned, seed=1, samples=64)
    error = transducer_error(check)
    assert error is not None
    assert error.p50 / BAR == pytest.approx(0.2, abs=0.03)
    item = next(i for i in from_suction(small_case, check, aligned) if i.key == "inlet.measured")
    assert isinstance(item, EvidenceItem)
    assert item.likelihood["healthy"] > 5 * item.likelihood["low"]


def test_a_record_that_tells_nothing_weighs_nothing() -> None:
    even = weighed(0.38, 0.38)
    assert even["yes"] == pytest.approx(even["no"])
    assert weighed(0.99, 0.38)["yes"] > weighed(0.6, 0.38)["yes"] > 0.5
