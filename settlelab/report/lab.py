"""The lab report table: one row per particle and fluid, then one per lot and fluid.

A lot counts each of its particles once, however often it was dropped. `means` tells how uncertainties are combined.
"""

from __future__ import annotations

import math
import re
from collections.abc import Iterable
from dataclasses import dataclass
from typing import TYPE_CHECKING, Annotated

import numpy as np
import pandas as pd

from settlelab.measure.model import (
    KilogramPerCubicMetre,
    Measured,
    Millimetre,
    MillimetrePerSecond,
    Number,
)
from settlelab.report.means import QUANTITIES, Repeatability, lot_u, particle_u, repeatability, with_parts
from settlelab.units import Unit

if TYPE_CHECKING:
    from settlelab.calibrate import Calibration

__all__ = ["LabRow", "lab_table"]

PARTS = [f"{quantity}_{part}_u" for quantity in QUANTITIES for part in ("own", "shared")]  # standard uncertainties
CONTROL = "control"  # stands for the lot in the rows of control spheres
SHAPES = ("sphericity", "corey_shape_factor", "circularity", "aspect_ratio")  # the first one known is shown
Percent = Annotated[float, Unit("%")]


@dataclass(frozen=True, slots=True, kw_only=True)
class LabRow:
    """One row of lab_table.csv; a row without particle is that of a lot. `expanded_u` is k = 2."""

    particle: str
    lot: str
    fluid: str
    particles: int  # with at least one accepted drop
    drops: int
    accepted: int
    equivalent_diameter: Millimetre
    density: KilogramPerCubicMetre
    shape: Number
    shape_measure: str  # the descriptor that `shape` is
    velocity: MillimetrePerSecond  # in the column, mean of the accepted drops
    velocity_expanded_u: MillimetrePerSecond
    velocity_scatter: Percent  # relative standard deviation of the drops, in a lot's row of its particles
    wall_factor: Number
    unbounded_velocity: MillimetrePerSecond
    unbounded_velocity_expanded_u: MillimetrePerSecond
    reynolds: Number
    reynolds_expanded_u: Number
    drag_coefficient: Number
    drag_coefficient_expanded_u: Number
    published_method: str  # the best published one
    published_velocity: MillimetrePerSecond  # predicted, unbounded
    published_deviation: Percent  # predicted over measured unbounded velocity, less 1
    calibrated_method: str
    calibrated_velocity: MillimetrePerSecond
    calibrated_deviation: Percent
    flags: str


def lab_table(measured: Measured, calibration: Calibration | None) -> pd.DataFrame:
    """The lab report table.

    Parameters
    ----------
    measured : Measured
        Drop table and budget of the study, SI.
    calibration : Calibration or None
        Predictions to set beside the measurement; None leaves their columns empty.

    Returns
    -------
    DataFrame
        Columns of `LabRow`, SI: the rows of cuttings by lot, those of control spheres, then one row per lot and
        fluid. Falls that could not be given to a particle are not in it.
    """
    drops = with_parts(measured.drops[measured.drops["particle"] != ""], measured.budget)
    drops = _with_predictions(drops, calibration)
    cuttings, controls = (drops[drops["control"].astype(bool) == control] for control in (False, True))
    of_particles = [*_particle_rows(cuttings), *_particle_rows(controls)]
    rows = pd.DataFrame(of_particles, columns=[*LabRow.__dataclass_fields__, *PARTS])
    in_lots = rows[(rows["lot"] != "") & (rows["lot"] != CONTROL)]
    of_lots = [_lot_row(group) for _, group in _groups(in_lots, ["lot", "fluid"])]
    table = pd.DataFrame([*of_particles, *of_lots], columns=list(LabRow.__dataclass_fields__))
    for kind, method in _methods(calibration).items():
        table[f"{kind}_method"] = np.where(table[f"{kind}_velocity"].notna(), method, "")
    return table


def _methods(calibration: Calibration | None) -> dict[str, str]:
    """The two correlations to set beside the measurement; empty where there is none."""
    if calibration is None:
        return {"published": "", "calibrated": ""}
    chosen = calibration.chosen.name if calibration.chosen else ""
    return {"published": calibration.best_published, "calibrated": chosen}


def _with_predictions(drops: pd.DataFrame, calibration: Calibration | None) -> pd.DataFrame:
    drops = drops.assign(published_velocity=np.nan, calibrated_velocity=np.nan)
    if calibration is None:
        return drops
    for kind, method in _methods(calibration).items():
        of_method = calibration.predictions[calibration.predictions["method"] == method]
        drops[f"{kind}_velocity"] = drops["drop"].map(of_method.set_index("drop")["predicted_velocity"])
    return drops


