"""Falling-ball viscosity against published relations and a known answer."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from settlelab.errors import SettlelabError
from settlelab.measure import falling_ball_viscosity, measure_study
from settlelab.measure.chain import Bore, Setup, bore_of
from settlelab.measure.controls import Comparison, ControlDrop, expected_velocity
from settlelab.measure.fluids import FluidState, fluid_state
from settlelab.measure.particle import grain_of
from settlelab.measure.propagation import Effect, Estimate
from settlelab.measure.viscosity import viscosity_table
from settlelab.physics.rheology import Rheology
from settlelab.study.model import Particle
from settlelab.units import Quantity
from tests.measure.invented import COLUMN, OIL, study, track, tracked

UNKNOWN = Rheology(consistency=77.0)  # what the study states has no part in the answer


def ball(
    velocity: float, *, density: float, fluid_density: float, diameter: float = 2e-3, u: float = 0.0
) -> ControlDrop:
    """A ball in creeping flow far from walls, its velocity the only uncertain input."""
    fluid = FluidState(name="liquid", density=fluid_density, rheology=UNKNOWN, effects=())
    sphere = grain_of(Particle(name="B", diameter=Quantity(diameter), density=Quantity(density)), diameter)
    nothing = Estimate(velocity, u, {})
    return ControlDrop(
        recording="a1.mp4",
        particle="B",
        sphere=sphere,
        setup=Setup(scale_u=0.0, clock_u=0.0, bore=Bore(math.inf, ()), fluid=fluid),
        track_u=u,
        seen_diameter=diameter,
        comparison=Comparison(expected=nothing, measured=nothing),
    )


def test_ratio_of_two_liquids_as_in_nist_tn_1900() -> None:
    # NIST TN 1900 (2015), example E3: ball 2217 kg/m3; reference 810 kg/m3, 4.63 mPa s, 36.6 s; liquid 1180 kg/m3, 61 s
    # over the same length; printed 5.69 mPa s. The relation is that of creeping flow: the fall is made slow enough.
    reference = falling_ball_viscosity([ball(1e-6 / 36.6, density=2217, fluid_density=810)])
    liquid = falling_ball_viscosity([ball(1e-6 / 61.0, density=2217, fluid_density=1180)])
    assert 4.63 * liquid.value / reference.value == pytest.approx(5.69, abs=0.005)
    u_time = falling_ball_viscosity([ball(1e-6 / 61.0, density=2217, fluid_density=1180, u=1e-6 / 61.0 / 10)])
    assert u_time.shares["track"] * u_time.u**2 == pytest.approx((0.1 * u_time.value) ** 2, rel=0.05)


def test_absolute_value_by_stokes() -> None:
    # Stokes (1851): mu = g d^2 (rho_s - rho)/(18 V)
    found = falling_ball_viscosity([ball(1e-6, density=2500, fluid_density=1000)])
    assert found.value == pytest.approx(9.80665 * 4e-6 * 1500 / (18 * 1e-6), rel=0.002)
    assert math.sqrt(found.shares["drag law"]) * found.u / found.value == pytest.approx(0.025, rel=0.02)


def glass(fluid: FluidState, name: str, diameter: float, *, truth: float) -> ControlDrop:
    """A glass sphere in a fluid of viscosity `truth`, measured without error but with an uncertainty."""
    particle = Particle(name=name, diameter=Quantity(diameter, 5e-6), density=Quantity(2500.0, 5.0))
    sphere = grain_of(particle, diameter)
    setup = Setup(scale_u=1e-3, clock_u=1e-4, bore=bore_of(COLUMN), fluid=fluid)
    real = replace(setup, fluid=replace(fluid, rheology=Rheology(consistency=truth)))
    velocity = expected_velocity(sphere, real).value
    measured = Estimate(velocity, 0.002 * velocity, {})
    return ControlDrop(
        recording="a1.mp4",
        particle=name,
        sphere=sphere,
        setup=setup,
        track_u=0.002 * velocity,
        seen_diameter=diameter,
        comparison=Comparison(expected=measured, measured=measured),
    )


@pytest.mark.parametrize("truth", [0.002, 0.05, 2.0])
def test_known_answer_at_any_reynolds_number_whatever_was_stated(truth: float) -> None:
    fluid = fluid_state(OIL)
    found = falling_ball_viscosity([glass(fluid, f"S-{d}", d, truth=truth) for d in (2e-3, 4e-3)])
    assert found.value == pytest.approx(truth, rel=1e-6)


def test_thin_fluids_are_told_less_well() -> None:
    fluid = fluid_state(OIL)
    thin, thick = (falling_ball_viscosity([glass(fluid, "S", 4e-3, truth=truth)]) for truth in (0.002, 2.0))
    assert thin.u / thin.value > 3 * thick.u / thick.value


def test_repeating_a_drop_lowers_the_part_of_the_track_only() -> None:
    fluid = fluid_state(OIL)
    one, four = (falling_ball_viscosity([glass(fluid, "S", 4e-3, truth=0.5)] * count) for count in (1, 4))
    part = {name: [each.shares[name] * each.u**2 for each in (one, four)] for name in ("track", "size", "scale")}
    assert part["track"][1] == pytest.approx(part["track"][0] / 4, rel=0.01)
    assert part["size"][1] == pytest.approx(part["size"][0], rel=0.01)
    assert part["scale"][1] == pytest.approx(part["scale"][0], rel=0.01)


def test_uncertainty_by_monte_carlo() -> None:
    fluid = replace(fluid_state(OIL), effects=(Effect("fluid density", {"fluid_density": 2.0}),))
    drop = glass(fluid, "S", 4e-3, truth=0.3)
    found = falling_ball_viscosity([drop])
    rng = np.random.default_rng(5)
    values = []
    for _ in range(150):
        diameter, density = 4e-3 + 5e-6 * rng.standard_normal(), 2500 + 5 * rng.standard_normal()
        moved = grain_of(Particle(name="S", diameter=Quantity(diameter), density=Quantity(density)), diameter)
        state = replace(fluid, density=fluid.density + 2 * rng.standard_normal())
        speed = drop.comparison.measured.value * (1 + math.hypot(0.002, 1e-3, 1e-4) * rng.standard_normal())
        seen = Estimate(speed, 0.0, {})
        setup = Setup(scale_u=0.0, clock_u=0.0, bore=Bore(drop.setup.bore.diameter, ()), fluid=state)
        values.append(
            falling_ball_viscosity(
                [replace(drop, sphere=moved, setup=setup, comparison=Comparison(expected=seen, measured=seen))]
            ).value
        )
    drawn = sum(found.shares[name] for name in ("track", "scale", "clock", "size", "particle density", "fluid density"))
    assert np.std(values) == pytest.approx(math.sqrt(drawn) * found.u, rel=0.2)


def test_of_a_measured_study_beside_what_was_stated() -> None:
    sphere = Particle(name="S-1", diameter=Quantity(4e-3, 5e-6), density=Quantity(2500.0, 5.0), control=True)
    asked = study(sphere)
    grain = grain_of(sphere, 4e-3)
    setup = Setup(scale_u=0.0, clock_u=0.0, bore=bore_of(COLUMN), fluid=fluid_state(OIL))
    velocity = expected_velocity(grain, setup).value
    measured = measure_study(asked, [tracked(track(velocity))])
    assert measured.viscosities is not None
    row = measured.viscosities.iloc[0]
    assert row["fluid"] == "oil"
    assert abs(row["viscosity"] - 0.373) < 2 * row["viscosity_u"]
    assert row["stated_viscosity"] == pytest.approx(0.373)
    assert row["stated_viscosity_u"] == pytest.approx(0.003)


def test_what_it_refuses() -> None:
    fluid = fluid_state(OIL)
    drop = glass(fluid, "S", 4e-3, truth=0.5)
    other = replace(drop, setup=replace(drop.setup, fluid=replace(fluid, name="other")))
    gel = replace(
        drop, setup=replace(drop.setup, fluid=replace(fluid, rheology=Rheology(consistency=0.5, flow_index=0.6)))
    )
    with pytest.raises(SettlelabError, match="drops in one fluid, not in 2"):
        falling_ball_viscosity([drop, other])
    with pytest.raises(SettlelabError, match="not Newtonian has no one viscosity"):
        falling_ball_viscosity([gel])
    assert viscosity_table([gel]).empty
