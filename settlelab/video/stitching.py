"""Joining the pieces of a path that was lost for longer than the linking waits, behind other objects or a mark."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from scipy.optimize import linear_sum_assignment

from settlelab.video.linking import FORBIDDEN, Sighting
from settlelab.video.model import FloatArray

FEWEST = 5  # points that a piece needs for its speed to be known
END = 12  # points at the end of a piece from which its speed is taken
FARTHEST = 15.0  # diameters, way between two pieces
MISS_FLOOR, MISS_SHARE = 2.0, 0.04  # px, and share of the way between the pieces
SPEED_SHARE = 0.15  # by which the speeds of two pieces may differ
SIZE_RATIO = 1.35  # of their areas


@dataclass(frozen=True, slots=True)
class _End:
    """One end of a piece: where, when, how fast, how large."""

    time: float  # frame intervals
    place: FloatArray  # px, (x, y)
    velocity: FloatArray  # px per frame interval
    area: float
    contrast: float


def stitched(paths: Sequence[list[Sighting]], times: FloatArray) -> list[list[Sighting]]:
    """The paths with pieces of one object joined, in order of appearance.

    Parameters
    ----------
    paths : sequence of lists
        Sightings in order of time.
    times : (N,) array
        Time of every frame [frame intervals].
    """
    known = [number for number, path in enumerate(paths) if len(path) >= FEWEST]
    follower = dict(_pairs(paths, known, times))
    joined = []
    for number in range(len(paths)):
        if number in follower.values():
            continue
        path = list(paths[number])
        while (number := follower.get(number, -1)) >= 0:
            path += paths[number]
        joined.append(path)
    return sorted(joined, key=lambda one: (one[0].index, one[0].y, one[0].x))


def _pairs(paths: Sequence[list[Sighting]], known: list[int], times: FloatArray) -> list[tuple[int, int]]:
    """Which piece goes on as which, the best assignment of all at once."""
    if len(known) < 2:
        return []
    lost = [_end(paths[number][-END:], times, -1) for number in known]
    found = [_end(paths[number][:END], times, 0) for number in known]
    cost = np.array([[_miss(one, other) for other in found] for one in lost])
    rows, columns = linear_sum_assignment(cost)
    return [
        (known[row], known[column]) for row, column in zip(rows, columns, strict=True) if cost[row, column] < FORBIDDEN
    ]


def _end(points: Sequence[Sighting], times: FloatArray, which: int) -> _End:
    time = times[[one.index for one in points]]
    place = np.array([(one.x, one.y) for one in points])
    spread = time - time.mean()
    velocity = spread @ (place - place.mean(axis=0)) / (spread @ spread)
    at = float(time[which])
    return _End(
        time=at,
        place=place.mean(axis=0) + velocity * (at - time.mean()),
        velocity=velocity,
        area=float(np.median([one.area for one in points])),
        contrast=points[which].contrast,
    )


def _miss(lost: _End, found: _End) -> float:
    """How far the two miss each other half-way, over the largest that is allowed."""
    passed = found.time - lost.time
    if passed <= 0 or lost.contrast * found.contrast < 0:
        return FORBIDDEN
    way = float(np.hypot(*(found.place - lost.place)))
    speed = float(np.hypot(*lost.velocity))
    diameter = np.sqrt(4 * lost.area / np.pi)
    if way > FARTHEST * diameter or not 1 / SIZE_RATIO < found.area / lost.area < SIZE_RATIO:
        return FORBIDDEN
    if float(np.hypot(*(found.velocity - lost.velocity))) > SPEED_SHARE * speed + 0.1:
        return FORBIDDEN
    ahead = lost.place + lost.velocity * passed / 2
    back = found.place - found.velocity * passed / 2
    miss = float(np.hypot(*(ahead - back))) / (MISS_FLOOR + MISS_SHARE * way)
    return miss if miss <= 1 else FORBIDDEN
