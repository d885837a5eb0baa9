"""Cross-validation: what a form predicts for particles, and for lots, that it was not fitted to."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from settlelab.calibrate.fit import LawFit
from settlelab.calibrate.form import Form
from settlelab.physics.constants import FloatArray

__all__ = ["parameters_without"]


def parameters_without(form: Form, fit: LawFit, groups: NDArray[np.int64]) -> FloatArray:
    """The parameters that a fit without the group of each observation gives.

    Leaving observations out of generalised least squares equals giving each of them a parameter of its own; the answer
    follows from the full fit, exactly for a linear law and to second order in the change for a curved one. Weights
    are those of the full fit.

    Parameters
    ----------
    form : Form
        The fitted form.
    fit : LawFit
        Its fit to N observations.
    groups : (N,) int array
        What is left out together: numbers of particles, or of lots.

    Returns
    -------
    (P, N) array
        Parameters for each observation, kept inside the bounds of the form; those at a bound stay there.

    References
    ----------
    Cook & Weisberg (1982), Residuals and Influence in Regression, Chapman & Hall, section 3.
    """
    root = fit.weights.whitening().apply(np.eye(len(fit.residual)))
    precision = root.T @ root
    jacobian = np.where(fit.at_bound, 0.0, fit.jacobian)
    weighted = precision @ jacobian
    inverse = np.linalg.pinv(jacobian.T @ weighted, hermitian=True)
    projected = precision - weighted @ inverse @ weighted.T
    values = np.repeat(fit.values[:, None], len(fit.residual), axis=1)
    for group in np.unique(groups):
        out = np.flatnonzero(groups == group)
        error = np.linalg.lstsq(projected[np.ix_(out, out)], (projected @ fit.residual)[out], rcond=None)[0]
        values[:, out] -= (inverse @ (weighted[out].T @ error))[:, None]
    low, high = (np.array([[getattr(parameter, end)] for parameter in form.parameters]) for end in ("low", "high"))
    return np.clip(values, low, high)
