"""The table for many particles against the solver."""

from __future__ import annotations

import tracemalloc
from functools import partial

import numpy as np
import pytest

from settlelab.physics.drag import DRAG, terminal_velocity, velocities_of_many
from settlelab.physics.rheology import Rheology

SHAPE = {
    "sphericity": 0.8,
    "corey_shape_factor": 0.6,
    "flatness": 0.6,
    "elongation": 0.8,
    "density_ratio": 2.65,
    "projected_area_ratio": 1.2,
    "projected_circularity": 0.9,
    "largest_circularity": 0.9,
    "powers_roundness": 3.5,
}


@pytest.mark.parametrize("name", DRAG)
def test_same_as_the_solver(name: str) -> None:
    """Every law, seams and drag crisis included, over nine decades of the Archimedes number."""
    draw = np.random.default_rng(4)
    diameter = np.exp(draw.uniform(np.log(3e-5), np.log(0.05), 400))
    density, viscosity = draw.uniform(900, 8000, 400), np.exp(draw.uniform(np.log(3e-4), np.log(2.0), 400))
    law = partial(DRAG[name].drag_coefficient, **{need: SHAPE[need] for need in DRAG[name].needs})
    found = velocities_of_many(law, diameter=diameter, densities=(density, 1050.0), viscosity=viscosity)
    exact = terminal_velocity(
        law,
        diameter=diameter,
        particle_density=density,
        fluid_density=1050.0,
        rheology=Rheology(consistency=viscosity),
    )
    assert found == pytest.approx(exact.velocity, rel=1e-8, abs=0)


def test_edges() -> None:
    law = DRAG["cheng-2009"].drag_coefficient
    found = velocities_of_many(law, diameter=[[1e-3], [np.nan]], densities=([2000, 1000, 500], 1000), viscosity=1e-3)
    assert found.shape == (2, 3)
    assert found[0, 0] > 0
    assert found[0, 1] == 0
    assert found[0, 2] < 0
    assert np.isnan(found[1, [0, 2]]).all()
    with pytest.raises(ValueError, match="must be above 0"):
        velocities_of_many(law, diameter=0.0, densities=(2000, 1000), viscosity=1e-3)
    by_particle = partial(DRAG["ganser-1993"].drag_coefficient, sphericity=np.array([0.7, 0.8]))
    with pytest.raises(ValueError, match="use terminal_velocity instead"):
        velocities_of_many(by_particle, diameter=[1e-3, 2e-3], densities=(2000, 1000), viscosity=1e-3)


def test_memory() -> None:
    """A million pairs of particle and draw, which broadcast: the result and a little more."""
    particles, draws = np.geomspace(1e-4, 1e-2, 1000)[:, None], np.linspace(9e-4, 1.1e-3, 1000)
    tracemalloc.start()
    found = velocities_of_many(
        DRAG["cheng-2009"].drag_coefficient, diameter=particles, densities=(2650.0, 1000.0), viscosity=draws
    )
    peak = tracemalloc.get_traced_memory()[1]
    tracemalloc.stop()
    assert found.shape == (1000, 1000)
    assert peak < found.nbytes + 50e6
