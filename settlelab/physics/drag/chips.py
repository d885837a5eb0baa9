"""Drag laws of flat bodies, of volcanic ash and of isometric bodies, and those that drilling texts use for cuttings.

Laws of a disc are stated on the disc's diameter in print; here they are on the volume-equivalent one like all the
others: d = dv (1.5 t/d)^(-1/3), and the drag coefficient is multiplied by (d/dv)^2. The flatness of a disc is t/d.
"""

from __future__ import annotations

import numpy as np

from settlelab.physics.constants import FloatArray
from settlelab.physics.drag.registry import published


def _disc_over_equivalent(flatness: FloatArray) -> FloatArray:
    """Diameter of a disc over that of the sphere of its volume."""
    return np.asarray(np.cbrt(1.5 * flatness) ** -1)


@published(
    "clift-disc-1978",
    source="Clift, Grace & Weber (1978), Bubbles, Drops, and Particles, Academic Press",
    where="disc fixed broadside to the flow",
    valid={"reynolds": (0.0, 1e5), "flatness": (0.0, 0.1)},
    diameter="volume-equivalent",
    note="From memory, but its pieces meet. A disc that falls freely keeps broadside only below Re 100 (on its "
    "diameter); above, it swings or tumbles. The limits of Re and of the thickness (t/d 0.1) are ours.",
    confirmed=False,
)
def clift_disc(reynolds: FloatArray, flatness: FloatArray) -> FloatArray:
    """Drag coefficient of a thin disc broadside by its thickness over diameter."""
    broad = _disc_over_equivalent(flatness)
    re = reynolds * broad
    w = np.log10(re)
    creeping = 64 / (np.pi * re)
    pieces = [
        creeping * (1 + re / (2 * np.pi)),
        creeping * (1 + 10 ** (-0.883 + 0.906 * w - 0.025 * w**2)),
        creeping * (1 + 0.138 * re**0.792),
    ]
    value = np.select([re <= 0.01, re <= 1.5, re <= 133], pieces, 1.17)
    return np.where(np.isnan(re), np.nan, value * broad**2)


@published(
    "walker-mayes-1975",
    source="Walker & Mayes (1975), J. Pet. Technol. 27, 893, SPE 4975",
    where="the turbulent branch, as drilling texts give it: 2.19 (h R)^(1/2) ft/s, h in inches",
    valid={"reynolds": (100.0, 1e5)},
    diameter="volume-equivalent",
    note="A field reference for cuttings taken as discs that fall flat; the law for slower falls could not be "
    "confirmed and is left out. Reynolds numbers below 100 are outside. The upper end of the range is ours.",
)
def walker_mayes(reynolds: FloatArray, flatness: FloatArray) -> FloatArray:
    """Drag coefficient of a cutting as a disc that falls flat, turbulent."""
    return 1.12 * _disc_over_equivalent(flatness) ** 2 * np.ones_like(reynolds)


@published(
    "chien-1971",
    source="Chien (1971), annular velocity for rotary drilling operations",
    where="as drilling texts give it in field units: 0.0075 and 36800, 1.44 (d R)^(1/2) when turbulent",
    valid={"reynolds": (0.0, 1e4)},
    diameter="volume-equivalent",
    note="A field reference for cuttings; superseded by chien-1994. Citation from memory; the drag coefficient "
    "follows from the field constants. The range is that of its successor.",
    confirmed=False,
)
def chien_1971(reynolds: FloatArray) -> FloatArray:
    """Drag coefficient of drilled cuttings of one shape."""
    return 24 / reynolds + 1.72


@published(
    "moore-1974",
    source="Moore (1974), Drilling Practices Manual, PennWell",
    where="as drilling texts give it in field units: 82.87, 2.90 and 1.54",
    valid={"reynolds": (0.0, 1e4)},
    diameter="volume-equivalent",
    note="A field reference for cuttings, in three pieces that do not meet: Cd jumps by 5 % at Re 3 and by 18 % at "
    "Re 300. He takes the viscosity from the annular flow, not from the settling. The upper end of the range is ours.",
)
def moore(reynolds: FloatArray) -> FloatArray:
    """Drag coefficient of drilled cuttings in three pieces."""
    value = np.select([reynolds < 3, reynolds <= 300], [40 / reynolds, 22 / np.sqrt(reynolds)], 1.5)
    return np.where(np.isnan(reynolds), np.nan, value)


