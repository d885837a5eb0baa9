"""How dropped particles move: from rest to terminal velocity, turning and drifting, until they lie on the bottom."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from settlelab.physics.drag import terminal_velocity
from settlelab.physics.motion import Body, Medium, fall_from_release
from settlelab.physics.walls import wall_factor
from settlelab.simulate.grains import rotation_about
from settlelab.simulate.scene import Drop, Liquid, Particle, Scene

FloatArray = NDArray[np.float64]

STEP = 2e-3  # s, between the points at which a fall is known; it is smooth in between
MARGIN = 0.02  # m, how far below the view a fall is followed


@dataclass(frozen=True, slots=True, kw_only=True)
class Settled:
    """Terminal state of a particle; velocities in m/s, numbers of unbounded fluid."""

    unbounded_velocity: float
    reynolds: float
    drag_coefficient: float
    viscosity: float  # Pa s, apparent
    wall_factor: float


@dataclass(frozen=True, slots=True)
class Trajectory:
    """The way of one drop; time 0 is the first frame of the recording."""

    drop: Drop
    settled: Settled
    elapsed: FloatArray  # (N,) s after release
    distance: FloatArray  # (N,) m fallen, with the bottom not thought of
    landing: float  # m fallen when the particle touches the bottom; infinity without one

    @property
    def terminal(self) -> float:
        """Terminal velocity in the column [m/s]."""
        return self.settled.unbounded_velocity * self.settled.wall_factor

    @property
    def reach(self) -> float:
        """Largest distance [m] of the particle's surface from its mass centre."""
        return self.drop.particle.body.reach

    def fallen(self, time: float) -> float:
        """Way fallen [m] at a time [s]; beyond the last known point at terminal velocity."""
        elapsed = max(time - self.drop.time, 0.0)
        beyond = max(elapsed - float(self.elapsed[-1]), 0.0) * self.terminal
        return min(float(np.interp(elapsed, self.elapsed, self.distance)) + beyond, self.landing)

    def speed(self, time: float) -> float:
        """Velocity along gravity [m/s] at a time [s]."""
        return (self.fallen(time + STEP / 2) - self.fallen(time - STEP / 2)) / STEP

    def at(self, time: float) -> tuple[float, float, FloatArray]:
        """Mass centre x, y [m] and rotation (3, 3) at a time [s]."""
        fallen = self.fallen(time)
        return self.drop.x + self.drop.drift * fallen, self.drop.y + fallen, _turned(self.drop, fallen)

    def whole_frames(self, scene: Scene) -> NDArray[np.int64]:
        """Numbers of the frames that show the whole particle on its way down."""
        times = scene.times
        fallen = np.array([self.fallen(float(time)) for time in times])
        y = self.drop.y + fallen
        inside = (y > self.reach) & (y < scene.camera.height * scene.camera.metre_per_px - self.reach)
        return np.flatnonzero(inside & (times > self.drop.time) & (fallen < self.landing))


def settle(particle: Particle, scene: Scene, scatter: float = 1.0) -> Settled:
    """Terminal state of a particle in the liquid and the column of a scene; `scatter` is that of the drop."""
    liquid, diameter = scene.liquid, particle.body.equivalent_diameter
    free = terminal_velocity(
        scene.law.drag(particle.body, particle.scatter * scatter),
        diameter=diameter,
        particle_density=particle.density,
        fluid_density=liquid.density,
        rheology=liquid.rheology,
    )
    velocity, reynolds = float(free.velocity), float(free.reynolds)
    factor = wall_factor(diameter / scene.column.bore, reynolds, flow_index=liquid.rheology.flow_index).factor
    return Settled(
        unbounded_velocity=velocity,
        reynolds=reynolds,
        drag_coefficient=float(free.drag_coefficient),
        viscosity=float(liquid.rheology.viscosity(velocity / diameter)),
        wall_factor=float(factor),
    )


def trajectories(scene: Scene) -> list[Trajectory]:
    """The ways of all drops of a scene, in the order of release."""
    return [_trajectory(drop, scene) for drop in scene.drops]


def _trajectory(drop: Drop, scene: Scene) -> Trajectory:
    particle, liquid = drop.particle, scene.liquid
    settled = settle(particle, scene, drop.scatter)
    terminal = settled.unbounded_velocity * settled.wall_factor
    way = scene.camera.height * scene.camera.metre_per_px - drop.y + particle.body.reach + MARGIN
    elapsed = np.arange(0.0, 1.3 * way / terminal + 10 * STEP, STEP)
    fall = fall_from_release(
        scene.law.drag(particle.body, particle.scatter * drop.scatter),
        Body(diameter=particle.body.equivalent_diameter, density=particle.density),
        Medium(density=liquid.density, rheology=liquid.rheology),
        elapsed,
        wall_factor=settled.wall_factor,
        history=_newtonian(liquid),
    )
    landing = _landing(drop, scene.column.bottom - drop.y) if scene.column.bottom is not None else np.inf
    return Trajectory(drop, settled, elapsed, fall.distance, landing)


def _newtonian(liquid: Liquid) -> bool:
    """Whether the history force, which is known for such fluids only, is taken along."""
    return bool(liquid.rheology.flow_index == 1.0 and liquid.rheology.yield_stress == 0.0)


def _landing(drop: Drop, way: float) -> float:
    """Way fallen when the lowest point touches a bottom that lies `way` [m] below the release point."""
    body = drop.particle.body
    candidates = np.linspace(way - body.reach, way, 200)
    below = [fallen + body.depth(_turned(drop, float(fallen))) for fallen in candidates]
    return float(candidates[int(np.argmax(np.array(below) >= way))])


def _turned(drop: Drop, fallen: float) -> FloatArray:
    return rotation_about(np.array(drop.tilt), drop.angle + 2 * np.pi * drop.turns_per_metre * fallen)
