"""Flags of a fall that the tracker can raise; each function states its rule."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from settlelab.video.falls import Points
from settlelab.video.linking import Sighting
from settlelab.video.model import FloatArray

FEW_POINTS = 10
FEW_DIAMETERS = 3.0
BLURRED_EDGE = 0.25  # of the diameter
SHARP_EDGE = 3.5  # px; lens and pixel alone blur an edge by this much
NEAR_WALL = 1.5  # diameters from the centre to the wall: one diameter of liquid between
NEIGHBOUR = 10.0  # diameters of the larger one, between centres


def short_track(points: Points) -> bool:
    """Fewer than 10 points, or a way of less than three diameters."""
    return len(points.y) < FEW_POINTS or bool(points.y[-1] - points.y[0] < FEW_DIAMETERS * points.diameter)


def gap(path: Sequence[Sighting], points: Points) -> bool:
    """Lost for at least one frame and found again, between its first and its last counted point."""
    index = np.array([one.index for one in path])
    counted = index[(index >= points.index[0]) & (index <= points.index[-1])]
    return bool(np.any(np.diff(counted) > 1))


def edge(path: Sequence[Sighting], points: Points) -> bool:
    """Cut by the edge of the picture between its first and its last counted point."""
    return any(one.cut and points.index[0] < one.index < points.index[-1] for one in path)


def blurred(path: Sequence[Sighting], points: Points) -> bool:
    """The edge of the silhouette is wider than a quarter of the diameter, and wider than lens and pixel explain."""
    width = float(np.median([one.edge_width for one in path]))
    return width > max(SHARP_EDGE, BLURRED_EDGE * points.diameter)


def near_wall(points: Points, wall_distance: FloatArray) -> bool:
    """Less than one diameter of liquid between the particle and the nearer side wall, over most of the fall."""
    known = wall_distance[np.isfinite(wall_distance)]
    return len(known) > 0 and bool(np.median(known) < NEAR_WALL * points.diameter)


def neighbour(points: Points, others: Sequence[Points]) -> bool:
    """Another moving object nearer than ten diameters of the larger one, in a frame that counts for both."""
    for other in others:
        _, mine, theirs = np.intersect1d(points.index, other.index, assume_unique=True, return_indices=True)
        apart = np.hypot(points.x[mine] - other.x[theirs], points.y[mine] - other.y[theirs])
        if len(apart) and apart.min() < NEIGHBOUR * max(points.diameter, other.diameter):
            return True
    return False
