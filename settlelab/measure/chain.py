"""From the velocity of one fall to wall factor, unbounded velocity, Reynolds number and drag coefficient."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from settlelab.errors import SettlelabError
from settlelab.measure.fluids import FluidState, flow_curve
from settlelab.measure.model import Velocity
from settlelab.measure.particle import Grain
from settlelab.measure.propagation import Drawn, Effect, Estimate, monte_carlo, propagate
from settlelab.physics.constants import FloatArray
from settlelab.physics.drag import drag_coefficient_from_velocity, generalised_reynolds
from settlelab.physics.walls import WallFactor, equivalent_bore, unbounded_velocity
from settlelab.study.model import Column

__all__ = ["Bore", "Fallen", "Setup", "bore_of", "fallen", "fallen_by_monte_carlo", "outputs"]

# First coefficient c of the creeping wall factor f = 1 - c d/D for a sphere off the axis, by the distance from the axis
# over the radius: method of fundamental solutions. Beyond 0.7 that of a plane wall, 9/16 over the distance, joined on.
_OFF_AXIS = (0.0, 0.2, 0.4, 0.6, 0.7)
_COEFFICIENT = (2.104, 2.079, 2.043, 2.17, 2.45)
_SIX = 6.0  # standard uncertainties that no draw goes beyond
_FREE = 0.5  # nearer to the axis than this share of the radius the wall factor holds as it is


@dataclass(frozen=True, slots=True)
class Bore:
    """Inner diameter of the column, or that of the round one whose wall acts alike [m]; infinite where unknown."""

    diameter: float
    effects: tuple[Effect, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Setup:
    """What a fall shares with the others of its recording; uncertainties relative, k = 1."""

    scale_u: float
    clock_u: float
    bore: Bore
    fluid: FluidState


@dataclass(frozen=True, slots=True, kw_only=True)
class Fallen:
    """What one fall tells; every estimate with its budget."""

    velocity: Estimate  # in the column, m/s
    wall_factor: Estimate
    unbounded_velocity: Estimate  # m/s
    reynolds: Estimate
    drag_coefficient: Estimate
    viscosity: Estimate  # apparent, at unbounded velocity over diameter, Pa s
    diameter: Estimate  # m
    particle_density: Estimate  # kg/m3
    fluid_density: Estimate  # kg/m3
    wall_method: str


def bore_of(column: Column) -> Bore:
    """The bore of a round column, or the equivalent one of a rectangular column.

    Parameters
    ----------
    column : Column
        A column whose inner size was not typed is taken as infinitely wide.
    """
    if column.section == "round" and column.inner_diameter is not None:
        return Bore(column.inner_diameter.value, (Effect("bore", {"bore": column.inner_diameter.u}),))
    if column.section == "rectangular" and column.width is not None and column.depth is not None:
        width, depth = column.width, column.depth
        steps = ((width.u, 0.0), (0.0, depth.u))
        changes = [
            float(
                equivalent_bore(width.value + dw, depth.value + dd)
                - equivalent_bore(width.value - dw, depth.value - dd)
            )
            / 2
            for dw, dd in steps
        ]
        bore = float(equivalent_bore(width.value, depth.value))
        return Bore(bore, tuple(Effect("bore", {"bore": change}) for change in changes))
    return Bore(math.inf, ())


def fallen(velocity: Velocity, grain: Grain, setup: Setup, *, off_axis: float = 0.0) -> Fallen:
    """Everything that follows from a terminal velocity, with standard uncertainties and budgets.

    Sources of uncertainty, independent of each other: "track" (the fit), "scale", "clock", "size", "particle density",
    "fluid density", "viscosity", "temperature", "mass fraction", "bore", "walls" (the wall factor itself).

    Parameters
    ----------
    velocity : Velocity
        In the column; a nan value makes everything that follows from it nan.
    grain : Grain
        The particle.
    setup : Setup
        What the recording shares.
    off_axis : float
        Distance of the fall from the axis of the column over its radius, as far as the camera sees it [-].

    Raises
    ------
    SettlelabError
        The particle would not fit into the column.
    """
    inputs, effects, wall_method = _sources(velocity, grain, setup, off_axis)
    return Fallen(**propagate(outputs, inputs, effects), wall_method=wall_method)


def fallen_by_monte_carlo(
    velocity: Velocity, grain: Grain, setup: Setup, *, off_axis: float = 0.0, count: int = 10_000
) -> dict[str, Drawn]:
    """The same by Monte Carlo: mean, standard deviation and 95 % interval of every output of `fallen`, by its name.

    Nothing where draws would leave what can be: within six standard uncertainties of rest, or of filling the column.

    Parameters
    ----------
    velocity, grain, setup, off_axis
        As for `fallen`.
    count : int
        Draws; their seed is fixed.

    Raises
    ------
    SettlelabError
        The particle would not fit into the column.
    """
    inputs, effects, _ = _sources(velocity, grain, setup, off_axis)
    u = {name: math.hypot(*(effect.change.get(name, 0.0) for effect in effects)) for name in inputs}
    widest = inputs["diameter"] + _SIX * (u["diameter"] + u["bore"])
    if not abs(inputs["velocity"]) > _SIX * u["velocity"] or not widest < inputs["bore"]:
        return {}
    if not inputs["diameter"] > _SIX * u["diameter"]:
        return {}
    return monte_carlo(outputs, inputs, effects, count=count)


def _sources(
    velocity: Velocity, grain: Grain, setup: Setup, off_axis: float
) -> tuple[dict[str, float], tuple[Effect, ...], str]:
    """Best values, independent sources of uncertainty, and the wall methods that were used."""
    if grain.diameter >= setup.bore.diameter:
        raise SettlelabError(
            f"a diameter of {1e3 * grain.diameter:.3g} mm does not fit into a column of "
            f"{1e3 * setup.bore.diameter:.3g} mm"
        )
    inputs = {
        "velocity": velocity.value,
        "diameter": grain.diameter,
        "particle_density": grain.density,
        "bore": setup.bore.diameter,
        **setup.fluid.properties,
        "wall_doubt": 0.0,
    }
    wall = _walls({name: np.asarray([value]) for name, value in inputs.items()})
    off_axis_u = (1 - float(wall.factor[0])) * wall_excess(off_axis)
    effects = (
        *_recording_effects(velocity, grain, setup),
        *grain.effects,
        *setup.fluid.effects,
        *setup.bore.effects,
        Effect("walls", {"wall_doubt": math.hypot(float(wall.u[0]), off_axis_u)}),
    )
    return inputs, effects, str(wall.method[0])


def wall_excess(off_axis: float) -> float:
    """How much stronger the wall acts on a fall off the axis than the wall factor says, relative, as a uncertainty.

    Parameters
    ----------
    off_axis : float
        Distance from the axis over the radius [-]; nan counts as 0.

    Returns
    -------
    float
        0 up to 0.5: there the wall factor's own uncertainty covers it.
    """
    if not off_axis > _FREE:
        return 0.0
    plane = 9 / 16 / max(1 - off_axis, 1e-3) + _COEFFICIENT[-1] - 9 / 16 / (1 - _OFF_AXIS[-1])
    coefficient = float(np.interp(off_axis, _OFF_AXIS, _COEFFICIENT)) if off_axis <= _OFF_AXIS[-1] else plane
    return coefficient / _COEFFICIENT[0] - 1


def _recording_effects(velocity: Velocity, grain: Grain, setup: Setup) -> tuple[Effect, ...]:
    """Effects of the fit, the scale and the clock; a size taken from the silhouette follows the scale."""
    scale = {"velocity": velocity.value * setup.scale_u}
    if grain.silhouette:
        scale["diameter"] = grain.diameter * setup.scale_u
    return (
        Effect("track", {"velocity": velocity.u}),
        Effect("scale", scale),
        Effect("clock", {"velocity": velocity.value * setup.clock_u}),
    )


def _walls(inputs: Mapping[str, FloatArray]) -> WallFactor:
    """Wall factor of falls in the column."""
    _, wall = unbounded_velocity(
        inputs["velocity"],
        diameter=inputs["diameter"],
        bore=inputs["bore"],
        fluid_density=inputs["fluid_density"],
        rheology=flow_curve(inputs),
    )
    return wall


def outputs(inputs: Mapping[str, FloatArray]) -> dict[str, FloatArray]:
    """The chain itself on (M,) arrays of its inputs; `wall_doubt` is added to the wall factor."""
    rheology = flow_curve(inputs)
    factor = _walls(inputs).factor + inputs["wall_doubt"]
    unbounded = inputs["velocity"] / factor
    diameter, fluid_density = inputs["diameter"], inputs["fluid_density"]
    reynolds = generalised_reynolds(unbounded, diameter=diameter, fluid_density=fluid_density, rheology=rheology)
    return {
        "velocity": inputs["velocity"],
        "wall_factor": factor,
        "unbounded_velocity": unbounded,
        "reynolds": reynolds,
        "drag_coefficient": drag_coefficient_from_velocity(
            unbounded, diameter=diameter, particle_density=inputs["particle_density"], fluid_density=fluid_density
        ),
        "viscosity": rheology.viscosity(np.abs(unbounded) / diameter),
        "diameter": diameter,
        "particle_density": inputs["particle_density"],
        "fluid_density": fluid_density,
    }
