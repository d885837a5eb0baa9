"""What a calibration hands on."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
import pandas as pd
from numpy.typing import ArrayLike

from settlelab.calibrate.card import Card
from settlelab.calibrate.form import Form
from settlelab.physics.constants import FloatArray

__all__ = ["CalibratedFit", "Calibration", "FittedParameter"]


@dataclass(frozen=True, slots=True, kw_only=True)
class FittedParameter:
    """A parameter with its standard uncertainty and 95 % interval; these are nan where it stands at a bound.

    The interval is that of the profile likelihood for the form that is chosen, and symmetric for the others.
    """

    name: str
    value: float
    u: float
    low: float
    high: float
    at_bound: bool
    meaning: str


@dataclass(frozen=True, slots=True, kw_only=True)
class CalibratedFit:
    """A calibrated form fitted to the drops of a study. Scatters are relative standard deviations of the velocity."""

    form: Form
    parameters: tuple[FittedParameter, ...]
    covariance: FloatArray  # (P, P)
    correlation: FloatArray  # (P, P)
    between_particles: float
    repeatability: float
    residual_scatter: float  # of a single drop of a new particle
    degrees: int  # of freedom
    aicc: float
    rms_percent: float
    cv_rms_percent: float  # on particles left out of the fit
    drops: int
    particles: int
    warnings: tuple[str, ...]

    @property
    def name(self) -> str:
        """As in the ranking."""
        return self.form.name

    @property
    def formula(self) -> str:
        """Readable without settlelab."""
        return self.form.formula

    @property
    def needs(self) -> tuple[str, ...]:
        """Descriptors that every particle must have."""
        return self.form.needs

    @property
    def names(self) -> tuple[str, ...]:
        """Names of the coefficients, as in the formula."""
        return tuple(parameter.name for parameter in self.parameters)

    @property
    def values(self) -> FloatArray:
        """Coefficients, (P,)."""
        return np.array([parameter.value for parameter in self.parameters])

    @property
    def u(self) -> FloatArray:
        """Standard uncertainties of the coefficients, (P,); nan at a bound."""
        return np.array([parameter.u for parameter in self.parameters])

    def drag_coefficient(self, reynolds: ArrayLike, **descriptors: ArrayLike) -> FloatArray:
        """Drag coefficient [-] at a Reynolds number; descriptors broadcast, those not needed are passed over.

        Raises
        ------
        ValueError
            A descriptor that the form needs was not given.
        """
        if missing := [name for name in self.form.needs if name not in descriptors]:
            raise ValueError(f"{self.name} needs {' and '.join(missing)}")
        shapes = {name: np.asarray(value, dtype=np.float64) for name, value in descriptors.items()}
        return self.form.law(self.values)(np.asarray(reynolds, dtype=np.float64), shapes)


@dataclass(frozen=True, slots=True, kw_only=True)
class Calibration:
    """Which law holds for these drops, and the calibrated form if one does better on particles it has not seen."""

    ranking: pd.DataFrame  # columns of ranking.csv, best first
    ranking_by_group: pd.DataFrame  # the same measures by lot and by decade of the Reynolds number
    predictions: pd.DataFrame  # drop, method, kind, predicted_velocity [m/s, unbounded], deviation, in_range
    best_published: str
    fits: tuple[CalibratedFit, ...]
    chosen: CalibratedFit | None  # None: the published law is kept
    card: Card
    residual_checks: pd.DataFrame  # of the law on the card: tests for trends, lots, normality
    influence: pd.DataFrame | None  # what leaving out a particle moves; None for a published law
    left_out: Mapping[str, str]  # published methods and forms that could not be used, with the reason
    notes: tuple[str, ...]  # the verdict first
