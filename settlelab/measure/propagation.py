"""Standard uncertainties and budgets by the law of propagation (JCGM 100).

Inputs of a drop share sources: one scale stands behind the velocity and the size of a silhouette, one particle density
behind buoyancy and the diameter from the mass. So it is the independent sources that are listed, each with what one
standard uncertainty of it changes in all inputs at once; correlations follow by themselves.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass

import numpy as np

from settlelab.physics.constants import FloatArray

__all__ = ["Effect", "Estimate", "propagate"]

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
