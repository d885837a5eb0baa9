"""Small scenes for the tests of this room and of others."""

from __future__ import annotations

from settlelab.physics.rheology import Rheology
from settlelab.simulate import Camera, Column, Drop, Lamp, Liquid, Particle, Scene, Sphere

LIQUID = Liquid(density=1200.0, rheology=Rheology(consistency=0.04))
SPHERE = Particle(name="S", body=Sphere(4e-3), density=2500.0)
DARK_ROOM = Lamp(level=200.0, tilt=(0.0, 0.0), vignette=0.0, flicker=0.0, drift=0.0)
CAMERA = Camera(width=160, height=240, frame_rate=60.0)


def small_scene(particle: Particle = SPHERE, *, camera: Camera = CAMERA, release: float = -0.2) -> Scene:
    """One particle falling through a small view, the walls outside it."""
    drop = Drop(particle=particle, time=release / 0.15, y=release)
    column = Column(bore=0.06, surface=release - 0.02, graduation=None)
    return Scene(liquid=LIQUID, drops=(drop,), duration=0.6, camera=camera, column=column, lamp=DARK_ROOM)
