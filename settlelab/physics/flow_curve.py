"""Fluid models fitted to viscometer readings.

Least squares with weights 1/u. The stress is written tau0 + S (rate/r)^n with r in the middle of the readings, because
the consistency K = S / r^n at 1 1/s, mostly outside them, is almost a function of n; it is converted afterwards.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace

import lmfit
import numpy as np
from numpy.typing import ArrayLike

from settlelab.errors import FitError
from settlelab.physics.constants import FloatArray
from settlelab.physics.rheology import Rheology

# model -> its free parameters, in the order of a covariance; what is not free is n = 1 and tau0 = 0
MODELS: Mapping[str, tuple[str, ...]] = {
    "newtonian": ("consistency",),
    "power-law": ("consistency", "flow_index"),
    "bingham": ("consistency", "yield_stress"),
    "herschel-bulkley": ("consistency", "flow_index", "yield_stress"),
}
_LOWEST_INDEX, _HIGHEST_INDEX = 0.05, 2.0


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
    parameters = _start(readings, free)
    result = lmfit.minimize(_residuals, parameters, args=(readings,), scale_covar=False)
    at_bound: tuple[str, ...] = ()
    while (name := _touching(result)) is not None:
        at_bound += (name,)
        parameters = _held(result.params, name)
        result = lmfit.minimize(_residuals, parameters, args=(readings,), scale_covar=False)
    if not result.success or (result.var_names and result.covar is None):
        raise FitError(f"the viscometer readings do not determine a {model} fluid")
    return _in_si(result, readings, model, at_bound)


def _start(readings: _Readings, free: Sequence[str]) -> lmfit.Parameters:
    """Starting values from a straight line in logarithms, strictly inside the bounds."""
    positive = readings.stress > 0
    index = 1.0
    if np.unique(readings.rate[positive]).size > 1 and "flow_index" in free:
        index = float(np.polyfit(np.log(readings.rate[positive]), np.log(readings.stress[positive]), 1)[0])
    parameters = lmfit.Parameters()
    parameters.add("consistency", value=float(np.median(readings.stress[positive])), min=0)
    index = float(np.clip(index, 2 * _LOWEST_INDEX, 0.9 * _HIGHEST_INDEX))
    parameters.add("flow_index", value=index, min=_LOWEST_INDEX, max=_HIGHEST_INDEX, vary="flow_index" in free)
    yields = "yield_stress" in free
    start = max(float(np.min(readings.stress)) / 2, 1e-3) if yields else 0.0
    parameters.add("yield_stress", value=start, min=0, vary=yields)
    return parameters


def _residuals(parameters: lmfit.Parameters, readings: _Readings) -> FloatArray:
    values = parameters.valuesdict()
    stress = values["yield_stress"] + values["consistency"] * readings.rate ** values["flow_index"]
    return np.asarray((stress - readings.stress) / readings.u)


def _touching(result: lmfit.minimizer.MinimizerResult) -> str | None:
    """A free parameter whose value ± u reaches a bound, or whose u could not be found; the yield stress before n."""
    for name in ("yield_stress", "flow_index"):
        parameter = result.params[name]
        u = parameter.stderr if parameter.stderr is not None else float("inf")
        if parameter.vary and (parameter.value - u <= parameter.min or parameter.value + u >= parameter.max):
            return name
    return None


def _held(parameters: lmfit.Parameters, name: str) -> lmfit.Parameters:
    """The same parameters with one held where it is, or on the bound if it lies there but for rounding."""
    held = parameters.copy()
    value = min(
        (held[name].min, held[name].max, held[name].value), key=lambda end: round(abs(end - held[name].value), 6)
    )
    held[name].set(value=value, vary=False)
    return held


def _in_si(
    result: lmfit.minimizer.MinimizerResult, readings: _Readings, model: str, at_bound: tuple[str, ...]
) -> RheologyFit:
    values, names = result.params.valuesdict(), tuple(result.var_names)
    index = values["flow_index"]
    consistency = values["consistency"] * readings.scale / readings.middle_rate**index
    # K = S scale / r^n, n and tau0 scale: rows of the Jacobian by output, columns by fitted parameter
    jacobian = np.diag([readings.scale if name == "yield_stress" else 1.0 for name in names])
    at = names.index("consistency")
    jacobian[at, at] = readings.scale / readings.middle_rate**index
    if "flow_index" in names:
        jacobian[at, names.index("flow_index")] = -consistency * np.log(readings.middle_rate)
    count, k = readings.rate.size, len(MODELS[model])
    few = count - k - 1 <= 0
    chi_square = float(result.chisqr)
    penalty = float("inf") if few else 2 * k + 2 * k * (k + 1) / (count - k - 1)
    return RheologyFit(
        rheology=Rheology(
            consistency=consistency, flow_index=index, yield_stress=values["yield_stress"] * readings.scale
        ),
        model=model,
        names=names,
        covariance=jacobian @ np.asarray(result.covar) @ jacobian.T,
        at_bound=at_bound,
        chi_square=chi_square,
        degrees_of_freedom=count - len(names),
        aicc={model: chi_square + penalty},
    )
