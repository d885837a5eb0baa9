"""From release to terminal velocity: the equation of motion of a particle falling from rest.

    (rho_p + Cm rho) v dV/dt = (rho_p - rho) g v - drag(V) - history

with v the volume, Cm the added-mass coefficient (1/2 for a sphere) and the drag of steady motion at the velocity V. The
history force, the after-effect of past acceleration in the fluid, is left out or taken by the kernel of Mei and Adrian.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike
from scipy.interpolate import PchipInterpolator

from settlelab.physics.constants import STANDARD_GRAVITY, FloatArray
from settlelab.physics.drag.solver import DragLaw, drag_in_fluid, terminal_velocity
from settlelab.physics.rheology import Rheology

_STEPS = 800


@dataclass(frozen=True, slots=True, kw_only=True)
class Body:
    """The falling particle: a sphere, or what a drag law on the volume-equivalent diameter makes of a grain."""

    diameter: float  # m, volume-equivalent
    density: float  # kg/m3
    added_mass: float = 0.5  # share of the displaced fluid's mass that is accelerated too


@dataclass(frozen=True, slots=True, kw_only=True)
class Medium:
    """The fluid that it falls through, at rest."""

    density: float  # kg/m3
    rheology: Rheology  # of scalar fields
    gravity: float = STANDARD_GRAVITY  # m/s2


@dataclass(frozen=True, slots=True, kw_only=True)
class Fall:
    """Motion along gravity from rest at time 0; positive downward, negative for a rising particle."""

    time: FloatArray  # s
    velocity: FloatArray  # m/s
    distance: FloatArray  # m


@dataclass(frozen=True, slots=True)
class _Balance:
    """The equation of motion per volume of the particle, for speeds along the way it moves."""

    drag: DragLaw
    body: Body
    medium: Medium
    wall_factor: float

    @property
    def inertia(self) -> float:
        """Mass that is accelerated, per volume [kg/m3]."""
        return self.body.density + self.body.added_mass * self.medium.density

    @property
    def weight(self) -> float:
        """Weight in the fluid, per volume [N/m3], without its sign."""
        return self.medium.gravity * abs(self.body.density - self.medium.density)

    def resistance(self, speed: float) -> float:
        """Drag per volume [N/m3]; in a column that of unbounded fluid at the speed over the wall factor."""
        free = np.asarray(max(speed, 1e-12) / self.wall_factor)
        d, rho = np.asarray(self.body.diameter), np.asarray(self.medium.density)
        cd = drag_in_fluid(self.drag, free, diameter=d, fluid_density=rho, rheology=self.medium.rheology)
        return float(0.75 * cd * rho * free**2 / d)


def fall_from_release(
    drag: DragLaw,
    body: Body,
    medium: Medium,
    time: ArrayLike,
    *,
    wall_factor: float = 1.0,
    history: bool = False,
) -> Fall:
    """Velocity and distance of a particle released from rest.

    Integrated by the implicit trapezoidal rule on 800 steps that grow with the cube of time, then interpolated. Without
    history the velocity is within 1e-5 of the terminal one of the exact solutions for Stokes' law and for constant Cd.
    The history integral is a sum over these steps with the acceleration constant in each, the singular factor
    (t - q)^(-1/2) integrated exactly and the rest of the kernel taken at mid step; within 5e-4 of the exact solution of
    Basset's equation.

    Parameters
    ----------
    drag : callable
        Reynolds number to drag coefficient, descriptors bound; used as in `terminal_velocity`.
    body : Body
        The particle.
    medium : Medium
        The fluid.
    time : (N,) array
        Times after release [s], not negative, in any order.
    wall_factor : float
        Velocity in the column over velocity in unbounded fluid [-], above 0 to 1, taken as constant: the drag is that
        of unbounded fluid at V over it, so that the terminal velocity is reduced by just this factor.
    history : bool
        Whether to add the history force of Mei & Adrian. Made for Newtonian fluids; in others the viscosity in it is
        the apparent one at terminal velocity.

    Returns
    -------
    Fall
        (N,) arrays at the times asked for.

    Raises
    ------
    ValueError
        A negative time, or a wall factor outside its range.

    References
    ----------
    Mei & Adrian (1992), J. Fluid Mech. 237, 323-341.
    """
    times = np.asarray(time, dtype=np.float64)
    if np.any(times < 0) or not 0 < wall_factor <= 1:
        raise ValueError("times must not be negative, and a wall factor lies between 0 and 1")
    balance = _Balance(drag, body, medium, wall_factor)
    end = float(np.max(times, initial=0.0))
    if end == 0 or _terminal(balance) == 0:
        return Fall(time=times, velocity=np.zeros_like(times), distance=np.zeros_like(times))
    steps = end * np.linspace(0, 1, _STEPS + 1) ** 3
    velocity = _integrate(balance, steps, _history_kernel(balance) if history else None)
    distance = np.concatenate([[0.0], np.cumsum(np.diff(steps) * (velocity[1:] + velocity[:-1]) / 2)])
    sign = np.sign(body.density - medium.density)
    return Fall(
        time=times,
        velocity=sign * PchipInterpolator(steps, velocity)(times),
        distance=sign * PchipInterpolator(steps, distance)(times),
    )


def _terminal(balance: _Balance) -> float:
    """Terminal speed in the column [m/s]."""
    settling = terminal_velocity(
        balance.drag,
        diameter=balance.body.diameter,
        particle_density=balance.body.density,
        fluid_density=balance.medium.density,
        rheology=balance.medium.rheology,
        gravity=balance.medium.gravity,
    )
    return float(abs(settling.velocity)) * balance.wall_factor


# Maps (ages of the ends of the past steps, present speed) to the integral of the kernel over each step, per volume.
Kernel = Callable[[FloatArray, float], FloatArray]


def _history_kernel(balance: _Balance) -> Kernel:
    """Integrals of the history kernel over steps of constant acceleration, per volume of the particle."""
    d, rho = balance.body.diameter, balance.medium.density
    viscosity = float(balance.medium.rheology.viscosity(_terminal(balance) / d))
    nu, radius = viscosity / rho, d / 2
    scale = 6 * np.pi * viscosity * radius / (np.pi * d**3 / 6)

    def integrals(age: FloatArray, speed: float) -> FloatArray:
        reynolds = speed * d / nu
        inertial = np.sqrt(np.pi / 2 * speed**3 / (radius * nu * (0.75 + 0.105 * reynolds) ** 3))
        middle = (age[1:] + age[:-1]) / 2
        smooth = ((np.pi * nu / radius**2) ** 0.25 + inertial * middle**0.75) ** -2
        return np.asarray(scale * smooth * 2 * (np.sqrt(age[:-1]) - np.sqrt(age[1:])))

    return integrals


def _integrate(balance: _Balance, steps: FloatArray, kernel: Kernel | None) -> FloatArray:
    """Speeds at the steps, from rest, by the trapezoidal rule; each step solved by Newton's method."""
    speed = np.zeros_like(steps)
    acceleration = np.zeros(steps.size - 1)
    before = balance.resistance(0.0)
    for i, step in enumerate(np.diff(steps)):
        past, own = 0.0, 0.0
        if kernel is not None:
            integrals = kernel(steps[i + 1] - steps[: i + 2], speed[i])
            past, own = float(integrals[:-1] @ acceleration[:i]), float(integrals[-1])
        inertia = (balance.inertia + own) / step
        known = inertia * speed[i] + balance.weight - past - before / 2
        speed[i + 1], before = _implicit_speed(balance, inertia, known, speed[i])
        acceleration[i] = (speed[i + 1] - speed[i]) / step
    return speed


