"""The lab report table: one row per particle and fluid, then one per lot and fluid.

How an uncertainty of a mean is built (JCGM 100, 4.2 and 5.2):

- *Repeatability*: the standard deviation of replicate drops of a particle, pooled as a relative figure over all
  particles of the table (cuttings and control spheres apart), times the Student factor t/2 of its degrees of freedom so
  that k = 2 keeps its 95 %, over the root of the number of drops. Where a track's own fit is worse than that, or
  nothing was dropped twice, the fit counts: the scatter of replicates contains it already, so the larger is taken.
- *Common part*: scale, clock, fluid, walls, and the size and density of the particle itself are the same in every
  drop; they do not average down and are added in quadrature.
- A *lot* is the mean of its particles: their scatter over the root of their number (Student factor again) contains
  what is peculiar to a particle; only what all particles share is added. Both are figures for the lot that the
  particles were taken from, not for those few particles alone.
"""

from __future__ import annotations

import math
from collections.abc import Iterable
from dataclasses import dataclass
from typing import TYPE_CHECKING, Annotated

import numpy as np
import pandas as pd
from scipy.stats import t as student

from settlelab.measure.model import (
    KilogramPerCubicMetre,
    Measured,
    Millimetre,
    MillimetrePerSecond,
    Number,
)
from settlelab.units import Unit

if TYPE_CHECKING:
    from settlelab.calibrate import Calibration

__all__ = ["LabRow", "lab_table"]

OF_ONE_FALL = frozenset({"track"})  # inputs of the budget that are new with every fall
OF_ONE_PARTICLE = frozenset({"size", "particle density"})  # the same whenever this particle falls
BUDGET_OF = {  # quantity of the table -> output of the budget whose shares apply
    "velocity": "velocity",
    "unbounded_velocity": "velocity",
    "reynolds": "reynolds",
    "drag_coefficient": "drag_coefficient",
}
SHAPES = ("sphericity", "corey_shape_factor", "circularity", "aspect_ratio")  # the first one known is shown
Percent = Annotated[float, Unit("%")]
COVERAGE = 0.9545  # of k = 2 for a normal distribution


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


@dataclass(frozen=True, slots=True)
class Repeatability:
    """Relative standard deviation of a single drop of the same particle, pooled over particles."""

    relative: float
    degrees: int

    def of_mean(self, mean: float, fit_u: np.ndarray) -> float:
        """Standard uncertainty of the mean of drops whose tracks alone give `fit_u`."""
        drops = len(fit_u)
        fit = math.sqrt(float(np.mean(fit_u**2)) / drops)
        if self.degrees == 0:
            return fit
        return max(fit, student_factor(self.degrees) * self.relative * abs(mean) / math.sqrt(drops))


def student_factor(degrees: int) -> float:
    """Factor on a standard uncertainty of so many degrees of freedom that keeps the coverage of k = 2."""
    return float(student.ppf((1 + COVERAGE) / 2, degrees)) / 2


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
    drops = _with_parts(measured.drops[measured.drops["particle"] != ""], measured.budget)
    drops = _with_predictions(drops, calibration)
    pooled = {
        (control, quantity): _repeatability(drops[drops["control"].astype(bool) == control], quantity)
        for control in (False, True)
        for quantity in BUDGET_OF
    }
    order = ["control", "lot", "particle", "fluid"]
    of_particles = [_particle_row(group, pooled) for _, group in drops.groupby(order, sort=True, dropna=False)]
    rows = pd.DataFrame(of_particles, columns=[*LabRow.__dataclass_fields__, *_shared_columns(), "control"])
    lots = rows[~rows["control"].astype(bool) & (rows["lot"] != "")].groupby(["lot", "fluid"], sort=True)
    table = pd.DataFrame([*of_particles, *(_lot_row(group) for _, group in lots)], columns=rows.columns)
    table = table[list(LabRow.__dataclass_fields__)]
    for kind, method in _methods(calibration).items():
        table[f"{kind}_method"] = np.where(table[f"{kind}_velocity"].notna(), method, "")
    return table


