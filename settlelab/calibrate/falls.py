"""What a velocity depends on, as arrays, and how much it changes when one of these changes."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field, replace

import numpy as np
from numpy.typing import NDArray

from settlelab.physics.constants import STANDARD_GRAVITY, BoolArray, FloatArray
from settlelab.physics.drag import Method, Settling, drag_in_fluid, terminal_velocity
from settlelab.physics.rheology import Rheology

__all__ = ["INPUTS", "Falls", "Law", "drag_sensitivity", "published_law", "sensitivity", "settle"]

# Drag coefficient by Reynolds number (already over the creeping correction) and the descriptors of each particle.
Law = Callable[[FloatArray, Mapping[str, FloatArray]], FloatArray]

INPUTS = (
    "diameter",
    "particle_density",
    "fluid_density",
    "viscosity",
)  # whose relative uncertainty reaches the velocity
_STEP = 1e-4  # of central differences, in a logarithm: error 1e-8 of a smooth law


@dataclass(frozen=True, slots=True, kw_only=True)
class Falls:
    """Particles falling alone in unbounded fluid: (N,) arrays in SI.

    `descriptors` holds shape descriptors by name; those that a law does not need may be nan.
    """

    diameter: FloatArray  # m, of the sphere of equal volume
    particle_density: FloatArray  # kg/m3
    fluid_density: FloatArray  # kg/m3
    consistency: FloatArray  # Pa s^n
    flow_index: FloatArray
    yield_stress: FloatArray  # Pa
    descriptors: Mapping[str, FloatArray] = field(default_factory=dict)

    @property
    def rheology(self) -> Rheology:
        """Flow curve of each fall's fluid."""
        return Rheology(consistency=self.consistency, flow_index=self.flow_index, yield_stress=self.yield_stress)

    def take(self, chosen: BoolArray | NDArray[np.int64]) -> Falls:
        """The falls at an index or where a mask is true."""
        arrays = {name: getattr(self, name)[chosen] for name in self.__dataclass_fields__ if name != "descriptors"}
        return Falls(**arrays, descriptors={name: values[chosen] for name, values in self.descriptors.items()})

    def scaled(self, name: str, factor: float) -> Falls:
        """The same falls with one input multiplied: of `INPUTS`, or a descriptor."""
        if name == "viscosity":  # the whole flow curve: a viscometer reads all stresses too high or too low together
            return replace(self, consistency=self.consistency * factor, yield_stress=self.yield_stress * factor)
        if name in INPUTS:
            return replace(self, **{name: getattr(self, name) * factor})
        return replace(self, descriptors={**self.descriptors, name: self.descriptors[name] * factor})


def published_law(method: Method) -> Law:
    """A published method as a law of the Reynolds number and the descriptors."""
    return lambda reynolds, descriptors: method.drag_coefficient(reynolds, **descriptors)


def settle(law: Law, falls: Falls) -> Settling:
    """Terminal velocity of each fall under a law."""
    return terminal_velocity(
        lambda reynolds: law(reynolds, falls.descriptors),
        diameter=falls.diameter,
        particle_density=falls.particle_density,
        fluid_density=falls.fluid_density,
        rheology=falls.rheology,
    )


def sensitivity(law: Law, falls: Falls, velocity: FloatArray, name: str) -> FloatArray:
    """Relative change of the terminal velocity per relative change of an input.

    The balance ln Cd + 2 ln V - ln(4/3 g d drho/rho) = 0 is differentiated implicitly, so that nothing is solved anew.

    Parameters
    ----------
    law : callable
        Drag law.
    falls : Falls
        N falls.
    velocity : (N,) array
        Their terminal velocity under the law [m/s], above 0.
    name : str
        One of `INPUTS`, or a descriptor that the falls have.

    Returns
    -------
    (N,) array
        d ln V / d ln x [-], such as 2 for the diameter in creeping flow.
    """
    up, down = falls.scaled(name, np.exp(_STEP)), falls.scaled(name, np.exp(-_STEP))
    by_input = _imbalance(law, up, velocity) - _imbalance(law, down, velocity)
    return by_input / (2 * _STEP) * drag_sensitivity(law, falls, velocity)


def drag_sensitivity(law: Law, falls: Falls, velocity: FloatArray) -> FloatArray:
    """Relative change of the terminal velocity per relative change of the drag coefficient: (N,), -1 if creeping."""
    faster, slower = velocity * np.exp(_STEP), velocity * np.exp(-_STEP)
    return -2 * _STEP / (_imbalance(law, falls, faster) - _imbalance(law, falls, slower))


def _imbalance(law: Law, falls: Falls, velocity: FloatArray) -> FloatArray:
    """Logarithm of drag over weight, up to a constant."""
    cd = drag_in_fluid(
        lambda reynolds: law(reynolds, falls.descriptors),
        velocity,
        diameter=falls.diameter,
        fluid_density=falls.fluid_density,
        rheology=falls.rheology,
    )
    weight = STANDARD_GRAVITY * falls.diameter * (falls.particle_density - falls.fluid_density) / falls.fluid_density
    return np.asarray(np.log(cd) + 2 * np.log(velocity) - np.log(weight))
