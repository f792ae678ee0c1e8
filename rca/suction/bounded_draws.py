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
) -> tuple[FloatArray, float]:
    """Draws of a Gaussian mixture given that the ``bounded`` coordinates are not negative.

    ``weights`` (G,), ``means`` (G, D), ``covariances`` (G, D, D); returns draws (number, D) and
    the distance of the most probable allowed point from the unbounded mean in standard deviations
    (above three, the data contradict the bounds).
    Each component counts with its share of the allowed region (A. Genz's integration, as in
    scipy). Gibbs sampling along the principal axes, so that collinear coordinates do not slow it.
    """
    draws, distances = bounded_mixtures(
        weights, means[None], covariances[None], bounded, number, rng
    )
    return draws[0], float(distances[0])


def bounded_mixtures(
    weights: FloatArray,
    means: FloatArray,
    covariances: FloatArray,
    bounded: Mask,
    number: int,
    rng: np.random.Generator,
) -> tuple[FloatArray, FloatArray]:
    """The same for K mixtures that share their weights: ``means`` (K, G, D) and so on.

    Returns draws (K, number, D) and distances (K,).
    """
    k, g, d = means.shape
    flat_means, flat = means.reshape(-1, d), covariances.reshape(-1, d, d)
    corner = np.ix_(bounded, bounded)
    pairs = zip(flat_means, flat, strict=True)
    allowed = np.array([_allowed(m[bounded], c[corner], rng) for m, c in pairs]).reshape(k, g)
    shares = allowed * weights
    total = shares.sum(axis=1, keepdims=True)
    shares = np.where(total > 0.0, shares / np.where(total > 0.0, total, 1.0), weights)
    chains = -(-number // KEPT)
    edges = np.floor(np.cumsum(shares, axis=1) * chains + rng.random((k, 1)))
    edges[:, -1] = chains  # every component within one chain of its share
    counts = np.diff(np.minimum(edges, chains), axis=1, prepend=0.0).astype(np.int64)
    values, vectors = np.linalg.eigh(flat)
    roots = vectors * np.sqrt(np.maximum(values, 1e-14 * values[:, -1:]))[:, None, :]
    starts = np.array(
        [_most_probable(m, r, bounded) for m, r in zip(flat_means, roots, strict=True)]
    )
    which = np.repeat(np.arange(k * g), counts.ravel())
    draws = _chains(flat_means[which], roots[which], starts[which], bounded, rng)
    draws = draws.reshape(KEPT, k, chains, d).transpose(1, 2, 0, 3).reshape(k, -1, d)[:, :number]
    distance = (shares * np.linalg.norm(starts, axis=1).reshape(k, g)).sum(axis=1)
    return np.asarray(draws), np.asarray(distance)


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
            abseps=0.003,
            releps=0.03,
            rng=rng,
        )
    )


def _chains(
    means: FloatArray,
    roots: FloatArray,
    starts: FloatArray,
    bounded: Mask,
    rng: np.random.Generator,
) -> FloatArray:
    """Gibbs chains side by side, one a row of ``means``; draws (KEPT, chains, D)."""
    z = starts.copy()
    rows = roots[:, bounded, :]  # (chains, bounds, D)
    room = means[:, bounded] + np.einsum("cbd,cd->cb", rows, z)
    kept = []
    for sweep in range(BURN_IN + KEPT):
        for axis in range(means.shape[1]):
            slope = rows[:, :, axis]
            rest = room - z[:, axis, None] * slope
            edge = -rest / np.where(slope == 0.0, np.nan, slope)
            low = np.where(slope > 0.0, edge, -np.inf).max(axis=1, initial=-np.inf)
            high = np.where(slope < 0.0, edge, np.inf).min(axis=1, initial=np.inf)
            z[:, axis] = _between(low, np.maximum(low, high), rng)
            room = rest + z[:, axis, None] * slope
        if sweep >= BURN_IN:
            kept.append(means + np.einsum("cij,cj->ci", roots, z))
    return np.array(kept)


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
