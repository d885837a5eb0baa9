"""Falling-ball viscosity: the viscosity at which control spheres fall as fast as they were seen to."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence

import numpy as np
import pandas as pd

from settlelab.errors import SettlelabError
from settlelab.measure.controls import ControlDrop, inputs_of, sphere_law, velocity_in_column
from settlelab.measure.propagation import Effect, Estimate, propagate
from settlelab.physics.constants import STANDARD_GRAVITY, FloatArray
from settlelab.physics.drag import DragLaw
from settlelab.physics.roots import bracketed_root

__all__ = ["VISCOSITY_COLUMNS", "falling_ball_viscosity", "viscosity_table"]

VISCOSITY_COLUMNS = ("fluid", "drops", "viscosity", "viscosity_u", "stated_viscosity", "stated_viscosity_u", "source")
THINNEST = math.log(1e-6)  # of the viscosity by Stokes' law, where the search ends


def falling_ball_viscosity(drops: Sequence[ControlDrop]) -> Estimate:
    """Viscosity [Pa s] of a Newtonian fluid from spheres of known size and density, with its budget.

    Of each drop the viscosity at which the standard drag curve and the wall factor give the measured velocity; of
    several drops the mean of the logarithms. The viscosity stated for the fluid has no part in it. Scale, clock, bore,
    fluid density and drag law are common to all drops, what is known of a sphere to its own drops. The share of the
    drag law grows with the Reynolds number: where drag depends little on viscosity, a fall tells little of it.

    Parameters
    ----------
    drops : sequence of ControlDrop
        All in one fluid; its density must be known.

    Raises
    ------
    SettlelabError
        No drop, several fluids, or a fluid that is not Newtonian.
    """
    fluids = {drop.setup.fluid.name: drop.setup.fluid for drop in drops}
    if len(fluids) != 1:
        raise SettlelabError(f"a falling-ball viscosity takes drops in one fluid, not in {len(fluids)}")
    (fluid,) = fluids.values()
    if not _newtonian(drops[0]):
        raise SettlelabError(f'fluid "{fluid.name}": a fluid that is not Newtonian has no one viscosity')
    law = sphere_law(fluid)
    inputs = {"fluid_density": fluid.density, "bore_change": 0.0, "law": 1.0}
    for number, drop in enumerate(drops):
        inputs |= {
            f"velocity {number}": drop.comparison.measured.value,
            f"diameter {number}": drop.sphere.diameter,
            f"particle_density {number}": drop.sphere.density,
            f"wall_doubt {number}": 0.0,
        }

    def model(moved: Mapping[str, FloatArray]) -> dict[str, FloatArray]:
        logs = [_log_viscosity(law.drag, _of_drop(drop, number, moved)) for number, drop in enumerate(drops)]
        return {"viscosity": np.exp(np.mean(logs, axis=0))}

    effects = (*_common_effects(drops), *_own_effects(drops), Effect("drag law", {"law": law.u}))
    return propagate(model, inputs, effects)["viscosity"]


def viscosity_table(drops: Sequence[ControlDrop]) -> pd.DataFrame:
    """Falling-ball viscosity of every Newtonian fluid that control spheres fell in, beside the stated one.

    Parameters
    ----------
    drops : sequence of ControlDrop
        Accepted ones.

    Returns
    -------
    DataFrame
        Columns of `VISCOSITY_COLUMNS` in SI; `source` is the largest one of uncertainty.
    """
    rows = []
    for name in dict.fromkeys(drop.setup.fluid.name for drop in drops if _newtonian(drop)):
        used = [drop for drop in drops if drop.setup.fluid.name == name]
        found, fluid = falling_ball_viscosity(used), used[0].setup.fluid
        consistency = float(fluid.rheology.arrays()[0])
        shares = found.shares
        rows.append(
            {
                "fluid": name,
                "drops": len(used),
                "viscosity": found.value,
                "viscosity_u": found.u,
                "stated_viscosity": consistency,
                "stated_viscosity_u": consistency * math.sqrt(float(fluid.covariance[1, 1])),
                "source": max(shares, key=lambda source: shares[source]) if shares else "",
            }
        )
    return pd.DataFrame(rows, columns=list(VISCOSITY_COLUMNS))


def _newtonian(drop: ControlDrop) -> bool:
    _, flow_index, yield_stress = drop.setup.fluid.rheology.arrays()
    return bool(flow_index == 1.0 and yield_stress == 0.0)


def _of_drop(drop: ControlDrop, number: int, moved: Mapping[str, FloatArray]) -> dict[str, FloatArray]:
    """Inputs of one drop out of those of all; its stated viscosity stands there until it is replaced."""
    own = {name: moved[f"{name} {number}"] for name in ("velocity", "diameter", "particle_density", "wall_doubt")}
    shared = {"fluid_density": moved["fluid_density"], "law": moved["law"]}
    stated = {name: np.full_like(moved["law"], value) for name, value in inputs_of(drop.sphere, drop.setup).items()}
    return stated | own | shared | {"bore": stated["bore"] + moved["bore_change"]}


def _log_viscosity(drag: DragLaw, inputs: Mapping[str, FloatArray]) -> FloatArray:
    """Logarithm of the viscosity at which the expected velocity is the measured one; Stokes' law bounds it above."""
    weight = STANDARD_GRAVITY * np.abs(inputs["particle_density"] - inputs["fluid_density"])
    highest = np.log(weight * inputs["diameter"] ** 2 / (18 * np.abs(inputs["velocity"]))) + 0.1  # laws err by less

    def excess(log_viscosity: FloatArray) -> FloatArray:
        expected, _ = velocity_in_column(drag, {**inputs, "log_consistency": log_viscosity})
        return np.log(np.abs(inputs["velocity"] / expected))

    return bracketed_root(excess, highest + THINNEST, highest, tolerance=1e-9)


def _common_effects(drops: Sequence[ControlDrop]) -> list[Effect]:
    """Effects of what all drops share."""
    velocity = {f"velocity {number}": drop.comparison.measured.value for number, drop in enumerate(drops)}
    setup = drops[0].setup
    scale, clock = (max(getattr(drop.setup, name) for drop in drops) for name in ("scale_u", "clock_u"))
    law = sphere_law(setup.fluid).drag
    walls = {}
    for number, drop in enumerate(drops):
        stated = {name: np.asarray([value]) for name, value in inputs_of(drop.sphere, drop.setup).items()}
        walls[f"wall_doubt {number}"] = float(velocity_in_column(law, stated)[1][0])
    return [
        Effect("scale", {name: value * scale for name, value in velocity.items()}),
        Effect("clock", {name: value * clock for name, value in velocity.items()}),
        Effect("walls", walls),
        *(Effect("bore", {"bore_change": effect.change["bore"]}) for effect in setup.bore.effects),
        *(
            Effect(effect.source, {"fluid_density": effect.change["fluid_density"]})
            for effect in setup.fluid.effects
            if "fluid_density" in effect.change
        ),
    ]


def _own_effects(drops: Sequence[ControlDrop]) -> list[Effect]:
    """Effects of each fit, and of each sphere on all its drops."""
    effects = [Effect("track", {f"velocity {number}": drop.track_u}) for number, drop in enumerate(drops)]
    for particle in dict.fromkeys(drop.particle for drop in drops):
        numbers = [number for number, drop in enumerate(drops) if drop.particle == particle]
        for effect in drops[numbers[0]].sphere.effects:
            change = {f"{name} {number}": value for name, value in effect.change.items() for number in numbers}
            effects.append(Effect(effect.source, change))
    return effects
