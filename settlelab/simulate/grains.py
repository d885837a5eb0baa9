"""Bodies to drop: spheres and irregular angular grains, with their exact volume, surface and caliper axes.

A grain is a convex polyhedron, the piece of rock that some planar breaks leave over. Coordinates are metres about the
mass centre (homogeneous body); x runs across the picture, y along gravity, z towards the camera.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from typing import Protocol

import numpy as np
from numpy.typing import NDArray
from scipy.spatial import ConvexHull, HalfspaceIntersection

FloatArray = NDArray[np.float64]

GOLDEN_ANGLE = np.pi * (3.0 - np.sqrt(5.0))


class Body(Protocol):
    """What can be dropped: its size, its shape, and the silhouette it shows."""

    @property
    def equivalent_diameter(self) -> float:
        """Diameter [m] of the sphere of equal volume."""

    @property
    def axes(self) -> tuple[float, float, float]:
        """Long, intermediate and short caliper axis [m], at right angles to each other."""

    @property
    def sphericity(self) -> float:
        """Surface of the sphere of equal volume over the surface, 1 for a sphere."""

    @property
    def reach(self) -> float:
        """Largest distance [m] of the surface from the mass centre."""

    def depth(self, rotation: FloatArray) -> float:
        """How far [m] the body reaches below its mass centre when turned by `rotation`."""

    def chords(self, y: FloatArray, rotation: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Left and right end [m] of the silhouette on lines at `y` (N,) [m]; equal where a line misses it."""


@dataclass(frozen=True)
class Sphere:
    """A sphere; `diameter` in m."""

    diameter: float

    @property
    def equivalent_diameter(self) -> float:
        """Diameter [m]."""
        return self.diameter

    @property
    def axes(self) -> tuple[float, float, float]:
        """Three times the diameter [m]."""
        return (self.diameter, self.diameter, self.diameter)

    @property
    def sphericity(self) -> float:
        """1."""
        return 1.0

    @property
    def reach(self) -> float:
        """Radius [m]."""
        return self.diameter / 2

    def depth(self, rotation: FloatArray) -> float:  # noqa: ARG002 (a sphere looks the same from everywhere)
        """Radius [m]."""
        return self.diameter / 2

    def chords(self, y: FloatArray, rotation: FloatArray) -> tuple[FloatArray, FloatArray]:  # noqa: ARG002
        """Ends [m] of the chords of the disc at heights `y` (N,) [m]."""
        half = np.sqrt(np.maximum(self.reach**2 - y**2, 0.0))
        return -half, half