@published(
    "fang-2008",
    source="Fang et al. (2008), slip velocity of cuttings by sphericity",
    where="as printed in a drilling-hydraulics textbook (2011), eqs 2.92-2.95",
    valid={"reynolds": (1.0, 1e4), "sphericity": (0.1, 1.0)},
    diameter="volume-equivalent",
    note="A field reference: fit of a friction-factor chart. 14 % high for a sphere at Re 1, and at sphericity 0.8 "
    "two to three times any other law. Full citation not seen; the ranges are ours.",
)
def fang(reynolds: FloatArray, sphericity: FloatArray) -> FloatArray:
    """Drag coefficient of drilled cuttings by sphericity, fit of a chart."""
    a, b, c = fang_coefficients(sphericity)
    w = np.log10(np.clip(reynolds, 0.1, 1e5))  # the parabola turns away beyond
    inside = np.asarray(10 ** (a + b * w + c * w**2))
    return inside * np.maximum(0.1 / reynolds, 1.0)


def fang_coefficients(sphericity: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
    """A, B and C of log10 Cd = A + B log10 Re + C log10 Re squared, by sphericity (Fang 2008)."""
    a = np.polyval([-2.9825, 4.4395, -2.2626, 2.2954], sphericity)
    b = np.polyval([-2.0409, 3.3416, -1.9014, -0.4193], sphericity)
    c = np.polyval([0.1145, -0.1468, 0.0553, 0.1117], sphericity)
    return np.asarray(a), np.asarray(b), np.asarray(c)


@published(
    "wilson-huang-1979",
    source="Wilson & Huang (1979), Earth Planet. Sci. Lett. 44, 311-324",
    valid={"reynolds": (0.0, 100.0)},
    diameter="volume-equivalent",
    note="Volcanic ash, by the mean of the two shorter axes over the longest; for a sphere the last term is 0.53. "
    "One witness.",
    confirmed=False,
)
def wilson_huang(reynolds: FloatArray, flatness: FloatArray, elongation: FloatArray) -> FloatArray:
    """Drag coefficient of volcanic ash by its axes."""
    form = elongation * (1 + flatness) / 2
    return np.asarray(24 / reynolds * form**-0.828 + 2 * np.sqrt(1.07 - np.minimum(form, 1.0)))


def pettyjohn_christiansen_factors(sphericity: FloatArray) -> tuple[FloatArray, FloatArray]:
    """K1, creeping velocity over that of the sphere, and K3, drag coefficient at high Re (1948), by sphericity."""
    return 0.843 * np.log10(sphericity / 0.065), 5.31 - 4.88 * sphericity


@published(
    "pettyjohn-christiansen-1948-stokes",
    source="Pettyjohn & Christiansen (1948), Chem. Eng. Prog. 44, 157-172",
    where="creeping flow",
    valid={"reynolds": (0.0, 0.05), "sphericity": (0.67, 1.0)},
    diameter="volume-equivalent",
    note="Isometric bodies: cubes, octahedra, cuboctahedra, tetrahedra.",
)
def pettyjohn_christiansen_stokes(reynolds: FloatArray, sphericity: FloatArray) -> FloatArray:
    """Drag coefficient of isometric bodies in creeping flow by sphericity."""
    return 24 / (reynolds * pettyjohn_christiansen_factors(sphericity)[0])


@published(
    "pettyjohn-christiansen-1948-newton",
    source="Pettyjohn & Christiansen (1948), Chem. Eng. Prog. 44, 157-172",
    where="Newton regime",
    valid={"reynolds": (2e3, 2e5), "sphericity": (0.67, 1.0)},
    diameter="volume-equivalent",
    note="Isometric bodies: cubes, octahedra, cuboctahedra, tetrahedra.",
)
def pettyjohn_christiansen_newton(reynolds: FloatArray, sphericity: FloatArray) -> FloatArray:
    """Drag coefficient of isometric bodies at high Reynolds number by sphericity."""
    return pettyjohn_christiansen_factors(sphericity)[1] * np.ones_like(reynolds)
