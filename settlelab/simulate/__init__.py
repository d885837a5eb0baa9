"""Draws recordings and bench tables with known answers: samples for users, and the yardstick for the analysis.

In: a `Scene` (camera, lamp, column, liquid, what is dropped). Out: a video and the truth about every drop. The
analysis is never imported here, so that an error in it cannot hide in its own test.
"""

from __future__ import annotations

from settlelab.simulate.at_random import random_study
from settlelab.simulate.bench import Instruments, TestFluid, glycerol_water, polymer
from settlelab.simulate.film import DropTruth, PositionTruth, pictures, positions, recording, truth
from settlelab.simulate.grains import Grain, Sphere, angular_grain, convex_grain, random_direction
from settlelab.simulate.lab import SimulatedStudy, Take, draw_study, write_truth
from settlelab.simulate.lots import Lot, cuttings
from settlelab.simulate.order import Order, draw_order
from settlelab.simulate.sample import draw_field_study, field_study
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
from settlelab.simulate.schedule import Manner, with_drops

__all__ = [
    "Bubble",
    "Camera",
    "Column",
    "Drop",
    "DropTruth",
    "Grain",
    "Instruments",
    "Lamp",
    "Liquid",
    "Lot",
    "Manner",
    "Nuisances",
    "Order",
    "Particle",
    "PositionTruth",
    "Scene",
    "ShapeLaw",
    "SimulatedStudy",
    "Sphere",
    "Take",
    "TestFluid",
    "angular_grain",
    "convex_grain",
    "corey_shape_factor",
    "cuttings",
    "draw_field_study",
    "draw_order",
    "draw_study",
    "field_study",
    "glycerol_water",
    "pictures",
    "polymer",
    "positions",
    "random_direction",
    "random_study",
    "recording",
    "truth",
    "with_drops",
    "write_truth",
]
