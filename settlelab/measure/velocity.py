"""Terminal velocity of one fall from its positions.

First outliers are set aside, then the approach to terminal velocity is looked for and cut off, then a straight line is
laid through what is left, a swing of the particle fitted along. Errors are taken as correlated (see `noise`).
"""

from __future__ import annotations

import math
from collections.abc import Callable
from functools import partial

import numpy as np
from numpy.typing import ArrayLike, NDArray

from settlelab.measure.approach import Approach, find_approach
from settlelab.measure.model import Velocity
from settlelab.measure.noise import blocks, regress
from settlelab.measure.swing import find_swing
from settlelab.physics.constants import FloatArray

__all__ = ["terminal_velocity"]

FEWEST = 8  # points that a velocity is taken from
STEADY = 0.005  # share of the terminal velocity that may be missing where the steady window begins; corrected for
LAST_STAGE = 0.3  # share that may be missing where the approach is taken as exponential
WORTH_CUTTING = 0.3  # share of the points that a steady window must keep; else the approach is extrapolated
ARRIVED = 0.98  # share of the terminal velocity below which the fall is still accelerating
OUTLYING = 5.0  # robust standard deviations from the curve of the fall
SWING_SPEED = 0.02  # amplitude of the velocity of a swing over the terminal velocity, from which it is flagged

_ROUNDS = 6  # an approach is seldom quite exponential: what is left of it is looked for again


def terminal_velocity(
    time: ArrayLike, distance: ArrayLike, *, wander: float = 0.0, slowest: float = math.inf
) -> Velocity:
    """Terminal velocity of one fall, with its standard uncertainty and how nearly it was reached.

    - Points further than 5 robust standard deviations from the curve of the fall are set aside.
    - An approach V = Vt - D exp(-t/tau) is looked for; it counts where it is 20 times likelier than a straight line.
    - The window begins where less than 0.5 % of the terminal velocity is missing; the rest is corrected for, and the
      correction enters the uncertainty too: an approach is not quite exponential. Where so late a start would leave
      less than 30 % of the points, the end of the approach is extrapolated; what is missing at the last point then
      enters the uncertainty.
    - `accelerating`: at the last point more than 2 % of the terminal velocity is missing (or is too much).
    - `wobbling`: a swing with two periods or more explains 60 % of the variance about the line, and its velocity
      reaches 2 % of the terminal one. Such a swing is fitted along with the line.
    - `short-track`: fewer than 8 points; value and uncertainty are nan.

    Parameters
    ----------
    time : (N,) array
        Times of the positions [s]; gaps do no harm.
    distance : (N,) array
        Positions along gravity [m].
    wander : float
        How far the centre of the silhouette may move against the centre of mass during the fall [m], k = 1: a slowly
        turning grain shows no sign of it in the residuals. Over the length of the window it adds to the uncertainty.
    slowest : float
        Longest time constant that an approach of this particle can have [s], where that is known; what bends the path
        more slowly is no approach.

    Returns
    -------
    Velocity
        `fraction_of_terminal` is that of the last point; 1 where no approach is seen.

    Raises
    ------
    ValueError
        Times that do not grow.
    """
    t, y = np.asarray(time, dtype=np.float64), np.asarray(distance, dtype=np.float64)
    kept = np.flatnonzero(np.isfinite(t) & np.isfinite(y))
    if len(kept) < FEWEST:
        return Velocity(
            value=math.nan, u=math.nan, fraction_of_terminal=math.nan, first=0, last=len(t) - 1, flags=("short-track",)
        )
    if np.any(np.diff(t[kept]) <= 0):
        raise ValueError("times must grow from point to point")
    sign = -1.0 if y[kept[-1]] < y[kept[0]] else 1.0
    t, y = t[kept], sign * y[kept]
    inlying = _inlying(t, y)
    kept, t, y = kept[inlying], t[inlying], y[inlying]
    first, approach, steady = _steady_window(t, y, wander=wander, slowest=slowest)
    fraction = 1.0 if approach is None else max(1 - abs(float(approach.missing(t[-1]))), 0.0)
    flags: tuple[str, ...] = ("accelerating",) if fraction < ARRIVED else ()
    if approach is not None and not steady:
        value = approach.terminal
        u = math.hypot(approach.u, value * (1 - fraction))
    else:
        t, y = t[first:], y[first:]
        value, u, swing = _straight(t, y if approach is None else approach.straightened(t, y))
        u = math.hypot(u, 0.0 if approach is None else value * _mean_missing(approach, t))
        flags += ("wobbling",) if swing > SWING_SPEED * value else ()
    return Velocity(
        value=sign * value,
        u=math.hypot(u, wander / float(t[-1] - t[0])),
        fraction_of_terminal=fraction,
        first=int(kept[first]),
        last=int(kept[-1]),
        flags=flags,
    )


