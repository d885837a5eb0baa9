"""What the measurement hands on: the drop table (SI inside, headings with units at the edge) and its budget."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Annotated

from settlelab.units import Unit

if TYPE_CHECKING:
    import pandas as pd

Second = Annotated[float, Unit("s")]
MillimetrePerSecond = Annotated[float, Unit("mm/s")]
Millimetre = Annotated[float, Unit("mm")]
SquareMillimetre = Annotated[float, Unit("mm2")]
KilogramPerCubicMetre = Annotated[float, Unit("kg/m3")]
MillipascalSecond = Annotated[float, Unit("mPa s")]
Number = Annotated[float, Unit("1")]


@dataclass(frozen=True, slots=True, kw_only=True)
class Velocity:
    """Terminal velocity of one fall; `u` is its standard uncertainty (k = 1)."""

    value: float  # m/s along gravity
    u: float  # m/s, of the fit alone: scale and clock enter later, they are common to a recording
    fraction_of_terminal: float  # share of the terminal velocity reached at the last point, 0..1
    first: int  # index into the track of the first point used
    last: int  # index of the last point used, inclusive
    flags: tuple[str, ...] = ()  # accelerating, wobbling, short-track


@dataclass(frozen=True, slots=True, kw_only=True)
class Drop:
    """One row of drops.csv. The annotation names the unit shown in the heading; values inside the package are SI.

    Unknown numbers are nan, unknown text is empty. Any further descriptor of the particle table follows as a column.
    """

    drop: int  # counted through the study, from 1
    recording: str
    particle: str
    lot: str
    accepted: bool
    flags: str  # joined by ";"
    first_time: Second
    last_time: Second
    frames: int
    velocity: MillimetrePerSecond
    velocity_u: MillimetrePerSecond
    fraction_of_terminal: Number
    projected_diameter: Millimetre  # area-equivalent, from the silhouette
    equivalent_diameter: Millimetre  # volume-equivalent
    equivalent_diameter_u: Millimetre
    particle_density: KilogramPerCubicMetre
    fluid_density: KilogramPerCubicMetre
    viscosity: MillipascalSecond  # apparent, at the shear rate unbounded velocity / equivalent diameter
    wall_factor: Number
    wall_factor_u: Number
    unbounded_velocity: MillimetrePerSecond
    unbounded_velocity_u: MillimetrePerSecond
    reynolds: Number  # generalised, on unbounded velocity and equivalent diameter
    reynolds_u: Number
    drag_coefficient: Number  # on the area of the equivalent sphere
    drag_coefficient_u: Number
    sphericity: Number
    corey_shape_factor: Number
    flatness: Number  # short over intermediate axis
    elongation: Number  # intermediate over long axis
    circularity: Number  # typed, else of the silhouette
    aspect_ratio: Number  # of the silhouette
    fluid: str
    particle_density_u: KilogramPerCubicMetre
    fluid_density_u: KilogramPerCubicMetre
    viscosity_u: MillipascalSecond
    consistency: Annotated[float, Unit("Pa s^n")]
    flow_index: Number
    yield_stress: Annotated[float, Unit("Pa")]
    equivalent_diameter_from: str  # "mass and density" | "calipers" | "silhouette" | "typed"
    sphericity_from: str  # "typed" | "ellipsoid of the axes" | ""
    wall_method: str
    control: bool
    reason: str  # why it was not accepted, or what a flag means here


@dataclass(frozen=True, slots=True, kw_only=True)
class TrackPoint:
    """One row of tracks.csv: a fall in one frame."""

    drop: int  # as in drops.csv
    frame: int  # of the recording, from 0
    time: Second  # of the true clock, from the first frame
    x: Millimetre  # across gravity, from the left edge of the picture
    y: Millimetre  # along gravity, from the edge where things appear
    area: SquareMillimetre
    aspect_ratio: Number
    circularity: Number
    orientation_deg: float  # degrees: long axis of the silhouette against gravity
    wall_distance: Millimetre  # centre to the nearer side wall


@dataclass(frozen=True, slots=True, kw_only=True)
class Scatter:
    """How drops repeat and particles differ, relative to the velocity; see `lots`."""

    lots: pd.DataFrame  # a row per lot and fluid, one for all together: scatter within and between particles, ...
    marks: pd.DataFrame  # outliers (1 %) and stragglers (5 %); none was removed
    trends: pd.DataFrame  # a row per fluid with replicates: change of velocity per drop, in order of release
    told: tuple[str, ...]  # what of it a reader must know, one sentence each


@dataclass(frozen=True, slots=True, kw_only=True)
class Measured:
    """All that the measuring room computes for a study."""

    drops: pd.DataFrame  # columns of Drop, SI
    budget: pd.DataFrame  # drop, output (a column of Drop), input (see `chain.fallen`), share (0..1 of the variance)
    controls: (
        pd.DataFrame
    )  # drop, recording, particle, expected_velocity, expected_velocity_u, velocity, velocity_u, en, passed
    assumed: tuple[str, ...]  # one sentence each
    doubts: tuple[str, ...]  # e.g. falls that do not match the names of a recording
    scatter: Scatter | None = None  # None where no cutting was accepted
    intervals: pd.DataFrame | None = None  # accepted drops: 95 % intervals by propagation and by Monte Carlo
    viscosities: pd.DataFrame | None = None  # by control spheres, a row per Newtonian fluid; see `viscosity`
