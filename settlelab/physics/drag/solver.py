"""Terminal velocity from a drag law, and the drag coefficient from a measured velocity."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import partial
from typing import Protocol

import numpy as np
from numpy.typing import ArrayLike

from settlelab.physics.constants import STANDARD_GRAVITY, BoolArray, FloatArray
from settlelab.physics.drag.nonnewtonian import creeping_correction, generalised_reynolds, held
from settlelab.physics.rheology import Rheology
from settlelab.physics.roots import bracketed_root

DragLaw = Callable[[FloatArray], FloatArray]

_LOWEST, _HIGHEST = 1e-100, 1e8  # Reynolds numbers between which the answer is looked for
# Where drag may fall as velocity rises: looked through in steps of 2 %, and at the onset in the standard curve.
_CRISIS = tuple(np.sort([*np.geomspace(5e4, 1e6, 151), 3.37e5]))


@dataclass(frozen=True, slots=True, kw_only=True)
class Settling:
    """Steady fall in unbounded fluid."""

    velocity: FloatArray  # m/s, positive downward
    reynolds: FloatArray  # generalised, rho V d / mu(V/d)
    drag_coefficient: FloatArray  # on the cross-section of the equivalent sphere; nan where nothing moves
    held: BoolArray  # the yield stress holds the particle still
    several: BoolArray  # the law has a drag crisis here, and faster balances than the one given


def drag_in_fluid(
    drag: DragLaw, velocity: FloatArray, *, diameter: FloatArray, fluid_density: FloatArray, rheology: Rheology
) -> FloatArray:
    """Drag coefficient [-] at a velocity [m/s] above 0: the law at the generalised Reynolds number over X."""
    reynolds = generalised_reynolds(velocity, diameter=diameter, fluid_density=fluid_density, rheology=rheology)
    return drag(reynolds / creeping_correction(velocity, diameter=diameter, rheology=rheology))


def terminal_velocity(
    drag: DragLaw,
    *,
    diameter: ArrayLike,
    particle_density: ArrayLike,
    fluid_density: ArrayLike,
    rheology: Rheology,
    gravity: float = STANDARD_GRAVITY,
) -> Settling:
    """Terminal velocity at which drag balances the weight in the fluid.

    Everything broadcasts, so that particles, lots of Monte Carlo draws and descriptors bound into `drag` may be arrays.
    The balance is solved to 1e-11 in ln V. Where a law with a drag crisis has several solutions between Re 5e4 and 1e6,
    the slowest is taken and `several` tells it: a smooth sphere in still liquid stays on that branch as it speeds up.

    Parameters
    ----------
    drag : callable
        Reynolds number to drag coefficient, as made for Newtonian fluids; bind descriptors with `functools.partial`.
        In other fluids it is evaluated at the generalised Reynolds number over X (see `creeping_correction`).
    diameter : (N,) array
        Diameter that the law is built on [m], above 0.
    particle_density, fluid_density : (N,) array
        Densities [kg/m3]. A particle lighter than the fluid rises: its velocity is negative.
    rheology : Rheology
        Flow curve of the fluid.
    gravity : float
        [m/s2].

    Returns
    -------
    Settling
        (N,) arrays. Where the yield stress holds the particle, and for equal densities, the velocity is 0.
        Solutions are sought at Reynolds numbers from 1e-100 to 1e8; nan in gives nan out.

    Raises
    ------
    ValueError
        A diameter or a density of 0 and less, a flow index of 2 and more.
    """
    return balance(
        partial(drag_in_fluid, drag),
        diameter=diameter,
        densities=(particle_density, fluid_density),
        rheology=rheology,
        gravity=gravity,
    )


class DragAt(Protocol):
    """Drag coefficient at a velocity in a fluid."""

    def __call__(
        self, velocity: FloatArray, *, diameter: FloatArray, fluid_density: FloatArray, rheology: Rheology
    ) -> FloatArray: ...


def balance(
    drag_at: DragAt,
    *,
    diameter: ArrayLike,
    densities: tuple[ArrayLike, ArrayLike],
    rheology: Rheology,
    gravity: float,
) -> Settling:
    """The steady fall at which drag balances weight, for any law of drag by velocity; see `terminal_velocity`."""
    inputs = (diameter, *densities, *rheology.arrays())
    d, rho_s, rho, consistency, n, tau0 = np.broadcast_arrays(*(np.asarray(item, dtype=np.float64) for item in inputs))
    if np.any(d <= 0) or np.any(rho <= 0) or np.any(rho_s <= 0):
        raise ValueError("diameters and densities must be above 0")
    if np.any(n >= 2):
        raise ValueError("a flow index must be below 2: drag would no longer grow with velocity")
    fluid = Rheology(consistency=consistency, flow_index=n, yield_stress=tau0)
    stopped = held(diameter=d, density_difference=rho_s - rho, yield_stress=tau0, gravity=gravity)
    weight = np.where(stopped | (rho_s == rho), np.nan, 4 / 3 * gravity * d * np.abs(rho_s - rho) / rho)

    def excess(log_velocity: FloatArray) -> FloatArray:
        velocity = np.exp(log_velocity)
        cd = drag_at(velocity, diameter=d, fluid_density=rho, rheology=fluid)
        return np.log(cd) + 2 * log_velocity - np.log(weight)

    log_speed, several = _lowest_root(excess, d, rho, fluid)
    speed = np.where(stopped | (rho_s == rho), 0.0, np.exp(log_speed))
    return Settling(
        velocity=np.where(rho_s < rho, 0.0 - speed, speed),
        reynolds=generalised_reynolds(speed, diameter=d, fluid_density=rho, rheology=fluid),
        drag_coefficient=np.asarray(weight / np.where(speed > 0, speed, np.nan) ** 2),
        held=np.asarray(stopped),
        several=several,
    )


def _lowest_root(
    excess: Callable[[FloatArray], FloatArray], diameter: FloatArray, fluid_density: FloatArray, fluid: Rheology
) -> tuple[FloatArray, BoolArray]:
    """Log velocity of the slowest balance, and whether there are others."""
    consistency, n, _ = fluid.arrays()

    def log_velocity(reynolds: float) -> FloatArray:
        return np.asarray(np.log(reynolds * consistency / (fluid_density * diameter**n)) / (2 - n))

    low, high = log_velocity(_LOWEST), log_velocity(_CRISIS[0])
    found = ~(excess(high) < 0)  # unknown ones are not looked for any further
    several = np.zeros_like(found)
    if np.all(found):
        return bracketed_root(excess, low, high), several
    for reynolds in _CRISIS[1:]:
        here = log_velocity(reynolds)
        enough = ~(excess(here) < 0)
        several |= found & ~enough
        low, high = np.where(found, low, high), np.where(found, high, here)
        found = found | enough
    low, high = np.where(found, low, high), np.where(found, high, log_velocity(_HIGHEST))
    return bracketed_root(excess, low, high), several


def drag_coefficient_from_velocity(
    velocity: ArrayLike,
    *,
    diameter: ArrayLike,
    particle_density: ArrayLike,
    fluid_density: ArrayLike,
    gravity: float = STANDARD_GRAVITY,
) -> FloatArray:
    """Drag coefficient of a steady fall, from its velocity in unbounded fluid.

    Parameters
    ----------
    velocity : (N,) array
        Terminal velocity [m/s].
    diameter : (N,) array
        Equivalent diameter [m]; the coefficient is on the cross-section of that sphere.
    particle_density, fluid_density : (N,) array
        Densities [kg/m3].
    gravity : float
        [m/s2].

    Returns
    -------
    (N,) array
        Cd = 4 g d |rho_s - rho| / (3 rho V^2) [-]; nan at rest.
    """
    v, d, rho_s, rho = (
        np.asarray(item, dtype=np.float64) for item in (velocity, diameter, particle_density, fluid_density)
    )
    moving = np.where(v != 0, v, np.nan)
    return np.asarray(4 / 3 * gravity * d * np.abs(rho_s - rho) / (rho * moving**2))
