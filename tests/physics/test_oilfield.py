"""Field numbers and the readings a settling test uses; single values are in test_values.py."""

from __future__ import annotations

import numpy as np
import pytest

from settlelab.physics.flow_curve import fit_rheology
from settlelab.physics.oilfield import (
    bingham_numbers,
    readings_of_the_fall,
    shear_rate_correction,
    true_shear_rates,
)
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


def test_true_shear_rates_give_the_power_law_back() -> None:
    """The stress at the bob is K times the true rate to the n; fitted to nominal rates K comes out high by 1.066^n."""
    k, n = 0.8, 0.5
    stress = k * (RATES * shear_rate_correction(n)) ** n
    true = true_shear_rates(RATES, stress)
    fit = fit_rheology(true, stress, 0.01, "power-law")
    assert fit.rheology.consistency == pytest.approx(k, rel=1e-6)
    assert fit.rheology.flow_index == pytest.approx(n, rel=1e-6)
    nominal = fit_rheology(RATES, stress, 0.01, "power-law")
    assert nominal.rheology.consistency == pytest.approx(k * 1.0655**n, rel=1e-4)  # reference sheet: 6.6 % at n 0.5


@pytest.mark.parametrize(("rate", "stress"), [([5.1], [1.0]), ([10.0, 5.0], [1.0, 2.0]), ([5.0, 10.0], [0.0, 1.0])])
def test_readings_that_give_no_slope(rate: list[float], stress: list[float]) -> None:
    with pytest.raises(ValueError, match="two and more readings"):
        true_shear_rates(rate, stress)