@dataclass(frozen=True, eq=False)
class Grain:
    """A convex polyhedron about its mass centre, made by `convex_grain` or `angular_grain`."""

    vertices: FloatArray  # (V, 3) m
    edges: NDArray[np.int64]  # (E, 2) indices of vertices
    normals: FloatArray  # (F, 3) outward unit normals of the faces
    volume: float  # m3
    surface: float  # m2

    @property
    def equivalent_diameter(self) -> float:
        """Diameter [m] of the sphere of equal volume."""
        return float(np.cbrt(6 * self.volume / np.pi))

    @property
    def sphericity(self) -> float:
        """Wadell's sphericity, from the exact volume and surface."""
        return float(np.pi * self.equivalent_diameter**2 / self.surface)

    @cached_property
    def axes(self) -> tuple[float, float, float]:
        """Long, intermediate and short axis [m] as calipers take them of a grain that lies flat.

        Thickness is the least width of all; then, seen from above, the least width and the extent at right angles.
        """
        short, flat = _least_width(self.vertices, self._width_directions())
        across, along = _plane(flat)
        outline = self.vertices @ np.column_stack([across, along])
        # the least width of an outline stands on one of its sides, and these are projected edges
        sides = outline[self.edges[:, 1]] - outline[self.edges[:, 0]]
        intermediate, turned = _least_width(outline, _unit(np.column_stack([-sides[:, 1], sides[:, 0]])))
        long = float(np.ptp(outline @ np.array([-turned[1], turned[0]])))
        return max(long, intermediate), min(long, intermediate), short

    @cached_property
    def reach(self) -> float:
        """Distance [m] of the farthest corner from the mass centre."""
        return float(np.linalg.norm(self.vertices, axis=1).max())

    def depth(self, rotation: FloatArray) -> float:
        """How far [m] the lowest corner lies below the mass centre."""
        return float((self.vertices @ rotation.T)[:, 1].max())

    def chords(self, y: FloatArray, rotation: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Ends [m] of the chords of the silhouette at heights `y` (N,) [m]: outermost crossings of any edge."""
        turned = (self.vertices @ rotation.T)[:, :2]
        start, end = turned[self.edges[:, 0]], turned[self.edges[:, 1]]
        rise = end[:, 1] - start[:, 1]
        share = (y[:, None] - start[:, 1]) / np.where(rise == 0.0, np.inf, rise)
        crossed = (share >= 0.0) & (share <= 1.0) & (rise != 0.0)
        x = start[:, 0] + share * (end[:, 0] - start[:, 0])
        left = np.where(crossed, x, np.inf).min(axis=1)
        right = np.where(crossed, x, -np.inf).max(axis=1)
        hit = crossed.any(axis=1)
        return np.where(hit, left, 0.0), np.where(hit, right, 0.0)

    def _width_directions(self) -> FloatArray:
        """Directions (N, 3) among which that of the least width is: face normals, and normals to two edges."""
        along = self.vertices[self.edges[:, 1]] - self.vertices[self.edges[:, 0]]
        first, second = np.triu_indices(len(along), 1)
        return np.vstack([self.normals, _unit(np.cross(along[first], along[second]))])


def convex_grain(points: FloatArray) -> Grain:
    """The grain whose corners are the outermost of `points` (N, 3) [m], moved to its mass centre."""
    hull = ConvexHull(points)
    inside = points[hull.vertices].mean(axis=0)
    corners = points[hull.simplices] - inside  # (F, 3, 3): the hull as tetrahedra over an inner point
    volumes = np.abs(np.linalg.det(corners)) / 6
    centre = inside + (volumes[:, None] * corners.sum(axis=1) / 4).sum(axis=0) / volumes.sum()
    place = {corner: row for row, corner in enumerate(hull.vertices.tolist())}
    pairs = {
        (place[a], place[b]) if place[a] < place[b] else (place[b], place[a])
        for face in hull.simplices.tolist()
        for a, b in zip(face, face[1:] + face[:1], strict=True)
    }
    return Grain(
        vertices=points[hull.vertices] - centre,
        edges=np.array(sorted(pairs), dtype=np.int64),
        normals=np.unique(np.round(hull.equations[:, :3], 12), axis=0),
        volume=float(volumes.sum()),
        surface=float(hull.area),
    )


def angular_grain(
    rng: np.random.Generator,
    *,
    equivalent_diameter: float,
    proportions: tuple[float, float, float] = (1.0, 0.8, 0.6),
    breaks: int = 14,
) -> Grain:
    """A random grain with about `breaks` flat faces.

    Parameters
    ----------
    rng : numpy.random.Generator
        Source of chance.
    equivalent_diameter : float
        Diameter [m] of the sphere of equal volume, met exactly.
    proportions : tuple of 3 floats
        Stretch along three axes [-]; only their ratios matter. The caliper axes scatter about these ratios.
    breaks : int
        Number of planes that cut the grain out of a block, 6 and more; few make it angular, many round it.
    """
    # planes spread evenly over all directions and shaken, so that no side of the block stays open
    place = np.arange(breaks) + 0.5
    height, angle = 1 - 2 * place / breaks, GOLDEN_ANGLE * place
    ring = np.sqrt(1 - height**2)
    even = np.column_stack([ring * np.cos(angle), ring * np.sin(angle), height])
    directions = _unit(even + rng.normal(0.0, 0.2, even.shape))
    block = np.vstack([np.eye(3), -np.eye(3)])
    offsets = np.concatenate([rng.uniform(0.75, 1.05, breaks), np.full(6, 1.2)])
    planes = np.column_stack([np.vstack([directions, block]), -offsets])
    points = HalfspaceIntersection(planes, np.zeros(3)).intersections * proportions
    grain = convex_grain(points)
    return convex_grain(grain.vertices * (equivalent_diameter / grain.equivalent_diameter))


def rotation_about(axis: FloatArray, angle: float) -> FloatArray:
    """Rotation matrix (3, 3) by `angle` [rad] about the unit vector `axis` (3,) (Rodrigues' formula)."""
    x, y, z = axis
    cross = np.array([[0.0, -z, y], [z, 0.0, -x], [-y, x, 0.0]])
    return np.asarray(np.eye(3) + np.sin(angle) * cross + (1 - np.cos(angle)) * cross @ cross)


def random_direction(rng: np.random.Generator) -> FloatArray:
    """A unit vector (3,), all directions equally likely."""
    return _unit(rng.standard_normal((1, 3))).reshape(3)


def _unit(vectors: FloatArray) -> FloatArray:
    """The vectors (N, k) at length 1; those of no length are left out."""
    lengths = np.linalg.norm(vectors, axis=1)
    some = lengths > 1e-9 * lengths.max()
    return np.asarray(vectors[some] / lengths[some, None])


def _least_width(points: FloatArray, directions: FloatArray) -> tuple[float, FloatArray]:
    widths = np.ptp(points @ directions.T, axis=0)
    least = int(widths.argmin())
    return float(widths[least]), directions[least]


def _plane(normal: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Two unit vectors that span the plane with that unit normal."""
    helper = np.eye(3)[int(np.abs(normal).argmin())]
    first = np.cross(normal, helper)
    first /= np.linalg.norm(first)
    return first, np.cross(normal, first)
