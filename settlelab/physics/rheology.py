"""Fluid models and the viscometer readings that they are fitted to."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from settlelab.physics.constants import FloatArray

# Rotational viscometer with rotor and bob R1B1 (radii 18.415 and 17.245 mm). The shear rate at the bob follows from the
# radii, for a Newtonian liquid; the stress is fixed by the dial reading at 300 rpm being the viscosity in mPa s.
SHEAR_RATE_PER_RPM = 1.7023  # 1/s per rpm
SHEAR_STRESS_PER_DEGREE = 0.5107  # Pa per degree


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
        consistency, flow_index, yield_stress = self.arrays()
        return np.asarray(yield_stress + consistency * np.asarray(shear_rate, dtype=np.float64) ** flow_index)

    def viscosity(self, shear_rate: ArrayLike) -> FloatArray:
        """Apparent viscosity [Pa s] at a shear rate [1/s] above 0."""
        return np.asarray(self.shear_stress(shear_rate) / np.asarray(shear_rate, dtype=np.float64))

    def arrays(self) -> tuple[FloatArray, FloatArray, FloatArray]:
        """Consistency [Pa s^n], flow index [-] and yield stress [Pa] as arrays."""
        consistency, flow_index, yield_stress = (
            np.asarray(field, dtype=np.float64) for field in (self.consistency, self.flow_index, self.yield_stress)
        )
        return consistency, flow_index, yield_stress
