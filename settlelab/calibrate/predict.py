"""Velocities from a calibration card, with intervals, marked where the card does not reach."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Annotated

import numpy as np
import pandas as pd
from numpy.typing import ArrayLike
from scipy.stats import t as student

from settlelab.calibrate.card import Card
from settlelab.calibrate.falls import Falls, settle
from settlelab.errors import SettlelabError
from settlelab.measure.model import Millimetre, MillimetrePerSecond, Number
from settlelab.physics.constants import FloatArray
from settlelab.physics.rheology import Rheology
from settlelab.units import Unit

__all__ = ["Prediction", "predict"]

COVERAGE = 0.95
_STEP = 1e-4  # of the derivatives to the coefficients, in units of their uncertainty


@dataclass(frozen=True, slots=True, kw_only=True)
class Prediction:
    """One row of a prediction; the intervals are of 95 %."""

    equivalent_diameter: Millimetre
    particle_density: Annotated[float, Unit("kg/m3")]
    velocity: MillimetrePerSecond  # alone, in unbounded fluid at rest
    confidence_low: MillimetrePerSecond  # where the law, the mean of many particles, lies
    confidence_high: MillimetrePerSecond
    prediction_low: MillimetrePerSecond  # where the next single particle falls
    prediction_high: MillimetrePerSecond
    reynolds: Number
    drag_coefficient: Number
    in_range: bool
    outside: str  # what lies outside the calibration, joined by ";"


def predict(
    card: Card,
    *,
    diameter: ArrayLike,
    particle_density: ArrayLike,
    fluid_density: ArrayLike,
    rheology: Rheology,
    descriptors: Mapping[str, ArrayLike] | None = None,
) -> pd.DataFrame:
    """Terminal velocities by the law of a card.

    Parameters
    ----------
    card : Card
        As `read_card` gives it.
    diameter : (N,) array
        Diameters of spheres of equal volume [m].
    particle_density, fluid_density : (N,) array
        [kg/m3].
    rheology : Rheology
        Flow curve of the fluid.
    descriptors : mapping, optional
        Shape descriptors by name, (N,) arrays; `lot` is the number of the lot on the card, from 0.

    Returns
    -------
    DataFrame
        Columns of `Prediction` in SI. A particle that the yield stress holds has velocity 0.

    Raises
    ------
    SettlelabError
        A descriptor that the law needs is missing, or a value that no particle or fluid has.
    """
    given = {name: np.asarray(value, dtype=np.float64) for name, value in (descriptors or {}).items()}
    if missing := [name for name in card.law.needs if name not in given and name != "density_ratio"]:
        raise SettlelabError(f"the card needs the {' and the '.join(missing).replace('_', ' ')} of the particles")
    falls = _falls(np.atleast_1d(diameter), particle_density, fluid_density, rheology, given)
    _refuse_nonsense(falls)
    found = settle(card.drag_law(), falls)
    law_u = _law_uncertainty(card, falls)
    factor = float(student.ppf((1 + COVERAGE) / 2, card.scatter.degrees_of_freedom))
    own, single = factor * law_u, factor * np.hypot(law_u, card.scatter.single_drop)
    outside = _outside(card, falls, found.velocity, found.reynolds)
    return pd.DataFrame(
        {
            "equivalent_diameter": falls.diameter,
            "particle_density": falls.particle_density,
            "velocity": found.velocity,
            "confidence_low": found.velocity * np.exp(-own),
            "confidence_high": found.velocity * np.exp(own),
            "prediction_low": found.velocity * np.exp(-single),
            "prediction_high": found.velocity * np.exp(single),
            "reynolds": found.reynolds,
            "drag_coefficient": found.drag_coefficient,
            "in_range": [not names for names in outside],
            "outside": outside,
        }
    )


def _falls(
    diameter: FloatArray,
    particle_density: ArrayLike,
    fluid_density: ArrayLike,
    rheology: Rheology,
    descriptors: Mapping[str, FloatArray],
) -> Falls:
    fields = (diameter, particle_density, fluid_density, *rheology.arrays(), *descriptors.values())
    arrays = [np.array(field, dtype=np.float64) for field in np.broadcast_arrays(*fields)]
    shapes = dict(zip(descriptors, arrays[6:], strict=True))
    return Falls(
        diameter=arrays[0],
        particle_density=arrays[1],
        fluid_density=arrays[2],
        consistency=arrays[3],
        flow_index=arrays[4],
        yield_stress=arrays[5],
        descriptors={"density_ratio": arrays[1] / arrays[2], **shapes},
    )


def _refuse_nonsense(falls: Falls) -> None:
    for name, values in (
        ("diameter", falls.diameter),
        ("particle density", falls.particle_density),
        ("fluid density", falls.fluid_density),
        ("viscosity or consistency", falls.consistency),
        ("flow index", falls.flow_index),
    ):
        if not np.all((values > 0) & np.isfinite(values)):
            raise SettlelabError(f"the {name} must be above 0")
    if np.any(falls.yield_stress < 0):
        raise SettlelabError("the yield stress must be 0 or above")
    if np.any(falls.particle_density <= falls.fluid_density):
        raise SettlelabError("a particle that is not denser than the fluid does not settle in it")
    for name, values in falls.descriptors.items():
        if name in ("lot", "density_ratio"):
            continue
        if not np.all((values > 0) & np.isfinite(values)):
            raise SettlelabError(f"the {name.replace('_', ' ')} must be above 0")
        if name == "sphericity" and np.any(values > 1):
            raise SettlelabError("the sphericity must be at most 1")


def _law_uncertainty(card: Card, falls: Falls) -> FloatArray:
    """Relative standard uncertainty of the velocity from that of the coefficients and their correlation."""
    u = np.sqrt(np.diag(card.covariance))
    derivatives = np.zeros((len(u), len(falls.diameter)))
    for number in np.flatnonzero(u > 0):
        step = np.zeros_like(u)
        step[number] = _STEP * u[number]
        up, down = (settle(card.drag_law(card.values + s * step), falls).velocity for s in (1, -1))
        moving = (up > 0) & (down > 0)
        derivatives[number] = np.log(np.where(moving, up, 1.0) / np.where(moving, down, 1.0)) / (2 * step[number])
    return np.asarray(np.sqrt(np.einsum("pn,pq,qn->n", derivatives, card.covariance, derivatives)))


def _outside(card: Card, falls: Falls, velocity: FloatArray, reynolds: FloatArray) -> list[str]:
    """For each fall the names of what the calibration does not cover."""
    asked = {
        "reynolds": reynolds,
        "equivalent_diameter_mm": 1e3 * falls.diameter,
        "particle_density_kg_m3": falls.particle_density,
        "fluid_density_kg_m3": falls.fluid_density,
        "flow_index": falls.flow_index,
        **{name: values for name, values in falls.descriptors.items() if name in card.law.needs},
    }
    words: list[list[str]] = [[] for _ in velocity]
    for name, values in asked.items():
        if name not in card.ranges:
            continue
        low, high = card.ranges[name].span
        for index in np.flatnonzero((values < low) | (values > high)):
            words[index].append(name)
    return [";".join(names) for names in words]
