"""How well the verdict's probabilities hold on simulated cases: ``python -m rca.workshop.calibration``.

Prints a report: confusion of sides, Brier score and log loss against base rates, reliability,
false micro-dieseling, abstention on poor and rich cases, rank of the true cause. The limits are
printed with it: simulated cases share the sources of the verdict's knowledge, if not its numbers,
so this tests arithmetic, structure and honesty, and not whether the trade's beliefs are true.
"""

import argparse
from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise

import numpy as np
import numpy.typing as npt

from rca.case.vocabulary import DISCHARGE_MECHANISMS, MECHANISMS, SUCTION_MECHANISMS
from rca.evidence.item import Basis
from rca.verdict.knowledge import Knowledge, shipped_knowledge
from rca.verdict.posterior import marginals, posterior, reported
from rca.workshop.simulated_signs import RICHNESS, draw_items
from rca.workshop.simulated_truth import draw_truth

FloatArray = npt.NDArray[np.float64]
SIDES = ("suction", "discharge", "both", "neither")
BINS = (0.0, 0.05, 0.1, 0.2, 0.35, 0.5, 0.65, 0.8, 0.9, 0.95, 1.0)
LIMITS = """Limits
  The cases are invented. Physics, faults and thresholds are drawn without the knowledge file, but
  the grades of the signs come from the same sources, so an error of the trade is an error of both.
  Faults are drawn nearly evenly, which no plant does; base rates here are not field rates.
  Observers err independently here; in a plant one wrong belief colours many findings."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Outcome:
    """One simulated case with what the verdict said."""

    richness: str
    truth: str
    said: str
    p: dict[str, float]  # suction, discharge and every mechanism
    y: dict[str, bool]
    causes: tuple[str, ...]  # true ones
    ranked: tuple[str, ...]  # most probable first


@dataclass(frozen=True, slots=True, kw_only=True)
class Score:
    """Brier score and log loss [nat] of one statement, and those of its base rate."""

    name: str
    rate: float
    brier: float
    brier_base: float
    log_loss: float
    log_loss_base: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Bin:
    """Predictions of one range and how often they came true."""

    low: float
    high: float
    count: int
    predicted: float
    observed: float


def simulate(count: int, *, seed: int, knowledge: Knowledge | None = None) -> tuple[Outcome, ...]:
    """``count`` cases, poor, usual and rich ones in turn; the same seed gives the same cases."""
    known = knowledge or shipped_knowledge()
    kinds = tuple(RICHNESS)
    return tuple(_one(known, kinds[n % len(kinds)], seed, n) for n in range(count))


def _one(known: Knowledge, richness: str, seed: int, n: int) -> Outcome:
    rng = np.random.default_rng([seed, n])
    truth = draw_truth(rng)
    items, _ = draw_items(rng, truth, richness)
    found = reported(known, items)
    groups = len({i.group for i in items if i.basis is not Basis.STATED})
    hidden = marginals(known, items, known.names("cause"))
    y = {m: m in truth.mechanisms for m in MECHANISMS}
    y |= {
        "suction": any(y[m] for m in SUCTION_MECHANISMS),
        "discharge": any(y[m] for m in DISCHARGE_MECHANISMS),
    }
    sides = found.sides()
    return Outcome(
        richness=richness,
        truth=_side(suction=y["suction"], discharge=y["discharge"]),
        said=found.side(groups)[0],
        p=found.mechanism() | {k: sides[k] for k in ("suction", "discharge")},
        y=y,
        causes=tuple(sorted(truth.causes)),
        ranked=tuple(sorted(hidden, key=lambda c: -hidden[c]["yes"])),
    )


def _side(*, suction: bool, discharge: bool) -> str:
    if suction and discharge:
        return "both"
    return "suction" if suction else "discharge" if discharge else "neither"


def score(outcomes: Sequence[Outcome], name: str) -> Score:
    """Brier score and log loss of one statement against the base rate of these very cases."""
    p = np.clip([o.p[name] for o in outcomes], 1e-6, 1 - 1e-6)
    y = np.array([o.y[name] for o in outcomes], dtype=float)
    rate = float(np.clip(y.mean(), 1e-6, 1 - 1e-6))
    return Score(
        name=name,
        rate=rate,
        brier=float(np.mean((p - y) ** 2)),
        brier_base=rate * (1 - rate),
        log_loss=float(-np.mean(y * np.log(p) + (1 - y) * np.log(1 - p))),
        log_loss_base=float(-(rate * np.log(rate) + (1 - rate) * np.log(1 - rate))),
    )


def cllr(ratios_true: Sequence[float], ratios_false: Sequence[float]) -> float:
    """Cost of likelihood ratios [bit]: 0 perfect, 1 as good as saying nothing, above 1 worse.

    Brümmer and du Preez 2006 (from memory): half the mean of log2(1 + 1/LR) where the statement
    is true plus half the mean of log2(1 + LR) where it is not.
    """
    true, false = np.asarray(ratios_true), np.asarray(ratios_false)
    return float(0.5 * (np.mean(np.log2(1 + 1 / true)) + np.mean(np.log2(1 + false))))


def ratio_cost(outcomes: Sequence[Outcome], name: str, prior: float) -> float:
    """Cllr of the ratios by which the evidence moved the odds of one statement."""
    p = np.clip([o.p[name] for o in outcomes], 1e-6, 1 - 1e-6)
    ratios = p / (1 - p) / (prior / (1 - prior))
    y = np.array([o.y[name] for o in outcomes])
    return cllr(ratios[y].tolist(), ratios[~y].tolist())


def reliability(outcomes: Sequence[Outcome], names: Sequence[str]) -> tuple[Bin, ...]:
    """Predictions of the named statements by range, beside how often they came true."""
    p = np.array([o.p[n] for o in outcomes for n in names])
    y = np.array([o.y[n] for o in outcomes for n in names], dtype=float)
    out = []
    for low, high in pairwise(BINS):
        inside = (p >= low) & ((p < high) | (high == 1.0))
        if inside.any():
            out.append(
                Bin(
                    low=low,
                    high=high,
                    count=int(inside.sum()),
                    predicted=float(p[inside].mean()),
                    observed=float(y[inside].mean()),
                )
            )
    return tuple(out)


def false_alarms(outcomes: Sequence[Outcome]) -> tuple[int, int]:
    """(cases called discharge or both without micro-dieseling, cases without it)."""
    without = [o for o in outcomes if not o.y["discharge"]]
    return sum(o.said in ("discharge", "both") for o in without), len(without)


def abstained(outcomes: Sequence[Outcome], richness: str) -> float:
    """Share of the cases of one richness that were called undetermined."""
    mine = [o for o in outcomes if o.richness == richness]
    return sum(o.said == "undetermined" for o in mine) / max(len(mine), 1)


def right_when_said(outcomes: Sequence[Outcome]) -> tuple[int, int]:
    """(right, all) of the cases in which a side was named."""
    said = [o for o in outcomes if o.said != "undetermined"]
    return sum(o.said == o.truth for o in said), len(said)


def report(outcomes: Sequence[Outcome]) -> str:
    """All of it as text."""
    return "\n\n".join(
        (
            f"{len(outcomes)} simulated cases, knowledge {shipped_knowledge().identity}",
            _confusion(outcomes),
            _scores(outcomes),
            _reliability(outcomes),
            _rates(outcomes),
            LIMITS,
        )
    )


def _confusion(outcomes: Sequence[Outcome]) -> str:
    counts = Counter((o.truth, o.said) for o in outcomes)
    said = (*SIDES, "undetermined")
    lines = ["Side: truth down, verdict across", f"{'':>12}" + "".join(f"{s:>14}" for s in said)]
    lines += [f"{t:>12}" + "".join(f"{counts[t, s]:>14}" for s in said) for t in SIDES]
    return "\n".join(lines)


def _scores(outcomes: Sequence[Outcome]) -> str:
    prior = posterior(shipped_knowledge(), [])
    before = prior.mechanism() | prior.sides()
    lines = [
        f"{'':>24}{'rate':>8}{'prior':>8}{'Brier':>9}{'of rate':>9}{'log loss':>10}{'of rate':>9}"
        f"{'Cllr':>7}"
    ]
    for name in ("suction", "discharge", *MECHANISMS):
        s = score(outcomes, name)
        lines.append(
            f"{name:>24}{s.rate:>8.2f}{before[name]:>8.2f}{s.brier:>9.3f}{s.brier_base:>9.3f}"
            f"{s.log_loss:>10.3f}{s.log_loss_base:>9.3f}"
            f"{ratio_cost(outcomes, name, before[name]):>7.2f}"
        )
    return "\n".join(lines)


def _reliability(outcomes: Sequence[Outcome]) -> str:
    parts = []
    for title, names in (
        ("suction", ("suction",)),
        ("discharge", ("discharge",)),
        ("all mechanisms", MECHANISMS),
    ):
        lines = [f"Reliability, {title}: range, cases, mean said, came true"]
        lines += [
            f"  {b.low:.2f}-{b.high:.2f} {b.count:>6} {b.predicted:>6.2f} {b.observed:>6.2f} "
            + "#" * round(30 * b.observed)
            for b in reliability(outcomes, names)
        ]
        parts.append("\n".join(lines))
    return "\n\n".join(parts)


def _rates(outcomes: Sequence[Outcome]) -> str:
    wrong, without = false_alarms(outcomes)
    right, said = right_when_said(outcomes)
    caused = [o for o in outcomes if o.causes]
    first = sum(o.ranked[0] in o.causes for o in caused)
    three = sum(bool(set(o.ranked[:3]) & set(o.causes)) for o in caused)
    lines = [
        f"Micro-dieseling found where there was none: {wrong} of {without}",
        f"Side right where one was named: {right} of {said}",
        f"A true cause first: {first} of {len(caused)}; among the first three: {three}",
    ]
    for kind in RICHNESS:
        mine = [o for o in outcomes if o.richness == kind]
        right, said = right_when_said(mine)
        lines.append(
            f"{kind}: undetermined {abstained(mine, kind):.0%}, else right {right}/{said}"
        )
    return "\n".join(lines)


def main() -> None:
    """Simulate and print."""
    parser = argparse.ArgumentParser(description="Calibration of the verdict on simulated cases.")
    parser.add_argument("--cases", type=int, default=1000)
    parser.add_argument("--seed", type=int, default=1)
    chosen = parser.parse_args()
    print(report(simulate(chosen.cases, seed=chosen.seed)))


if __name__ == "__main__":
    main()
