"""From a drop table to what is compared: accepted drops of cuttings, and particles of which replicates are averaged."""

from __future__ import annotations

import math
from collections.abc import Collection, Hashable, Iterable, Sequence
from dataclasses import dataclass, replace

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from settlelab.calibrate.falls import INPUTS, Falls
from settlelab.errors import FitError
from settlelab.measure.model import Drop
from settlelab.physics.constants import BoolArray, FloatArray
from settlelab.physics.drag import DRAG, generalised_reynolds, held

__all__ = ["FEWEST_DROPS", "Observations", "observe", "particle_means", "replicates"]

FEWEST_DROPS = 3
SHARE_WITH_DESCRIPTOR = 0.8  # of the drops; a descriptor that fewer have is left aside, else the drops without it are
OF_SILHOUETTE = ("circularity", "aspect_ratio")  # used where nothing better is known: one view of a turning particle
_COLUMN = {"diameter": "equivalent_diameter"}  # column of an input where the names differ
_POSITIVE = {
    "unbounded_velocity": "velocity",
    "equivalent_diameter": "equivalent diameter",
    "particle_density": "particle density",
    "fluid_density": "fluid density",
    "consistency": "viscosity or consistency",
    "flow_index": "flow index",
}


@dataclass(frozen=True, slots=True, kw_only=True)
class Observations:
    """Measured unbounded velocities with what they depend on; (N,) arrays, one entry a drop or a particle mean."""

    drop: NDArray[np.int64]
    particle: NDArray[np.int64]  # number of the particle; replicate drops and drops in other fluids share it
    fluid: NDArray[np.int64]  # number of the fluid
    fluid_name: NDArray[np.str_]
    lot: NDArray[np.str_]
    velocity: FloatArray  # m/s
    velocity_u: FloatArray  # relative standard uncertainty, repeatability included once replicates are averaged
    reynolds: FloatArray  # measured
    falls: Falls
    input_u: dict[str, FloatArray]  # relative standard uncertainty of each of INPUTS and of descriptors
    repeatability: float = 0.0  # relative standard deviation of one drop among replicates; 0 where unknown

    def take(self, chosen: BoolArray | NDArray[np.int64]) -> Observations:
        """Those at an index, or where a mask is true."""
        return Observations(
            drop=self.drop[chosen],
            particle=self.particle[chosen],
            fluid=self.fluid[chosen],
            fluid_name=self.fluid_name[chosen],
            lot=self.lot[chosen],
            velocity=self.velocity[chosen],
            velocity_u=self.velocity_u[chosen],
            reynolds=self.reynolds[chosen],
            falls=self.falls.take(chosen),
            input_u={name: u[chosen] for name, u in self.input_u.items()},
            repeatability=self.repeatability,
        )


def observe(drops: pd.DataFrame, descriptors: Sequence[str] = ()) -> tuple[Observations, tuple[str, ...]]:
    """The drops that can be compared with drag laws, all with the same descriptors.

    Parameters
    ----------
    drops : DataFrame
        Columns of `Drop` in SI; a missing column is unknown throughout.
    descriptors : sequence of str
        Further columns to use as descriptors.

    Returns
    -------
    observations : Observations
        Accepted drops that are no control spheres, with all that a velocity depends on.
    notes : tuple of str
        What was set aside and why, one sentence each.

    Raises
    ------
    FitError
        Fewer than three drops are left, or a descriptor asked for is not known for enough drops.
    """
    table = _complete(drops)
    used = table[table["accepted"].astype(bool) & ~table["control"].astype(bool)].reset_index(drop=True)
    notes = []
    for name, words in _POSITIVE.items():
        known = used[name].to_numpy() > 0
        notes += _set_aside(used[~known], f"{words} is unknown")
        used = used[known]
    rising = used["particle_density"] <= used["fluid_density"]
    notes += _set_aside(used[rising], "the particle is not denser than the fluid")
    used = used[~rising]
    still = _held(used)
    notes += _set_aside(used[still], "the stated yield stress would hold the particle still")
    used = used[~still]
    asked_by_laws = [name for method in DRAG.values() for name in method.needs if name != "density_ratio"]
    used, kept, lacking = _with_descriptors(used, (*asked_by_laws, *descriptors))
    notes += lacking
    if not kept:
        used, kept, lacking = _with_descriptors(used, OF_SILHOUETTE)
        notes += lacking
    if missing := [name for name in descriptors if name not in kept]:
        raise FitError(f"the descriptor {missing[0]} is known for fewer than {SHARE_WITH_DESCRIPTOR:.0%} of the drops")
    if len(used) < FEWEST_DROPS:
        raise FitError(f"{len(used)} drops can be compared with drag laws, at least {FEWEST_DROPS} are needed")
    return _as_arrays(used.reset_index(drop=True), kept), tuple(notes)


def particle_means(drops: Observations) -> Observations:
    """Replicate drops of a particle in one fluid averaged, with the repeatability of a drop pooled over all of them.

    The uncertainty of a mean is that of one drop, which replicates mostly share (scale, clock, walls), and the
    repeatability over the root of the number of drops in quadrature: it never understates.
    """
    group = replicates(drops)
    first = np.unique(group, return_index=True)[1]
    count = np.bincount(group)

    def mean(values: FloatArray) -> FloatArray:
        return np.asarray(np.bincount(group, weights=values) / count)

    log_velocity = mean(np.log(drops.velocity))
    degrees = len(group) - len(first)
    squares = float(np.sum((np.log(drops.velocity) - log_velocity[group]) ** 2))
    repeatability = math.sqrt(squares / degrees) if degrees else 0.0
    return replace(
        drops.take(first),
        velocity=np.exp(log_velocity),
        velocity_u=np.sqrt(mean(drops.velocity_u**2) + repeatability**2 / count),
        reynolds=np.exp(mean(np.log(drops.reynolds))),
        repeatability=repeatability,
    )


