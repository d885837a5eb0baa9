"""Invented lots with a known law: drawn with numpy, nothing of it comes from a measurement."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import pandas as pd

from settlelab.calibrate.falls import Falls, Law, published_law, settle
from settlelab.calibrate.forms import build_form, recipe
from settlelab.physics.drag import DRAG

FLUIDS = ((1110.0, 0.020), (1150.0, 0.006), (998.2, 0.001))  # density kg/m3, viscosity Pa s
POWER_FORM = build_form(recipe("stokes-newton-power", descriptor="sphericity"))
POWER_TRUTH = (0.35, 3.2)


@dataclass(frozen=True, slots=True, kw_only=True)
class Lots:
    """How to draw: numbers of particles and of drops of each, and relative standard deviations."""

    particles: int = 30
    replicates: int = 2
    scatter: float = 0.05  # between particles, about the law
    repeatability: float = 0.01
    diameter_u: float = 0.005
    viscosity_u: float = 0.0
    several_fluids: bool = False  # every particle in every fluid
    sizes: tuple[float, float] = (0.8e-3, 8e-3)  # m
    fluids: tuple[tuple[float, float], ...] = FLUIDS


def power_law_of_shape() -> Law:
    """The true law of most lots: a Stokes and a Newton shape factor as powers of the sphericity."""
    return POWER_FORM.law(POWER_TRUTH)


def published(name: str) -> Law:
    """A published law as the true one."""
    return published_law(DRAG[name])


def draw(law: Law, lots: Lots, seed: int) -> pd.DataFrame:
    """A drop table in SI with noise in velocity, in diameter, and common to a fluid in viscosity."""
    rng = np.random.default_rng(seed)
    each = np.arange(lots.particles)
    size = np.exp(rng.uniform(*np.log(lots.sizes), lots.particles))
    sphericity = rng.uniform(0.55, 0.92, lots.particles)
    own = rng.normal(0.0, lots.scatter, lots.particles)
    seen_size = size * np.exp(rng.normal(0.0, lots.diameter_u, lots.particles))
    errors = rng.normal(0.0, lots.viscosity_u, len(lots.fluids))
    tables = []
    for number, (density, viscosity) in enumerate(lots.fluids):
        dropped = each if lots.several_fluids else each[each % len(lots.fluids) == number]
        dropped = np.repeat(dropped, lots.replicates)
        falls = Falls(
            diameter=size[dropped],
            particle_density=np.full(len(dropped), 2600.0),
            fluid_density=np.full(len(dropped), density),
            consistency=np.full(len(dropped), viscosity * np.exp(errors[number])),
            flow_index=np.ones(len(dropped)),
            yield_stress=np.zeros(len(dropped)),
            descriptors={"sphericity": sphericity[dropped]},
        )
        velocity = settle(law, falls).velocity * np.exp(
            own[dropped] + rng.normal(0.0, lots.repeatability, len(dropped))
        )
        tables.append(
            pd.DataFrame(
                {
                    "particle": [f"P-{index:03d}" for index in dropped],
                    "lot": [("north", "south", "east")[index % 3] for index in dropped],
                    "fluid": f"fluid {number + 1}",
                    "unbounded_velocity": velocity,
                    "unbounded_velocity_u": 0.003 * velocity,
                    "equivalent_diameter": seen_size[dropped],
                    "equivalent_diameter_u": lots.diameter_u * seen_size[dropped],
                    "particle_density": 2600.0,
                    "fluid_density": density,
                    "viscosity": viscosity,
                    "viscosity_u": lots.viscosity_u * viscosity,
                    "sphericity": sphericity[dropped],
                }
            )
        )
    return pd.concat(tables, ignore_index=True)
