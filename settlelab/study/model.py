"""A study as the lab typed it, validated and in SI. Nothing here is computed from physics."""

from __future__ import annotations

from dataclasses import dataclass, field
from pathlib import Path
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from settlelab.units import Quantity

Gravity = Literal["down", "up", "left", "right"]
RheologyChoice = Literal["newtonian", "power-law", "bingham", "herschel-bulkley", "best"]


@dataclass(frozen=True, slots=True, kw_only=True)
class ViscometerReadings:
    """Flow-curve readings of a viscometer; `u_shear_stress` is a standard uncertainty."""

    file: Path
    shear_rate: NDArray[np.float64]  # (N,) 1/s
    shear_stress: NDArray[np.float64]  # (N,) Pa
    u_shear_stress: NDArray[np.float64]  # (N,) Pa


@dataclass(frozen=True, slots=True, kw_only=True)
class Fluid:
    """A test fluid as typed; temperature in K, mass fraction as a fraction."""

    name: str
    liquid: Literal["water", "glycerol-water", "measured"]
    temperature: Quantity | None = None
    mass_fraction: Quantity | None = None
    density: Quantity | None = None
    viscosity: Quantity | None = None
    readings: ViscometerReadings | None = None
    rheology: RheologyChoice = "best"


@dataclass(frozen=True, slots=True, kw_only=True)
class Column:
    """The test column; lengths in m."""

    section: Literal["round", "rectangular"]
    inner_diameter: Quantity | None = None
    width: Quantity | None = None
    depth: Quantity | None = None
    height: Quantity | None = None
    wall_thickness: Quantity | None = None
    wall_index: float | None = None
    viewing_box: bool = False
    fluid_index: float | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class Camera:
    """The camera and its scale, one of: metre_per_px, marks, graduation, checkerboard."""

    frame_rate: Quantity | None = None  # Hz, true capture rate
    metre_per_px: Quantity | None = None
    marks: tuple[tuple[float, float], tuple[float, float]] | None = None  # px, picture as recorded
    marks_apart: Quantity | None = None
    graduation: Quantity | None = None  # m, spacing of the marks on the column
    checkerboard: Path | None = None
    square: Quantity | None = None
    gravity: Gravity = "down"
    exposure: Quantity | None = None  # s
    distance: Quantity | None = None  # m


@dataclass(frozen=True, slots=True, kw_only=True)
class Particle:
    """One row of the particle table, or a control sphere; what was not measured is None."""

    name: str
    lot: str = ""
    row: int | None = None  # row of the table, as a spreadsheet counts
    mass: Quantity | None = None  # kg
    density: Quantity | None = None  # kg/m3
    diameter: Quantity | None = None  # m, spheres only
    long_axis: Quantity | None = None
    intermediate_axis: Quantity | None = None
    short_axis: Quantity | None = None
    sphericity: Quantity | None = None
    circularity: Quantity | None = None
    descriptors: dict[str, float] = field(default_factory=dict)  # any further numeric column, as typed
    control: bool = False


@dataclass(frozen=True, slots=True, kw_only=True)
class Recording:
    """One recording with everything that applies to it, overrides included."""

    name: str  # the video's path as typed in study.toml
    video: Path  # resolved
    particles: tuple[str, ...]  # in order of release
    fluid: Fluid
    camera: Camera
    column: Column


@dataclass(frozen=True, slots=True, kw_only=True)
class CalibrationChoice:
    """The optional [calibration] section; empty means: settlelab chooses and says so."""

    descriptors: tuple[str, ...] = ()
    forms: tuple[str, ...] = ()
    target: float | None = None  # relative deviation in velocity aimed at, e.g. 0.1


@dataclass(frozen=True, slots=True, kw_only=True)
class ReportChoice:
    """The optional [report] section."""

    units: Literal["lab", "field", "si"] = "lab"
    title: str = ""
    signatures: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class Study:
    """A study file with its bench tables."""

    file: Path
    name: str
    lab: str = ""
    operator: str = ""
    date: str = ""
    notes: str = ""
    fluids: tuple[Fluid, ...]
    particles: tuple[Particle, ...]  # cuttings and control spheres
    recordings: tuple[Recording, ...]
    calibration: CalibrationChoice = CalibrationChoice()
    report: ReportChoice = ReportChoice()
    inputs: tuple[Path, ...] = ()  # every file that was read, study.toml first
    assumed: tuple[str, ...] = ()  # what was neither measured nor typed, one sentence each

    def particle(self, name: str) -> Particle:
        """The particle of that name.

        Raises
        ------
        KeyError
            No particle has that name (a study that was read holds every name its recordings use).
        """
        for particle in self.particles:
            if particle.name == name:
                return particle
        raise KeyError(name)
