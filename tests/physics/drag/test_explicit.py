"""Laws in d*: used as drag laws they must give back the velocity that they state."""

from __future__ import annotations

from functools import partial

import numpy as np
import pytest

from settlelab.physics.drag import DRAG, terminal_velocity
from settlelab.physics.rheology import Rheology

EXPLICIT = [method for method in DRAG.values() if method.takes == "dstar"]
SHAPE = {"sphericity": 0.8, "corey_shape_factor": 0.7, "powers_roundness": 3.5}


@pytest.mark.parametrize("method", EXPLICIT, ids=lambda method: method.name)
def test_solver_gives_the_stated_velocity(method) -> None:
    """Without iteration by hand: Re = f(d*), V = Re mu / (rho d)."""
    diameter = np.array([1e-4, 3e-4, 1e-3, 4e-3])
    dstar = np.cbrt(9.80665 * 1650 * 1000 * diameter**3 / 1e-3**2)
    stated = method.evaluate(dstar=dstar, **SHAPE) * 1e-3 / (1000 * diameter)
    settling = terminal_velocity(
        partial(method.drag_coefficient, **SHAPE),
        diameter=diameter,
        particle_density=2650,
        fluid_density=1000,
        rheology=Rheology(consistency=1e-3),
    )
    assert settling.velocity == pytest.approx(stated, rel=1e-9)


@pytest.mark.parametrize("method", EXPLICIT, ids=lambda method: method.name)
def test_dstar_is_the_inverse(method) -> None:
    dstar = np.array([[0.7], [5.0], [40.0]])
    sphericity = np.array([0.7, 0.9])
    given = {**SHAPE, "sphericity": sphericity}
    reynolds = method.evaluate(dstar=dstar, **given) * np.ones_like(dstar * sphericity)
    assert method.dstar(reynolds, **given) == pytest.approx(dstar * np.ones_like(reynolds), rel=1e-9)


def test_dstar_of_a_law_of_the_reynolds_number() -> None:
    stokes = DRAG["stokes-1851"]
    assert stokes.dstar(0.05) ** 3 == pytest.approx(18 * 0.05, rel=1e-12)  # Ar = 18 Re in creeping flow


def test_range_in_dstar_is_kept_at_the_reynolds_number() -> None:
    madsen = DRAG["jimenez-madsen-2003"]
    reynolds = madsen.evaluate(dstar=[1.4, 1.6, 24.0, 26.0])
    assert madsen.within(reynolds=reynolds).tolist() == [False, True, True, False]
    with pytest.raises(ValueError, match="jimenez-madsen-2003 needs reynolds"):
        madsen.within(sphericity=0.8)