def _shared_columns() -> list[str]:
    return [f"{quantity}_shared_u" for quantity in BUDGET_OF]


def _with_parts(drops: pd.DataFrame, budget: pd.DataFrame) -> pd.DataFrame:
    """Each quantity's uncertainty in parts: of the fall, common to the particle's drops, shared by all particles.

    What the budget does not attribute counts as common, which never understates a mean.
    """
    parts = drops.copy()
    for quantity, output in BUDGET_OF.items():
        of_output = budget[budget["output"] == output]
        fall, particle = (
            of_output[of_output["input"].isin(inputs)].groupby("drop")["share"].sum()
            for inputs in (OF_ONE_FALL, OF_ONE_PARTICLE)
        )
        own = parts["drop"].map(fall).fillna(0.0).clip(0.0, 1.0)
        peculiar = parts["drop"].map(particle).fillna(0.0).clip(0.0, 1.0)
        u = parts[f"{quantity}_u"]
        parts[f"{quantity}_fall_u"] = u * np.sqrt(own)
        parts[f"{quantity}_common_u"] = u * np.sqrt(1 - own)
        parts[f"{quantity}_shared_u"] = u * np.sqrt((1 - own - peculiar).clip(lower=0.0))
    return parts


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


def _repeatability(drops: pd.DataFrame, quantity: str) -> Repeatability:
    """Pooled relative scatter of replicates: root of the sum of squares over the sum of degrees of freedom."""
    squares, degrees = 0.0, 0
    for _, group in drops[drops["accepted"].astype(bool)].groupby(["particle", "fluid"]):
        values = group[quantity].to_numpy(dtype=np.float64)
        squares += float(np.sum((values / values.mean() - 1.0) ** 2))
        degrees += len(values) - 1
    return Repeatability(math.sqrt(squares / degrees) if degrees else math.nan, degrees)


def _particle_row(drops: pd.DataFrame, pooled: dict[tuple[bool, str], Repeatability]) -> dict[str, object]:
    first = drops.iloc[0]
    used = drops[drops["accepted"].astype(bool)]
    control = bool(first["control"])
    shape, shape_measure = _shape(first)
    row: dict[str, object] = {
        "particle": first["particle"],
        "lot": first["lot"] or ("control" if control else ""),
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
        "control": control,
    }
    for quantity in BUDGET_OF:
        mean = float(used[quantity].mean())
        random = (
            pooled[control, quantity].of_mean(mean, used[f"{quantity}_fall_u"].to_numpy()) if len(used) else math.nan
        )
        row[quantity] = mean
        row[f"{quantity}_expanded_u"] = 2 * math.hypot(random, used[f"{quantity}_common_u"].mean())
        row[f"{quantity}_shared_u"] = used[f"{quantity}_shared_u"].mean()
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
        "control": False,
    }
    averaged = [
        "equivalent_diameter",
        "density",
        "wall_factor",
        *(f"{kind}_{what}" for kind in ("published", "calibrated") for what in ("velocity", "deviation")),
    ]
    row |= {name: used[name].mean() for name in averaged}
    for quantity in BUDGET_OF:
        row[quantity] = used[quantity].mean()
        row[f"{quantity}_expanded_u"] = _lot_expanded_u(used, quantity)
    return row


def _lot_expanded_u(particles: pd.DataFrame, quantity: str) -> float:
    """Twice the standard uncertainty of the lot's mean; of a single particle that particle's own."""
    count = len(particles)
    if count < 2:
        return float(particles[f"{quantity}_expanded_u"].mean())
    between = student_factor(count - 1) * float(particles[quantity].std(ddof=1)) / math.sqrt(count)
    return 2 * math.hypot(between, float(particles[f"{quantity}_shared_u"].mean()))


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
