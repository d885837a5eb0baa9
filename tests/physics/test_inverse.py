"""From a velocity back to diameter, sphericity and viscosity."""

from __future__ import annotations

from functools import partial

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from settlelab.physics.drag import DRAG, terminal_velocity
from settlelab.physics.inverse import effective_diameter, effective_sphericity, effective_viscosity
from settlelab.physics.rheology import Rheology
from settlelab.physics.walls import wall_factor

SPHERE = DRAG["cheng-2009"].drag_coefficient


@given(st.floats(1e-4, 2e-2), st.floats(1e-3, 5.0), st.floats(0.4, 1.0), st.sampled_from([0.0, 0.5]))
def test_diameter(diameter: float, consistency: float, flow_index: float, yield_share: float) -> None:
    limit = 0.0477 * 9.80665 * diameter * 1500
    mud = Rheology(consistency=consistency, flow_index=flow_index, yield_stress=yield_share * limit)
    settling = terminal_velocity(SPHERE, diameter=diameter, particle_density=2600, fluid_density=1100, rheology=mud)
    found = effective_diameter(settling.velocity, SPHERE, densities=(2600, 1100), rheology=mud)
    assert found == pytest.approx(diameter, rel=1e-8)


def test_diameter_of_stokes_and_of_nothing() -> None:
    """By hand: d = sqrt(18 mu V / (g drho))."""
    stokes = DRAG["stokes-1851"].drag_coefficient
    found = effective_diameter([2e-4, 0.0, np.nan], stokes, densities=(2650, 1000), rheology=Rheology(consistency=1.0))
    assert found[0] == pytest.approx(np.sqrt(18 * 2e-4 / (9.80665 * 1650)), rel=1e-9)
    assert np.isnan(found[1:]).all()


@pytest.mark.parametrize("name", ["ganser-1993", "haider-levenspiel-1989", "coelho-massarani-1996", "chien-1994"])
@pytest.mark.parametrize("consistency", [1e-3, 0.05])
def test_sphericity(name: str, consistency: float) -> None:
    method, water = DRAG[name], Rheology(consistency=consistency)
    truth = np.array([0.7, 0.8, 0.9])
    bound = partial(method.drag_coefficient, sphericity=truth)
    settling = terminal_velocity(bound, diameter=4e-3, particle_density=2650, fluid_density=1000, rheology=water)
    found = effective_sphericity(settling.velocity, method, diameter=4e-3, densities=(2650, 1000), rheology=water)
    assert found == pytest.approx(truth, rel=1e-8)
    too_fast = effective_sphericity(3.0, method, diameter=4e-3, densities=(2650, 1000), rheology=water)
    assert np.isnan(too_fast)


def test_sphericity_of_a_law_without_it() -> None:
    with pytest.raises(ValueError, match="wu-wang-2006 does not take the sphericity"):
        effective_sphericity(
            0.1, DRAG["wu-wang-2006"], diameter=4e-3, densities=(2650, 1000), rheology=Rheology(consistency=1e-3)
        )


@given(st.floats(1e-3, 10.0), st.floats(5e-4, 1e-2))
def test_viscosity_in_a_column(viscosity: float, diameter: float) -> None:
    fluid = Rheology(consistency=viscosity)
    free = terminal_velocity(SPHERE, diameter=diameter, particle_density=2500, fluid_density=1200, rheology=fluid)
    if free.reynolds > 1500:
        return
    in_column = free.velocity * wall_factor(diameter / 0.05, free.reynolds).factor
    found = effective_viscosity(in_column, SPHERE, diameter=diameter, densities=(2500, 1200), bore=0.05)
    assert found == pytest.approx(viscosity, rel=1e-6)


@pytest.mark.parametrize(
    ("density", "viscosity", "velocity"),
    [(970, 0.373, 0.038), (965, 0.212, 0.060), (962, 0.113, 0.091), (960, 0.058, 0.128)],
)
def test_viscosity_of_a_fall_in_print(density: float, viscosity: float, velocity: float) -> None:
    """ten Cate et al. (2002), Phys. Fluids 14, 4012: sphere of 15 mm, 1120 kg/m3, velocity in unbounded fluid.

    Their velocities rest on the law of Abraham, whose drag is up to 9 % high here, and are given to two digits.
    """
    abraham = DRAG["abraham-1970"].drag_coefficient
    found = effective_viscosity(velocity, abraham, diameter=0.015, densities=(1120, density), gravity=9.81)
    assert found == pytest.approx(viscosity, rel=0.03)


def test_velocity_that_tells_no_viscosity() -> None:
    assert np.isnan(effective_viscosity(2.0, SPHERE, diameter=5e-3, densities=(2500, 1000)))
