"""The calibration card: a calibrated law with all that is needed to use it, and to distrust it, in ten years' time.

Plain JSON with the unit in every key, the formula written out, and drag coefficients at a few Reynolds numbers, against
which any reader, this one included, checks that it has understood the formula. `card.schema.json` beside this module
describes it.
"""

from __future__ import annotations

import math
from pathlib import Path
from typing import Annotated, Literal

import numpy as np
from pydantic import BaseModel, ConfigDict, Field, ValidationError, model_validator

from settlelab.calibrate.falls import Law, published_law
from settlelab.calibrate.form import Recipe
from settlelab.calibrate.forms import build_form
from settlelab.errors import Fault, InputFaults, SettlelabError
from settlelab.physics.constants import FloatArray
from settlelab.physics.drag import DRAG
from settlelab.physics.registry import find

__all__ = [
    "Card",
    "CardData",
    "CardFluid",
    "CardLaw",
    "CardParameter",
    "CardScatter",
    "CheckValue",
    "Range",
    "check_values",
    "read_card",
    "six_digits",
    "write_card",
]

CHECKED_AT = (0.1, 1.0, 10.0, 100.0, 1000.0, 10000.0)  # Reynolds numbers of the check values
_AGREES = 1e-4  # relative; the numbers of a card carry six digits


def six_digits(value: float) -> float:
    """A number as a card carries it."""
    return float(f"{value:.6g}")


Positive = Annotated[float, Field(gt=0)]


class _Part(BaseModel):
    model_config = ConfigDict(extra="forbid", frozen=True, strict=True, allow_inf_nan=False)


class CardParameter(_Part):
    """One coefficient of the formula; dimensionless."""

    name: str
    value: float
    standard_uncertainty: float | None = Field(description="k = 1; null where the value stands at a bound of the fit")
    interval_95: tuple[float, float] | None
    meaning: str


class CardLaw(_Part):
    """The drag law. `kind`, `base`, `descriptor` and `lots` are how settlelab builds it again."""

    kind: str = Field(description="published, or the calibrated form")
    base: str = Field(description="the published law that it is or stands on")
    descriptor: str = Field(description="shape descriptor x of the formula, or empty")
    expression: str = Field(default="", description="a formula of the lab's own as it was typed, or empty")
    lots: tuple[str, ...] = Field(description="lots with a coefficient of their own, in the order of the coefficients")
    needs: tuple[str, ...] = Field(description="descriptors that every particle must have")
    formula: str
    source: str
    parameters: tuple[CardParameter, ...]
    covariance: tuple[tuple[float, ...], ...] = Field(
        description="of the coefficients, in their order; zeros where one stands at a bound"
    )
    how_to_use: str


class CardScatter(_Part):
    """Relative standard deviation of velocities about the law (of ln V)."""

    single_drop: float = Field(ge=0, description="one drop of a new particle; widens prediction intervals")
    between_particles: float = Field(ge=0)
    repeatability: float = Field(ge=0, description="between drops of one particle; 0 where none was dropped twice")
    degrees_of_freedom: int = Field(ge=1)
    rms_percent: float = Field(ge=0)
    cross_validated_rms_percent: float | None = Field(description="on particles left out of the fit; null if published")


class Range(_Part):
    """Range of the calibration drops, with their median."""

    low: float
    high: float
    median: float

    @classmethod
    def of(cls, values: FloatArray, factor: float = 1.0) -> Range:
        """The range of an array, times a factor of units."""
        low, high, median = (six_digits(factor * float(f(values))) for f in (np.min, np.max, np.median))
        return cls(low=low, high=high, median=median)

    @property
    def span(self) -> tuple[float, float]:
        """Ends, let out by the rounding of the card."""
        slack = 1e-5 * max(abs(self.low), abs(self.high))
        return self.low - slack, self.high + slack


class CardFluid(_Part):
    """A fluid of the calibration."""

    name: str
    density_kg_m3: Positive
    consistency_Pa_s_n: Positive = Field(  # noqa: N815 (the unit is in the key)
        description="the viscosity in Pa s where the flow index is 1"
    )
    flow_index: Positive
    yield_stress_Pa: float = Field(ge=0)  # noqa: N815 (the unit is in the key)


class CardData(_Part):
    """What the card rests on."""

    drops: int = Field(ge=1)
    particles: int = Field(ge=1)
    lots: tuple[str, ...]
    fluids: tuple[CardFluid, ...]
    sha256: str = Field(description="of the drops that were used, as a table with six significant digits")


class CheckValue(_Part):
    """The drag coefficient that the formula gives; a reader who finds another has misread it."""

    reynolds: Positive
    descriptors: dict[str, float]
    drag_coefficient: Positive


