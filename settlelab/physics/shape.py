"""Size and shape of a grain from what a bench measures: mass, three caliper axes, a silhouette.

Axes are full lengths, mutually perpendicular (calipers or the box of least volume), long >= intermediate >= short. The
greatest and least width of one silhouette are not such axes.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.special import elliprg

from settlelab.physics.constants import FloatArray


def diameter_from_mass(mass: ArrayLike, density: ArrayLike) -> FloatArray:
    """Volume-equivalent diameter from mass and particle density.

    Parameters
    ----------
    mass : (N,) array
        [kg].
    density : (N,) array
        Density of the particle as it displaces the fluid [kg/m3].

    Returns
    -------
    (N,) array
        (6 m / (pi rho))^(1/3) [m]; its relative standard uncertainty is a third of that of m/rho.
    """
    return np.cbrt(6 * np.asarray(mass, dtype=np.float64) / (np.pi * np.asarray(density, dtype=np.float64)))


def diameter_from_axes(long: ArrayLike, intermediate: ArrayLike, short: ArrayLike) -> FloatArray:
    """Diameter of the sphere that has the volume of the ellipsoid of the three axes.

    Parameters
    ----------
    long, intermediate, short : (N,) array
        Axes [m].

    Returns
    -------
    (N,) array
        [m]. Too large for angular grains, which fill their ellipsoid only in part.

    Raises
    ------
    ValueError
        Axes out of order, or not above 0.
    """
    a, b, c = ordered_axes(long, intermediate, short)
    return np.cbrt(a * b * c)


def diameter_from_area(area: ArrayLike) -> FloatArray:
    """Diameter of the circle that has the area of a silhouette.

    Parameters
    ----------
    area : (N,) array
        [m2].

    Returns
    -------
    (N,) array
        sqrt(4 A / pi) [m], x_A of ISO 9276-6.
    """
    return np.sqrt(4 * np.asarray(area, dtype=np.float64) / np.pi)


def equivalent_diameter(
    *, typed: ArrayLike, from_mass: ArrayLike, from_axes: ArrayLike, from_area: ArrayLike
) -> tuple[FloatArray, NDArray[np.str_]]:
    """The best known equivalent diameter of each particle, and the route that it was found by.

    Parameters
    ----------
    typed, from_mass, from_axes, from_area : (N,) array
        Diameters by each route [m], nan where it is not open. The first that is known is taken, in this order: a
        diameter stated by the lab, the volume by weighing, that of the ellipsoid, the size of the silhouette.

    Returns
    -------
    diameter : (N,) array
        [m], nan where no route is open.
    route : (N,) array of str
        "typed", "mass and density", "calipers", "silhouette", or "".
    """
    routes = ("typed", "mass and density", "calipers", "silhouette")
    found = np.broadcast_arrays(
        *(np.asarray(item, dtype=np.float64) for item in (typed, from_mass, from_axes, from_area))
    )
    known = [np.isfinite(diameter) for diameter in found]
    return np.select(known, list(found), default=np.nan), np.select(known, list(routes), default="")


def corey_shape_factor(long: ArrayLike, intermediate: ArrayLike, short: ArrayLike) -> FloatArray:
    """Corey shape factor c / sqrt(a b).

    Parameters
    ----------
    long, intermediate, short : (N,) array
        Axes a, b, c [m], or in any one unit.

    Returns
    -------
    (N,) array
        [-], 1 for equal axes.

    Raises
    ------
    ValueError
        Axes out of order, or not above 0.
    """
    a, b, c = ordered_axes(long, intermediate, short)
    return np.asarray(c / np.sqrt(a * b))


def flatness(intermediate: ArrayLike, short: ArrayLike) -> FloatArray:
    """Short over intermediate axis.

    Parameters
    ----------
    intermediate, short : (N,) array
        Axes, in any one unit.

    Returns
    -------
    (N,) array
        [-], 1 for a rod of round section, 0 for a sheet.

    Raises
    ------
    ValueError
        Axes out of order, or not above 0.
    """
    _, b, c = ordered_axes(intermediate, intermediate, short)
    return np.asarray(c / b)


def elongation(long: ArrayLike, intermediate: ArrayLike) -> FloatArray:
    """Intermediate over long axis.

    Parameters
    ----------
    long, intermediate : (N,) array
        Axes, in any one unit.

    Returns
    -------
    (N,) array
        [-], 1 for a disc, 0 for a needle.

    Raises
    ------
    ValueError
        Axes out of order, or not above 0.
    """
    a, b, _ = ordered_axes(long, intermediate, intermediate)
    return np.asarray(b / a)


def ellipsoid_surface(long: ArrayLike, intermediate: ArrayLike, short: ArrayLike) -> FloatArray:
    """Surface of an ellipsoid, exact: 4 pi R_G(a^2 b^2, a^2 c^2, b^2 c^2) on the semi-axes.

    Parameters
    ----------
    long, intermediate, short : (N,) array
        Full axes [m].

    Returns
    -------
    (N,) array
        [m2].

    Raises
    ------
    ValueError
        Axes out of order, or not above 0.

    References
    ----------
    Carlson's symmetric integral R_G: NIST Digital Library of Mathematical Functions, 19.33.
    """
    a, b, c = (axis / 2 for axis in ordered_axes(long, intermediate, short))
    return np.asarray(4 * np.pi * elliprg((a * b) ** 2, (a * c) ** 2, (b * c) ** 2))


def sphericity(volume: ArrayLike, surface: ArrayLike) -> FloatArray:
    """Wadell's sphericity: surface of the sphere of equal volume over the surface of the particle.

    Parameters
    ----------
    volume : (N,) array
        [m3].
    surface : (N,) array
        [m2].

    Returns
    -------
    (N,) array
        pi^(1/3) (6 V)^(2/3) / S [-], 1 for a sphere, 0.806 for a cube.

    References
    ----------
    Wadell (1935), J. Geol. 43, 250-280.
    """
    volume, surface = np.asarray(volume, dtype=np.float64), np.asarray(surface, dtype=np.float64)
    return np.asarray(np.cbrt(np.pi) * np.cbrt(6 * volume) ** 2 / surface)


def ellipsoid_sphericity(long: ArrayLike, intermediate: ArrayLike, short: ArrayLike) -> FloatArray:
    """Sphericity of the ellipsoid of the three axes.

    Parameters
    ----------
    long, intermediate, short : (N,) array
        Axes, in any one unit.

    Returns
    -------
    (N,) array
        [-]. An upper estimate for an angular grain: a block with the same axes has a lower one.

    Raises
    ------
    ValueError
        Axes out of order, or not above 0.
    """
    volume = np.pi / 6 * diameter_from_axes(long, intermediate, short) ** 3
    return sphericity(volume, ellipsoid_surface(long, intermediate, short))


def circularity(area: ArrayLike, perimeter: ArrayLike) -> FloatArray:
    """Circularity of a silhouette.

    Parameters
    ----------
    area : (N,) array
        [m2], or any square unit.
    perimeter : (N,) array
        [m], or that unit. Of a smooth outline: counted pixel edges are 27 % too long on a circle.

    Returns
    -------
    (N,) array
        sqrt(4 pi A / P^2) [-], 1 for a circle, as in ISO 9276-6; its square also goes by this name.
    """
    area, perimeter = np.asarray(area, dtype=np.float64), np.asarray(perimeter, dtype=np.float64)
    return np.asarray(np.sqrt(4 * np.pi * area) / perimeter)


def ordered_axes(
    long: ArrayLike, intermediate: ArrayLike, short: ArrayLike
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """The axes as arrays; a ValueError where they are not above 0 and in order."""
    a, b, c = (np.asarray(axis, dtype=np.float64) for axis in (long, intermediate, short))
    if np.any(a < b) or np.any(b < c) or np.any(c <= 0):
        raise ValueError("axes must be above 0 and in order: long, intermediate, short")
    return a, b, c
