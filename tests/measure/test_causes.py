"""Control drops that fail for a known reason: the reason is found, with its size."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from settlelab.measure import causes
from settlelab.measure.causes import likely_causes
from settlelab.measure.chain import Setup, bore_of
from settlelab.measure.controls import Comparison, ControlDrop, expected_velocity
from settlelab.measure.fluids import FluidState, fluid_state
from settlelab.measure.particle import grain_of
from settlelab.measure.propagation import Estimate
from settlelab.physics.rheology import Rheology
from settlelab.study.model import Particle
from settlelab.units import Quantity
from tests.measure.invented import COLUMN, OIL

STATED = fluid_state(replace(OIL, viscosity=Quantity(0.05, 0.0001)))
SPHERES = ((1.5e-3, 2500.0), (3e-3, 2500.0), (6e-3, 2500.0), (4e-3, 1400.0), (6e-3, 7800.0))  # Re 1 to 500


def thicker(fluid: FluidState, factor: float) -> FluidState:
    return replace(fluid, rheology=Rheology(consistency=float(fluid.rheology.arrays()[0]) * factor))


def drop_of(
    diameter: float, density: float, *, truth: FluidState, scale: float = 1.0, rate: float = 1.0, stated=STATED
) -> ControlDrop:
    """What is measured where the fluid is `truth` and scale and rate are so many times what was stated."""
    particle = Particle(name=f"{diameter} {density}", diameter=Quantity(diameter, 1e-6), density=Quantity(density, 1.0))
    sphere = grain_of(particle, diameter)
    setup = Setup(scale_u=1e-3, clock_u=1e-4, bore=bore_of(COLUMN), fluid=stated)
    true_velocity = expected_velocity(sphere, replace(setup, fluid=truth)).value
    velocity = true_velocity / scale / rate
    comparison = Comparison(
        expected=expected_velocity(sphere, setup), measured=Estimate(velocity, 0.002 * velocity, {})
    )
    return ControlDrop(
        recording="a1.mp4",
        particle=particle.name,
        sphere=sphere,
        setup=setup,
        track_u=0.001 * velocity,
        seen_diameter=diameter / scale,
        comparison=comparison,
    )


@pytest.mark.parametrize(
    ("wrong", "quantity", "change"),
    [
        ({"truth": STATED, "scale": 1.08}, "scale (mm per px)", 0.08),
        ({"truth": STATED, "rate": 30000 / 1001 / 25}, "frame rate", 30000 / 1001 / 25 - 1),
        ({"truth": thicker(STATED, 1.3)}, "viscosity of oil", 0.3),
        ({"truth": replace(STATED, density=STATED.density * 1.15)}, "density of oil", 0.15),
    ],
    ids=lambda value: value if isinstance(value, str) else "",
)
def test_the_one_cause_is_found_with_its_size(wrong: dict, quantity: str, change: float) -> None:
    drops = [drop_of(*sphere, **wrong) for sphere in SPHERES]
    assert any(not drop.comparison.passed for drop in drops)
    first = causes(drops)[0]
    assert first.quantity == quantity
    assert first.change == pytest.approx(change, abs=0.004)
    assert first.explains
    assert first.largest_en < 0.05
    assert quantity in likely_causes(drops).split("; or ")[0]
    assert f"{100 * change:.2g} % above" in likely_causes(drops)


def test_found_among_noise() -> None:
    rng = np.random.default_rng(8)
    drops = []
    for sphere in SPHERES * 2:
        drop = drop_of(*sphere, truth=thicker(STATED, 1.25))
        noisy = drop.comparison.measured.value * (1 + 0.003 * rng.standard_normal())
        drops.append(replace(drop, comparison=replace(drop.comparison, measured=Estimate(noisy, 0.003 * noisy, {}))))
    first = causes(drops)[0]
    assert first.quantity == "viscosity of oil"
    assert first.change == pytest.approx(0.25, abs=0.02)


def test_a_fluid_is_named_where_only_its_drops_fail() -> None:
    water = replace(STATED, name="thin", rheology=Rheology(consistency=0.004))
    thin = [drop_of(*sphere, truth=water, stated=water) for sphere in SPHERES]
    oil = [drop_of(*sphere, truth=thicker(STATED, 1.4)) for sphere in SPHERES]
    explaining = [cause.quantity for cause in causes([*thin, *oil]) if cause.explains]
    assert explaining == ["viscosity of oil"]


def test_two_spheres_mixed_up_have_no_common_cause() -> None:
    first, second = (drop_of(*sphere, truth=STATED) for sphere in ((2e-3, 2500.0), (4e-3, 2500.0)))
    mixed = [
        replace(first, comparison=replace(first.comparison, measured=second.comparison.measured)),
        replace(second, comparison=replace(second.comparison, measured=first.comparison.measured)),
    ]
    assert likely_causes(mixed).startswith("none of scale, frame rate, viscosity and fluid density alone")


def test_one_sphere_tells_little_and_says_so() -> None:
    told = likely_causes([drop_of(3e-3, 2500.0, truth=thicker(STATED, 1.3))])
    assert told.count("; or ") == 2
    assert told.endswith("two different spheres would tell more")
