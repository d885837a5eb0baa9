"""One recording to order: what a user asks `settlelab simulate` for, in SI."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field, replace
from pathlib import Path
from typing import Literal

import numpy as np

from settlelab.errors import SettlelabError
from settlelab.simulate.bench import TestFluid, glycerol_water, polymer
from settlelab.simulate.grains import Sphere
from settlelab.simulate.lab import SimulatedStudy, Take, draw_study, write_truth
from settlelab.simulate.lots import Lot, cuttings
from settlelab.simulate.scene import Bubble, Camera, Column, Nuisances, Particle, Scene
from settlelab.simulate.schedule import Manner, with_drops

POLYMER_DENSITY = 1005.0  # kg/m3, of the polymer fluid: little more than water


@dataclass(frozen=True, slots=True, kw_only=True)
class Order:
    """A recording to draw, with everything that has a usual value left to it."""

    particle: Literal["grain", "sphere"] = "grain"
    number: int = 3
    diameter: float = 4e-3  # m, volume-equivalent
    density: float = 2600.0  # kg/m3
    proportions: tuple[float, float, float] = (1.0, 0.8, 0.6)  # of grains
    mass_fraction: float = 0.70  # of glycerol
    temperature: float = 294.15  # K
    power_law: tuple[float, float] | None = None  # consistency [Pa s^n] and flow index: a polymer fluid instead
    camera: Camera = field(default_factory=Camera)
    column: Column = field(default_factory=lambda: Column(surface=-0.42))
    depth: float = -0.40  # m, y of the release point in the view
    dust: int = 4
    bubbles: int = 0
    suffix: Literal[".mp4", ".avi", ".mkv"] = ".mp4"
    seed: int = 1


def draw_order(order: Order, directory: Path, progress: Callable[[int, int], object] | None = None) -> list[Path]:
    """Draw one recording with its study.toml, bench tables and truth.csv into a folder; returns the files.

    Raises
    ------
    SettlelabError
        The particles do not sink, or are too large for the column.
    RecordingError
        The video cannot be written.
    """
    rng = np.random.default_rng(order.seed)
    fluid = _fluid(order, rng)
    particles = _particles(order, rng)
    _check(order, fluid, particles)
    scene = Scene(liquid=fluid.liquid, drops=(), duration=1.0, camera=order.camera, column=order.column)
    scene = with_drops(scene, particles, rng, Manner(depth=order.depth, spread=0.12 * order.column.bore))
    scene = replace(scene, nuisances=_nuisances(order, scene, rng))
    study = SimulatedStudy(
        name="Simulated recording",
        fluids=(fluid,),
        cuttings=particles if order.particle == "grain" else (),
        spheres=particles if order.particle == "sphere" else (),
        takes=(Take(video=f"recording{order.suffix}", fluid=fluid.name, scene=scene),),
    )
    truth, written = draw_study(study, directory, directory, order.seed, progress=progress)
    return [*written, write_truth(truth, directory / "truth.csv")]


def _fluid(order: Order, rng: np.random.Generator) -> TestFluid:
    if order.power_law is not None:
        return polymer("polymer", POLYMER_DENSITY, *order.power_law, order.temperature)
    return glycerol_water("glycerol", order.mass_fraction, order.temperature, rng)


def _particles(order: Order, rng: np.random.Generator) -> tuple[Particle, ...]:
    if order.particle == "sphere":
        return tuple(
            Particle(name=f"S-{place}", lot="spheres", body=Sphere(order.diameter), density=order.density)
            for place in range(1, order.number + 1)
        )
    lot = Lot(
        name="cuttings",
        prefix="C",
        density=order.density,
        size=(order.diameter, order.diameter),
        proportions=order.proportions,
        breaks=14,
    )
    return cuttings(lot, order.number, rng)


def _check(order: Order, fluid: TestFluid, particles: tuple[Particle, ...]) -> None:
    lightest = min(particle.density for particle in particles)
    if lightest <= fluid.liquid.density:
        raise SettlelabError(
            f"particles of {lightest:.0f} kg/m3 do not sink in a fluid of {fluid.liquid.density:.0f} kg/m3: "
            "give a density above that"
        )
    longest = max(2 * particle.body.reach for particle in particles)
    if longest >= 0.5 * order.column.bore:
        raise SettlelabError(
            f"particles {longest * 1e3:.1f} mm long need a column at least twice as wide, "
            f"the bore is {order.column.bore * 1e3:.1f} mm"
        )


def _nuisances(order: Order, scene: Scene, rng: np.random.Generator) -> Nuisances:
    height = scene.camera.height * scene.camera.metre_per_px
    bubbles = tuple(
        Bubble(
            diameter=float(rng.uniform(0.8e-3, 1.8e-3)),
            x=float(rng.uniform(-0.3, 0.3)) * order.column.bore,
            y=height * float(rng.uniform(0.6, 1.6)),
            speed=height / scene.duration * float(rng.uniform(0.8, 2.0)),
            sway=0.6e-3,
        )
        for _ in range(order.bubbles)
    )
    return Nuisances(dust=order.dust, bubbles=bubbles)