def replicates(drops: Observations) -> NDArray[np.int64]:
    """Number of each drop's place in the particle means: drops of one particle in one fluid share it."""
    return _numbers(zip(drops.particle.tolist(), drops.fluid.tolist(), strict=True))


def _complete(drops: pd.DataFrame) -> pd.DataFrame:
    """The table with every column of `Drop`; a Newtonian fluid gets its viscosity as consistency."""
    table = drops.reset_index(drop=True).copy()
    text = {"recording", "particle", "lot", "flags", "fluid"}
    plain = {"drop": np.arange(1, len(table) + 1), "accepted": True, "control": False}
    for name in Drop.__dataclass_fields__:
        if name not in table.columns:
            table[name] = plain.get(name, "" if name in text else np.nan)
    newtonian = table["consistency"].isna()
    table["consistency"] = table["consistency"].where(~newtonian, table["viscosity"])
    table["flow_index"] = table["flow_index"].where(~newtonian, 1.0)
    return table


def _held(used: pd.DataFrame) -> BoolArray:
    density_difference = (used["particle_density"] - used["fluid_density"]).to_numpy(dtype=np.float64)
    yield_stress = np.nan_to_num(used["yield_stress"].to_numpy(dtype=np.float64))
    diameter = used["equivalent_diameter"].to_numpy(dtype=np.float64)
    return held(diameter=diameter, density_difference=density_difference, yield_stress=yield_stress)


def _with_descriptors(used: pd.DataFrame, candidates: Sequence[str]) -> tuple[pd.DataFrame, tuple[str, ...], list[str]]:
    """Descriptors that nearly all drops have, the drops that have them all, and what was set aside for it."""
    present = [name for name in dict.fromkeys(candidates) if name in used.columns]
    known = {name: pd.to_numeric(used[name], errors="coerce").to_numpy(dtype=np.float64) > 0 for name in present}
    fewest = SHARE_WITH_DESCRIPTOR * len(used)
    left, kept = np.ones(len(used), dtype=np.bool_), []
    for name in sorted(present, key=lambda name: -int(known[name].sum())):
        if (left & known[name]).sum() >= fewest and known[name].any():
            left &= known[name]
            kept.append(name)
    lacking = used[~left]
    what = " or ".join(name.replace("_", " ") for name in kept if not known[name].all())
    return used[left], tuple(kept), _set_aside(lacking, f"{what} is unknown")


def _set_aside(drops: pd.DataFrame, reason: str) -> list[str]:
    if len(drops) == 0:
        return []
    shown = ", ".join(str(number) for number in drops["drop"].tolist())
    noun = "drop" if len(drops) == 1 else "drops"
    return [f"{noun} {shown} left out of the comparison: {reason}"]


def _as_arrays(used: pd.DataFrame, descriptors: Collection[str]) -> Observations:
    def column(name: str) -> FloatArray:
        return np.array(pd.to_numeric(used[name], errors="coerce"), dtype=np.float64)

    def relative(name: str, of: str) -> FloatArray:
        """Relative uncertainty; an unknown one adds nothing."""
        return np.nan_to_num(column(name) / column(of)) if name in used.columns else np.zeros(len(used))

    shapes = {name: column(name) for name in descriptors}
    shapes["density_ratio"] = column("particle_density") / column("fluid_density")
    shapes["lot"] = _numbers(used["lot"].tolist()).astype(np.float64)
    falls = Falls(
        diameter=column("equivalent_diameter"),
        particle_density=column("particle_density"),
        fluid_density=column("fluid_density"),
        consistency=column("consistency"),
        flow_index=column("flow_index"),
        yield_stress=np.nan_to_num(column("yield_stress")),
        descriptors=shapes,
    )
    velocity, fluids = column("unbounded_velocity"), _fluids(used, falls)
    return Observations(
        drop=used["drop"].to_numpy(dtype=np.int64),
        particle=_particles(used),
        fluid=fluids,
        fluid_name=np.array([name or f"fluid {n + 1}" for name, n in zip(used["fluid"], fluids, strict=True)]),
        lot=used["lot"].to_numpy(dtype=np.str_),
        velocity=velocity,
        velocity_u=relative("unbounded_velocity_u", "unbounded_velocity"),
        reynolds=generalised_reynolds(
            velocity, diameter=falls.diameter, fluid_density=falls.fluid_density, rheology=falls.rheology
        ),
        falls=falls,
        input_u={
            name: relative(f"{_COLUMN.get(name, name)}_u", _COLUMN.get(name, name)) for name in (*INPUTS, *descriptors)
        },
    )


def _fluids(used: pd.DataFrame, falls: Falls) -> NDArray[np.int64]:
    """Number of each drop's fluid; fluids without a name are told apart by their properties."""
    curve = (falls.fluid_density, falls.consistency, falls.flow_index, falls.yield_stress)
    properties = zip(*(values.tolist() for values in curve), strict=True)
    return _numbers(name or values for name, values in zip(used["fluid"].tolist(), properties, strict=True))


def _particles(used: pd.DataFrame) -> NDArray[np.int64]:
    """Number of each drop's particle; a drop without a name is a particle of its own."""
    columns = (used["lot"].tolist(), used["particle"].tolist(), used["drop"].tolist())
    return _numbers((lot, name) if name else ("", drop) for lot, name, drop in zip(*columns, strict=True))


def _numbers(labels: Iterable[Hashable]) -> NDArray[np.int64]:
    """Labels numbered in the order in which they first stand."""
    order: dict[Hashable, int] = {}
    return np.array([order.setdefault(label, len(order)) for label in labels], dtype=np.int64)
