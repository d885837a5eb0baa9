"""Terminal velocities of very many particles of one shape, as Monte Carlo draws need them: by a table, in chunks.

In a Newtonian liquid the Reynolds number at terminal velocity depends on Ar alone. It is solved exactly at a few
thousand Ar, interpolated between, and checked half way: where the check fails (the seams of a law in pieces) each
particle is solved by itself.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from settlelab.physics.constants import STANDARD_GRAVITY, BoolArray, FloatArray
from settlelab.physics.drag.solver import DragLaw, terminal_velocity
from settlelab.physics.rheology import Rheology

_NODES, _CHUNK = 4096, 50_000
_GOOD = 1e-9  # of ln Re, half way between nodes


def velocities_of_many(
    drag: DragLaw,
    *,
    diameter: ArrayLike,
    densities: tuple[ArrayLike, ArrayLike],
    viscosity: ArrayLike,
    gravity: float = STANDARD_GRAVITY,
) -> FloatArray:
    """Terminal velocity of many particles of one shape in Newtonian liquids.

    Parameters
    ----------
    drag : callable
        Reynolds number to drag coefficient, with descriptors bound that are plain numbers. For shapes that differ from
        particle to particle use `terminal_velocity`.
    diameter : (N,) array
        Diameter that the law is built on [m], above 0.
    densities : pair of (N,) array
        Of particle and liquid [kg/m3], above 0.
    viscosity : (N,) array
        [Pa s], above 0.
    gravity : float
        [m/s2].

    Returns
    -------
    (N,) array
        [m/s], as of `terminal_velocity` to a relative 1e-8. All inputs broadcast; memory beyond them and the result
        stays below 50 MB.

    Raises
    ------
    ValueError
        A law whose drag coefficient has another shape than the Reynolds number, or an input not above 0.
    """
    inputs = (diameter, *densities, viscosity)
    arrays = np.broadcast_arrays(*(np.asarray(item, dtype=np.float64) for item in inputs))
    if any(np.any(np.asarray(item) <= 0) for item in inputs):
        raise ValueError("diameters, densities and viscosities must be above 0")
    if np.shape(drag(np.ones((2, 1)))) != (2, 1):
        raise ValueError("a law with descriptors that are plain numbers is needed here: use terminal_velocity instead")
    velocity = np.empty(arrays[0].shape)
    flat, size = velocity.reshape(-1), velocity.size
    spans = [slice(start, min(start + _CHUNK, size)) for start in range(0, size, _CHUNK)]
    table = _table(drag, *_extremes(arrays, gravity, spans))
    for span in spans:
        flat[span] = _velocity(table, [array.flat[span] for array in arrays], gravity)
    return velocity


@dataclass(frozen=True, slots=True)
class _Table:
    """ln Re by ln(4/3 Ar): a cubic in each of the equal steps from `start`, and where it is not to be trusted."""

    drag: DragLaw
    start: float
    step: float
    cubics: FloatArray  # (steps, 4), highest power first
    bad: BoolArray


def _log_drag_number(particles: list[FloatArray], gravity: float) -> FloatArray:
    """ln(4/3 Ar), minus infinity for equal densities."""
    d, rho_s, rho, mu = particles
    with np.errstate(divide="ignore"):
        return np.asarray(np.log(4 / 3 * gravity * np.abs(rho_s - rho) * rho * d * d * d / (mu * mu)))


def _extremes(arrays: tuple[FloatArray, ...], gravity: float, spans: list[slice]) -> tuple[float, float]:
    low, high = np.inf, -np.inf
    for span in spans:
        y = _log_drag_number([array.flat[span] for array in arrays], gravity)
        y = y[np.isfinite(y)]
        low, high = min(low, float(y.min(initial=np.inf))), max(high, float(y.max(initial=-np.inf)))
    return (low, high) if low <= high else (0.0, 0.0)


def _table(drag: DragLaw, low: float, high: float) -> _Table:
    step = max((high - low) / (_NODES - 4), 1e-6)
    start = low - 1.5 * step  # the first and the last step are only neighbours of others
    at = start + step / 2 * np.arange(2 * _NODES - 1)
    x = _log_reynolds(drag, np.asarray(at, dtype=np.float64))
    nodes, half_way = x[::2], x[1::2]
    before, left, right, after = (nodes[i : i + _NODES - 3] for i in range(4))
    cubics = np.zeros((_NODES - 1, 4))
    cubics[1:-1] = np.stack(
        [
            (after - before) / 6 + (left - right) / 2,
            (before + right) / 2 - left,
            right - before / 3 - left / 2 - after / 6,
            left,
        ],
        axis=-1,
    )
    bad = ~(np.abs(np.polyval(cubics.T, 0.5) - half_way) < _GOOD)
    bad = np.convolve(bad, np.ones(3), mode="same") > 0  # and its neighbours, whose cubics use the same nodes
    return _Table(drag, start, step, cubics, bad)


def _log_reynolds(drag: DragLaw, log_drag_number: FloatArray) -> FloatArray:
    """The exact solution, for a particle of unit diameter and twice the density of a liquid of unit density."""
    viscosity = np.sqrt(4 / 3) * np.exp(-log_drag_number / 2)
    fluid = Rheology(consistency=viscosity)
    settling = terminal_velocity(
        drag, diameter=1.0, particle_density=2.0, fluid_density=1.0, rheology=fluid, gravity=1.0
    )
    return np.asarray(np.log(settling.reynolds))


def _velocity(table: _Table, particles: list[FloatArray], gravity: float) -> FloatArray:
    d, rho_s, rho, mu = particles
    y = _log_drag_number(particles, gravity)
    known = np.isfinite(y)
    place = (np.where(known, y, table.start) - table.start) / table.step
    index = place.astype(np.int64)
    share = place - index
    a, b, c, e = np.take(table.cubics, index, axis=0).T
    speed = np.exp(((a * share + b) * share + c) * share + e) * mu / (rho * d)
    alone = np.take(table.bad, index) & known
    if np.any(alone):
        speed[alone] = np.exp(_log_reynolds(table.drag, y[alone])) * (mu / (rho * d))[alone]
    speed = np.where(known, speed, np.where(np.isnan(y), np.nan, 0.0))
    return np.asarray(np.where(rho_s < rho, -speed, speed))
