"""Flow curves and the constants of the viscometer."""

from __future__ import annotations

import numpy as np
import pytest

from settlelab.physics.rheology import SHEAR_RATE_PER_RPM, SHEAR_STRESS_PER_DEGREE, Rheology


def test_shear_rate_follows_from_the_radii() -> None:
    """Rotor 18.415 mm, bob 17.245 mm (print, oil-field standard): rate at the bob 2 Omega/(1 - (Rb/Rr)^2)."""
    per_rpm = 2 * (2 * np.pi / 60) / (1 - (17.245 / 18.415) ** 2)
    assert per_rpm == pytest.approx(SHEAR_RATE_PER_RPM, abs=5e-5)


def test_dial_reading_at_300_rpm_is_the_viscosity() -> None:
    """The convention of the trade: degrees at 300 rpm = mPa s."""
    viscosity = SHEAR_STRESS_PER_DEGREE / (300 * SHEAR_RATE_PER_RPM)
    assert viscosity == pytest.approx(1e-3, rel=1e-4)


def test_flow_curves() -> None:
    mud = Rheology(consistency=0.8, flow_index=0.5, yield_stress=3.0)
    assert mud.shear_stress([4.0, 100.0]) == pytest.approx([4.6, 11.0])  # 3 + 0.8 * 2, 3 + 0.8 * 10
    assert mud.viscosity(100.0) == pytest.approx(0.11)
    assert Rheology(consistency=0.02).viscosity([1.0, 500.0]) == pytest.approx([0.02, 0.02])


def test_fields_broadcast() -> None:
    draws = Rheology(consistency=np.full(7, 0.8), flow_index=np.linspace(0.4, 0.6, 7))
    assert draws.viscosity([[1.0], [10.0]]).shape == (2, 7)
