"""Small complete studies drawn at random, unlike the sample: for tests of the whole way from pictures to numbers."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from pathlib import Path

import numpy as np
import pandas as pd

from settlelab.physics.constants import ZERO_CELSIUS
from settlelab.simulate.bench import TestFluid, glycerol_water, polymer
from settlelab.simulate.falls import settle
from settlelab.simulate.grains import Sphere
from settlelab.simulate.lab import SimulatedStudy, Take, draw_study
from settlelab.simulate.lots import ROCKS, cuttings
from settlelab.simulate.scene import Camera, Column, Lamp, Nuisances, Particle, Scene
from settlelab.simulate.schedule import Manner, with_drops

FRAME_RATES = (30.0, 40.0, 50.0, 60.0, 75.0, 90.0, 120.0, 150.0, 200.0, 240.0)  # Hz
FRAMES_PER_FALL = 50  # aimed at for the fastest particle of a recording


def random_study(
    directory: Path, seed: int, *, recordings: int | None = None, drops: int | None = None
) -> pd.DataFrame:
    """Write a study folder with random fluids, particles, column, camera and light; every drop is a good one.

    Parameters
    ----------
    directory : Path
        Folder for study.toml, bench tables and videos.
    seed : int
        The same seed gives the same study.
    recordings : int, optional
        How many; 2 to 4 where left out.
    drops : int, optional
        Drops in each recording; 2 to 4, differing between recordings, where left out.

    Returns
    -------
    pandas.DataFrame
        The truth, which is not written: `recording` and the columns of `DropTruth` in SI, one row per drop in the
        order of the study.
    """
    rng = np.random.default_rng(seed)
    count = recordings or int(rng.integers(2, 5))
    sizes = [drops or int(rng.integers(2, 5)) for _ in range(count)]
    return draw_study(_study(rng, sizes), directory, directory, seed)[0]


def _study(rng: np.random.Generator, sizes: Sequence[int]) -> SimulatedStudy:
    fluids = _fluids(rng)
    lots = [cuttings(lot, int(rng.integers(2, 5)), rng) for lot in ROCKS[: int(rng.integers(1, 4))]]
    spheres = _spheres(rng)
    known = (*spheres, *(particle for lot in lots for particle in lot))
    column = Column(bore=float(rng.uniform(0.045, 0.09)), wall=float(rng.uniform(0.002, 0.005)), surface=-0.5)
    takes = []
    for number, size in enumerate(sizes, start=1):
        fluid = fluids[int(rng.integers(len(fluids)))]
        dropped = [known[int(rng.integers(len(known)))] for _ in range(size)]
        scene = _with_camera(_scene(fluid, column, rng), dropped, rng)
        scene = with_drops(scene, dropped, rng, Manner(depth=-0.45, spread=0.15 * column.bore))
        suffix = str(rng.choice([".mp4", ".avi"]))
        takes.append(Take(video=f"take_{number}{suffix}", fluid=fluid.name, scene=scene))
    return SimulatedStudy(
        name="Random study",
        fluids=fluids,
        cuttings=tuple(particle for lot in lots for particle in lot),
        spheres=spheres,
        takes=tuple(takes),
    )


def _fluids(rng: np.random.Generator) -> tuple[TestFluid, ...]:
    temperature = ZERO_CELSIUS + float(rng.uniform(18, 26))
    mixture = glycerol_water("mixture", float(rng.uniform(0.35, 0.8)), temperature, rng)
    if rng.random() < 0.5:
        return (mixture,)
    density, consistency, flow_index = rng.uniform((1000, 0.08, 0.55), (1010, 0.2, 0.8)).tolist()
    return mixture, polymer("polymer", density, consistency, flow_index, temperature)


def _spheres(rng: np.random.Generator) -> tuple[Particle, ...]:
    densities = rng.choice([2170.0, 2510.0, 3200.0], 2)
    return tuple(
        Particle(name=f"K{number}", body=Sphere(float(rng.uniform(2.2e-3, 4.2e-3))), density=float(density))
        for number, density in enumerate(densities, start=1)
    )


def _scene(fluid: TestFluid, column: Column, rng: np.random.Generator) -> Scene:
    tilt = rng.uniform(-0.12, 0.12, 2)
    lamp = Lamp(
        level=float(rng.uniform(150, 220)),
        tilt=(float(tilt[0]), float(tilt[1])),
        flicker=float(rng.uniform(0, 0.006)),
        drift=float(rng.normal(0, 0.002)),
    )
    return Scene(
        liquid=fluid.liquid,
        drops=(),
        duration=1.0,
        column=column,
        lamp=lamp,
        nuisances=Nuisances(dust=int(rng.integers(0, 6))),
    )


def _with_camera(scene: Scene, dropped: Sequence[Particle], rng: np.random.Generator) -> Scene:
    """A camera that sees the column from wall to wall, and is as fast as the fastest particle asks for."""
    width = 16 * int(rng.integers(20, 31))
    height = 16 * int(rng.integers(38, 51))
    scale = float(rng.uniform(1.02, 1.12)) * (scene.column.bore + 2 * scene.column.wall) / width
    fastest = max(_terminal(particle, scene) for particle in dropped)
    wanted = FRAMES_PER_FALL * fastest / (height * scale)
    rate = min((rate for rate in FRAME_RATES if rate >= wanted), default=FRAME_RATES[-1])
    camera = Camera(
        width=width,
        height=height,
        metre_per_px=scale,
        frame_rate=rate,
        container_rate=30.0 if rate >= 200.0 else None,
        exposure=float(min(2e-3, round(1.5 * scale / fastest, 5))),
        softness=float(rng.uniform(0.5, 1.0)),
        gravity=str(rng.choice(["down", "up", "left", "right"])),  # type: ignore[arg-type]  # one of the four
        read_noise=float(rng.uniform(0.3, 0.8)),
    )
    return replace(scene, camera=camera)


def _terminal(particle: Particle, scene: Scene) -> float:
    state = settle(particle, scene)
    return state.unbounded_velocity * state.wall_factor
