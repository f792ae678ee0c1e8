"""Bayesian regression with coefficients that move in time along straight pieces between knots.

Each coefficient is a first value and a random walk from knot to knot. How far it may walk is not
known, so a grid of walk lengths is averaged with the weight the data give each (marginal
likelihood). Given a walk length and the noise, everything is Gaussian and exact: A. Gelman et al.,
Bayesian Data Analysis, 3rd ed., ch. 14 (conjugate linear model), from memory.
"""

from dataclasses import dataclass
from itertools import product

import numpy as np
import numpy.typing as npt
from scipy.linalg import cho_factor, cho_solve

FloatArray = npt.NDArray[np.float64]
CLIP = 5.0  # robust standard deviations beyond which a row is set aside
ROUNDS = 3
LEAST_BLOCKS = 16  # fewer blocks do not give a variance worth having


@dataclass(frozen=True, slots=True, kw_only=True)
class Prior:
    """What is believed of one coefficient before the data."""

    mean: float
    sd: float  # of its first value
    walks: tuple[
        float, ...
    ]  # standard deviations of its walk over the whole record, equally likely


@dataclass(frozen=True, slots=True, kw_only=True)
class VaryingFit:
    """A mixture of Gaussians over the coefficients at the knots.

    ``means`` is (G, P K) with the P coefficients of knot 0 first, ``covariances`` (G, P K, P K).
    """

    knots: FloatArray  # (K,) [s]
    weights: FloatArray  # (G,)
    means: FloatArray
    covariances: FloatArray
    noise: float  # standard deviation of one row
    inflation: float  # rows that carry the information of one independent row
    kept: npt.NDArray[np.bool_]  # rows within CLIP
    residual: FloatArray  # all rows, about the mixture's mean

    @property
    def parameters(self) -> int:
        """Number of coefficients at one knot."""
        return int(self.means.shape[1]) // int(self.knots.size)


def fit_varying(
    time: FloatArray, y: FloatArray, x: FloatArray, knots: FloatArray, priors: tuple[Prior, ...]
) -> VaryingFit:
    """Fit y = sum_p theta_p(t) x_p + noise; ``time`` (n,) rising, ``x`` (n, P), ``knots`` (K,).

    Noise is estimated robustly (median absolute deviation) and its standard error widened for
    autocorrelation by the blocking method of H. Flyvbjerg and H. Petersen, J. Chem. Phys. 91
    (1989) 461 (from memory), with the largest factor found at any block length: it errs wide.
    Raises ValueError for fewer rows than knots or a value that is not finite.
    """
    if time.size < max(knots.size, 4) or not (np.isfinite(y).all() and np.isfinite(x).all()):
        raise ValueError("fit_varying needs finite rows, and at least as many as knots")
    kept = np.ones(time.size, dtype=bool)
    hats = _Hats(time, knots)
    noise, inflation = max(float(np.std(y)), 1.0), 1.0
    freest = tuple(
        Prior(mean=p.mean, sd=p.sd, walks=(max(p.walks),)) for p in priors
    )  # the freest walk, only to find noise and outliers
    solution = _Solution(hats, y, x, kept, freest, noise, inflation)
    for _ in range(ROUNDS):
        residual = y - hats.predict(solution.mean, x)
        noise = max(_robust_sd(residual), 1e-6 * max(float(np.ptp(y)), 1.0))
        kept = np.abs(residual) <= CLIP * noise
        inflation = _inflation(residual[kept])
        solution = _Solution(hats, y, x, kept, freest, noise, inflation)
    solution = _Solution(hats, y, x, kept, priors, noise, inflation)
    return VaryingFit(
        knots=knots,
        weights=solution.weights,
        means=solution.means,
        covariances=solution.covariances,
        noise=noise,
        inflation=inflation,
        kept=kept,
        residual=y - hats.predict(solution.mean, x),
    )


