"""Control spheres that fail: which single cause would explain all of them."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np

from settlelab.measure.controls import COVERAGE, ControlDrop, inputs_of, sphere_law, velocity_in_column
from settlelab.physics.constants import FloatArray

__all__ = ["Cause", "causes", "likely_causes"]

SEEN_U = 0.02  # relative standard uncertainty of a seen diameter beyond the scale: the edge of a silhouette
FARTHEST = math.log(2)  # a quantity may be wrong by up to a factor of two
STEPS = 281
SHOWN = 3  # causes told
Change = Callable[[ControlDrop, FloatArray], FloatArray]


@dataclass(frozen=True, slots=True)
class Cause:
    """A quantity that was stated wrongly, as the one cause of all deviations."""

    quantity: str
    change: float  # true over stated value, less 1
    largest_en: float  # |E_n| that is left if it is so
    misfit: float  # root mean square deviation that is left over its standard uncertainty, seen sizes included

    @property
    def explains(self) -> bool:
        """Whether all control drops would agree."""
        return self.largest_en <= 1.0


def causes(controls: Sequence[ControlDrop]) -> tuple[Cause, ...]:
    """Scale, frame rate, and viscosity and density of each fluid, each as the only cause; the likeliest first.

    Each is fitted to the deviations of all control drops, and to the size in which the spheres are seen: that tells
    the scale from the frame rate, which act alike on velocities. Spheres of different Reynolds number tell viscosity
    from scale, spheres of different density the density of the fluid from its viscosity.

    Parameters
    ----------
    controls : sequence of ControlDrop
        Accepted drops, those that agree too: they limit what a cause may be.
    """
    grid = np.linspace(-FARTHEST, FARTHEST, STEPS)
    candidates: dict[str, tuple[Change, bool]] = {
        "scale (mm per px)": (lambda _, change: change, True),
        "frame rate": (lambda _, change: change, False),
    }
    for fluid in dict.fromkeys(control.setup.fluid.name for control in controls):
        candidates[f"viscosity of {fluid}"] = (_by_fluid(fluid, _thicker), False)
        candidates[f"density of {fluid}"] = (_by_fluid(fluid, _denser), False)
    found = [_fitted(name, controls, grid, *candidate) for name, candidate in candidates.items()]
    return tuple(sorted(found, key=lambda cause: cause.misfit))


def likely_causes(controls: Sequence[ControlDrop]) -> str:
    """What a failure of control drops points to, in a sentence."""
    explaining = [cause for cause in causes(controls) if cause.explains]
    if not explaining:
        return (
            "none of scale, frame rate, viscosity and fluid density alone explains all control drops: suspect the "
            "spheres, their order of release, or several causes at once"
        )
    told = "; or ".join(_told(cause) for cause in explaining[:SHOWN])
    only = "the one cause" if len(explaining) == 1 else "a single cause"
    alike = "" if len({control.particle for control in controls}) > 1 else "; two different spheres would tell more"
    return f"{only} that would bring all control drops into agreement, the likeliest first: {told}{alike}"


def _told(cause: Cause) -> str:
    way = "above" if cause.change > 0 else "below"
    return (
        f"{cause.quantity} {100 * abs(cause.change):.2g} % {way} what was stated (largest |E_n| then "
        f"{cause.largest_en:.2f})"
    )


def _fitted(name: str, controls: Sequence[ControlDrop], grid: FloatArray, change: Change, resizes: bool) -> Cause:
    """The change that leaves least, by least squares on a grid refined once."""
    deviation = np.array(
        [math.log(each.comparison.measured.value / each.comparison.expected.value) for each in controls]
    )
    u = np.array([_relative_u(control) for control in controls])
    seen = np.array([math.log(control.seen_diameter / control.sphere.diameter) for control in controls])
    size = float(np.nanmean(seen)) if np.any(np.isfinite(seen)) else 0.0
    responses = np.array([change(control, grid) for control in controls])  # added to the deviations
    fine = np.linspace(grid[0], grid[-1], 40 * STEPS)
    left = deviation[:, None] + np.array([np.interp(fine, grid, response) for response in responses])
    left_of_size = (size + (fine if resizes else 0.0)) / SEEN_U
    square = np.sum((left / u[:, None]) ** 2, axis=0) + left_of_size**2
    best = int(np.nanargmin(square))
    return Cause(
        quantity=name,
        change=math.expm1(float(fine[best])),
        largest_en=float(np.max(np.abs(left[:, best]) / (COVERAGE * u))),
        misfit=math.sqrt(float(square[best]) / (len(controls) + 1)),
    )


def _relative_u(control: ControlDrop) -> float:
    measured, expected = control.comparison.measured, control.comparison.expected
    return math.hypot(measured.u / measured.value, expected.u / expected.value)


def _by_fluid(fluid: str, change: Change) -> Change:
    """A change of one fluid: drops in others stay as they are."""
    return lambda control, log: change(control, log) if control.setup.fluid.name == fluid else np.zeros_like(log)


def _thicker(control: ControlDrop, log: FloatArray) -> FloatArray:
    """What a viscosity multiplied by exp(log) adds to the logarithm of measured over expected velocity."""
    stated = inputs_of(control.sphere, control.setup)
    return _slower(
        control,
        {
            "log_consistency": stated["log_consistency"] + log,
            "yield_stress": stated["yield_stress"] * np.exp(log),
        },
    )


def _denser(control: ControlDrop, log: FloatArray) -> FloatArray:
    """The same for the density of the fluid; a fluid as dense as the sphere is none that it falls in."""
    stated = inputs_of(control.sphere, control.setup)
    density = np.minimum(stated["fluid_density"] * np.exp(log), 0.999 * stated["particle_density"])
    return _slower(control, {"fluid_density": density})


def _slower(control: ControlDrop, changed: dict[str, FloatArray]) -> FloatArray:
    count = len(next(iter(changed.values())))
    inputs = {name: np.full(count, value) for name, value in inputs_of(control.sphere, control.setup).items()}
    velocity, _ = velocity_in_column(sphere_law(control.setup.fluid).drag, inputs | changed)
    return np.log(control.comparison.expected.value / velocity)
