"""The keys of study.toml, section by section, with the type and the limits of each.

Every key is optional here: which ones a section needs depends on others and is judged in `rules.py`, so that a slip in
one key does not hide the next fault.
"""

from __future__ import annotations

import datetime
from collections.abc import Callable
from typing import Annotated, Literal

from pydantic import BaseModel, ConfigDict, PlainValidator

from settlelab.study.limits import ABOVE_ZERO, FRACTION, INDEX, LIQUID, LIQUID_DENSITY, SOLID_DENSITY, Limits
from settlelab.study.model import Gravity, RheologyChoice
from settlelab.units import Quantity, parse_quantity

__all__ = [
    "CalibrationKeys",
    "CameraKeys",
    "ColumnKeys",
    "ControlKeys",
    "FluidKeys",
    "Keys",
    "ParticlesKeys",
    "RecordingKeys",
    "ReportKeys",
    "StudyKeys",
]

Marks = tuple[tuple[float, float], tuple[float, float]]


class Keys(BaseModel):
    """A section of study.toml as typed; an unknown key is a fault."""

    model_config = ConfigDict(extra="forbid", frozen=True, strict=True, allow_inf_nan=False)


def _typed(dimension: str, limits: Limits, unit: str = "") -> Callable[[object], Quantity]:
    """A reader of a quantity; `unit` where the key itself names one."""

    def read(typed: object) -> Quantity:
        plain = repr(typed) if isinstance(typed, int | float) and not isinstance(typed, bool) else typed
        if not isinstance(plain, str):
            plain = ""
        quantity = parse_quantity(plain, dimension, unit=unit)
        limits.check(quantity, dimension)
        return quantity

    return read


def _marks(typed: object) -> Marks:
    """Two points of the picture as recorded, in pixels."""
    wanted = "two different points in px such as [[412, 96], [415, 1010]]"
    if not isinstance(typed, list) or len(typed) != 2:
        raise ValueError(wanted)
    points = []
    for point in typed:
        if not isinstance(point, list) or len(point) != 2 or not all(_is_pixel(number) for number in point):
            raise ValueError(wanted)
        points.append((float(point[0]), float(point[1])))
    if points[0] == points[1]:
        raise ValueError(wanted)
    return points[0], points[1]


def _is_pixel(number: object) -> bool:
    return isinstance(number, int | float) and not isinstance(number, bool) and 0 <= number < 1e6


def _date(typed: object) -> str:
    """A date as text; TOML has dates of its own."""
    if isinstance(typed, datetime.date):
        return typed.isoformat()
    if not isinstance(typed, str):
        raise ValueError('a date such as 2026-03-31 or "March 2026"')
    return typed


Length = Annotated[Quantity, PlainValidator(_typed("m", ABOVE_ZERO))]
Duration = Annotated[Quantity, PlainValidator(_typed("s", ABOVE_ZERO))]
Frequency = Annotated[Quantity, PlainValidator(_typed("Hz", ABOVE_ZERO))]
SolidDensity = Annotated[Quantity, PlainValidator(_typed("kg/m3", SOLID_DENSITY))]
LiquidDensity = Annotated[Quantity, PlainValidator(_typed("kg/m3", LIQUID_DENSITY))]
Viscosity = Annotated[Quantity, PlainValidator(_typed("Pa s", ABOVE_ZERO))]
Temperature = Annotated[Quantity, PlainValidator(_typed("K", LIQUID))]
Share = Annotated[Quantity, PlainValidator(_typed("1", FRACTION))]
Index = Annotated[Quantity, PlainValidator(_typed("1", INDEX))]
MillimetrePerPixel = Annotated[Quantity, PlainValidator(_typed("m/px", ABOVE_ZERO, unit="mm/px"))]


class StudyKeys(Keys):
    """`[study]`: free text."""

    name: str | None = None
    lab: str | None = None
    operator: str | None = None
    date: Annotated[str, PlainValidator(_date)] | None = None
    notes: str | None = None


class FluidKeys(Keys):
    """`[[fluid]]`."""

    name: str | None = None
    liquid: Literal["water", "glycerol-water", "measured"] | None = None
    temperature: Temperature | None = None
    mass_fraction: Share | None = None
    density: LiquidDensity | None = None
    viscosity: Viscosity | None = None
    viscometer: str | None = None
    rheology: RheologyChoice | None = None


class ColumnKeys(Keys):
    """`[column]`, also as override of a recording."""

    section: Literal["round", "rectangular"] | None = None
    inner_diameter: Length | None = None
    width: Length | None = None
    depth: Length | None = None
    height: Length | None = None
    wall_thickness: Length | None = None
    wall_index: Index | None = None
    viewing_box: bool | None = None
    fluid_index: Index | None = None


class CameraKeys(Keys):
    """`[camera]`, also as override of a recording."""

    frame_rate: Frequency | None = None
    mm_per_px: MillimetrePerPixel | None = None
    marks: Annotated[Marks, PlainValidator(_marks)] | None = None
    marks_apart: Length | None = None
    graduation: Length | None = None
    checkerboard: str | None = None
    square: Length | None = None
    gravity: Gravity | None = None
    exposure: Duration | None = None
    distance: Length | None = None


class ParticlesKeys(Keys):
    """`[particles]`."""

    table: str | None = None


class ControlKeys(Keys):
    """`[[control]]`: a sphere of known size and density."""

    particle: str | None = None
    diameter: Length | None = None
    density: SolidDensity | None = None


class RecordingKeys(Keys):
    """`[[recording]]`, with overrides of `[camera]` and `[column]`."""

    video: str | None = None
    particles: list[str] | None = None
    fluid: str | None = None
    camera: CameraKeys | None = None
    column: ColumnKeys | None = None


class CalibrationKeys(Keys):
    """`[calibration]`."""

    descriptors: list[str] | None = None
    forms: list[str] | None = None
    target: Share | None = None


class ReportKeys(Keys):
    """`[report]`."""

    units: Literal["lab", "field", "si"] | None = None
    title: str | None = None
    signatures: list[str] | None = None