def _groups(frame: pd.DataFrame, keys: list[str]) -> list[tuple[tuple[str, ...], pd.DataFrame]]:
    """Groups in the order in which a person sorts names: A-2 before A-10."""
    return sorted(frame.groupby(keys, sort=False), key=lambda item: [_natural(key) for key in item[0]])


def _natural(name: str) -> list[tuple[int, str]]:
    return [(int(part), "") if part.isdigit() else (-1, part) for part in re.findall(r"[0-9]+|[^0-9]+", name)]


def _particle_rows(drops: pd.DataFrame) -> list[dict[str, object]]:
    accepted = drops[drops["accepted"].astype(bool)]
    pooled = {quantity: repeatability(accepted, quantity) for quantity in QUANTITIES}
    return [_particle_row(group, pooled) for _, group in _groups(drops, ["lot", "particle", "fluid"])]


def _particle_row(drops: pd.DataFrame, pooled: dict[str, Repeatability]) -> dict[str, object]:
    first = drops.iloc[0]
    used = drops[drops["accepted"].astype(bool)]
    shape, shape_measure = _shape(first)
    row: dict[str, object] = {
        "particle": first["particle"],
        "lot": CONTROL if first["control"] else first["lot"],
        "fluid": first["fluid"],
        "particles": int(len(used) > 0),
        "drops": len(drops),
        "accepted": len(used),
        "equivalent_diameter": drops["equivalent_diameter"].mean(),
        "density": drops["particle_density"].mean(),
        "shape": shape,
        "shape_measure": shape_measure,
        "velocity_scatter": _scatter(used["velocity"]),
        "wall_factor": used["wall_factor"].mean(),
        "flags": _joined(drops["flags"]),
    }
    for quantity in QUANTITIES:
        row[quantity] = float(used[quantity].mean())
        own, shared = particle_u(used, quantity, pooled[quantity])
        row |= {f"{quantity}_own_u": own, f"{quantity}_shared_u": shared}
        row[f"{quantity}_expanded_u"] = 2 * math.hypot(own, shared)
    return row | _compared(used["published_velocity"].mean(), used["calibrated_velocity"].mean(), row)


def _compared(published: float, calibrated: float, row: dict[str, object]) -> dict[str, object]:
    measured = row["unbounded_velocity"]
    assert isinstance(measured, float)
    return {
        "published_velocity": published,
        "published_deviation": published / measured - 1,
        "calibrated_velocity": calibrated,
        "calibrated_deviation": calibrated / measured - 1,
    }


def _lot_row(particles: pd.DataFrame) -> dict[str, object]:
    first = particles.iloc[0]
    used = particles[particles["accepted"] > 0]
    measures = used["shape_measure"].unique()
    row: dict[str, object] = {
        "particle": "",
        "lot": first["lot"],
        "fluid": first["fluid"],
        "particles": len(used),
        "drops": int(particles["drops"].sum()),
        "accepted": int(particles["accepted"].sum()),
        "shape_measure": measures[0] if len(measures) == 1 else "",
        "shape": used["shape"].mean() if len(measures) == 1 else math.nan,
        "velocity_scatter": _scatter(used["velocity"]),
        "flags": _joined(particles["flags"]),
    }
    averaged = [
        "equivalent_diameter",
        "density",
        "wall_factor",
        *(f"{kind}_{what}" for kind in ("published", "calibrated") for what in ("velocity", "deviation")),
    ]
    row |= {name: used[name].mean() for name in averaged}
    for quantity in QUANTITIES:
        row[quantity] = used[quantity].mean()
        parts = used[[f"{quantity}_own_u", f"{quantity}_shared_u"]].dropna().to_numpy(dtype=np.float64)
        row[f"{quantity}_expanded_u"] = 2 * lot_u(*parts.T)
    return row


def _scatter(values: pd.Series) -> float:
    return float(values.std(ddof=1) / values.mean()) if len(values) > 1 else math.nan


def _shape(row: pd.Series) -> tuple[float, str]:
    for name in SHAPES:
        if math.isfinite(row[name]):
            return float(row[name]), name
    return math.nan, ""


def _joined(flags: Iterable[str]) -> str:
    """Every flag once, in the order met."""
    return ";".join(dict.fromkeys(flag for cell in flags for flag in cell.split(";") if flag))
