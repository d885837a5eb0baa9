"""How the measured velocities vary together: what is known of it, and the scatter that the drops themselves show.

All covariances are of ln V, hence relative. An error of a particle's size, density or shape is the same in all its
drops; one of a fluid's density or viscosity is the same in all drops in that fluid, and does not average out. Nor does
that of the sphere law under a form, which all drops at like Reynolds numbers share.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray
from scipy.linalg import cholesky_banded, solve_banded
from scipy.optimize import minimize

from settlelab.calibrate.falls import Law, drag_sensitivity, sensitivity
from settlelab.calibrate.observations import Observations
from settlelab.physics.constants import FloatArray

__all__ = ["Covariance", "Whitening", "deviance", "known_covariance", "law_effects", "restricted_scatter"]

FLOOR = 1e-4  # no velocity is known to better than 0.01 %, which also keeps the covariance invertible
_OF_FLUID = frozenset({"fluid_density", "viscosity"})
_FINE = 1e-3  # of the search: far below what any number of drops tells about a scatter
_NEGLIGIBLE = 1e-3  # an estimated scatter below 0.1 % is none


@dataclass(frozen=True, slots=True, kw_only=True)
class Covariance:
    """Covariance of N observations by its causes, never written out: thousands of drops cost no more than their number.

    Each effect is a column of standard deviations with sign; within a particle, or throughout, it acts on all at once.
    """

    own: FloatArray  # (N,) variance that belongs to an observation alone
    particle: NDArray[np.int64]  # (N,) its particle
    of_particle: FloatArray  # (N, E) effects common to the observations of a particle
    common: FloatArray  # (N, F) effects common to all for which they are not 0

    @property
    def variance(self) -> FloatArray:
        """(N,) variance of each observation."""
        return np.asarray(self.own + np.sum(self.of_particle**2, axis=1) + np.sum(self.common**2, axis=1))

    @property
    def scatters(self) -> int:
        """How many parts of an unexplained scatter can be told apart: two where particles stand several times."""
        return 1 if len(np.unique(self.particle)) == len(self.particle) else 2

    def with_scatter(self, scatter: FloatArray) -> Covariance:
        """With a scatter between particles and, if given, one of a particle between fluids (standard deviations)."""
        between = np.full((len(self.own), 1), scatter[0])
        own = self.own + scatter[1] ** 2 if len(scatter) > 1 else self.own
        return replace(self, own=own, of_particle=np.hstack([self.of_particle, between]))

    def whitening(self) -> Whitening:
        """Its inverse root: a banded one for what stays within particles, a low-rank one for what is common."""
        order = np.argsort(self.particle, kind="stable")
        particle, effects = self.particle[order], self.of_particle[order]
        size = len(order)
        bands = np.zeros((int(np.bincount(particle).max()), size))
        for offset in range(len(bands)):
            here, there = slice(0, size - offset), slice(offset, size)
            same = particle[here] == particle[there]
            bands[offset, here] = same * np.sum(effects[here] * effects[there], axis=1)
        bands[0] += self.own[order]
        lower = cholesky_banded(bands, lower=True, check_finite=False)
        turned = solve_banded((len(bands) - 1, 0), lower, self.common[order], check_finite=False)
        directions, length, _ = np.linalg.svd(turned, full_matrices=False)
        return Whitening(order=order, lower=lower, directions=directions, length=length)


@dataclass(frozen=True, slots=True, kw_only=True)
class Whitening:
    """Turns columns so that errors of the covariance become independent and of size one; rows change their order."""

    order: NDArray[np.intp]
    lower: FloatArray  # banded Cholesky factor of the part within particles
    directions: FloatArray  # (N, F) orthonormal, of what is common
    length: FloatArray  # (F,)

    @property
    def log_determinant(self) -> float:
        """Of the covariance."""
        return float(2 * np.sum(np.log(self.lower[0])) + np.sum(np.log1p(self.length**2)))

    def apply(self, columns: FloatArray) -> FloatArray:
        """The columns (N,) or (N, P) turned."""
        y = solve_banded((len(self.lower) - 1, 0), self.lower, columns[self.order], check_finite=False)
        shrink = 1 / np.sqrt(1 + self.length**2) - 1
        return np.asarray(y + (self.directions * shrink) @ (self.directions.T @ y))


def known_covariance(seen: Observations, law: Law, velocity: FloatArray) -> Covariance:
    """Covariance of ln V from the stated uncertainties: of the velocity, and of each input through its sensitivity.

    Parameters
    ----------
    seen : Observations
        N observations.
    law : callable
        Drag law that gives the sensitivities (effective variance).
    velocity : (N,) array
        Velocity under the law [m/s].

    Returns
    -------
    Covariance
    """
    of_particle, common = [], []
    fluids = np.unique(seen.fluid)
    for name, u in seen.input_u.items():
        if not np.any(u):
            continue
        effect = u * sensitivity(law, seen.falls, velocity, name)
        if name in _OF_FLUID:
            common += [np.where(seen.fluid == fluid, effect, 0.0) for fluid in fluids]
        else:
            of_particle.append(effect)
    none = np.empty((len(velocity), 0))
    return Covariance(
        own=seen.velocity_u**2 + FLOOR**2,
        particle=seen.particle,
        of_particle=np.column_stack(of_particle) if of_particle else none,
        common=np.column_stack(common) if common else none,
    )


def law_effects(seen: Observations, law: Law, velocity: FloatArray, law_u: float) -> FloatArray:
    """Effects on ln V of an error in the law itself.

    The error is made up of independent ones at whole powers of ten of Re, so that it is smooth in ln Re, as the
    differences between good sphere laws are: common to drops at like Reynolds numbers, independent two decades apart.

    Parameters
    ----------
    seen : Observations
        N observations.
    law : callable
        Drag law.
    velocity : (N,) array
        Velocity under the law [m/s].
    law_u : float
        Relative standard uncertainty of its drag coefficients.

    Returns
    -------
    (N, F) array
        Standard deviations with sign; each column acts on all observations at once.
    """
    decade = np.log10(seen.reynolds)[:, None]
    knots = np.arange(np.floor(decade.min()), np.floor(decade.max()) + 2)
    share = np.maximum(1 - np.abs(decade - knots), 0.0)
    share /= np.linalg.norm(share, axis=1, keepdims=True)
    return np.asarray(law_u * drag_sensitivity(law, seen.falls, velocity)[:, None] * share)


def restricted_scatter(residual: FloatArray, jacobian: FloatArray, known: Covariance) -> FloatArray:
    """Standard deviation of each part of the unexplained scatter, by restricted maximum likelihood.

    Parameters
    ----------
    residual : (N,) array
        Measured less fitted ln V.
    jacobian : (N, P) array
        Derivative of the fitted ln V to the parameters; P may be 0.
    known : Covariance
        From stated uncertainties.

    Returns
    -------
    (K,) array
        Between particles and, where they were dropped in several fluids, of a particle between fluids [-]; 0 where the
        stated uncertainties explain all.

    References
    ----------
    Patterson & Thompson (1971), Biometrika 58, 545-554.
    """
    size = max(float(np.sqrt(np.mean(residual**2))), FLOOR)

    def criterion(share: FloatArray) -> float:
        return deviance(residual, jacobian, known.with_scatter(share * size), restricted=True)

    start = np.full(known.scatters, 0.7)
    found = minimize(
        criterion,
        start,
        method="Nelder-Mead",
        bounds=[(0.0, 3.0)] * len(start),
        options={"xatol": _FINE, "fatol": _FINE},
    )
    scatter = np.asarray(found.x * size)
    return np.where(scatter < _NEGLIGIBLE, 0.0, scatter)


def deviance(residual: FloatArray, jacobian: FloatArray, covariance: Covariance, *, restricted: bool) -> float:
    """Minus twice the log-likelihood of normal residuals, fitted parameters profiled out.

    Restricted: the part of it that does not depend on the parameters, whose maximum estimates a scatter without the
    bias of having fitted them.
    """
    whitening = covariance.whitening()
    both = whitening.apply(np.column_stack([jacobian, residual]))
    x, r = both[:, :-1], both[:, -1]
    q, triangle = np.linalg.qr(x)
    r = r - q @ (q.T @ r)
    value = whitening.log_determinant + r @ r + (len(r) - restricted * x.shape[1]) * np.log(2 * np.pi)
    if restricted:
        value += 2 * np.sum(np.log(np.abs(np.diag(triangle)) + 1e-300))
    return float(value)
