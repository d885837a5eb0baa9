"""The scaled form that calibration stands on."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from settlelab.physics.drag import DRAG, ganser_factors, scaled_drag

cheng = DRAG["cheng-2009"].formula


@given(st.floats(0.3, 1.2), st.floats(1.0, 8.0))
def test_limits(k_stokes: float, k_newton: float) -> None:
    low, high = np.array(1e-9), np.array(1e15)
    assert scaled_drag(low, k_stokes, k_newton, cheng) == pytest.approx(24 / (low * k_stokes), rel=1e-6)
    assert scaled_drag(high, k_stokes, k_newton, cheng) == pytest.approx(0.47 * k_newton, rel=1e-3)  # plateau of cheng


def test_sphere_is_exact() -> None:
    reynolds = np.geomspace(1e-3, 1e5, 50)
    assert np.array_equal(scaled_drag(reynolds, 1.0, 1.0, cheng), cheng(reynolds))


@pytest.mark.parametrize(
    ("sphericity", "k_stokes", "k_newton"),
    [(0.67, 0.8712, 4.6197), (0.806, 0.9294, 2.9228), (0.846, 0.9451, 2.5264), (0.906, 0.9674, 1.9832), (1.0, 1, 1)],
)
def test_ganser_factors(sphericity: float, k_stokes: float, k_newton: float) -> None:
    """Worked by hand in the reference sheet from the formula that five public codes agree on."""
    assert ganser_factors(np.array(sphericity)) == pytest.approx((k_stokes, k_newton), abs=5e-5)
