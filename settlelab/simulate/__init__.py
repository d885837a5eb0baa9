"""Draws recordings and bench tables with known answers: samples for users, and the yardstick for the analysis.

In: a `Scene` (camera, lamp, column, liquid, what is dropped). Out: a video and the truth about every drop. The
analysis is never imported here, so that an error in it cannot hide in its own test.
"""

from __future__ import annotations

from settlelab.simulate.film import DropTruth, PositionTruth, pictures, positions, recording, truth
from settlelab.simulate.grains import Grain, Sphere, angular_grain, convex_grain, random_direction
from settlelab.simulate.scene import (
    Bubble,
    Camera,
    Column,
    Drop,
    Lamp,
    Liquid,
    Nuisances,
    Particle,
    Scene,
    ShapeLaw,
    corey_shape_factor,
)

__all__ = [
    "Bubble",
    "Camera",
    "Column",
    "Drop",
    "DropTruth",
    "Grain",
    "Lamp",
    "Liquid",
    "Nuisances",
    "Particle",
    "PositionTruth",
    "Scene",
    "ShapeLaw",
    "Sphere",
    "angular_grain",
    "convex_grain",
    "corey_shape_factor",
    "pictures",
    "positions",
    "random_direction",
    "recording",
    "truth",
]
