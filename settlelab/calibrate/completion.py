"""What a drop table leaves to be computed: size, shape, fluid, wall correction, Reynolds number, drag coefficient."""

from __future__ import annotations

from collections.abc import Collection, Sequence

import numpy as np
import pandas as pd

from settlelab.physics import shape
from settlelab.physics.constants import FloatArray
from settlelab.physics.drag import drag_coefficient_from_velocity, generalised_reynolds
from settlelab.physics.rheology import Rheology
from settlelab.physics.walls import unbounded_velocity

__all__ = ["AXES", "TAKEN_AS_UNBOUNDED", "completed", "corrected"]

AXES = ("long_axis", "intermediate_axis", "short_axis")
TAKEN_AS_UNBOUNDED = "no column diameter: velocity taken as unbounded"


def completed(drops: pd.DataFrame) -> pd.DataFrame:
    """Size, shape and fluid of each drop; in and out are the columns of a typed table in SI, nan where not given."""
    known = drops.copy()
    a, b, c = (known[name].to_numpy() for name in AXES)
    typed = known["equivalent_diameter"].notna()
    from_mass = shape.diameter_from_mass(known["mass"], known["particle_density"])
    mass_u = np.hypot(known["mass_u"] / known["mass"], known["particle_density_u"] / known["particle_density"]) / 3
    axes_u = np.sqrt(sum((known[f"{name}_u"] / known[name]) ** 2 for name in AXES)) / 3
    from_axes = np.cbrt(a * b * c)
    routes = [~typed & ~np.isnan(from_mass), ~typed & ~np.isnan(from_axes)]
    d = np.select(routes, [from_mass, from_axes], known["equivalent_diameter"])
    known["equivalent_diameter_u"] = np.select(routes, [mass_u * d, axes_u * d], known["equivalent_diameter_u"])
    known["equivalent_diameter"] = d
    named = known["equivalent_diameter_from"] != ""
    known["equivalent_diameter_from"] = np.select(
        [named, *routes, typed], [known["equivalent_diameter_from"], "mass and density", "calipers", "typed"], ""
    )
    return _with_shapes(_with_fluid(known), a, b, c)


def _with_fluid(known: pd.DataFrame) -> pd.DataFrame:
    """Newtonian where no consistency is given; apparent viscosity at the velocity over the diameter where it is."""
    newtonian = known["consistency"].isna()
    known["consistency"] = known["consistency"].where(~newtonian, known["viscosity"])
    known["flow_index"] = known["flow_index"].where(~newtonian, 1.0)
    known["yield_stress"] = known["yield_stress"].fillna(0.0)
    rheology = _rheology(known)
    apparent = rheology.viscosity(np.abs(known["velocity"]) / known["equivalent_diameter"])
    relative = known["consistency_u"] / known["consistency"]
    known["viscosity_u"] = known["viscosity_u"].where(known["viscosity"].notna(), relative * apparent)
    known["viscosity"] = known["viscosity"].where(known["viscosity"].notna(), apparent)
    return known


def _with_shapes(known: pd.DataFrame, a: FloatArray, b: FloatArray, c: FloatArray) -> pd.DataFrame:
    """Descriptors from the axes where they are not typed."""
    given = ~np.isnan(a * b * c)
    ratios = {"corey_shape_factor": c / np.sqrt(a * b), "flatness": c / b, "elongation": b / a}
    for name, ratio in ratios.items():
        known[name] = known[name].where(known[name].notna(), ratio)
    ellipsoid = np.full(len(known), np.nan)
    ellipsoid[given] = shape.ellipsoid_sphericity(a[given], b[given], c[given])
    typed, named = known["sphericity"].notna(), known["sphericity_from"] != ""
    known["sphericity"] = known["sphericity"].where(typed, ellipsoid)
    known["sphericity_from"] = np.select(
        [named, typed, given], [known["sphericity_from"], "typed", "ellipsoid of the axes"], ""
    )
    return known


def corrected(drops: pd.DataFrame, given: Collection[str]) -> pd.DataFrame:
    """Unbounded velocity, Reynolds number and drag coefficient, each where the table is not `given` with its own."""
    drops = drops.copy()
    if "unbounded_velocity" not in given:
        bore = drops["column_diameter"].to_numpy(dtype=np.float64, copy=True)
        open_water = np.isnan(bore)
        bore[open_water] = np.inf
        velocity, wall = unbounded_velocity(
            drops["velocity"],
            diameter=drops["equivalent_diameter"],
            bore=bore,
            fluid_density=drops["fluid_density"],
            rheology=_rheology(drops),
        )
        drops["unbounded_velocity"] = velocity
        drops["wall_factor"] = np.where(open_water, np.nan, wall.factor)
        drops["wall_factor_u"] = np.where(open_water, np.nan, wall.u)
        relative = np.hypot(drops["velocity_u"] / drops["velocity"], wall.u / wall.factor)
        drops["unbounded_velocity_u"] = relative * velocity
        drops["wall_method"] = np.where(open_water, TAKEN_AS_UNBOUNDED, wall.method)
    if "reynolds" not in given:
        drops["reynolds"], drops["reynolds_u"] = _reynolds(drops)
    if "drag_coefficient" not in given:
        drops["drag_coefficient"], drops["drag_coefficient_u"] = _drag_coefficient(drops)
    return drops


def _rheology(drops: pd.DataFrame) -> Rheology:
    fields = ("consistency", "flow_index", "yield_stress")
    consistency, flow_index, yield_stress = (drops[name].to_numpy(dtype=np.float64) for name in fields)
    return Rheology(consistency=consistency, flow_index=flow_index, yield_stress=yield_stress)


def _in_quadrature(drops: pd.DataFrame, parts: Sequence[tuple[FloatArray | float, str]]) -> FloatArray:
    """Relative standard uncertainty from parts given by sensitivity and column; an unknown one adds nothing."""
    total = np.zeros(len(drops))
    for sensitivity, name in parts:
        relative = (drops[f"{name}_u"] / drops[name]).to_numpy(dtype=np.float64)
        total += (sensitivity * np.nan_to_num(relative)) ** 2
    return np.sqrt(total)


def _reynolds(drops: pd.DataFrame) -> tuple[FloatArray, FloatArray]:
    """Generalised Reynolds number; its uncertainty as in a power-law fluid."""
    d, rho = drops["equivalent_diameter"], drops["fluid_density"]
    value = generalised_reynolds(drops["unbounded_velocity"], diameter=d, fluid_density=rho, rheology=_rheology(drops))
    n = drops["flow_index"].to_numpy(dtype=np.float64)
    parts = ((2 - n, "unbounded_velocity"), (n, "equivalent_diameter"), (1.0, "fluid_density"), (1.0, "viscosity"))
    return value, value * _in_quadrature(drops, parts)


def _drag_coefficient(drops: pd.DataFrame) -> tuple[FloatArray, FloatArray]:
    rho_s, rho = drops["particle_density"], drops["fluid_density"]
    value = drag_coefficient_from_velocity(
        drops["unbounded_velocity"], diameter=drops["equivalent_diameter"], particle_density=rho_s, fluid_density=rho
    )
    lever = (rho_s / (rho_s - rho)).to_numpy(dtype=np.float64)
    parts = (
        (2.0, "unbounded_velocity"),
        (1.0, "equivalent_diameter"),
        (lever, "particle_density"),
        (lever, "fluid_density"),
    )
    return value, np.abs(value) * _in_quadrature(drops, parts)
