"""How the measured velocities vary together: what is known of it, and the scatter that the drops themselves show.

All covariances are of ln V, hence relative. An error of a particle's size, density or shape is the same in all its
drops; one of a fluid's density or viscosity is the same in all drops in that fluid, and does not average out.
"""

from __future__ import annotations

import numpy as np
from scipy.linalg import cholesky, solve_triangular
from scipy.optimize import minimize

from settlelab.calibrate.falls import Law, sensitivity
from settlelab.calibrate.observations import Observations
from settlelab.physics.constants import FloatArray

__all__ = ["add_scatter", "deviance", "known_covariance", "restricted_scatter", "scatter_structure", "whiten"]

FLOOR = 1e-4  # no velocity is known to better than 0.01 %, which also keeps the covariance invertible
_OF_FLUID = frozenset({"fluid_density", "viscosity"})
_FINE = 3e-3  # of the search: far below what any number of drops tells about a scatter
_NEGLIGIBLE = 1e-3  # an estimated scatter below 0.1 % is none


def known_covariance(seen: Observations, law: Law, velocity: FloatArray) -> FloatArray:
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
    (N, N) array
        Covariance [-].
    """
    covariance = np.diag(seen.velocity_u**2 + FLOOR**2)
    for name, u in seen.input_u.items():
        if not np.any(u):
            continue
        effect = u * sensitivity(law, seen.falls, velocity, name)
        shared = seen.fluid if name in _OF_FLUID else seen.particle
        covariance += np.where(shared[:, None] == shared, effect[:, None] * effect, 0.0)
    return covariance


def scatter_structure(seen: Observations) -> tuple[FloatArray, ...]:
    """What an unexplained scatter may belong to: (N, N) matrices of ones and zeros.

    The particle; and, where particles were dropped in several fluids, also the particle in that fluid.
    """
    of_particle = (seen.particle[:, None] == seen.particle).astype(np.float64)
    alone = np.eye(len(seen.particle))
    return (of_particle,) if np.array_equal(of_particle, alone) else (of_particle, alone)


def restricted_scatter(
    residual: FloatArray, jacobian: FloatArray, known: FloatArray, structure: tuple[FloatArray, ...]
) -> FloatArray:
    """Standard deviation of each part of the scatter, by restricted maximum likelihood.

    Parameters
    ----------
    residual : (N,) array
        Measured less fitted ln V.
    jacobian : (N, P) array
        Derivative of the fitted ln V to the parameters; P may be 0.
    known : (N, N) array
        Covariance from stated uncertainties.
    structure : tuple of (N, N) array
        See `scatter_structure`.

    Returns
    -------
    (K,) array
        Standard deviations [-], one for each part of the structure; 0 where the stated uncertainties explain all.

    References
    ----------
    Patterson & Thompson (1971), Biometrika 58, 545-554.
    """
    size = max(float(np.sqrt(np.mean(residual**2))), FLOOR)

    def criterion(share: FloatArray) -> float:
        return deviance(residual, jacobian, add_scatter(known, structure, share * size), restricted=True)

    start = np.full(len(structure), 0.7)
    found = minimize(
        criterion,
        start,
        method="Nelder-Mead",
        bounds=[(0.0, 3.0)] * len(structure),
        options={"xatol": _FINE, "fatol": _FINE},
    )
    scatter = np.asarray(found.x * size)
    return np.where(scatter < _NEGLIGIBLE, 0.0, scatter)


def add_scatter(known: FloatArray, structure: tuple[FloatArray, ...], scatter: FloatArray) -> FloatArray:
    """The whole covariance."""
    return np.asarray(known + sum(sigma**2 * matrix for sigma, matrix in zip(scatter, structure, strict=True)))


def whiten(covariance: FloatArray, *columns: FloatArray) -> tuple[FloatArray, ...]:
    """Arrays of N rows turned so that errors of that covariance become independent and of size one."""
    lower = cholesky(covariance, lower=True)
    return tuple(solve_triangular(lower, column, lower=True) for column in columns)


def deviance(residual: FloatArray, jacobian: FloatArray, covariance: FloatArray, *, restricted: bool) -> float:
    """Minus twice the log-likelihood of normal residuals, fitted parameters profiled out.

    Restricted: the part of it that does not depend on the parameters, whose maximum estimates a scatter without the
    bias of having fitted them.
    """
    lower = cholesky(covariance, lower=True, check_finite=False)
    both = solve_triangular(lower, np.column_stack([jacobian, residual]), lower=True, check_finite=False)
    x, r = both[:, :-1], both[:, -1]
    q, triangle = np.linalg.qr(x)
    r = r - q @ (q.T @ r)
    value = 2 * np.sum(np.log(np.diag(lower))) + r @ r + (len(r) - restricted * x.shape[1]) * np.log(2 * np.pi)
    if restricted:
        value += 2 * np.sum(np.log(np.abs(np.diag(triangle)) + 1e-300))
    return float(value)