def _inlying(time: FloatArray, distance: FloatArray) -> NDArray[np.bool_]:
    """Which points lie on the curve of the fall: a line and the decay that fits best, by Huber's weights."""
    s = (time - time[0]) / (time[-1] - time[0])
    smallest = 1e-9 * float(np.ptp(distance)) + 1e-300
    decays = np.exp(-s[:, None] / np.geomspace(0.02, 1.5, 9))
    designs = np.stack([np.column_stack([np.ones_like(s), s, decay]) for decay in decays.T])
    weight = np.ones_like(s)
    for _ in range(6):
        basis, _ = np.linalg.qr(designs * weight[:, None])
        fitted = np.einsum("knp,kp->kn", basis, np.einsum("knp,n->kp", basis, weight * distance))
        best = np.argmin(np.sum((weight * distance - fitted) ** 2, axis=1))
        residual = np.abs(distance - fitted[best] / weight)
        # few points lie closer to a curve fitted to them than they should
        scale = max(1.4826 * float(np.median(residual)) * len(s) / (len(s) - 4), smallest)
        weight = np.sqrt(np.minimum(1.0, 1.5 * scale / np.maximum(residual, smallest)))
    inlying = residual <= OUTLYING * scale
    return inlying if np.count_nonzero(inlying) >= FEWEST else np.ones_like(inlying)


def _steady_window(
    time: FloatArray, distance: FloatArray, *, wander: float, slowest: float
) -> tuple[int, Approach | None, bool]:
    """Index at which the steady window begins, the last approach that was found, and whether the window is steady."""
    find = partial(find_approach, wander=wander, slowest=slowest)
    first: int = 0
    found: Approach | None = None
    for _ in range(_ROUNDS):
        t, y = time[first:], distance[first:]
        found = _approach_beyond(find, found, t, y)
        missing = 0.0 if found is None else abs(float(found.missing(t[0])))
        if found is None or missing <= STEADY:
            break
        start = int(np.searchsorted(time, found.steady_from(STEADY if missing <= LAST_STAGE else LAST_STAGE)))
        if len(time) - start < max(FEWEST, WORTH_CUTTING * len(t)):
            return first, found, False
        first = start
    return first, found, True


def _approach_beyond(
    find: Callable[[FloatArray, FloatArray], Approach | None],
    found: Approach | None,
    time: FloatArray,
    distance: FloatArray,
) -> Approach | None:
    """The approach in a window: the one found before, or a new one where that leaves another unexplained."""
    if found is None:
        return find(time, distance)
    if find(time, found.straightened(time, distance)) is None:
        return found
    return find(time, distance) or found


def _mean_missing(approach: Approach, time: FloatArray) -> float:
    """Share of the terminal velocity that the slope of a line through the window would miss, without its sign."""
    weight = (time - time[0]) * (time[-1] - time)
    return abs(float(np.sum(weight * approach.missing(time)) / np.sum(weight)))


def _straight(time: FloatArray, distance: FloatArray) -> tuple[float, float, float]:
    """Slope of a line, its standard uncertainty, and the amplitude of the velocity of a swing about it (0 for none)."""
    length = time[-1] - time[0]
    s = (time - time[0]) / length
    line = np.column_stack([np.ones_like(s), s])
    swing = find_swing(s, distance)
    design = line if swing is None else np.column_stack([line, swing.columns])
    columns = blocks(np.column_stack([design, distance - distance[0]]))
    slope, u = regress(columns[:, :-1], columns[:, -1]).averaged(1)
    return float(slope / length), float(u / length), 0.0 if swing is None else float(swing.speed / length)
