"""Straight lines through positions whose errors are correlated in time.

The centre of a silhouette errs from frame to frame (white noise), with the sub-pixel position and with the turning of
the grain (correlated noise). Errors are described as white noise plus an exponentially correlated part; its share and
its correlation time are unknown and are averaged over, weighted by the restricted likelihood. So the uncertainty of a
slope grows with correlation that the residuals show, and a little with correlation that so few points cannot exclude.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from settlelab.physics.constants import FloatArray

_BLOCKS = 48  # positions are averaged to at most so many before the regression
_CORRELATION_TIMES = (0.03, 0.08, 0.2, 0.5)  # over the length of the window
_WHITE_SHARES = (0.0, 0.1, 0.3, 0.6)  # of the variance
_PRIOR_WHITE = 0.5  # of the noise being white; the other models share the rest


@dataclass(frozen=True, slots=True)
class NoiseModels:
    """Whitening matrices of H noise models for n equally spaced points."""

    whitening: FloatArray  # (H, n, n)
    log_weight: FloatArray  # (H,) log prior less half the log determinant of the covariance


@lru_cache(maxsize=64)
def noise_models(count: int) -> NoiseModels:
    """White noise, and every combination of correlation time and white share."""
    apart = np.abs(np.subtract.outer(np.arange(count), np.arange(count))) / count
    covariances = [np.eye(count)]
    for length in _CORRELATION_TIMES:
        covariances += [share * np.eye(count) + (1 - share) * np.exp(-apart / length) for share in _WHITE_SHARES]
    values, vectors = np.linalg.eigh(np.array(covariances))
    prior = np.full(len(covariances), (1 - _PRIOR_WHITE) / (len(covariances) - 1))
    prior[0] = _PRIOR_WHITE
    return NoiseModels(
        whitening=np.swapaxes(vectors, 1, 2) / np.sqrt(values)[:, :, None],
        log_weight=np.log(prior) - 0.5 * np.log(values).sum(axis=1),
    )


def blocks(columns: FloatArray) -> FloatArray:
    """Means of (N, p) columns over at most 48 stretches of equally many rows."""
    count = columns.shape[0]
    starts = np.arange(min(count, _BLOCKS)) * count // min(count, _BLOCKS)
    sizes = np.diff(np.append(starts, count))
    return np.asarray(np.add.reduceat(columns, starts, axis=0) / sizes[:, None])


@dataclass(frozen=True, slots=True)
class Regression:
    """Least squares of y on the columns of a design, under each of H noise models."""

    basis: FloatArray  # (H, n, p) orthonormal columns of the whitened design
    inverse: FloatArray  # (H, p, p) of the triangular factor
    response: FloatArray  # (H, n) whitened y
    rss: FloatArray  # (H,) residual sum of squares
    log_without_rss: FloatArray  # (H,) restricted likelihood, prior included, without its term in rss
    degrees: int

    @property
    def log_likelihood(self) -> FloatArray:
        """(H,)."""
        return np.asarray(self.log_without_rss - self.degrees / 2 * np.log(self.rss))

    @property
    def coefficients(self) -> FloatArray:
        """(H, p)."""
        return np.asarray(np.einsum("hij,hnj,hn->hi", self.inverse, self.basis, self.response))

    def averaged(self, column: int) -> tuple[float, float]:
        """Coefficient of a column and its standard uncertainty, averaged over the noise models."""
        variance = self.rss / (self.degrees - 2) * np.sum(self.inverse[:, column] ** 2, axis=1)
        return mixture(self.coefficients[:, column], variance, weights(self.log_likelihood))


def regress(design: FloatArray, y: FloatArray) -> Regression:
    """Least squares under every noise model.

    Parameters
    ----------
    design : (n, p) array
        Columns, in block means.
    y : (n,) array
        Block means, n at least p + 3.

    Returns
    -------
    Regression
    """
    models = noise_models(len(y))
    basis, triangle = np.linalg.qr(models.whitening @ design)
    response = models.whitening @ y
    rss = np.sum(response**2, axis=1) - np.sum(np.einsum("hnp,hn->hp", basis, response) ** 2, axis=1)
    rss = np.maximum(rss, 1e-24 * np.sum(response**2, axis=1) + 1e-300)  # of an exact line only rounding is left
    diagonal = np.abs(np.diagonal(triangle, axis1=1, axis2=2))
    degrees = len(y) - design.shape[1]
    return Regression(
        basis=basis,
        inverse=np.linalg.inv(triangle),
        response=response,
        rss=rss,
        log_without_rss=models.log_weight - np.log(diagonal).sum(axis=1),
        degrees=degrees,
    )


def weights(log_likelihood: FloatArray) -> FloatArray:
    """Likelihoods scaled to add up to 1."""
    likelihood = np.exp(log_likelihood - np.max(log_likelihood))
    return np.asarray(likelihood / likelihood.sum())


def mixture(values: FloatArray, variances: FloatArray, weight: FloatArray) -> tuple[float, float]:
    """Mean and standard deviation of a mixture of distributions."""
    mean = float(np.sum(weight * values))
    return mean, float(np.sqrt(np.sum(weight * (variances + (values - mean) ** 2))))
