"""Fluid models fitted to viscometer readings.

Least squares with weights 1/u. The stress is written tau0 + S (rate/r)^n with r in the middle of the readings, because
the consistency K = S / r^n at 1 1/s, mostly outside them, is almost a function of n; it is converted afterwards.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from functools import partial

import lmfit
import numpy as np
from numpy.typing import ArrayLike

from settlelab.errors import FitError
from settlelab.physics.constants import FloatArray
from settlelab.physics.least_squares import minimise
from settlelab.physics.rheology import Rheology

# model -> its free parameters, in the order of a covariance
MODELS: Mapping[str, tuple[str, ...]] = {
    "newtonian": ("consistency",),
    "power-law": ("consistency", "flow_index"),
    "bingham": ("consistency", "yield_stress"),
    "herschel-bulkley": ("consistency", "flow_index", "yield_stress"),
}
_SET = {"flow_index": 1.0, "yield_stress": 0.0}  # where the model does not free them
_LOWEST_INDEX, _HIGHEST_INDEX = 0.05, 1.5


@dataclass(frozen=True, slots=True, kw_only=True)
class RheologyFit:
    """A fluid model fitted to readings, in SI."""

    rheology: Rheology
    model: str
    names: tuple[str, ...]  # parameters with a standard uncertainty: fields of Rheology
    covariance: FloatArray  # of these, in this order
    at_bound: tuple[str, ...]  # fitted parameters whose value ± u reaches a bound: held there, without uncertainty
    chi_square: float  # sum of squared residuals over u
    degrees_of_freedom: int
    aicc: Mapping[str, float]  # by model, of every model tried; infinite where the readings are too few for it

    def u(self, name: str) -> float:
        """Standard uncertainty of a parameter; 0 for one that the model sets, nan for one at a bound."""
        if name in self.at_bound:
            return float("nan")
        return float(np.sqrt(np.diag(self.covariance)[self.names.index(name)])) if name in self.names else 0.0


@dataclass(frozen=True, slots=True)
class _Readings:
    rate: FloatArray  # over the middle rate
    stress: FloatArray  # over the greatest stress
    u: FloatArray  # over the greatest stress
    middle_rate: float
    scale: float


@dataclass(frozen=True, slots=True)
class _Solution:
    """A fit in the scale of the readings."""

    values: Mapping[str, float]  # all parameters, free or held
    names: tuple[str, ...]  # free to the end
    covariance: FloatArray  # of these
    at_bound: tuple[str, ...]


def fit_rheology(shear_rate: ArrayLike, shear_stress: ArrayLike, u: ArrayLike, model: str = "best") -> RheologyFit:
    """Fit a fluid model to viscometer readings.

    Parameters
    ----------
    shear_rate : (N,) array
        [1/s], above 0.
    shear_stress : (N,) array
        [Pa].
    u : (N,) array or float
        Standard uncertainty of the stress [Pa], above 0.
    model : str
        "newtonian", "power-law", "bingham", "herschel-bulkley", or "best": of those four, the one with the least
        Akaike criterion corrected for few readings (AICc, for known uncertainties chi^2 + 2k + 2k(k+1)/(N-k-1)), models
        with a parameter at a bound left aside.

    Returns
    -------
    RheologyFit
        The covariance rests on `u` alone; a chi square well above the degrees of freedom says that `u` is too small or
        the model wrong.

    Raises
    ------
    FitError
        Too few readings for the model, or no sensible solution.
    ValueError
        A rate or an uncertainty not above 0, an unknown model.

    References
    ----------
    Hurvich & Tsai (1989), Biometrika 76, 297-307, for AICc.
    """
    readings = _scaled(shear_rate, shear_stress, u)
    if model != "best":
        if model not in MODELS:
            raise ValueError(f'"{model}" is not one of {", ".join(MODELS)}, best')
        return _fit(readings, model)
    enough = [name for name, free in MODELS.items() if readings.rate.size >= len(free) + 2]
    if not enough:
        raise FitError(
            f"{readings.rate.size} viscometer readings cannot tell which fluid model is best: name one, or take 3"
        )
    fits = [_fit(readings, name) for name in enough]
    aicc = dict.fromkeys(MODELS, float("inf")) | {fit.model: fit.aicc[fit.model] for fit in fits}
    best = min((fit for fit in fits if not fit.at_bound), key=lambda fit: aicc[fit.model])
    return replace(best, aicc=aicc)


def _scaled(shear_rate: ArrayLike, shear_stress: ArrayLike, u: ArrayLike) -> _Readings:
    arrays = (np.asarray(item, dtype=np.float64) for item in (shear_rate, shear_stress, u))
    rate, stress, error = (np.ravel(item) for item in np.broadcast_arrays(*arrays))
    if not (np.all(rate > 0) and np.all(error > 0) and np.all(np.isfinite(stress))):
        raise ValueError("shear rates and uncertainties of the stress must be above 0, stresses must be numbers")
    if not np.max(stress, initial=0.0) > 0:
        raise FitError("no viscometer reading shows a stress above 0")
    middle, scale = float(np.exp(np.mean(np.log(rate)))), float(np.max(stress))
    return _Readings(rate / middle, stress / scale, error / scale, middle, scale)


def _fit(readings: _Readings, model: str) -> RheologyFit:
    free = MODELS[model]
    count = np.unique(readings.rate).size
    if count < len(free):
        raise FitError(f"a {model} fluid needs viscometer readings at {len(free)} or more shear rates, {count} found")
    solution = _solve(readings, free)
    if solution is None:
        raise FitError(f"the viscometer readings do not determine a {model} fluid")
    return _in_si(solution, readings, model)


def _solve(readings: _Readings, free: Sequence[str]) -> _Solution | None:
    """Least squares; a parameter that reaches a bound is held there and the others are fitted anew."""
    parameters, values = _start(readings, free), dict(_SET)
    at_bound: tuple[str, ...] = ()
    while True:
        result = minimise(partial(_residuals, readings=readings, values=dict(values)), parameters)
        values |= result.params.valuesdict()
        names = tuple(result.var_names)
        covariance = _covariance(readings, values, names)
        if not result.success or covariance is None:
            return None
        reached = _reached(result.params, np.sqrt(np.diag(covariance)))
        if reached is None:
            return _Solution(values, names, covariance, at_bound)
        at_bound += (reached,)
        parameters = result.params
        values[reached] = _held(parameters.pop(reached))


def _start(readings: _Readings, free: Sequence[str]) -> lmfit.Parameters:
    """Starting values of the free parameters from a straight line in logarithms, strictly inside the bounds."""
    positive = readings.stress > 0
    parameters = lmfit.Parameters()
    parameters.add("consistency", value=float(np.median(readings.stress[positive])), min=0)
    if "flow_index" in free:
        index = 1.0
        if np.unique(readings.rate[positive]).size > 1:
            index = float(np.polyfit(np.log(readings.rate[positive]), np.log(readings.stress[positive]), 1)[0])
        start = float(np.clip(index, 2 * _LOWEST_INDEX, 0.9 * _HIGHEST_INDEX))
        parameters.add("flow_index", value=start, min=_LOWEST_INDEX, max=_HIGHEST_INDEX)
    if "yield_stress" in free:
        parameters.add("yield_stress", value=max(float(np.min(readings.stress)) / 2, 1e-3), min=0)
    return parameters


def _residuals(parameters: lmfit.Parameters, readings: _Readings, values: Mapping[str, float]) -> FloatArray:
    value = dict(values) | parameters.valuesdict()
    stress = value["yield_stress"] + value["consistency"] * readings.rate ** value["flow_index"]
    return np.asarray((stress - readings.stress) / readings.u)


def _covariance(readings: _Readings, values: Mapping[str, float], names: Sequence[str]) -> FloatArray | None:
    """Covariance of the free parameters, from the uncertainty of the readings alone; None where it is undetermined."""
    power = readings.rate ** values["flow_index"]
    slopes = {
        "consistency": power,
        "flow_index": values["consistency"] * power * np.log(readings.rate),
        "yield_stress": np.ones_like(power),
    }
    design = np.column_stack([slopes[name] / readings.u for name in names])
    information = design.T @ design
    if np.linalg.matrix_rank(information, hermitian=True) < len(names):
        return None
    return np.asarray(np.linalg.inv(information))


def _reached(parameters: lmfit.Parameters, u: FloatArray) -> str | None:
    """A parameter whose value ± u reaches a bound, the yield stress before the flow index."""
    at_bound = [
        name
        for (name, parameter), spread in zip(parameters.items(), u, strict=True)
        if parameter.value - spread <= parameter.min or parameter.value + spread >= parameter.max
    ]
    return next((name for name in ("yield_stress", "flow_index") if name in at_bound), None)


def _held(parameter: lmfit.Parameter) -> float:
    """The fitted value, or the bound if it lies there but for rounding."""
    ends = (parameter.min, parameter.max, parameter.value)
    return float(min(ends, key=lambda end: round(abs(end - parameter.value), 6)))


def _in_si(solution: _Solution, readings: _Readings, model: str) -> RheologyFit:
    values, names = solution.values, solution.names
    index = values["flow_index"]
    consistency = values["consistency"] * readings.scale / readings.middle_rate**index
    # K = S scale / r^n, n and tau0 scale: rows of the Jacobian by output, columns by fitted parameter
    jacobian = np.diag([readings.scale if name == "yield_stress" else 1.0 for name in names])
    at = names.index("consistency")
    jacobian[at, at] = readings.scale / readings.middle_rate**index
    if "flow_index" in names:
        jacobian[at, names.index("flow_index")] = -consistency * np.log(readings.middle_rate)
    chi_square = float(np.sum(_residuals(lmfit.Parameters(), readings, values) ** 2))
    return RheologyFit(
        rheology=Rheology(
            consistency=consistency, flow_index=index, yield_stress=values["yield_stress"] * readings.scale
        ),
        model=model,
        names=names,
        covariance=jacobian @ solution.covariance @ jacobian.T,
        at_bound=solution.at_bound,
        chi_square=chi_square,
        degrees_of_freedom=readings.rate.size - len(names),
        aicc={model: chi_square + _penalty(readings.rate.size, len(MODELS[model]))},
    )


def _penalty(count: int, k: int) -> float:
    """What AICc adds to chi square for k parameters fitted to so many readings."""
    return 2 * k + 2 * k * (k + 1) / (count - k - 1) if count > k + 1 else float("inf")
