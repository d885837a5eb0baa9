"""Intervals by the profile of the likelihood: as lopsided as the law makes them, and ending where the bounds do."""

from __future__ import annotations

import numpy as np
from scipy.optimize import brentq

from settlelab.calibrate.fit import LawFit, derivatives, log_velocity, parameter_covariance
from settlelab.calibrate.form import Form
from settlelab.calibrate.observations import Observations
from settlelab.physics.constants import FloatArray

__all__ = ["profile_intervals"]

_STEPS = 2  # of Gauss and Newton to the best of the other parameters, from where the full fit expects it
_FARTHEST = 5.0  # half-widths of the symmetric interval within which the end is looked for


def profile_intervals(form: Form, fit: LawFit, seen: Observations) -> FloatArray:
    """95 % intervals of the parameters.

    An end is where the sum of squares, best in all other parameters, exceeds its least value by the square of the
    coverage factor. What errors of the underlying law add to the uncertainty is put on in quadrature.

    Parameters
    ----------
    form : Form
        The fitted form.
    fit : LawFit
        Its fit to `seen`, no parameter at a bound.
    seen : Observations
        Particle means.

    Returns
    -------
    (P, 2) array

    References
    ----------
    Bates & Watts (1988), Nonlinear Regression Analysis and Its Applications, Wiley, section 6.1.
    """
    alone = parameter_covariance(fit.jacobian, fit.weights)
    of_law = fit.coverage_factor**2 * np.maximum(np.diag(fit.covariance) - np.diag(alone), 0.0)
    ends = np.array(
        [[_reach(form, fit, seen, alone, number, way) for way in (-1, 1)] for number in range(len(fit.values))]
    )
    spread = np.sqrt(ends**2 + of_law[:, None])
    low, high = (np.array([getattr(parameter, end) for parameter in form.parameters]) for end in ("low", "high"))
    interval = fit.values[:, None] + spread * [-1, 1]
    return np.asarray(np.clip(interval, low[:, None], high[:, None]))


def _reach(form: Form, fit: LawFit, seen: Observations, alone: FloatArray, number: int, way: int) -> float:
    """Distance from the fitted value to an end of the interval."""
    whitening, measured = fit.weights.whitening(), np.log(seen.velocity)
    low, high = (np.array([getattr(parameter, end) for parameter in form.parameters]) for end in ("low", "high"))
    others = np.arange(len(fit.values)) != number
    path = alone[:, number] / alone[number, number]  # how the others follow this one, to first order

    def square(distance: float) -> float:
        values = np.clip(fit.values + way * distance * path, low, high)
        for _ in range(_STEPS if np.any(others) else 0):
            left = whitening.apply(measured - log_velocity(form.law(values), seen))
            slopes = whitening.apply(derivatives(form, values, seen)[:, others])
            values[others] += np.linalg.lstsq(slopes, left, rcond=None)[0]
            values = np.clip(values, low, high)
        left = whitening.apply(measured - log_velocity(form.law(values), seen))
        return float(left @ left)

    least, wanted = square(0.0), fit.coverage_factor**2
    symmetric = fit.coverage_factor * float(np.sqrt(alone[number, number]))
    room = float(high[number] - fit.values[number] if way > 0 else fit.values[number] - low[number])
    farthest = min(_FARTHEST * symmetric, room)
    if square(farthest) - least < wanted:
        return farthest
    return float(brentq(lambda distance: square(distance) - least - wanted, 0.0, farthest, rtol=1e-4))