def _implicit_speed(balance: _Balance, inertia: float, known: float, start: float) -> tuple[float, float]:
    """Solve inertia V + drag(V)/2 = known; gives V and drag(V). The left side grows with V: secants converge."""
    speed, resistance = start, balance.resistance(start)
    for _ in range(30):
        nudge = max(1e-6 * speed, 1e-10)
        slope = inertia + (balance.resistance(speed + nudge) - resistance) / nudge / 2
        change = (known - inertia * speed - resistance / 2) / slope
        speed = max(speed + change, 0.0)
        resistance = balance.resistance(speed)
        if abs(change) <= 1e-10 * max(speed, 1e-10):
            break
    return speed, resistance


def time_to_fraction(
    drag: DragLaw, body: Body, medium: Medium, fraction: float = 0.99, *, wall_factor: float = 1.0, history: bool = True
) -> tuple[float, float]:
    """Time and distance from release to a given share of terminal velocity.

    Parameters
    ----------
    drag : callable
        As in `fall_from_release`.
    body : Body
        The particle.
    medium : Medium
        The fluid.
    fraction : float
        Share of terminal velocity [-], above 0 and below 1.
    wall_factor : float
        As in `fall_from_release`.
    history : bool
        As in `fall_from_release`. Measured times are 9 to 13 % longer with it, 20 to 35 % without it (Mordant &
        Pinton 2000, Eur. Phys. J. B 18, 343): plan with a margin.

    Returns
    -------
    time : float
        [s]; 0 for a particle that does not move.
    distance : float
        [m], without sign.

    Raises
    ------
    ValueError
        A fraction outside its range.
    """
    if not 0 < fraction < 1:
        raise ValueError("the fraction of terminal velocity lies between 0 and 1")
    balance = _Balance(drag, body, medium, wall_factor)
    terminal = _terminal(balance)
    if terminal == 0:
        return 0.0, 0.0
    horizon = 10 * terminal * balance.inertia / balance.weight
    while True:
        fall = fall_from_release(
            drag, body, medium, np.linspace(0, horizon, 4001), wall_factor=wall_factor, history=history
        )
        speed = np.abs(fall.velocity)
        reached = np.flatnonzero(speed >= fraction * terminal)
        if reached.size:
            break
        horizon *= 4
    first = reached[0]
    share = (fraction * terminal - speed[first - 1]) / (speed[first] - speed[first - 1])
    time = fall.time[first - 1] + share * (fall.time[first] - fall.time[first - 1])
    return float(time), float(np.interp(time, fall.time, np.abs(fall.distance)))
