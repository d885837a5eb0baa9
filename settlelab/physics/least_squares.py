"""The one place where lmfit is called."""

from __future__ import annotations

import warnings
from collections.abc import Callable
from typing import Any

import lmfit

from settlelab.physics.constants import FloatArray

Residuals = Callable[[lmfit.Parameters], FloatArray]


def minimise(residuals: Residuals, start: lmfit.Parameters, **options: Any) -> lmfit.minimizer.MinimizerResult:  # noqa: ANN401 (options of the optimiser)
    """Least squares of residuals over their standard uncertainty; covariances are left to the caller.

    Parameters
    ----------
    residuals : callable
        Parameters to (N,) array of residuals over u.
    start : lmfit.Parameters
        Free parameters only: starting values of about 1, strictly inside their bounds.
    options : keyword arguments
        Tolerances of the optimiser, such as `ftol`.

    Returns
    -------
    lmfit.minimizer.MinimizerResult
        `success` and `params`.
    """
    with warnings.catch_warnings():
        # lmfit 1.2 computes uncertainties unasked, and builds numbers of zero uncertainty on the way (a misspelt name)
        warnings.filterwarnings("ignore", message="Using UFloat objects with std_dev==0", category=UserWarning)
        return lmfit.minimize(residuals, start, scale_covar=False, calc_covar=False, **options)
