"""Bayesian regression with coefficients that move in time along straight pieces between knots.

Each coefficient is a first value and a random walk from knot to knot. Whether it starts where it
should and how far it walks is not known, so a few courses of each are averaged with the weight
the data give them (marginal likelihood). Given the courses and the noise, everything is Gaussian
and exact: A. Gelman et al., Bayesian Data Analysis, 3rd ed., ch. 14 (conjugate linear model), from
memory.
"""

from dataclasses import dataclass
from itertools import product

import numpy as np
import numpy.typing as npt
from scipy.linalg import cho_solve
from scipy.linalg.lapack import dpotrf, dpotrs

FloatArray = npt.NDArray[np.float64]
CLIP = 5.0  # robust standard deviations beyond which a row is set aside
ROUNDS = 3
LEAST_WEIGHT = 0.01  # combinations below it are dropped
LEAST_BLOCKS = 16  # fewer blocks do not give a variance worth having


@dataclass(frozen=True, slots=True, kw_only=True)
class Course:
    """One way a coefficient may run before the data are seen: a first value and a random walk."""

    mean: float  # of the first value
    sd: float
    walk: float  # standard deviation of the walk over the whole record
    weight: float  # how probable this course is beside the coefficient's others


Prior = tuple[Course, ...]  # of one coefficient; weights add up to one


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
    # the freest course of each, only to find noise and outliers
    freest = tuple((max(prior, key=lambda course: course.walk * course.sd),) for prior in priors)
    solution = _Solution(hats, y, x, kept, freest, noise, inflation)
    for _ in range(ROUNDS):
        residual = y - hats.predict(solution.mean, x)
        noise = max(_robust_sd(residual), 1e-6 * max(float(np.ptp(y)), 1.0))
        # about the median, as gross errors can pull the first fit off every good row
        kept = np.abs(residual - np.median(residual)) <= CLIP * noise
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
    """Posterior for every combination of courses, and their weights."""

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
        precisions = [
            [course_precision(course, j, len(priors), hats.count) for course in prior]
            for j, prior in enumerate(priors)
        ]
        results = [_posterior(xx * scale, xy * scale, pieces) for pieces in product(*precisions)]
        evidence = np.array([r[2] for r in results])
        weights = np.exp(evidence - evidence.max())
        weights /= weights.sum()
        use = weights > LEAST_WEIGHT
        self.weights = weights[use] / weights[use].sum()
        self.means = np.array([r[0] for r, u in zip(results, use, strict=True) if u])
        unit = np.eye(xy.size)
        self.covariances = np.array(
            [cho_solve((r[1], True), unit) for r, u in zip(results, use, strict=True) if u]
        )
        self.mean = self.weights @ self.means


Piece = tuple[FloatArray, FloatArray, float]  # precision, precision times mean, constant


def _posterior(
    xx: FloatArray, xy: FloatArray, pieces: tuple[Piece, ...]
) -> tuple[FloatArray, FloatArray, float]:
    """Mean, Cholesky factor of the precision, and logarithm of the evidence but for a constant."""
    precision, rhs, constant = xx.copy(), xy.copy(), 0.0
    for piece in pieces:
        precision += piece[0]
        rhs += piece[1]
        constant += piece[2]
    factor, failed = dpotrf(precision, lower=1, clean=1)
    if failed:
        raise ValueError("the precision of the coefficients is not positive definite")
    mean, _ = dpotrs(factor, rhs, lower=1)
    log_post = 2.0 * float(np.sum(np.log(np.diag(factor))))
    return mean, factor, 0.5 * (constant - log_post + float(rhs @ mean))


def course_precision(course: Course, place: int, parameters: int, knots: int) -> Piece:
    """Precision of one coefficient's first value and walk, among ``parameters`` at each knot.

    With it, precision times mean, and log-determinant less the mean's own quadratic form plus
    twice the logarithm of the weight, which is what the evidence needs of it.
    """
    own = np.zeros((knots, knots))
    own[0, 0] = course.sd**-2
    if knots > 1:
        step = (knots - 1) / course.walk**2
        edge = np.arange(knots - 1)
        own[edge, edge] += step
        own[edge + 1, edge + 1] += step
        own[edge, edge + 1] -= step
        own[edge + 1, edge] -= step
    log_det = -2.0 * np.log(course.sd)
    log_det += (knots - 1) * np.log((knots - 1) / course.walk**2) if knots > 1 else 0.0
    size = parameters * knots
    out, shifted = np.zeros((size, size)), np.zeros(size)
    here = np.arange(knots) * parameters + place
    out[np.ix_(here, here)] = own
    shifted[here] = own @ np.full(knots, course.mean)
    constant = log_det - course.mean**2 / course.sd**2 + 2.0 * np.log(course.weight)
    return out, shifted, float(constant)


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
