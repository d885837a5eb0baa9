"""Invented inputs of the report: no number here comes from a measurement."""

from __future__ import annotations

from dataclasses import replace
from functools import partial
from pathlib import Path

import numpy as np
import pandas as pd

from settlelab.calibrate import Calibration, calibrate_drops
from settlelab.measure.model import Drop, Measured
from settlelab.physics.drag import DRAG, terminal_velocity
from settlelab.physics.rheology import Rheology
from settlelab.study.model import CalibrationChoice, Camera, Column, Fluid, Particle, Recording, ReportChoice, Study
from settlelab.units import Quantity
from settlelab.video.model import Clock, Track, TrackedRecording

TEXT = {"recording", "particle", "lot", "flags", "fluid", "reason"}
TEXT |= {"equivalent_diameter_from", "sphericity_from", "wall_method"}


def drop(number: int, **given: object) -> dict[str, object]:
    """One row of the drop table, plain where nothing is given."""
    row: dict[str, object] = {name: "" if name in TEXT else np.nan for name in Drop.__dataclass_fields__}
    row |= {"drop": number, "recording": "a1.mp4", "accepted": True, "control": False, "frames": 120}
    row |= {"fluid": "glycerol", "first_time": 0.5, "last_time": 1.5, "fraction_of_terminal": 0.999}
    row |= {"velocity": 0.1, "velocity_u": 0.001, "unbounded_velocity": 0.104, "unbounded_velocity_u": 0.00104}
    row |= {"reynolds": 30.0, "reynolds_u": 0.6, "drag_coefficient": 3.0, "drag_coefficient_u": 0.09}
    row |= {"equivalent_diameter": 0.004, "equivalent_diameter_u": 0.00002, "particle_density": 2600.0}
    row |= {"particle_density_u": 8.0, "fluid_density": 1155.0, "fluid_density_u": 1.0, "projected_diameter": 0.0042}
    row |= {"viscosity": 0.0111, "viscosity_u": 0.0002, "consistency": 0.0111, "flow_index": 1.0, "yield_stress": 0.0}
    row |= {"wall_factor": 0.96, "wall_factor_u": 0.004, "sphericity": 0.78, "wall_method": "kehlenbeck-difelice-1999"}
    row |= {"equivalent_diameter_from": "mass and density", "sphericity_from": "ellipsoid of the axes"}
    return row | given


def invented_drops() -> list[dict[str, object]]:
    """Twelve cuttings of three lots dropped twice, one refused, and two control spheres."""
    draw = np.random.default_rng(7)
    rows: list[dict[str, object]] = []
    for lot, (size, sphericity) in {"A": (0.0035, 0.82), "B": (0.005, 0.74), "C": (0.007, 0.68)}.items():
        for count in range(1, 5):
            diameter = size * draw.uniform(0.85, 1.15)
            law = partial(DRAG["ganser-1993"].drag_coefficient, sphericity=sphericity)
            unbounded = terminal_velocity(
                law, diameter=diameter, particle_density=2600, fluid_density=1155, rheology=Rheology(consistency=0.0111)
            )
            velocity = 1.12 * float(unbounded.velocity) * draw.normal(1.0, 0.015)
            for _ in range(2):
                speed = velocity * draw.normal(1.0, 0.012)
                cd = 4 * 9.80665 * diameter * (2600 / 1155 - 1) / (3 * speed**2)
                reynolds = 1155 * speed * diameter / 0.0111
                rows.append(
                    drop(
                        len(rows) + 1,
                        recording=f"{lot.lower()}{(count + 1) // 2}.mp4",
                        particle=f"{lot}-{count:02d}",
                        lot=lot,
                        velocity=speed * 0.96,
                        velocity_u=speed * 0.006,
                        unbounded_velocity=speed,
                        unbounded_velocity_u=speed * 0.0075,
                        reynolds=reynolds,
                        reynolds_u=reynolds * 0.02,
                        drag_coefficient=cd,
                        drag_coefficient_u=cd * 0.025,
                        equivalent_diameter=diameter,
                        sphericity=sphericity + draw.normal(0, 0.01),
                    )
                )
    rows[5] |= {"accepted": False, "flags": "accelerating", "reason": "only 91 % of terminal velocity in view"}
    rows[9] |= {"flags": "wobbling"}
    for name, speed in (("S-1", 0.14), ("S-2", 0.2)):
        rows.append(
            drop(
                len(rows) + 1,
                recording="a1.mp4",
                particle=name,
                control=True,
                unbounded_velocity=speed,
                velocity=speed * 0.95,
                sphericity=1.0,
                reynolds=speed * 600,
                drag_coefficient=1.2,
                equivalent_diameter_from="typed",
                sphericity_from="typed",
            )
        )
    return rows


def budget_of(drops: list[dict[str, object]]) -> pd.DataFrame:
    """Shares of the variance, the same for every drop."""
    shares = {
        "velocity": {"track": 0.25, "scale": 0.45, "clock": 0.05, "walls": 0.25},
        "reynolds": {"track": 0.05, "scale": 0.1, "size": 0.15, "viscosity": 0.7},
        "drag_coefficient": {"track": 0.1, "scale": 0.2, "size": 0.3, "particle density": 0.25, "walls": 0.15},
    }
    return pd.DataFrame(
        [
            {"drop": row["drop"], "output": output, "input": name, "share": share}
            for row in drops
            for output, inputs in shares.items()
            for name, share in inputs.items()
        ],
        columns=["drop", "output", "input", "share"],
    )


