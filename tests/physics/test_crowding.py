"""Neighbours and waiting; single published values are in test_values.py."""

from __future__ import annotations

import numpy as np
import pytest

from settlelab.errors import SettlelabError
from settlelab.physics.crowding import (
    CROWDING,
    hindered_factor,
    pair_drag_factor,
    resting_time,
    wake_velocity_share,
)
from tests.physics.outside import published


def test_hindered_factor() -> None:
    """By hand at creeping exponent 4.65 (Richardson & Zaki eq. 33): 0.9^4.65; 4.7 of Rowe at Re 0."""
    assert hindered_factor(0.1, 0.01, method="richardson-zaki-1954") == pytest.approx(0.9**4.65)
    assert hindered_factor([0.0, 2e-4], 1e-6) == pytest.approx([1.0, (1 - 2e-4) ** 4.7], rel=1e-6)
    assert np.isnan(hindered_factor(0.1, np.nan))
    with pytest.raises(ValueError, match="between 0 and 1"):
        hindered_factor(1.0, 1.0)
    with pytest.raises(SettlelabError, match='did you mean "rowe-1987"'):
        hindered_factor(0.1, 1.0, method="row-1987")


@pytest.mark.parametrize("name", CROWDING)
def test_exponents_fall_from_creeping_to_newton(name: str) -> None:
    reynolds = np.geomspace(1e-4, 1e6, 300)
    exponent = CROWDING[name].evaluate(reynolds=reynolds, ratio=0.0)
    assert np.all(np.diff(exponent) < 0.15)  # but for the seams of the pieces
    assert 4.5 < exponent[0] < 6.6
    assert 2.3 < exponent[-1] < 3.1
    assert np.isnan(CROWDING[name].evaluate(reynolds=np.nan, ratio=0.0))


def test_every_exponent_has_a_value_from_outside() -> None:
    rows = [row["inputs"] for row in published("values.csv") if row["what"] == "crowding exponent"]
    assert all(any(f"method={name};" in row for row in rows) for name in CROWDING)


def test_pair_far_apart_and_touching() -> None:
    assert 1 - pair_drag_factor(200.0) == pytest.approx(3 / 4 / 200, rel=0.01)  # far field
    assert pair_drag_factor(1.00001) == pytest.approx(0.645, abs=5e-4)  # contact, in print
    with pytest.raises(ValueError, match="above one diameter"):
        pair_drag_factor(1.0)


def test_wake_and_rest() -> None:
    """Reference sheet: 1 % of V at 85 d for Re 1 (Cd 27.2); 11 min for water in a bore of 100 mm."""
    assert wake_velocity_share(85.0, 1.0, 27.2) == pytest.approx(0.01, rel=0.01)
    assert resting_time(0.1, 1.0e-3, 998) / 60 == pytest.approx(11, abs=0.2)
    assert resting_time(0.1, 1.0, 998) < 1
    with pytest.raises(ValueError, match="share"):
        resting_time(0.1, 1.0, 998, share=1.0)