class _Hats:
    """Straight pieces between knots: every row touches the two knots it lies between."""

    def __init__(self, time: FloatArray, knots: FloatArray) -> None:
        self.count = knots.size
        if knots.size == 1:
            self.left = np.zeros(time.size, dtype=np.int64)
            self.share = np.zeros(time.size)
            return
        self.left = np.clip(np.searchsorted(knots, time, side="right") - 1, 0, knots.size - 2)
        step = np.diff(knots)[self.left]
        self.share = np.clip((time - knots[self.left]) / step, 0.0, 1.0)

    def moments(
        self, y: FloatArray, x: FloatArray, kept: npt.NDArray[np.bool_]
    ) -> tuple[FloatArray, FloatArray]:
        """X'X and X'y over all knots, piece by piece; nothing of the size of the rows is built."""
        p = x.shape[1]
        xx, xy = np.zeros((p * self.count, p * self.count)), np.zeros(p * self.count)
        for piece in range(max(self.count - 1, 1)):
            rows = kept & (self.left == piece)
            if not rows.any():
                continue
            w = self.share[rows, None]
            both = np.hstack([x[rows] * (1.0 - w), x[rows] * w])
            size = both.shape[1] if self.count > 1 else p
            place = slice(piece * p, piece * p + size)
            xx[place, place] += both[:, :size].T @ both[:, :size]
            xy[place] += both[:, :size].T @ y[rows]
        return xx, xy

    def predict(self, theta: FloatArray, x: FloatArray) -> FloatArray:
        table = theta.reshape(self.count, -1)
        right = np.minimum(self.left + 1, self.count - 1)
        w = self.share[:, None]
        return np.asarray(((table[self.left] * (1 - w) + table[right] * w) * x).sum(axis=1))


class _Solution:
    """Posterior for every combination of walk lengths, and their weights."""

    def __init__(
        self,
        hats: _Hats,
        y: FloatArray,
        x: FloatArray,
        kept: npt.NDArray[np.bool_],
        priors: tuple[Prior, ...],
        noise: float,
        inflation: float,
    ) -> None:
        xx, xy = hats.moments(y, x, kept)
        scale = 1.0 / (noise**2 * inflation)
        results = [
            _posterior(xx * scale, xy * scale, priors, walks, hats.count)
            for walks in product(*(prior.walks for prior in priors))
        ]
        evidence = np.array([r[2] for r in results])
        weights = np.exp(evidence - evidence.max())
        weights /= weights.sum()
        use = weights > 1e-3
        self.weights = weights[use] / weights[use].sum()
        self.means = np.array([r[0] for r, u in zip(results, use, strict=True) if u])
        unit = np.eye(xy.size)
        self.covariances = np.array(
            [cho_solve(r[1], unit) for r, u in zip(results, use, strict=True) if u]
        )
        self.mean = self.weights @ self.means


def _posterior(
    xx: FloatArray, xy: FloatArray, priors: tuple[Prior, ...], walks: tuple[float, ...], knots: int
) -> tuple[FloatArray, tuple[FloatArray, bool], float]:
    """Mean, Cholesky factor of the precision, and logarithm of the evidence but for a constant."""
    precision, log_det = prior_precision(priors, walks, knots)
    mean_0 = np.tile([prior.mean for prior in priors], knots)
    factor = cho_factor(xx + precision, lower=True)
    rhs = xy + precision @ mean_0
    mean = cho_solve(factor, rhs)
    log_post = 2.0 * float(np.sum(np.log(np.diag(factor[0]))))
    evidence = 0.5 * (log_det - log_post + float(rhs @ mean - mean_0 @ precision @ mean_0))
    return mean, factor, evidence


def prior_precision(
    priors: tuple[Prior, ...], walks: tuple[float, ...], knots: int
) -> tuple[FloatArray, float]:
    """Precision matrix of first values and walks, and the logarithm of its determinant."""
    p = len(priors)
    out, log_det = np.zeros((p * knots, p * knots)), 0.0
    for j, (prior, walk) in enumerate(zip(priors, walks, strict=True)):
        first = prior.sd**-2
        out[j, j] += first
        log_det += np.log(first)
        if knots == 1:
            continue
        step = (knots - 1) / walk**2
        log_det += (knots - 1) * np.log(step)
        for k in range(knots - 1):
            a, b = k * p + j, (k + 1) * p + j
            out[a, a] += step
            out[b, b] += step
            out[a, b] -= step
            out[b, a] -= step
    return out, float(log_det)


def _robust_sd(values: FloatArray) -> float:
    return float(1.4826 * np.median(np.abs(values - np.median(values))))


def _inflation(residual: FloatArray) -> float:
    """Largest ratio of block-mean variance to what independent rows would give."""
    total = float(np.var(residual))
    worst, length = 1.0, 2
    while total > 0 and residual.size // length >= LEAST_BLOCKS:
        blocks = residual[: residual.size // length * length].reshape(-1, length).mean(axis=1)
        worst = max(worst, length * float(np.var(blocks)) / total)
        length *= 2
    return worst
