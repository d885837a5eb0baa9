"""The sample field study: an invented scenario with three lots of cuttings, control spheres and three fluids."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import numpy as np

from settlelab.physics.constants import ZERO_CELSIUS
from settlelab.simulate.bench import TestFluid, glycerol_water, polymer
from settlelab.simulate.grains import Sphere
from settlelab.simulate.lab import SimulatedStudy, Take, draw_study, write_truth
from settlelab.simulate.lots import ROCKS, cuttings
from settlelab.simulate.scene import Bubble, Camera, Column, Lamp, Nuisances, Particle, Scene
from settlelab.simulate.schedule import Manner, with_drops

SEED = 20260

MAIN = Column(bore=0.100, wall=0.004, surface=-0.42)
NARROW = Column(bore=0.060, wall=0.003, surface=-0.42)
SHORT = Column(bore=0.100, wall=0.004, surface=0.012, bottom=0.150, release_tube=True)

SLOW = Camera(frame_rate=40.0, exposure=2.0e-3)
FAST = Camera(frame_rate=90.0, exposure=0.8e-3)
SLOW_MOTION = replace(FAST, container_rate=30.0)
SIDEWAYS = Camera(frame_rate=30.0, exposure=3.0e-3, width=416, height=832, metre_per_px=1.6e-4, gravity="right")

SPHERES = (
    Particle(name="S-1", lot="glass", body=Sphere(4.000e-3), density=2510.0),
    Particle(name="S-2", lot="glass", body=Sphere(3.000e-3), density=2510.0),
    Particle(name="S-3", lot="PTFE", body=Sphere(4.763e-3), density=2170.0),
    Particle(name="S-4", lot="ceramic", body=Sphere(2.500e-3), density=3890.0),
)

README_TABLES = """# Bench tables of the sample study

{note}

`study.toml` describes the study, `particles.csv` holds what was weighed and measured of the cuttings,
`viscometer_polymer.csv` the readings of the polymer fluid. The recordings lie in `../sample_videos`.
`settlelab run sample_tables/study.toml` does the main job; `settlelab simulate --field-study .`, run in the project
folder, draws all of it anew.
"""
README_VIDEOS = """# Recordings of the sample study

{note}

What was dropped in each, in which fluid, stands in `../sample_tables/study.toml`. Waiting times between drops are cut.
One grain is let go too near the wall, a bubble rises through another recording, and some show dust.
"""
NOTE = "Simulated in an invented scenario: drawn by `settlelab simulate`, no grain of it was ever dropped."


def field_study() -> SimulatedStudy:
    """The sample study before it is drawn; always the same."""
    rng = np.random.default_rng(SEED)
    fluids = (
        glycerol_water("glycerol-80", 0.80, ZERO_CELSIUS + 21.4, rng),
        glycerol_water("glycerol-45", 0.45, ZERO_CELSIUS + 21.9, rng),
        polymer("polymer", 1004.0, 0.24, 0.62, ZERO_CELSIUS + 22.3),
    )
    lots = [cuttings(lot, 5, rng) for lot in ROCKS]
    return SimulatedStudy(
        name="Sample study: three lots, three fluids",
        heading=(("lab", "Simulated laboratory"), ("operator", "settlelab simulate"), ("date", "2026-03-02")),
        fluids=fluids,
        cuttings=tuple(particle for lot in lots for particle in lot),
        spheres=SPHERES,
        takes=_takes(fluids, {particle.name: particle for lot in (*lots, SPHERES) for particle in lot}, rng),
        report=(("title", "Settling tests of the sample study (simulated)"),),
    )


def _takes(fluids: tuple[TestFluid, ...], known: dict[str, Particle], rng: np.random.Generator) -> tuple[Take, ...]:
    thick, thin, mud = fluids

    def take(video: str, fluid: TestFluid, camera: Camera, column: Column, names: str) -> Take:
        manner = Manner(depth=column.surface + 0.02) if column.surface < 0 else Manner(depth=0.024, spread=0.0015)
        scene = Scene(
            liquid=fluid.liquid,
            drops=(),
            duration=1.0,
            camera=camera,
            column=column,
            lamp=_lamp(rng),
            nuisances=Nuisances(dust=4),
        )
        dropped = with_drops(scene, [known[name] for name in names.split()], rng, manner)
        return Take(video=video, fluid=fluid.name, scene=dropped)

    takes = [
        take("a1.mp4", thick, SLOW, MAIN, "A-01 A-02 A-03 S-1"),
        take("a2.mp4", thick, SLOW, MAIN, "B-01 B-02 B-03"),
        take("a3.mp4", thick, SLOW, MAIN, "C-01 C-02 C-03 S-2"),
        take("a4.mp4", thick, SLOW, SHORT, "A-04 B-04 C-04 A-04"),
        take("b1.mp4", thin, FAST, MAIN, "A-01 A-03 A-05 S-3 A-04"),
        take("b2.mp4", thin, FAST, MAIN, "B-01 B-03 B-05 S-2 B-04"),
        take("b3.mp4", thin, SLOW_MOTION, MAIN, "C-01 C-04 C-05 S-4 C-02"),
        take("b4.mp4", thin, FAST, MAIN, "A-01 B-04 C-05 A-01 S-3"),
        take("p1.mp4", mud, SIDEWAYS, NARROW, "A-02 A-05 C-03 S-1"),
        take("p2.mp4", mud, SIDEWAYS, NARROW, "B-02 B-05 C-05 S-4"),
    ]
    return tuple(_disturbed(taken) for taken in takes)


def _lamp(rng: np.random.Generator) -> Lamp:
    tilt = rng.uniform(-0.10, 0.10, 2)
    return Lamp(level=float(rng.uniform(190, 215)), tilt=(float(tilt[0]), float(tilt[1])))


def _disturbed(take: Take) -> Take:
    """The touches of real life that the flags should find."""
    scene = take.scene
    if take.video == "a2.mp4":
        bubble = Bubble(diameter=1.4e-3, x=-0.021, y=0.30, speed=0.031, sway=0.8e-3)
        return replace(take, scene=replace(scene, nuisances=Nuisances(dust=14, bubbles=(bubble,))))
    if take.video == "b2.mp4":
        near = replace(scene.drops[2], x=0.0452, drift=0.0)
        return replace(take, scene=replace(scene, drops=(*scene.drops[:2], near, *scene.drops[3:])))
    if take.video == "a4.mp4":
        return replace(take, scale="marks")
    return take


def draw_field_study(project: Path, progress: Callable[[int, int], object] | None = None) -> list[Path]:
    """Draw the sample study into a project folder: sample_videos/, sample_tables/ and tests/sample_truth.csv."""
    tables, videos = project / "sample_tables", project / "sample_videos"
    truth, written = draw_study(field_study(), tables, videos, SEED, progress=progress)
    for folder, text in ((tables, README_TABLES), (videos, README_VIDEOS)):
        readme = folder / "README.md"
        readme.write_bytes(text.format(note=NOTE).encode())
        written.append(readme)
    return [*written, write_truth(truth, project / "tests" / "sample_truth.csv")]
