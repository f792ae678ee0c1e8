"""Draws from a Gaussian some of whose coordinates can't be negative."""

import numpy as np
import numpy.typing as npt
from scipy.optimize import lsq_linear
from scipy.special import ndtr, ndtri
from scipy.stats import multivariate_normal

FloatArray = npt.NDArray[np.float64]
Mask = npt.NDArray[np.bool_]
BURN_IN, KEPT = 8, 10  # sweeps before draws are kept, and draws kept of each chain


def bounded_mixture(
    weights: FloatArray,
    means: FloatArray,
    covariances: FloatArray,
    bounded: Mask,
    number: int,
    rng: np.random.Generator,
) -> tuple[FloatArray, float, Mask]:
    """Draws of a Gaussian mixture given that the ``bounded`` coordinates are not negative.

    ``weights`` (G,), ``means`` (G, D), ``covariances`` (G, D, D); returns draws (number, D), the
    distance of the most probable allowed point from the unbounded mean in standard deviations
    (above three, the data contradict the bounds), and which coordinates sit on their bound there.
    Each component counts with its share of the allowed region (A. Genz's integration, as in
    scipy). Gibbs sampling along the principal axes, so that collinear coordinates do not slow it.
    """
    shares = np.array(
        [
            w * _allowed(m[bounded], c[np.ix_(bounded, bounded)], rng)
            for w, m, c in zip(weights, means, covariances, strict=True)
        ]
    )
    shares = shares / shares.sum() if shares.sum() > 0.0 else weights
    parts, distances, active = [], [], np.zeros(bounded.size)
    for share, mean, covariance, n in zip(
        shares, means, covariances, rng.multinomial(number, shares), strict=True
    ):
        if not n:
            continue
        draws, distance, on_bound = _bounded(mean, covariance, bounded, int(n), rng)
        parts.append(draws)
        distances.append(share * distance)
        active += share * on_bound
    return np.concatenate(parts), float(np.sum(distances)), active > 0.5


def _allowed(mean: FloatArray, covariance: FloatArray, rng: np.random.Generator) -> float:
    """Probability that no coordinate is negative."""
    if not mean.size or (mean > 5.0 * np.sqrt(np.diag(covariance))).all():
        return 1.0
    return float(
        multivariate_normal.cdf(
            np.zeros(mean.size),
            mean=-mean,
            cov=covariance,
            allow_singular=True,
            maxpts=500 * mean.size,
            rng=rng,
        )
    )


def _bounded(
    mean: FloatArray, covariance: FloatArray, bounded: Mask, number: int, rng: np.random.Generator
) -> tuple[FloatArray, float, Mask]:
    values, vectors = np.linalg.eigh(covariance)
    root = vectors * np.sqrt(np.maximum(values, 1e-14 * values[-1]))  # columns: principal axes
    start = _most_probable(mean, root, bounded)
    z = np.repeat(start[None, :], -(-number // KEPT), axis=0)
    rows, base = root[bounded], mean[bounded]
    room = base + z @ rows.T  # value of each bounded coordinate, (chains, bounds)
    kept = []
    for sweep in range(BURN_IN + KEPT):
        for axis in range(mean.size):
            slope = rows[:, axis]
            rest = room - z[:, axis, None] * slope
            edge = -rest / np.where(slope == 0.0, np.nan, slope)
            up = slope > 0.0
            low = edge[:, up].max(axis=1, initial=-np.inf)
            high = edge[:, slope < 0.0].min(axis=1, initial=np.inf)
            z[:, axis] = _between(low, np.maximum(low, high), rng)
            room = rest + z[:, axis, None] * slope
        if sweep >= BURN_IN:
            kept.append(z.copy())
    z = np.concatenate(kept)[:number]
    point = mean + root @ start
    scale = np.sqrt(np.diag(covariance))
    on_bound = bounded & (point < 1e-3 * scale) & (mean < 0.0)
    return mean + z @ root.T, float(np.linalg.norm(start)), on_bound


def _most_probable(mean: FloatArray, root: FloatArray, bounded: Mask) -> FloatArray:
    """The allowed point of highest density, in principal axes."""
    if (mean[bounded] >= 0.0).all():
        return np.zeros(mean.size)
    inverse = np.linalg.inv(root)
    lower = np.where(bounded, 0.0, -np.inf)
    found = lsq_linear(inverse, inverse @ mean, bounds=(lower, np.inf), method="bvls")
    return np.asarray(inverse @ (np.maximum(found.x, lower) - mean))


def _between(low: FloatArray, high: FloatArray, rng: np.random.Generator) -> FloatArray:
    """Standard normal values between two bounds, by inversion in the nearer tail."""
    flip = low > 0.0
    a, b = np.where(flip, -high, low), np.where(flip, -low, high)
    p, q = ndtr(a), ndtr(b)
    value = ndtri(p + rng.random(a.size) * (q - p))
    value = np.clip(np.where(np.isfinite(value), value, b), a, b)
    return np.asarray(np.where(flip, -value, value))
