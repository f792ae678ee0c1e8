"""Numbers worked by hand from published formulas, through the network's own exact inference."""

import numpy as np
import pytest

from rca.verdict.inference import Factor, joint
from rca.workshop.calibration import cllr


def ratio(*factors: Factor) -> float:
    """P(evidence | H) over P(evidence | not H), with even odds before."""
    table = joint([Factor(("H",), np.array([[0.5, 0.5]])), *factors], ("H",))[0]
    return float(table[1] / table[0])


@pytest.mark.outside_value(source="P'(E|H) = r P(E|H) + (1 - r) q with q = 0.5, by hand")
@pytest.mark.parametrize(("r", "expected"), [(1.0, 8.0), (0.9, 5.50), (0.7, 3.227), (0.5, 2.167)])
def test_reliability_of_a_source_shrinks_its_ratio(r: float, expected: float) -> None:
    sound = Factor(("sound",), np.array([[1 - r, r]]))
    look = Factor(("sound", "H"), np.array([[[0.5, 0.5], [0.1, 0.8]]]))
    assert ratio(sound, look) == pytest.approx(expected, abs=5e-3)


@pytest.mark.outside_value(source="chain rule P(E1|H) P(E2|E1,H), by hand: 8.44, naive 64")
def test_an_item_nearly_implied_by_another_adds_next_to_nothing() -> None:
    first = Factor(("H",), np.array([[0.1, 0.8]]))
    second = Factor(("H",), np.array([[0.90, 0.95]]))
    assert ratio(first, second) == pytest.approx(8.44, abs=5e-3)
    assert ratio(first, first) == pytest.approx(64.0)


@pytest.mark.outside_value(source="LR against the weighted rest, by hand: 4.00, 6.67, 2.86")
@pytest.mark.parametrize(
    ("weights", "expected"), [((0.5, 0.5), 4.00), ((0.9, 0.1), 6.67), ((0.1, 0.9), 2.86)]
)
def test_a_ratio_against_the_rest_depends_on_the_weights(
    weights: tuple[float, float], expected: float
) -> None:
    prior = Factor(("state",), np.array([[0.5, 0.5 * weights[0], 0.5 * weights[1]]]))
    seen = Factor(("state",), np.array([[0.8, 0.1, 0.3]]))
    table = joint([prior, seen], ("state",))[0]
    assert table[0] / (table[1] + table[2]) == pytest.approx(expected, abs=5e-3)


@pytest.mark.outside_value(source="EIG = H(p) - sum P(t) H(p|t), by hand")
@pytest.mark.parametrize(
    ("prior", "test", "expected"),
    [
        ((0.35, 0.35, 0.30), (0.10, 0.85, 0.15), 0.3957),
        ((0.35, 0.35, 0.30), (0.55, 0.65, 0.50), 0.0114),
        ((0.35, 0.35, 0.30), (0.90, 0.90, 0.20), 0.3483),
        ((0.05, 0.90, 0.05), (0.10, 0.85, 0.15), 0.1619),
    ],
)
def test_expected_information_of_a_test(
    prior: tuple[float, ...], test: tuple[float, ...], expected: float
) -> None:
    found = np.array(test)
    looks = Factor(("state", "found"), np.stack([1 - found, found], axis=1)[None])
    table = joint([Factor(("state",), np.array([prior])), looks], ("state", "found"))[0]

    def entropy(p: np.ndarray) -> float:
        return float(-(p * np.log2(p)).sum())

    chance = table.sum(axis=0)
    gain = entropy(np.array(prior)) - sum(
        float(chance[k]) * entropy(table[:, k] / chance[k]) for k in (0, 1)
    )
    assert gain == pytest.approx(expected, abs=1e-4)


@pytest.mark.outside_value(source="Cllr by hand: 1.000, 0.0559, 3.32")
@pytest.mark.parametrize(
    ("true", "false", "expected"),
    [
        ((1.0, 1.0), (1.0, 1.0), 1.0),
        ((100.0, 50.0, 20.0), (0.01, 0.05, 0.1), 0.0559),
        ((1e4, 1e4, 1e-3), (1e-4, 1e-4, 1e3), 3.32),
    ],
)
def test_the_cost_of_ratios(
    true: tuple[float, ...], false: tuple[float, ...], expected: float
) -> None:
    assert cllr(true, false) == pytest.approx(expected, abs=5e-3)
