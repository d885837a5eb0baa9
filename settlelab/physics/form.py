"""Further descriptors of form: indices from three axes, sphericity of standard bodies, and silhouettes by ISO 9276-6.

Axes as in `shape`: full lengths a >= b >= c, mutually perpendicular. Silhouette descriptors carry the names of
ISO 9276-6:2008 (from memory); lengths and areas may be in any one unit.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from settlelab.physics.constants import FloatArray
from settlelab.physics.shape import ordered_axes, sphericity


def krumbein_sphericity(long: ArrayLike, intermediate: ArrayLike, short: ArrayLike) -> FloatArray:
    """Intercept sphericity (b c / a^2)^(1/3) of Krumbein (1941), J. Sediment. Petrol. 11, 64-72."""
    a, b, c = ordered_axes(long, intermediate, short)
    return np.cbrt(b * c / a**2)


def maximum_projection_sphericity(long: ArrayLike, intermediate: ArrayLike, short: ArrayLike) -> FloatArray:
    """Maximum projection sphericity (c^2 / (a b))^(1/3) of Sneed & Folk (1958), J. Geol. 66, 114-150."""
    a, b, c = ordered_axes(long, intermediate, short)
    return np.cbrt(c**2 / (a * b))


def oblate_prolate_index(long: ArrayLike, intermediate: ArrayLike, short: ArrayLike) -> FloatArray:
    """Oblate-prolate index of Dobkins & Folk (1970), J. Sediment. Petrol. 40, 1167-1203.

    10 ((a - b)/(a - c) - 1/2) a/c: negative for discs, positive for rods, nan where a = c.
    """
    a, b, c = ordered_axes(long, intermediate, short)
    spread = np.where(a > c, a - c, np.nan)
    return np.asarray(10 * ((a - b) / spread - 0.5) * a / c)


def wentworth_flatness(long: ArrayLike, intermediate: ArrayLike, short: ArrayLike) -> FloatArray:
    """Flatness index (a + b) / (2 c) of Wentworth (1922); 1000 times it is the index of Cailleux."""
    a, b, c = ordered_axes(long, intermediate, short)
    return np.asarray((a + b) / (2 * c))


def janke_form_factor(long: ArrayLike, intermediate: ArrayLike, short: ArrayLike) -> FloatArray:
    """Form factor c (3 / (a^2 + b^2 + c^2))^(1/2) of Janke (1966), from memory."""
    a, b, c = ordered_axes(long, intermediate, short)
    return np.asarray(c * np.sqrt(3 / (a**2 + b**2 + c**2)))


def aschenbrenner_sphericity(long: ArrayLike, intermediate: ArrayLike, short: ArrayLike) -> FloatArray:
    """Working sphericity of Aschenbrenner (1956), J. Sediment. Petrol. 26, 15-31, from memory: 0.956 for equal axes."""
    a, b, c = ordered_axes(long, intermediate, short)
    p, q = c / b, b / a
    return np.asarray(12.8 * np.cbrt(p**2 * q) / (1 + p * (1 + q) + 6 * np.sqrt(1 + p**2 * (1 + q**2))))


def zingg_class(long: ArrayLike, intermediate: ArrayLike, short: ArrayLike) -> NDArray[np.str_]:
    """Class of form of Zingg (1935), with his limits of 2/3: "equant", "disc", "rod" or "blade"."""
    a, b, c = ordered_axes(long, intermediate, short)
    wide, thick = b / a > 2 / 3, c / b > 2 / 3
    return np.select([wide & thick, wide, thick], ["equant", "disc", "rod"], "blade")


def thomsen_surface(long: ArrayLike, intermediate: ArrayLike, short: ArrayLike) -> FloatArray:
    """Surface of an ellipsoid by the approximation of Thomsen (2004), within 1.1 %; `ellipsoid_surface` is exact."""
    a, b, c = (axis / 2 for axis in ordered_axes(long, intermediate, short))
    power = 1.6075
    mean = ((a * b) ** power + (a * c) ** power + (b * c) ** power) / 3
    return np.asarray(4 * np.pi * mean ** (1 / power))


def box_sphericity(long: ArrayLike, intermediate: ArrayLike, short: ArrayLike) -> FloatArray:
    """Sphericity of a rectangular block by its edges: a lower estimate for an angular grain with these axes."""
    a, b, c = ordered_axes(long, intermediate, short)
    return sphericity(a * b * c, 2 * (a * b + a * c + b * c))


def cylinder_sphericity(height_over_diameter: ArrayLike) -> FloatArray:
    """Sphericity of a round cylinder by its height over diameter: 0.874 at 1."""
    h = np.asarray(height_over_diameter, dtype=np.float64)
    return sphericity(np.pi / 4 * h, np.pi / 2 + np.pi * h)


POWERS_LIMITS = (0.12, 0.17, 0.25, 0.35, 0.49, 0.70, 1.00)  # Wadell roundness that bounds the six classes
POWERS_CLASSES = ("very angular", "angular", "subangular", "subrounded", "rounded", "well rounded")


def powers_class(roundness: ArrayLike) -> NDArray[np.str_]:
    """Class of roundness of Powers (1953) by Wadell's roundness [-]; limits from memory."""
    number = np.digitize(np.asarray(roundness, dtype=np.float64), POWERS_LIMITS[1:-1])
    return np.asarray(POWERS_CLASSES)[number]


