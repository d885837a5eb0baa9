"""Control spheres: does the whole chain give the velocity that a known sphere must have?"""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
import pandas as pd

from settlelab.measure.chain import Fallen, Setup
from settlelab.measure.fluids import FluidState, flow_curve
from settlelab.measure.particle import Grain
from settlelab.measure.propagation import Effect, Estimate, propagate
from settlelab.physics.constants import FloatArray
from settlelab.physics.drag import DRAG, SPHERE_LAW_U, DragLaw, terminal_velocity
from settlelab.physics.walls import wall_factor

__all__ = [
    "CONTROL_COLUMNS",
    "Comparison",
    "ControlDrop",
    "Law",
    "chain_verdict",
    "compare_control",
    "e_n",
    "expected_velocity",
    "inputs_of",
    "sphere_law",
    "velocity_in_column",
]

LAW = "cheng-2009"
# The creeping drag of a sphere in power-law fluid is computed up to 4 % apart (rectangular over that range).
LAW_U_NON_NEWTONIAN = math.hypot(SPHERE_LAW_U, 0.04 / math.sqrt(3))
COVERAGE = 2.0

CONTROL_COLUMNS = (
    "drop",
    "recording",
    "particle",
    "expected_velocity",
    "expected_velocity_u",
    "velocity",
    "velocity_u",
    "en",
    "passed",
)


@dataclass(frozen=True, slots=True, kw_only=True)
class Comparison:
    """A control sphere's velocity in the column [m/s] against the expected one; uncertainties are standard ones."""

    expected: Estimate
    measured: Estimate

    @property
    def en(self) -> float:
        """E_n number."""
        return e_n(self.measured.value, self.expected.value, COVERAGE * self.measured.u, COVERAGE * self.expected.u)

    @property
    def passed(self) -> bool:
        """Whether the two agree within their expanded uncertainties."""
        return abs(self.en) <= 1.0


def e_n(value: float, reference: float, expanded_u: float, expanded_u_reference: float) -> float:
    """Deviation over the expanded uncertainty of the deviation; satisfactory from -1 to 1.

    References
    ----------
    ISO 13528:2022, 9.7; ISO/IEC 17043:2023, annex B.
    """
    return (value - reference) / math.hypot(expanded_u, expanded_u_reference)


@dataclass(frozen=True, slots=True)
class Law:
    """Reynolds number to drag coefficient, and the relative standard uncertainty of that."""

    drag: DragLaw
    u: float


def sphere_law(fluid: FluidState) -> Law:
    """The standard drag curve of spheres, as sure as it is in this fluid."""
    _, flow_index, yield_stress = fluid.rheology.arrays()
    newtonian = flow_index == 1.0 and yield_stress == 0.0
    return Law(DRAG[LAW].drag_coefficient, SPHERE_LAW_U if newtonian else LAW_U_NON_NEWTONIAN)


def expected_velocity(particle: Grain, setup: Setup, law: Law | None = None) -> Estimate:
    """Velocity [m/s] in the column of a particle of known size and density, by a drag law and the wall factor.

    The budget adds the source "drag law" to those of particle, fluid and column.

    Parameters
    ----------
    particle : Grain
        Diameter and density known otherwise than from the recording.
    setup : Setup
        Column and fluid; scale and clock have no part in what is expected.
    law : Law, optional
        That of a sphere where left out.
    """
    law = law or sphere_law(setup.fluid)
    inputs = inputs_of(particle, setup)
    _, wall_u = velocity_in_column(law.drag, {name: np.asarray([value]) for name, value in inputs.items()})
    effects = (
        *particle.effects,
        *setup.fluid.effects,
        *setup.bore.effects,
        Effect("walls", {"wall_doubt": float(wall_u[0])}),
        Effect("drag law", {"law": law.u}),
    )
    return propagate(lambda moved: {"velocity": velocity_in_column(law.drag, moved)[0]}, inputs, effects)["velocity"]


def inputs_of(particle: Grain, setup: Setup) -> dict[str, float]:
    """Best values of all that an expected velocity depends on; `law` multiplies the drag coefficient."""
    return {
        "diameter": particle.diameter,
        "particle_density": particle.density,
        "bore": setup.bore.diameter,
        **setup.fluid.properties,
        "wall_doubt": 0.0,
        "law": 1.0,
    }


def velocity_in_column(drag: DragLaw, inputs: Mapping[str, FloatArray]) -> tuple[FloatArray, FloatArray]:
    """Velocity in the column, and the standard uncertainty of the wall factor in it; (M,) arrays of `inputs_of`."""
    rheology = flow_curve(inputs)
    unbounded = terminal_velocity(
        lambda reynolds: drag(reynolds) * inputs["law"],
        diameter=inputs["diameter"],
        particle_density=inputs["particle_density"],
        fluid_density=inputs["fluid_density"],
        rheology=rheology,
    )
    wall = wall_factor(inputs["diameter"] / inputs["bore"], unbounded.reynolds, flow_index=rheology.flow_index)
    return unbounded.velocity * (wall.factor + inputs["wall_doubt"]), wall.u


@dataclass(frozen=True, slots=True, kw_only=True)
class ControlDrop:
    """An accepted drop of a control sphere."""

    recording: str
    particle: str
    sphere: Grain
    setup: Setup
    track_u: float  # m/s, uncertainty of the fit alone
    seen_diameter: float  # m, of its silhouette
    comparison: Comparison


def compare_control(sphere: Grain, setup: Setup, result: Fallen) -> Comparison:
    """A control drop against what is expected of it."""
    return Comparison(expected=expected_velocity(sphere, setup), measured=result.velocity)


def chain_verdict(controls: pd.DataFrame) -> str:
    """What the control drops say about the chain, in a sentence.

    Parameters
    ----------
    controls : DataFrame
        Columns of `CONTROL_COLUMNS`, accepted drops only.
    """
    if controls.empty:
        return "no control sphere was measured: scale, clock, fluid and wall correction are not checked together"
    count, failed = len(controls), int((~controls["passed"]).sum())
    worst = f"|E_n| {controls['en'].abs().max():.2f}"
    if failed == 0 and count == 1:
        return f"the one control drop agrees with the expected velocity ({worst})"
    if failed == 0:
        return f"all {count} control drops agree with the expected velocities (largest {worst})"
    verb = "does" if failed == 1 else "do"
    told = f"{failed} of {count} control drops {verb} not agree with the expected velocity (largest {worst})"
    deviation = (controls["velocity"] / controls["expected_velocity"] - 1).to_numpy(dtype=np.float64)
    if np.all(deviation > 0) or np.all(deviation < 0):
        subject = f"it is too {_way(deviation)}" if count == 1 else f"all are too {_way(deviation)}"
        mean = f"by {100 * abs(deviation).mean():.1f} %" + (" on average" if count > 1 else "")
        return f"{told}; {subject}, {mean}: check scale, clock and viscosity" + (
            ", which they share" if count > 1 else ""
        )
    return f"{told}, some too fast and some too slow: check the spheres themselves and their order of release"


def _way(deviation: FloatArray) -> str:
    return "fast" if deviation[0] > 0 else "slow"
