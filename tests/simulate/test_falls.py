"""How simulated particles move."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from settlelab.physics.rheology import Rheology
from settlelab.simulate import Column, Drop, Liquid, Manner, Particle, ShapeLaw, Sphere, angular_grain, positions, truth
from settlelab.simulate.falls import settle, trajectories
from settlelab.simulate.scene import Scene
from settlelab.simulate.schedule import with_drops
from tests.simulate.scenes import LIQUID, SPHERE, small_scene

GRAIN = Particle(name="G", body=angular_grain(np.random.default_rng(2), equivalent_diameter=4e-3), density=2600.0)


def balance(velocity: float, particle: Particle, liquid: Liquid, law: ShapeLaw) -> float:
    """Weight in the fluid over drag, written out from the definition of the drag coefficient (Newtonian fluid)."""
    d = particle.body.equivalent_diameter
    viscosity = float(np.asarray(liquid.rheology.consistency))
    reynolds = liquid.density * velocity * d / viscosity
    long, intermediate, short = particle.body.axes
    corey = short / np.sqrt(long * intermediate)
    stokes, newton = corey**-law.stokes_exponent, corey**-law.newton_exponent
    scaled = reynolds * newton / stokes
    # Clift & Gauvin (1971), Can. J. Chem. Eng. 49, 439: the sphere law of the simulator, typed anew
    sphere = 24 / scaled * (1 + 0.15 * scaled**0.687) + 0.42 / (1 + 42500 * scaled**-1.16)
    drag = newton * sphere * particle.scatter * np.pi / 8 * liquid.density * d**2 * velocity**2
    return float((particle.density - liquid.density) * 9.80665 * np.pi / 6 * d**3 / drag)


@pytest.mark.parametrize("particle", [SPHERE, GRAIN, replace(GRAIN, scatter=1.2)], ids=["sphere", "grain", "odd grain"])
def test_terminal_velocity_balances_weight_and_drag(particle: Particle) -> None:
    scene = small_scene(particle)
    state = settle(particle, scene)
    assert balance(state.unbounded_velocity, particle, scene.liquid, scene.law) == pytest.approx(1.0, abs=1e-6)


def test_wall_slows_the_fall() -> None:
    narrow = replace(small_scene(), column=Column(bore=0.012, surface=-0.2))
    state = settle(SPHERE, narrow)
    # diameter over bore 1/3 at Re 15: computed table of the lab reference, 4.2, by eye between its columns
    assert state.wall_factor == pytest.approx(0.72, abs=0.04)
    assert trajectories(narrow)[0].terminal == pytest.approx(state.unbounded_velocity * state.wall_factor)


def test_a_fall_begins_at_rest_and_ends_at_terminal_velocity() -> None:
    scene = small_scene()
    fall = trajectories(scene)[0]
    start = fall.drop.time
    assert fall.at(start - 1.0)[:2] == (0.0, -0.2)
    # at first it falls at (rho_p - rho) g / (rho_p + rho / 2), slowed a little by drag and history from the start
    assert 0.3 < (fall.fallen(start + 0.002) / (0.5 * 1300 * 9.80665 / 3100 * 0.002**2)) < 1.0
    assert fall.speed(0.3) == pytest.approx(fall.terminal, rel=1e-3)
    far = fall.fallen(start + 1000.0) - fall.fallen(start + 999.0)
    assert far == pytest.approx(fall.terminal)


def test_positions_follow_the_truth_table() -> None:
    scene = small_scene()
    table, row = positions(scene), truth(scene).iloc[0]
    velocity = np.polyfit(table["time"], table["y_px"], 1)[0] * scene.camera.metre_per_px
    assert velocity == pytest.approx(row["velocity"], rel=1e-3)
    assert table["frame"].iloc[0] == row["first_frame"]
    assert table["frame"].iloc[-1] == row["last_frame"]
    assert row["fraction_of_terminal"] == pytest.approx(1.0, abs=1e-3)
    radius = 2e-3 / scene.camera.metre_per_px
    assert table["y_px"].between(radius - 0.5, scene.camera.height - 0.5 - radius).all()


@pytest.mark.parametrize("particle", [SPHERE, GRAIN], ids=["sphere", "grain"])
def test_a_particle_comes_to_lie_on_the_bottom(particle: Particle) -> None:
    scene = small_scene(particle)
    scene = replace(scene, column=replace(scene.column, bottom=0.03), duration=2.0)
    tumbling = replace(scene.drops[0], turns_per_metre=5.0, tilt=(0.0, 0.6, 0.8))
    scene = replace(scene, drops=(tumbling,))
    fall = trajectories(scene)[0]
    _, y, rotation = fall.at(2.0)
    assert y + particle.body.depth(rotation) == pytest.approx(0.03, abs=5e-5)
    assert fall.at(1.9)[1] == y
    assert truth(scene)["last_frame"].iloc[0] < 110


def test_drag_law_is_a_sphere_law_for_spheres_and_a_power_law_of_shape_for_grains() -> None:
    law = ShapeLaw(stokes_exponent=0.2, newton_exponent=1.0)
    assert law.drag_ratios(Sphere(1e-3)) == (1.0, 1.0)
    long, intermediate, short = GRAIN.body.axes
    corey = short / np.sqrt(long * intermediate)
    assert law.drag_ratios(GRAIN.body) == pytest.approx((corey**-0.2, 1 / corey))
    by_sphericity = ShapeLaw(descriptor="sphericity", stokes_exponent=0.2, newton_exponent=1.0)
    sphericity = GRAIN.body.sphericity
    assert by_sphericity.drag_ratios(GRAIN.body) == pytest.approx((sphericity**-0.2, 1 / sphericity))
    creeping = law.drag(GRAIN.body)(np.array([1e-6]))
    assert creeping == pytest.approx(24 / 1e-6 * corey**-0.2, rel=1e-4)  # Stokes (1851), times k_S


def test_power_law_fluid_falls_by_its_own_flow_curve() -> None:
    mud = Liquid(density=1000.0, rheology=Rheology(consistency=2.0, flow_index=0.5))
    scene = replace(small_scene(), liquid=mud)
    state = settle(SPHERE, scene)
    d, v = 4e-3, state.unbounded_velocity
    # creeping fall: 3 pi K V^n d^(2-n) X(n) = weight, X(0.5) = 1.476 (lab reference 4.3); Re is small enough
    weight = 1500 * 9.80665 * np.pi / 6 * d**3
    assert 3 * np.pi * 2.0 * v**0.5 * d**1.5 * 1.476 == pytest.approx(weight, rel=0.03)
    assert state.reynolds < 0.2


def test_drops_follow_one_another_without_meeting() -> None:
    base = Scene(liquid=LIQUID, drops=(), duration=1.0, camera=small_scene().camera, column=Column(surface=-0.3))
    rng = np.random.default_rng(5)
    scene = with_drops(base, [SPHERE, GRAIN, SPHERE, GRAIN], rng, Manner(depth=-0.25))
    table = truth(scene)
    assert list(table["particle"]) == ["S", "G", "S", "G"]
    assert (table["first_frame"].to_numpy()[1:] > table["last_frame"].to_numpy()[:-1]).all()
    assert table["last_frame"].iloc[-1] < len(scene.times) - 5
    assert isinstance(scene.drops[0], Drop)
    assert np.abs([drop.x for drop in scene.drops]).max() <= Manner().spread
