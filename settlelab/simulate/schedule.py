"""When to let go of which particle, so that one fall is in view at a time."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from settlelab.simulate.falls import settle
from settlelab.simulate.grains import random_direction
from settlelab.simulate.scene import Drop, Particle, Scene


@dataclass(frozen=True, slots=True, kw_only=True)
class Manner:
    """How the operator lets particles go; lengths in m."""

    depth: float = -0.40  # y of the release point in the view; negative: above it
    spread: float = 0.012  # largest distance from the axis, across and towards the camera
    drift: float = 0.015  # largest way sideways over way fallen
    turns: tuple[float, float] = (1.0, 6.0)  # tumbling, turns per metre
    scatter: float = 0.01  # relative, of the drag coefficient from drop to drop
    pause: float = 0.25  # s between one fall's leaving the view and the next one's entering


def with_drops(scene: Scene, particles: Sequence[Particle], rng: np.random.Generator, manner: Manner) -> Scene:
    """The scene with these particles dropped one after the other, just long enough to see them all."""
    height = scene.camera.height * scene.camera.metre_per_px
    drops, clock = [], manner.pause
    for particle in particles:
        drop = _let_go(particle, rng, manner)
        state = settle(particle, scene, drop.scatter)
        terminal = state.unbounded_velocity * state.wall_factor
        above, reach = max(-manner.depth, 0.0), particle.body.reach
        drops.append(replace(drop, time=clock - (above - reach) / terminal))
        clock += (height + 2 * reach - max(manner.depth, 0.0)) / terminal + manner.pause
    # a fall starts slowly and is a little late against this reckoning
    return replace(scene, drops=tuple(drops), duration=clock + manner.pause)


def _let_go(particle: Particle, rng: np.random.Generator, manner: Manner) -> Drop:
    x, z, drift = rng.uniform(-1, 1, 3)
    tilt = random_direction(rng)
    return Drop(
        particle=particle,
        time=0.0,
        x=manner.spread * x,
        y=manner.depth,
        z=manner.spread * z,
        drift=manner.drift * drift,
        tilt=(float(tilt[0]), float(tilt[1]), float(tilt[2])),
        angle=float(rng.uniform(0, 2 * np.pi)),
        turns_per_metre=float(rng.uniform(*manner.turns)),
        scatter=float(np.exp(manner.scatter * rng.standard_normal())),
    )
