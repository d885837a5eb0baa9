"""Uncertainty of a mean over drops and over particles (JCGM 100, 4.2 and 5.2).

- *Repeatability*: the standard deviation of replicate drops of a particle, pooled as a relative figure over all
  particles of the table (cuttings and control spheres apart), times the Student factor t/2 of its degrees of freedom so
  that k = 2 keeps its 95 %, over the root of the number of drops. Where a track's own fit is worse than that, or
  nothing was dropped twice, the fit counts: the scatter of replicates contains it already, so the larger is taken.
- *Common part*: scale, clock, fluid, walls, and the size and density of the particle itself are the same in every
  drop; they do not average down and are added in quadrature.
- A *lot* is the mean of its particles, and its uncertainty is of the mean of these very particles: what is peculiar to
  a particle (repeatability, size, density) averages down, what all share does not. How much the particles differ
  among themselves, by size and shape above all, is no uncertainty of that mean and is told apart, as a scatter.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
import pandas as pd
from scipy.stats import t as student

from settlelab.physics.constants import FloatArray

__all__ = ["QUANTITIES", "Repeatability", "lot_u", "particle_u", "repeatability", "with_parts"]

OF_ONE_FALL = frozenset({"track"})  # sources of the budget that are new with every fall
OF_ONE_PARTICLE = frozenset({"size", "particle density"})  # the same whenever this particle falls
QUANTITIES = ("velocity", "unbounded_velocity", "reynolds", "drag_coefficient")
COVERAGE = 0.9545  # of k = 2 for a normal distribution


@dataclass(frozen=True, slots=True)
class Repeatability:
    """Relative standard deviation of a single drop of the same particle, pooled over particles."""

    relative: float
    degrees: int

    def of_mean(self, values: FloatArray, fit_u: FloatArray) -> float:
        """Standard uncertainty of the mean of drops whose tracks alone give `fit_u`."""
        fit = math.sqrt(float(np.mean(fit_u**2)) / len(values))
        if self.degrees == 0:
            return fit
        scatter = self.relative * abs(float(np.mean(values)))
        return max(fit, student_factor(self.degrees) * scatter / math.sqrt(len(values)))


def student_factor(degrees: int) -> float:
    """Factor on a standard uncertainty of so many degrees of freedom that keeps the coverage of k = 2."""
    return float(student.ppf((1 + COVERAGE) / 2, degrees)) / 2


def with_parts(drops: pd.DataFrame, budget: pd.DataFrame) -> pd.DataFrame:
    """Each quantity's uncertainty in three parts: of the fall, of the particle, shared by all particles.

    What the budget does not attribute counts as shared, which never understates a mean.
    """
    parts = drops.copy()
    for quantity in QUANTITIES:
        rows = budget[budget["output"] == quantity]
        fall, particle = (
            parts["drop"].map(rows[rows["input"].isin(sources)].groupby("drop")["share"].sum())
            for sources in (OF_ONE_FALL, OF_ONE_PARTICLE)
        )
        fall, particle = (share.astype(np.float64).fillna(0.0).clip(0, 1) for share in (fall, particle))
        u = parts[f"{quantity}_u"]
        parts[f"{quantity}_fall_u"] = u * np.sqrt(fall)
        parts[f"{quantity}_particle_u"] = u * np.sqrt(particle)
        parts[f"{quantity}_shared_u"] = u * np.sqrt((1 - fall - particle).clip(lower=0.0))
    return parts


def repeatability(drops: pd.DataFrame, quantity: str) -> Repeatability:
    """Pooled relative scatter of replicates: root of the sum of squares over the sum of degrees of freedom."""
    squares, degrees = 0.0, 0
    for _, values in drops.dropna(subset=[quantity]).groupby(["particle", "fluid"])[quantity]:
        squares += float(((values / values.mean() - 1.0) ** 2).sum())
        degrees += len(values) - 1
    return Repeatability(math.sqrt(squares / degrees) if degrees else math.nan, degrees)


def particle_u(drops: pd.DataFrame, quantity: str, pooled: Repeatability) -> tuple[float, float]:
    """Standard uncertainty of a particle's mean over its accepted drops, in two parts; nan without any.

    Returns
    -------
    own : float
        What is peculiar to the particle: repeatability of its drops, its size and density.
    shared : float
        What it shares with every other particle.
    """
    known = drops.dropna(subset=[quantity])
    if len(known) == 0:
        return math.nan, math.nan
    random = pooled.of_mean(known[quantity].to_numpy(), known[f"{quantity}_fall_u"].to_numpy())
    particle, shared = (float(known[f"{quantity}_{part}_u"].mean()) for part in ("particle", "shared"))
    return math.hypot(random, particle), shared


def lot_u(own: FloatArray, shared: FloatArray) -> float:
    """Standard uncertainty of the mean of particles, from the two parts of each."""
    if len(own) == 0:
        return math.nan
    return math.hypot(float(np.sqrt(np.sum(own**2))) / len(own), float(np.mean(shared)))
