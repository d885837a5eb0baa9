"""Fits that tell the truth: least squares with lmfit, on ln V, weighted by all that is known of the uncertainty.

A fit alternates between its parameters and its weights: the weights hold the sensitivities to size, density, viscosity
and shape at the fitted law (effective variance), and a scatter between particles estimated by restricted maximum
likelihood. They stay fixed while the parameters move: weights that move with them would favour laws under which
velocities look uncertain. Observations far from the law pull no harder than those at three standard deviations.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace

import lmfit
import numpy as np
from scipy.stats import t as student

from settlelab.calibrate.covariance import (
    Covariance,
    deviance,
    known_covariance,
    law_effects,
    restricted_scatter,
)
from settlelab.calibrate.falls import Law, settle
from settlelab.calibrate.form import Form, Parameter
from settlelab.calibrate.observations import Observations
from settlelab.errors import FitError
from settlelab.physics.constants import BoolArray, FloatArray
from settlelab.physics.least_squares import minimise

__all__ = [
    "LawFit",
    "Solution",
    "derivatives",
    "fit_form",
    "judge_law",
    "least_squares",
    "log_velocity",
    "parameter_covariance",
]

_ROUNDS = 8  # of parameters and weights in turn; three or four settle
_SETTLED = 1e-2  # change of parameters over their uncertainty at which it has settled
_ILL = 1e6  # condition number of the scaled derivatives at which parameters cannot be told apart
_REACH = 3.0  # standard deviations beyond which an observation is held down; normal errors seldom get there
_HOLDS = 12  # rounds of scatter and holding down in turn
_STEP = 1e-5  # of the derivatives to the parameters, relative to their scale
SPARE_PARTICLES = 3  # more than there are parameters


@dataclass(frozen=True, slots=True, kw_only=True)
class Solution:
    """Least squares parameters (P,) with the sum of squares before and after, and which stand at a bound."""

    values: FloatArray
    start_square: float
    square: float
    at_bound: BoolArray


@dataclass(frozen=True, slots=True, kw_only=True)
class LawFit:
    """A law set against N observations; a published law has no parameters (P = 0).

    `covariance` is that of the parameters, nan where one stands at a bound; `weights` that of the observed ln V.
    """

    values: FloatArray
    covariance: FloatArray
    at_bound: BoolArray
    residual: FloatArray  # measured less fitted ln V
    distance: FloatArray  # the same over its standard deviation, nothing held down
    jacobian: FloatArray  # (N, P), fitted ln V to the parameters
    weights: Covariance
    scatter: FloatArray  # between particles, and where it can be told apart of a particle between fluids
    repeatability: float
    aicc: float
    degrees: int

    @property
    def residual_scatter(self) -> float:
        """Relative standard deviation of the velocity of a single drop of a new particle about the law."""
        return float(np.sqrt(np.sum(self.scatter**2) + self.repeatability**2))

    @property
    def coverage_factor(self) -> float:
        """Half-width of a 95 % interval over the standard uncertainty."""
        return float(student.ppf(0.975, self.degrees))


def least_squares(residual: Callable[[FloatArray], FloatArray], parameters: Sequence[Parameter]) -> Solution:
    """Parameters that make the sum of squared residuals least, sought inside the bounds by a trust region.

    Parameters
    ----------
    residual : callable
        (P,) parameters to (M,) residuals, each over its standard uncertainty.
    parameters : sequence of Parameter
        Start strictly inside the bounds; the fit works on the values over the size of their start.

    Raises
    ------
    FitError
        No solution, or none better than the start.
    """
    scale = np.array([abs(parameter.start) or 1.0 for parameter in parameters])
    scaled = lmfit.Parameters()
    for number, (parameter, size) in enumerate(zip(parameters, scale, strict=True)):
        low, high = parameter.low / size, parameter.high / size
        scaled.add(f"p{number}", value=parameter.start / size, min=low, max=high)

    def objective(trial: lmfit.Parameters) -> FloatArray:
        return residual(scale * np.array(list(trial.valuesdict().values())))

    start = float(np.sum(objective(scaled) ** 2))
    try:
        found = minimise(objective, scaled, method="least_squares", ftol=1e-12, xtol=1e-12)
    except ValueError as error:  # lmfit's word for residuals that are not numbers
        raise FitError("the law gives no velocity for some drops") from error
    values = scale * np.array([found.params[name].value for name in scaled])
    square = float(np.sum(residual(values) ** 2))
    if not square < start:
        raise FitError("no parameters fit better than those at which the search starts")
    low, high = (np.array([getattr(parameter, end) for parameter in parameters]) for end in ("low", "high"))
    close = 1e-6 * (high - low)
    return Solution(
        values=values, start_square=start, square=square, at_bound=(values < low + close) | (values > high - close)
    )


def fit_form(form: Form, seen: Observations) -> LawFit:
    """A calibrated form fitted to particle means.

    Raises
    ------
    FitError
        Too few particles for the number of parameters, or no solution better than the start.
    """
    particles, wanted = len(np.unique(seen.particle)), len(form.parameters) + SPARE_PARTICLES
    if particles < wanted:
        raise FitError(f"{particles} particles, at least {wanted} are needed for {len(form.parameters)} parameters")
    values = np.array([parameter.start for parameter in form.parameters])
    state = _weigh(form.law(values), seen, np.empty((len(seen.drop), 0)))
    for _ in range(_ROUNDS):
        before, solution = values, _solve(form, seen, state.weights)
        values = solution.values
        state = _weigh(form.law(values), seen, derivatives(form, values, seen))
        u = np.sqrt(np.diag(parameter_covariance(state.jacobian, state.weights)))
        if np.all(np.abs(values - before) <= _SETTLED * u):
            break
    law = form.law(values)
    of_law = law_effects(seen, law, settle(law, seen.falls).velocity, form.law_u)
    u = np.sqrt(np.diag(parameter_covariance(state.jacobian, state.weights, of_law)))
    ends = np.array([(parameter.low, parameter.high) for parameter in form.parameters])
    at_bound = solution.at_bound | (values - u <= ends[:, 0]) | (values + u >= ends[:, 1])
    covariance = np.full((len(values), len(values)), np.nan)
    if len(free := np.flatnonzero(~at_bound)):
        covariance[np.ix_(free, free)] = parameter_covariance(state.jacobian[:, free], state.weights, of_law)
    return replace(state, values=values, covariance=covariance, at_bound=at_bound)


def judge_law(law: Law, seen: Observations) -> LawFit:
    """A published law as it stands, with the scatter about it; its bias counts as scatter."""
    return _weigh(law, seen, np.empty((len(seen.drop), 0)))


def _solve(form: Form, seen: Observations, weights: Covariance) -> Solution:
    """Parameters under fixed weights, always from the start of the form."""
    measured = np.log(seen.velocity)
    whitening = weights.whitening()

    def residual(values: FloatArray) -> FloatArray:
        return whitening.apply(measured - log_velocity(form.law(values), seen))

    return least_squares(residual, form.parameters)


def _weigh(law: Law, seen: Observations, jacobian: FloatArray) -> LawFit:
    """Residuals, covariance and scatter of the observations about a law whose parameters are taken as found."""
    fitted = log_velocity(law, seen)
    residual = np.log(seen.velocity) - fitted
    known = known_covariance(seen, law, np.exp(fitted))
    scatter, distance, weights = _held_down(residual, jacobian, known)
    size, parameters = len(residual), jacobian.shape[1] + len(scatter)
    # the number of parameters counts the scatter too (Hurvich & Tsai 1989, Biometrika 76, 297-307)
    penalty = 2 * parameters * size / (size - parameters - 1) if size > parameters + 1 else np.inf
    empty = np.empty(0)
    return LawFit(
        values=empty,
        covariance=np.empty((0, 0)),
        at_bound=np.empty(0, dtype=np.bool_),
        residual=residual,
        distance=distance,
        jacobian=jacobian,
        weights=weights,
        scatter=scatter,
        repeatability=seen.repeatability,
        aicc=deviance(residual, jacobian, weights, restricted=False) + penalty,
        degrees=len(np.unique(seen.particle)) - jacobian.shape[1],
    )


def _held_down(
    residual: FloatArray, jacobian: FloatArray, known: Covariance
) -> tuple[FloatArray, FloatArray, Covariance]:
    """Scatter, distance of each observation in standard deviations, and weights.

    An observation at z > 3 standard deviations gets z/3 times its variance, which holds its pull to that of one at 3;
    the scatter is found with the same variances, so that it is that of the others.

    References
    ----------
    Huber (1964), Ann. Math. Stat. 35, 73-101.
    """
    added = np.zeros_like(residual)
    for _ in range(_HOLDS):
        before, held = added, replace(known, own=known.own + added)
        scatter = restricted_scatter(residual, jacobian, held)
        variance = known.with_scatter(scatter).variance
        distance = residual / np.sqrt(variance)
        added = variance * np.maximum(np.abs(distance) / _REACH - 1, 0.0)
        if np.all(np.abs(added - before) <= _SETTLED * variance):
            break
    return scatter, distance, replace(known, own=known.own + added).with_scatter(scatter)


def log_velocity(law: Law, seen: Observations) -> FloatArray:
    """Natural logarithm of the velocities [m/s] under a law, (N,)."""
    return np.asarray(np.log(settle(law, seen.falls).velocity))


def derivatives(form: Form, values: FloatArray, seen: Observations) -> FloatArray:
    """Derivative of ln V to each parameter, (N, P), by central differences that stay inside the bounds."""
    columns = []
    for number, parameter in enumerate(form.parameters):
        step = _STEP * (abs(parameter.start) or 1.0)
        up, down = values.copy(), values.copy()
        up[number] = min(values[number] + step, parameter.high)
        down[number] = max(values[number] - step, parameter.low)
        change = log_velocity(form.law(up), seen) - log_velocity(form.law(down), seen)
        columns.append(change / (up[number] - down[number]))
    return np.column_stack(columns)


def parameter_covariance(jacobian: FloatArray, weights: Covariance, of_law: FloatArray | None = None) -> FloatArray:
    """Covariance of generalised least squares, and what errors of the law (`law_effects`) add to it.

    These have no part in the weights: a fit that knew of them would leave such deviations standing, where the
    parameters may well take them up.

    Raises
    ------
    FitError
        The observations do not determine the parameters.
    """
    whitening = weights.whitening()
    turned = whitening.apply(jacobian)
    size = np.linalg.norm(turned, axis=0)
    if np.any(size == 0) or np.linalg.cond(turned / size) > _ILL:
        raise FitError("the drops do not determine the parameters: their Reynolds numbers or shapes are too alike")
    covariance = np.linalg.inv((turned / size).T @ (turned / size)) / np.outer(size, size)
    if of_law is not None:
        moved = covariance @ (turned.T @ whitening.apply(of_law))
        covariance = covariance + moved @ moved.T
    return np.asarray(covariance)
