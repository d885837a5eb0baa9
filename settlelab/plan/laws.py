"""Which published drag laws a particle is expected to follow, and how far they differ."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from settlelab.measure.controls import LAW, Law, sphere_law
from settlelab.measure.fluids import FluidState
from settlelab.measure.particle import Grain
from settlelab.physics.constants import FloatArray
from settlelab.physics.drag import DRAG, DragLaw, Method, Settling, terminal_velocity, usable_methods

__all__ = ["GRAIN_SCATTER", "ExpectedLaw", "expected_law", "settle", "tabulated"]

# Drag coefficients of single angular grains about the better laws for their shape, relative and k = 1: such is the
# scatter in the comparisons that came with these laws (from memory; 10 to 25 %). Beyond what the laws differ among
# themselves, and told as assumed.
GRAIN_SCATTER = 0.2
SHAPES = ("sphericity", "corey_shape_factor", "flatness", "elongation", "circularity")


@dataclass(frozen=True, slots=True, kw_only=True)
class ExpectedLaw:
    """The geometric mean of drag laws as one, with its uncertainty for a single particle."""

    law: Law
    names: tuple[str, ...]
    in_range: bool


def expected_law(grain: Grain, fluid: FluidState) -> ExpectedLaw:
    """The mean of the published laws that a particle's shape allows; a sphere has the standard drag curve.

    Laws outside their range at the expected Reynolds number are left out, unless all are. Without a shape descriptor
    the grain is taken as a sphere and its uncertainty doubled: angular grains have up to twice the drag of one.

    Parameters
    ----------
    grain : Grain
        Size and density known.
    fluid : FluidState
        The fluid that it falls in.
    """
    known = _descriptors(grain, fluid)
    if grain.diameter_from == "typed":
        law = sphere_law(fluid)
        return ExpectedLaw(law=law, names=(LAW,), in_range=_all_within((DRAG[LAW],), law, grain, fluid))
    usable = tuple(method for method in usable_methods(known)[0] if set(method.needs) & set(SHAPES))
    if not usable:
        law = Law(DRAG[LAW].drag_coefficient, 2 * GRAIN_SCATTER)
        return ExpectedLaw(law=law, names=(LAW,), in_range=False)
    reynolds = float(settle(_mean(usable, known, 0.0), grain, fluid).reynolds)
    inside = tuple(method for method in usable if bool(method.within(reynolds=reynolds, **known)))
    used = inside or usable
    spread = _spread(used, known, reynolds)
    own = sphere_law(fluid).u  # how sure a law is in a fluid of this kind
    law = _mean(used, known, math.sqrt(spread**2 + GRAIN_SCATTER**2 + own**2))
    return ExpectedLaw(law=law, names=tuple(method.name for method in used), in_range=bool(inside))


def settle(law: Law, grain: Grain, fluid: FluidState) -> Settling:
    """Terminal velocity in unbounded fluid under a law."""
    return terminal_velocity(
        law.drag,
        diameter=grain.diameter,
        particle_density=grain.density,
        fluid_density=fluid.density,
        rheology=fluid.rheology,
    )


def tabulated(drag: DragLaw, reynolds: float) -> DragLaw:
    """A drag law as a table up to twice a Reynolds number: to 1e-3, and quick where it is asked one value at a time."""
    grid = np.linspace(math.log(reynolds) - 35, math.log(2 * reynolds), 1000)
    logs = np.log(drag(np.exp(grid)))
    return lambda asked: np.exp(np.interp(np.log(asked), grid, logs))


def _descriptors(grain: Grain, fluid: FluidState) -> dict[str, float]:
    known = {name: getattr(grain, name) for name in SHAPES} | {"density_ratio": grain.density / fluid.density}
    return {name: value for name, value in known.items() if math.isfinite(value)}


def _mean(methods: tuple[Method, ...], known: Mapping[str, float], u: float) -> Law:
    def drag(reynolds: FloatArray) -> FloatArray:
        logs = [np.log(method.drag_coefficient(reynolds, **known)) for method in methods]
        return np.asarray(np.exp(np.mean(logs, axis=0)))

    return Law(drag, u)


def _spread(methods: tuple[Method, ...], known: Mapping[str, float], reynolds: float) -> float:
    """Standard deviation of the logarithm of the drag coefficients; 0 of a single law."""
    logs = [float(np.log(method.drag_coefficient(reynolds, **known))) for method in methods]
    return float(np.std(logs, ddof=1)) if len(logs) > 1 else 0.0


def _all_within(methods: tuple[Method, ...], law: Law, grain: Grain, fluid: FluidState) -> bool:
    reynolds = float(settle(law, grain, fluid).reynolds)
    return all(bool(method.within(reynolds=reynolds)) for method in methods)
