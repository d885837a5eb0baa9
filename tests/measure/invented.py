"""Studies and tracks with known answers, drawn from closed forms: no number here comes from a measurement."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from settlelab.study.model import Camera, Column, Fluid, Particle, Recording, Study
from settlelab.units import Quantity
from settlelab.video.model import Clock, Track, TrackedRecording

SCALE = Quantity(2e-4, 2e-7)
OIL = Fluid(name="oil", liquid="measured", density=Quantity(970.0, 0.5), viscosity=Quantity(0.373, 0.003))
COLUMN = Column(section="round", inner_diameter=Quantity(0.19, 0.0005))
WALLS = (25.0, 975.0)  # px: 190 mm


def track(
    velocity: float,
    *,
    seconds: float = 1.0,
    rate: float = 120.0,
    start: float = 0.5,
    diameter: float = 4e-3,
    x: float = 500.0,
    circularity: float = 0.95,
    noise: float = 0.05,
    seed: int = 1,
    flags: tuple[str, ...] = (),
) -> Track:
    """A steady fall of a disc [m/s, s, Hz, m], with white noise of the centroid [px]."""
    frame = np.arange(round(start * rate), round((start + seconds) * rate))
    time = frame / rate
    y = velocity * (time - start) / SCALE.value + noise * np.random.default_rng(seed).standard_normal(len(time))
    same = np.ones(len(frame))
    return Track(
        frame=frame,
        time=time,
        x=x * same,
        y=y,
        area=np.pi / 4 * (diameter / SCALE.value) ** 2 * same,
        aspect_ratio=0.9 * same,
        circularity=circularity * same,
        orientation=0.3 * same,
        wall_distance=min(x - WALLS[0], WALLS[1] - x) * same,
        flags=flags,
    )


def tracked(*falls: Track, name: str = "a1.mp4", clock_u: float = 1e-4) -> TrackedRecording:
    """A recording of these falls."""
    return TrackedRecording(
        video=Path(name),
        frame_count=2000,
        size=(1000, 1200),
        clock=Clock(frame_rate=120.0, u_relative=clock_u, source="stated", irregular=False),
        scale=SCALE,
        falls=falls,
        refused=(replace(track(-0.05), reason="rising: a bubble"),),
        background=np.zeros((4, 4), dtype=np.uint8),
        walls=WALLS,
    )


def study(
    *particles: Particle, drops: tuple[str, ...] | None = None, fluid: Fluid = OIL, column: Column = COLUMN
) -> Study:
    """A study with one recording, in which each particle falls once, or those of `drops`."""
    names = tuple(particle.name for particle in particles) if drops is None else drops
    recording = Recording(
        name="a1.mp4", video=Path("a1.mp4"), particles=names, fluid=fluid, camera=Camera(), column=column
    )
    return Study(
        file=Path("study.toml"), name="invented", fluids=(fluid,), particles=particles, recordings=(recording,)
    )


def ar1(rng: np.random.Generator, count: int, phi: float) -> NDArray[np.float64]:
    """Correlated noise of unit variance: each value is `phi` times the last one and something new."""
    new = rng.standard_normal(count)
    noise = np.empty(count)
    noise[0] = new[0]
    for i in range(1, count):
        noise[i] = phi * noise[i - 1] + np.sqrt(1 - phi**2) * new[i]
    return noise
