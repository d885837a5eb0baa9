"""Field numbers and the readings a settling test uses; single values are in test_values.py."""

from __future__ import annotations

import numpy as np
import pytest

from settlelab.physics.oilfield import bingham_numbers, readings_of_the_fall, shear_rate_correction
from settlelab.physics.rheology import SHEAR_RATE_PER_RPM

RATES = SHEAR_RATE_PER_RPM * np.array([3, 6, 100, 200, 300, 600])


def test_apparent_viscosity() -> None:
    assert bingham_numbers(65.0, 39.0).apparent_viscosity == pytest.approx(0.0325)  # AV = R600/2


def test_newtonian_rate_is_not_corrected() -> None:
    assert shear_rate_correction(1.0) == 1.0
    assert np.all(np.diff(shear_rate_correction(np.linspace(0.2, 1.2, 20))) < 0)


@pytest.mark.parametrize(
    ("velocity", "diameter", "used"),
    [
        ([0.05, 0.1], [5e-3, 5e-3], [True, True, True, False, False, False]),  # V/d 10 to 20: from 5.1 to 170
        ([0.005], [5e-3], [True, False, False, False, False, False]),  # 1: below all readings
        ([30.0], [5e-3], [False, False, False, False, False, True]),  # 6000: above all
        ([np.nan], [5e-3], [False] * 6),
    ],
)
def test_readings_of_the_fall(velocity: list[float], diameter: list[float], used: list[bool]) -> None:
    assert readings_of_the_fall(RATES, velocity, diameter).tolist() == used