def perimeter_diameter(perimeter: ArrayLike) -> FloatArray:
    """Diameter of the circle of equal perimeter, P / pi."""
    return np.asarray(np.asarray(perimeter, dtype=np.float64) / np.pi)


def aspect_ratio(least_feret: ArrayLike, greatest_feret: ArrayLike) -> FloatArray:
    """Least over greatest Feret diameter."""
    return _share(least_feret, greatest_feret)


def ellipse_ratio(minor: ArrayLike, major: ArrayLike) -> FloatArray:
    """Minor over major axis of the ellipse that has the silhouette's second moments of area."""
    return _share(minor, major)


def geodesic_elongation(thickness: ArrayLike, geodesic_length: ArrayLike) -> FloatArray:
    """Elongation of a fibre-like silhouette: thickness over geodesic length."""
    return _share(thickness, geodesic_length)


def straightness(greatest_feret: ArrayLike, geodesic_length: ArrayLike) -> FloatArray:
    """Greatest Feret diameter over geodesic length."""
    return _share(greatest_feret, geodesic_length)


def compactness(area: ArrayLike, greatest_feret: ArrayLike) -> FloatArray:
    """Diameter of the circle of equal area over the greatest Feret diameter."""
    return _share(np.sqrt(4 * np.asarray(area, dtype=np.float64) / np.pi), greatest_feret)


def extent(area: ArrayLike, feret: ArrayLike, perpendicular_feret: ArrayLike) -> FloatArray:
    """Area over the product of a Feret diameter and the one at right angles to it; `box_ratio` with the least box."""
    return _share(area, np.asarray(feret, dtype=np.float64) * np.asarray(perpendicular_feret, dtype=np.float64))


def box_ratio(area: ArrayLike, box_area: ArrayLike) -> FloatArray:
    """Area over that of the least rectangle around the silhouette."""
    return _share(area, box_area)


def form_factor(area: ArrayLike, perimeter: ArrayLike) -> FloatArray:
    """4 pi A / P^2, the square of the circularity, and often called by its name."""
    return _share(4 * np.pi * np.asarray(area, dtype=np.float64), np.square(np.asarray(perimeter, dtype=np.float64)))


def solidity(area: ArrayLike, hull_area: ArrayLike) -> FloatArray:
    """Area over that of the convex hull."""
    return _share(area, hull_area)


def convexity(hull_perimeter: ArrayLike, perimeter: ArrayLike) -> FloatArray:
    """Perimeter of the convex hull over that of the silhouette."""
    return _share(hull_perimeter, perimeter)


def irregularity(inscribed: ArrayLike, circumscribed: ArrayLike) -> FloatArray:
    """Diameter of the largest inscribed circle over that of the smallest circumscribed one (modification ratio)."""
    return _share(inscribed, circumscribed)


def _share(part: ArrayLike, whole: ArrayLike) -> FloatArray:
    return np.asarray(np.asarray(part, dtype=np.float64) / np.asarray(whole, dtype=np.float64))