def calibration_of(measured: Measured, **given: object) -> Calibration:
    """The calibration of these drops with a single form, which does not take long."""
    choice = CalibrationChoice(forms=("velocity-power",), descriptors=("sphericity",))
    return replace(calibrate_drops(measured.drops, choice), **given)


CONTROL_COLUMNS = ["drop", "recording", "particle", "expected_velocity", "expected_velocity_u", "velocity"]
CONTROL_COLUMNS += ["velocity_u", "en", "passed"]


def measured_of(drops: list[dict[str, object]], **given: object) -> Measured:
    """Measured with the given drop table and a matching budget."""
    controls = [
        dict(
            zip(
                CONTROL_COLUMNS, (r["drop"], "a1.mp4", r["particle"], 0.2, 0.001, 0.201, 0.001, 0.35, True), strict=True
            )
        )
        for r in drops
        if r["control"]
    ]
    parts: dict[str, object] = {
        "drops": pd.DataFrame(drops, columns=list(Drop.__dataclass_fields__)),
        "budget": budget_of(drops),
        "controls": pd.DataFrame(controls, columns=CONTROL_COLUMNS),
        "assumed": ("glycerol: viscosity from mass fraction and temperature, not measured",),
        "doubts": ("b2.mp4: 3 falls for 2 names; none was given a particle",),
    }
    return Measured(**(parts | given))


def track_of(start: float, x: float, speed: float, *, height: int = 960, reason: str = "") -> Track:
    """A steady fall through a picture, at 120 frames a second."""
    frames = np.arange(int(start * 120), int((start + (height - 60) / speed) * 120))
    y = 30 + (frames / 120 - start) * speed
    same = np.ones(len(frames))
    return Track(
        frame=frames,
        time=frames / 120,
        x=x + 2 * np.sin(y / 80),
        y=y,
        area=300 * same,
        aspect_ratio=0.8 * same,
        circularity=0.85 * same,
        orientation=0 * same,
        wall_distance=150 * same,
        reason=reason,
    )


def tracked_of(name: str = "a1.mp4", size: tuple[int, int] = (360, 960), falls: int = 3) -> TrackedRecording:
    """A recording with falls one after the other, a rising bubble and two specks."""
    width, height = size
    lamp = 205 - 60 * ((np.arange(width) - width / 2) / width) ** 2
    noise = np.random.default_rng(3).normal(0, 1.5, (height, width))
    background = np.clip(np.broadcast_to(lamp, (height, width)) + noise, 0, 255).astype(np.uint8)
    background[:, :20] = background[:, -20:] = 60
    fall = track_of(1.0, 250.0, 500.0, height=height, reason="rising: a bubble")
    bubble = replace(fall, y=height - fall.y, flags=("rising",))
    specks = tuple(
        track_of(2.0 + s, 60.0 + 200 * s, 2000.0, height=height, reason="shorter than 10 frames") for s in (0, 1)
    )
    return TrackedRecording(
        video=Path(name),
        frame_count=960,
        size=size,
        clock=Clock(frame_rate=120.0, u_relative=1e-4, source="stated", irregular=False),
        scale=Quantity(2.113e-4, 3e-7),
        background=background,
        walls=(20.0, width - 20.0),
        notes=("lamp flicker removed",),
        falls=tuple(track_of(0.3 + 2.5 * i, width / 2 + 8 * i, 420 + 60 * i, height=height) for i in range(falls)),
        refused=(bubble, *specks),
    )


def study_of(**given: object) -> Study:
    """A small study in glycerol-water with three lots."""
    glycerol = Fluid(
        name="glycerol", liquid="glycerol-water", temperature=Quantity(294.55, 0.2), mass_fraction=Quantity(0.62, 0.003)
    )
    column = Column(section="round", inner_diameter=Quantity(0.19, 0.0005), height=Quantity(1.2))
    camera = Camera(frame_rate=Quantity(120.0), metre_per_px=Quantity(2.113e-4, 3e-7))
    names = ["a1.mp4", "a2.mp4", "b1.mp4", "b2.mp4", "c1.mp4", "c2.mp4"]
    recordings = tuple(
        Recording(
            name=name,
            video=Path(name),
            particles=(f"{name[0].upper()}-01",),
            fluid=glycerol,
            camera=camera,
            column=column,
        )
        for name in names
    )
    particles = tuple(Particle(name=f"{lot}-{count:02d}", lot=lot) for lot in "ABC" for count in range(1, 5))
    parts: dict[str, object] = {
        "file": Path("study.toml"),
        "name": "Upper lots",
        "lab": "Bench 4",
        "operator": "R. Okafor",
        "date": "2026-03-02",
        "notes": "Simulated: drawn with known answers.",
        "fluids": (glycerol,),
        "particles": particles,
        "recordings": recordings,
        "report": ReportChoice(),
        "inputs": (Path("study.toml"),),
        "assumed": ("gravity 9.80665 m/s²",),
    }
    return Study(**(parts | given))