class Card(_Part):
    """A calibration card."""

    card: Literal["settlelab calibration"] = "settlelab calibration"
    version: Literal[1] = 1
    title: str
    date: str = Field(description="of the measurement, as the lab states it")
    by: str
    name: str = Field(description="of the law, as in the ranking")
    law: CardLaw
    scatter: CardScatter
    ranges: dict[str, Range] = Field(description="what the calibration drops cover; unit in the key")
    data: CardData
    check_values: tuple[CheckValue, ...]
    cautions: tuple[str, ...]
    software: dict[str, str]

    @model_validator(mode="after")
    def _coefficients_match(self) -> Card:
        size = len(self.law.parameters)
        if len(self.law.covariance) != size or any(len(row) != size for row in self.law.covariance):
            raise ValueError(f"a covariance of {size} rows and columns, one for each parameter")
        return self

    @property
    def values(self) -> FloatArray:
        """Coefficients, (P,)."""
        return np.array([parameter.value for parameter in self.law.parameters])

    @property
    def covariance(self) -> FloatArray:
        """Covariance of the coefficients, (P, P)."""
        size = len(self.law.parameters)
        return np.array(self.law.covariance, dtype=np.float64).reshape(size, size)

    def drag_law(self, values: FloatArray | None = None) -> Law:
        """The law of the card, at its coefficients or at others.

        Raises
        ------
        SettlelabError
            A law that this version of settlelab does not know.
        """
        if self.law.kind == "published":
            return published_law(DRAG[find(self.law.base, DRAG).name])
        form = build_form(
            Recipe(
                kind=self.law.kind,
                base=self.law.base,
                descriptor=self.law.descriptor,
                lots=self.law.lots,
                expression=self.law.expression,
            )
        )
        if len(form.parameters) != len(self.law.parameters):
            raise SettlelabError(
                f"the form {form.name} has {len(form.parameters)} parameters, not {len(self.law.parameters)}"
            )
        return form.law(self.values if values is None else values)


def check_values(law: Law, descriptors: dict[str, float]) -> tuple[CheckValue, ...]:
    """The drag coefficient of a law at `CHECKED_AT`, for a particle of those descriptors."""
    rounded = {name: six_digits(value) for name, value in descriptors.items()}
    shapes = {name: np.array([value]) for name, value in rounded.items()}
    return tuple(
        CheckValue(
            reynolds=reynolds,
            descriptors=rounded,
            drag_coefficient=six_digits(float(np.ravel(law(np.array([reynolds]), shapes))[0])),
        )
        for reynolds in CHECKED_AT
    )


def write_card(card: Card, path: Path) -> Path:
    """Write a card as JSON; the same card gives the same bytes."""
    path.parent.mkdir(parents=True, exist_ok=True)
    path.write_bytes((card.model_dump_json(indent=2) + "\n").encode())
    return path


def read_card(path: Path) -> Card:
    """Read a card and check that its formula gives its check values.

    Raises
    ------
    InputFaults
        Keys that are missing, unknown, or not what they should be; all of them.
    SettlelabError
        No such file, no JSON, a law that this version does not know, or one that gives other drag coefficients.
    """
    try:
        text = path.read_text(encoding="utf-8")
    except (OSError, UnicodeDecodeError) as error:
        raise SettlelabError(f"{path} cannot be read as a calibration card (calibration.json of a study)") from error
    try:
        card = Card.model_validate_json(text)
    except ValidationError as error:
        raise _faults(path, error) from error
    law = card.drag_law()
    for value in card.check_values:
        (again,) = check_values_at(law, value)
        if not math.isclose(again, value.drag_coefficient, rel_tol=_AGREES):
            raise SettlelabError(
                f"{path.name}: at Re {value.reynolds:g} the formula of this version gives Cd {again:.4g}, the card "
                f"says {value.drag_coefficient:.4g}; it was changed, or written by a version with another law"
            )
    return card


def check_values_at(law: Law, value: CheckValue) -> FloatArray:
    """The drag coefficient that a law gives where a check value stands."""
    shapes = {name: np.array([number]) for name, number in value.descriptors.items()}
    return np.ravel(law(np.array([value.reynolds]), shapes))


def _faults(path: Path, error: ValidationError) -> SettlelabError:
    """The findings of pydantic in our words; text that is no JSON at all is told apart."""
    findings = error.errors(include_url=False)
    if findings[0]["type"] == "json_invalid":
        return SettlelabError(f"{path.name} is not JSON: {findings[0]['ctx']['error']}")
    faults = []
    for finding in findings:
        key = ".".join(str(part) for part in finding["loc"]) or "card"
        match finding["type"]:
            case "missing":
                faults.append(Fault(file=path, key=key, found=None, accepted="as card.schema.json describes it"))
            case "extra_forbidden":
                faults.append(Fault(file=path, key=key, found=key, accepted="a key of a calibration card"))
            case "value_error":
                faults.append(Fault(file=path, key=key, found=None, accepted=str(finding["ctx"]["error"])))
            case _:
                told = finding["msg"].removeprefix("Input should be ")
                faults.append(Fault(file=path, key=key, found=_short(finding["input"]), accepted=told))
    return InputFaults(faults)


def _short(value: object) -> str:
    text = str(value)
    return text if len(text) <= 40 else f"{text[:37]}..."
