"""Drag laws of non-spherical particles that ask for a silhouette: its area along the fall, or its outline.

On the volume-equivalent diameter. The projected-area ratio is the area seen along the fall over pi dv^2/4; a camera at
the side of a column sees another silhouette. The ratio of projected to volume-equivalent diameter is its root.
"""

from __future__ import annotations

import numpy as np

from settlelab.physics.constants import FloatArray
from settlelab.physics.drag.nonspherical import ganser_base, ganser_factors, scaled_drag
from settlelab.physics.drag.registry import published
from settlelab.physics.drag.spheres import haider_levenspiel_sphere


def stokes_shape_factor(sphericity: FloatArray, projected_area_ratio: FloatArray) -> FloatArray:
    """Creeping drag over that of the sphere of equal volume, 1/3 dn/dv + 2/3 ds/dv (Leith 1987)."""
    return np.asarray(np.sqrt(projected_area_ratio) / 3 + 2 / 3 * sphericity**-0.5)


@published(
    "leith-1987",
    source="Leith (1987), Aerosol Sci. Technol. 6, 153-161",
    valid={"reynolds": (0.0, 0.1)},
    diameter="volume-equivalent",
    note="Creeping flow only: a third of the drag goes with the projected area, two thirds with the surface.",
)
def leith(reynolds: FloatArray, sphericity: FloatArray, projected_area_ratio: FloatArray) -> FloatArray:
    """Drag coefficient in creeping flow by sphericity and projected area."""
    return 24 / reynolds * stokes_shape_factor(sphericity, projected_area_ratio)


@published(
    "ganser-1993-nonisometric",
    source="Ganser (1993), Powder Technol. 77, 143-152",
    where="eq. 18, table 7, non-isometric particles",
    valid={"reynolds": (0.0, 2.5e4)},
    diameter="volume-equivalent",
    note="Discs, rods and chips. The wall term of K1 (-2.25 d/D) is left out: walls are corrected for apart, and "
    "never twice. The limit Re K1 K2 <= 1e5 stands here as Re <= 2.5e4. No value in print was at hand to check it; its "
    "coefficients have two witnesses, and for a sphere it equals the isometric form.",
    confirmed=False,
)
def ganser_nonisometric(reynolds: FloatArray, sphericity: FloatArray, projected_area_ratio: FloatArray) -> FloatArray:
    """Drag coefficient by sphericity and projected area: Stokes and Newton shape factors."""
    _, k_newton = ganser_factors(sphericity)
    return scaled_drag(reynolds, 1 / stokes_shape_factor(sphericity, projected_area_ratio), k_newton, ganser_base)


@published(
    "tran-cong-2004",
    source="Tran-Cong, Gay & Michaelides (2004), Powder Technol. 139, 21-32",
    valid={
        "reynolds": (0.15, 1500.0),
        "projected_area_ratio": (0.64, 2.25),
        "projected_circularity": (0.4, 1.0),
    },
    diameter="volume-equivalent",
    note="Agglomerates of spheres. Its da is the diameter of the projected area, its dn the volume-equivalent one: "
    "the stated 0.8 to 1.5 of their ratio stands here squared. A sphere gives clift-gauvin-1971. An outline counted "
    "in pixel edges is too long and makes the circularity too low.",
)
def tran_cong(reynolds: FloatArray, projected_area_ratio: FloatArray, projected_circularity: FloatArray) -> FloatArray:
    """Drag coefficient by area and circularity of the silhouette along the fall."""
    broad = np.sqrt(projected_area_ratio)
    scaled, root = broad * reynolds, np.sqrt(projected_circularity)
    viscous = 24 / reynolds * broad * (1 + 0.15 / root * scaled**0.687)
    return np.asarray(viscous + 0.42 * broad**2 / (root * (1 + 4.25e4 * scaled**-1.16)))


_ROUNDEST = 0.98


@published(
    "hoelzer-sommerfeld-2008",
    source="Hölzer & Sommerfeld (2008), Powder Technol. 184, 361-365",
    where="with the lengthwise sphericity taken as the crosswise one, the authors' own simplification",
    valid={"reynolds": (0.0, 1e5), "sphericity": (0.0, _ROUNDEST)},
    diameter="volume-equivalent",
    note="The last term is 0.42 times a power of ten (often misprinted 0.4210 to a power), the logarithm in it to "
    "base 10. That power rises without limit in slope as the sphericity leaves 1: a loss of 1 % adds 36 % at high "
    "Re, so that it is not to be trusted above a sphericity of 0.98. For a sphere -12 % at Re 10 and 100, +14 % at "
    "1000.",
)
def hoelzer_sommerfeld(reynolds: FloatArray, sphericity: FloatArray, projected_area_ratio: FloatArray) -> FloatArray:
    """Drag coefficient by sphericity and projected area, for any orientation."""
    steep = 10 ** (0.4 * np.maximum(-np.log10(sphericity), 0.0) ** 0.2)
    creeping = 8 * np.sqrt(projected_area_ratio) / reynolds + 16 / (reynolds * np.sqrt(sphericity))
    return np.asarray(creeping + 3 / (np.sqrt(reynolds) * sphericity**0.75) + 0.42 * steep * projected_area_ratio)


@published(
    "song-2017",
    source="Song et al. (2017), Powder Technol. 321, 242-250, doi 10.1016/j.powtec.2017.08.017",
    valid={"reynolds": (0.001, 100.0)},
    diameter="volume-equivalent",
    note="336 tests of spheres, cubes and cylinders in viscous liquids, 3.5 %. It has no plateau (Cd goes as "
    "Re^-0.56): 33 % low for a sphere at Re 1000.",
)
def song(reynolds: FloatArray, sphericity: FloatArray, projected_area_ratio: FloatArray) -> FloatArray:
    """Drag coefficient by sphericity and projected area at low Reynolds number."""
    shape = sphericity**0.65 * projected_area_ratio**-0.3
    return np.asarray(24 / (reynolds * shape) * (1 + 0.35 * reynolds) ** 0.44)


@published(
    "dioguardi-2018",
    source="Dioguardi, Mele & Dellino (2018), J. Geophys. Res. Solid Earth 123, 144-156",
    valid={"reynolds": (0.03, 1e4)},
    diameter="volume-equivalent",
    note="Irregular volcanic particles, by sphericity times circularity of the largest silhouette. Where that is 1 "
    "it gives haider-levenspiel-1989-sphere. It has no creeping limit: below Re 0.03 it rises as Re^-1.25.",
)
def dioguardi(reynolds: FloatArray, sphericity: FloatArray, largest_circularity: FloatArray) -> FloatArray:
    """Drag coefficient of irregular particles by sphericity and circularity."""
    # the paper divides by the perimeter over that of the circle of equal area, the reciprocal of circularity
    shape = sphericity * largest_circularity
    creeping = 24 / reynolds * (np.maximum(1 - shape, 0.0) / reynolds + 1) ** 0.25
    middle = 24 / reynolds * 0.1806 * reynolds**0.6459 * shape ** -(reynolds**0.08)
    return np.where(
        shape >= 1,
        haider_levenspiel_sphere(reynolds),
        creeping + middle + 0.4251 / (1 + 6880.95 / reynolds * shape**5.05),
    )
