"""Standard uncertainties and budgets by the law of propagation (JCGM 100), and intervals by Monte Carlo (JCGM 101).

Inputs of a drop share sources: one scale stands behind the velocity and the size of a silhouette, one particle density
behind buoyancy and the diameter from the mass. So it is the independent sources that are listed, each with what one
standard uncertainty of it changes in all inputs at once; correlations follow by themselves.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass

import numpy as np

from settlelab.physics.constants import FloatArray

__all__ = ["Drawn", "Effect", "Estimate", "monte_carlo", "propagate"]

Model = Callable[[Mapping[str, FloatArray]], Mapping[str, FloatArray]]


@dataclass(frozen=True, slots=True)
class Effect:
    """What one standard uncertainty of a source changes in the inputs that depend on it."""

    source: str
    change: Mapping[str, float]


@dataclass(frozen=True, slots=True)
class Estimate:
    """An output with its standard uncertainty, and the share of each source in its variance."""

    value: float
    u: float
    shares: Mapping[str, float]


@dataclass(frozen=True, slots=True)
class Drawn:
    """An output by Monte Carlo; the interval leaves 2.5 % of draws to either side."""

    mean: float
    u: float
    low: float
    high: float


def shifted(inputs: Mapping[str, float], effects: tuple[Effect, ...], scores: FloatArray) -> dict[str, FloatArray]:
    """Inputs after each source has moved by so many of its standard uncertainties.

    Parameters
    ----------
    inputs : mapping
        Best values.
    effects : tuple of Effect
        Independent sources.
    scores : (M, len(effects)) array
        Standard deviations by which each source moves.

    Returns
    -------
    dict of (M,) arrays
    """
    moved = {name: np.full(len(scores), value) for name, value in inputs.items()}
    for effect, score in zip(effects, scores.T, strict=True):
        for name, change in effect.change.items():
            moved[name] = moved[name] + score * change
    return moved


def propagate(model: Model, inputs: Mapping[str, float], effects: tuple[Effect, ...]) -> dict[str, Estimate]:
    """Outputs of a model with standard uncertainties and the share of every source.

    The sensitivities are central differences over one standard uncertainty to either side, so that they are those of
    the range in which the input may lie. Effects of the same source are independent parts of it; their shares add up.

    Parameters
    ----------
    model : callable
        Maps arrays of the inputs to arrays of the outputs.
    inputs : mapping
        Best value of each input.
    effects : tuple of Effect
        Independent sources.

    Returns
    -------
    dict of Estimate
        By output; an output that is nan has no uncertainty and no shares.
    """
    count = len(effects)
    scores = np.concatenate([np.zeros((1, count)), np.eye(count), -np.eye(count)])
    estimates = {}
    for name, values in model(shifted(inputs, effects, scores)).items():
        parts = ((values[1 : count + 1] - values[count + 1 :]) / 2) ** 2
        variance = float(parts.sum())
        shares: dict[str, float] = {}
        if np.isfinite(variance) and variance > 0:
            for effect, part in zip(effects, parts, strict=True):
                shares[effect.source] = shares.get(effect.source, 0.0) + float(part) / variance
        estimates[name] = Estimate(float(values[0]), float(np.sqrt(variance)), shares)
    return estimates


def monte_carlo(
    model: Model, inputs: Mapping[str, float], effects: tuple[Effect, ...], *, count: int, seed: int = 1
) -> dict[str, Drawn]:
    """Outputs of a model by drawing all sources, each normal; the check on `propagate` where a model is bent.

    Parameters
    ----------
    model, inputs, effects
        As for `propagate`.
    count : int
        Draws. The ends of the interval scatter by 0.027 u with 10 000 of them.
    seed : int
        The same seed gives the same draws.

    Returns
    -------
    dict of Drawn
        By output; nan where draws are.

    References
    ----------
    JCGM 101:2008, 7.7: probabilistically symmetric coverage interval of 95 %.
    """
    scores = np.random.default_rng(seed).standard_normal((count, len(effects)))
    found = {}
    for name, values in model(shifted(inputs, effects, scores)).items():
        low, high = np.quantile(values, [0.025, 0.975])
        found[name] = Drawn(float(np.mean(values)), float(np.std(values, ddof=1)), float(low), float(high))
    return found
