"""Fluid models and the viscometer readings that they are fitted to."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

FloatArray = NDArray[np.float64]


@dataclass(frozen=True, slots=True, kw_only=True)
class Rheology:
    """Herschel-Bulkley flow curve tau = yield_stress + consistency * rate**flow_index, and its special cases.

    Newtonian: flow index 1, yield stress 0, consistency = viscosity. Fields broadcast (Monte Carlo draws).
    """

    consistency: ArrayLike  # Pa s^n
    flow_index: ArrayLike = 1.0
    yield_stress: ArrayLike = 0.0  # Pa

    def shear_stress(self, shear_rate: ArrayLike) -> FloatArray:
        """Shear stress [Pa] at a shear rate [1/s] above 0."""
        rate = np.asarray(shear_rate, dtype=np.float64)
        consistency, flow_index, yield_stress = (
            np.asarray(field, dtype=np.float64) for field in (self.consistency, self.flow_index, self.yield_stress)
        )
        return yield_stress + consistency * rate**flow_index

    def viscosity(self, shear_rate: ArrayLike) -> FloatArray:
        """Apparent viscosity [Pa s] at a shear rate [1/s] above 0."""
        return self.shear_stress(shear_rate) / np.asarray(shear_rate, dtype=np.float64)
