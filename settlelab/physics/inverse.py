"""From a measured velocity back to what a law leaves unknown: diameter, sphericity or viscosity.

Velocities are terminal ones; only for the viscosity is a column's wall allowed for here. nan wherever no value gives
the velocity.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping

import numpy as np
from numpy.typing import ArrayLike

from settlelab.physics.constants import STANDARD_GRAVITY, FloatArray
from settlelab.physics.drag.nonnewtonian import creeping_correction, generalised_reynolds
from settlelab.physics.drag.registry import Method
from settlelab.physics.drag.solver import DragLaw, drag_coefficient_from_velocity, drag_in_fluid
from settlelab.physics.rheology import Rheology
from settlelab.physics.roots import bracketed_root
from settlelab.physics.walls import wall_factor

_SMALLEST, _LARGEST = 1e-8, 10.0  # m
_SLOWEST, _FASTEST = 1e-9, 2000.0  # Reynolds numbers between which velocity tells viscosity


def effective_diameter(
    velocity: ArrayLike,
    drag: DragLaw,
    *,
    densities: tuple[ArrayLike, ArrayLike],
    rheology: Rheology,
    gravity: float = STANDARD_GRAVITY,
) -> FloatArray:
    """Diameter of the particle that falls with this velocity in unbounded fluid under a drag law.

    Parameters
    ----------
    velocity : (N,) array
        Terminal velocity [m/s], of either sign.
    drag : callable
        Reynolds number to drag coefficient, descriptors bound; that of a sphere gives the hydraulic diameter.
    densities : pair of (N,) array
        Of particle and fluid [kg/m3].
    rheology : Rheology
        Flow curve of the fluid.
    gravity : float
        [m/s2].

    Returns
    -------
    (N,) array
        [m], the least one that balances between 1e-8 and 10 m; nan at rest and where none does.
    """
    inputs = (velocity, *densities, *rheology.arrays())
    v, rho_s, rho, consistency, n, tau0 = np.broadcast_arrays(*(np.asarray(item, dtype=np.float64) for item in inputs))
    fluid = Rheology(consistency=consistency, flow_index=n, yield_stress=tau0)
    speed = np.where(v != 0, np.abs(v), np.nan)
    per_diameter = 4 / 3 * gravity * np.abs(rho_s - rho) / rho

    def excess(log_diameter: FloatArray) -> FloatArray:
        d = np.exp(log_diameter)
        cd = drag_in_fluid(drag, speed, diameter=d, fluid_density=rho, rheology=fluid)
        return np.asarray(np.log(per_diameter * d) - np.log(cd) - 2 * np.log(speed))

    return np.exp(_root_or_nan(excess, np.full(v.shape, np.log(_SMALLEST)), np.full(v.shape, np.log(_LARGEST))))


def effective_sphericity(
    velocity: ArrayLike,
    method: Method,
    *,
    diameter: ArrayLike,
    densities: tuple[ArrayLike, ArrayLike],
    rheology: Rheology,
    descriptors: Mapping[str, ArrayLike] | None = None,
) -> FloatArray:
    """Sphericity with which a drag law gives this velocity in unbounded fluid, at standard gravity.

    Parameters
    ----------
    velocity : (N,) array
        Terminal velocity [m/s], of either sign.
    method : Method
        A law that needs the sphericity.
    diameter : (N,) array
        Volume-equivalent diameter [m].
    densities : pair of (N,) array
        Of particle and fluid [kg/m3].
    rheology : Rheology
        Flow curve of the fluid.
    descriptors : mapping of (N,) array, optional
        What else the law needs.

    Returns
    -------
    (N,) array
        [-], within the law's range of sphericity; nan where no sphericity in it gives the velocity: a particle that
        falls faster than the law's roundest one, or a law in which shape does not act at this Reynolds number.

    Raises
    ------
    ValueError
        A law that does not take the sphericity.
    """
    if "sphericity" not in method.needs:
        raise ValueError(f"{method.name} does not take the sphericity")
    rest = {name: np.asarray(value, dtype=np.float64) for name, value in (descriptors or {}).items()}
    d, v, rho = (np.asarray(item, dtype=np.float64) for item in (diameter, velocity, densities[1]))
    measured = drag_coefficient_from_velocity(v, diameter=d, particle_density=densities[0], fluid_density=rho)
    moving = np.where(v != 0, np.abs(v), np.nan)
    reynolds = generalised_reynolds(moving, diameter=d, fluid_density=rho, rheology=rheology)
    reynolds = reynolds / creeping_correction(moving, diameter=d, rheology=rheology)

    def excess(sphericity: FloatArray) -> FloatArray:
        cd = method.drag_coefficient(reynolds, sphericity=sphericity, **rest)
        return np.log(measured) - np.log(cd)

    low, high = method.valid.get("sphericity", (0.1, 1.0))
    shape = np.broadcast_shapes(measured.shape, reynolds.shape, *(value.shape for value in rest.values()))
    return _root_or_nan(excess, np.full(shape, max(low, 0.02)), np.full(shape, high))


def effective_viscosity(
    velocity: ArrayLike,
    drag: DragLaw,
    *,
    diameter: ArrayLike,
    densities: tuple[ArrayLike, ArrayLike],
    bore: ArrayLike = np.inf,
    gravity: float = STANDARD_GRAVITY,
) -> FloatArray:
    """Viscosity of a Newtonian liquid from the velocity of a falling ball.

    Parameters
    ----------
    velocity : (N,) array
        Terminal velocity in the column [m/s], of either sign.
    drag : callable
        Sphere law, Reynolds number to drag coefficient.
    diameter : (N,) array
        Diameter of the ball [m].
    densities : pair of (N,) array
        Of ball and liquid [kg/m3].
    bore : (N,) array
        Inner diameter of the column [m]; infinite for no wall. The wall factor is that of `wall_factor`.
    gravity : float
        [m/s2].

    Returns
    -------
    (N,) array
        [Pa s]; nan where the fall would be above Re 2000: there the velocity hardly depends on the viscosity.

    Raises
    ------
    ValueError
        A ball not smaller than the column.
    """
    inputs = (velocity, diameter, *densities, bore)
    v, d, rho_s, rho, width = np.broadcast_arrays(*(np.asarray(item, dtype=np.float64) for item in inputs))
    speed = np.where(v != 0, np.abs(v), np.nan)
    ratio = d / width
    weight = 4 / 3 * gravity * d * np.abs(rho_s - rho) / rho

    def unbounded(log_reynolds: FloatArray) -> FloatArray:
        return np.asarray(speed / wall_factor(ratio, np.exp(log_reynolds)).factor)

    def excess(log_reynolds: FloatArray) -> FloatArray:
        cd = drag(np.exp(log_reynolds))
        return np.asarray(np.log(weight / cd) - 2 * np.log(unbounded(log_reynolds)))

    log_reynolds = _root_or_nan(excess, np.full(v.shape, np.log(_SLOWEST)), np.full(v.shape, np.log(_FASTEST)))
    return np.asarray(rho * unbounded(log_reynolds) * d / np.exp(log_reynolds))


def _root_or_nan(function: Callable[[FloatArray], FloatArray], low: FloatArray, high: FloatArray) -> FloatArray:
    bracketed = np.sign(function(low)) * np.sign(function(high)) <= 0
    return np.where(bracketed, bracketed_root(function, low, high), np.nan)
