"""Drag laws of freely falling non-spherical particles, and the scaling that the calibrated forms stand on.

Re and Cd are built on the diameter of the sphere of equal volume; the area in Cd is that sphere's cross-section, not
the silhouette. Sphericity is Wadell's.
"""

from __future__ import annotations

from collections.abc import Callable

import numpy as np

from settlelab.physics.constants import FloatArray
from settlelab.physics.drag.registry import published


def scaled_drag(
    reynolds: FloatArray,
    k_stokes: FloatArray,
    k_newton: FloatArray,
    base: Callable[[FloatArray], FloatArray],
) -> FloatArray:
    """Drag coefficient of a particle from a sphere law and two shape factors: Cd = K2 F(Re K1 K2).

    Parameters
    ----------
    reynolds : (N,) array
        Reynolds number on the volume-equivalent diameter [-].
    k_stokes : (N,) array
        K1 [-]: creeping velocity over that of the sphere of equal volume.
    k_newton : (N,) array
        K2 [-]: drag coefficient over that of the sphere at high Reynolds number.
    base : callable
        F, a sphere law: Reynolds number to drag coefficient.

    Returns
    -------
    (N,) array
        Drag coefficient [-]: 24/(Re K1) in creeping flow, K2 times the plateau of the sphere at high Re.

    References
    ----------
    Ganser (1993), Powder Technol. 77, 143-152; Thompson & Clark (1991), Powder Technol. 67, 57-66.
    """
    return np.asarray(k_newton * base(reynolds * k_stokes * k_newton))


@published(
    "haider-levenspiel-1989",
    source="Haider & Levenspiel (1989), Powder Technol. 58, 63-70, doi 10.1016/0032-5910(89)80008-7",
    where="eqs 10a-d",
    valid={"reynolds": (0.0, 2.5e4), "sphericity": (0.026, 1.0)},
    diameter="volume-equivalent",
    note="Fitted to 419 points of isometric bodies (sphericity 0.67 to 1) and, below Re 500, 87 of discs (0.026 to "
    "0.23). Its creeping limit is 24/Re for every sphericity, so that shape hardly acts below Re 1. At sphericity 1 "
    "it lies 2 to 9 % above the standard sphere curve.",
)
def haider_levenspiel(reynolds: FloatArray, sphericity: FloatArray) -> FloatArray:
    """Drag coefficient by sphericity."""
    a = np.exp(np.polyval([2.4486, -6.4581, 2.3288], sphericity))
    b = 0.0964 + 0.5565 * sphericity
    c = np.exp(np.polyval([-10.2599, 18.4222, -13.8944, 4.905], sphericity))
    d = np.exp(np.polyval([15.8855, -20.7322, 12.2584, 1.4681], sphericity))
    return np.asarray(24 / reynolds * (1 + a * reynolds**b) + c / (1 + d / reynolds))


def ganser_factors(sphericity: FloatArray) -> tuple[FloatArray, FloatArray]:
    """K1 and K2 [-] of an isometric particle by its sphericity, without the wall term (Ganser 1993, table 7)."""
    k_stokes = 1 / (1 / 3 + 2 / 3 * sphericity**-0.5)
    k_newton = 10 ** (1.8148 * (-np.log10(np.minimum(sphericity, 1.0))) ** 0.5743)
    return k_stokes, k_newton


def ganser_base(reynolds: FloatArray) -> FloatArray:
    """Sphere law of Ganser (1993), eq. 18."""
    return 24 / reynolds * (1 + 0.1118 * reynolds**0.6567) + 0.4305 / (1 + 3305 / reynolds)


@published(
    "ganser-1993",
    source="Ganser (1993), Powder Technol. 77, 143-152",
    where="eq. 18, table 7, isometric particles",
    valid={"reynolds": (0.0, 2.5e4), "sphericity": (0.67, 1.0)},
    diameter="volume-equivalent",
    note="The wall term of K1 (-2.25 d/D) is left out: walls are corrected for apart, and never twice. The logarithm "
    "in K2 is to base 10. The limit Re K1 K2 <= 1e5 stands here as Re <= 2.5e4, which keeps it down to sphericity "
    "0.67, that of the least round isometric body. At sphericity 1 it lies 15 to 26 % below the standard sphere "
    "curve at Re 10 to 1000.",
)
def ganser(reynolds: FloatArray, sphericity: FloatArray) -> FloatArray:
    """Drag coefficient of an isometric particle by sphericity: Stokes and Newton shape factors."""
    return scaled_drag(reynolds, *ganser_factors(sphericity), ganser_base)


@published(
    "chien-1994",
    source="Chien (1994), SPE Drill. Compl. 9 (4), 281-289, SPE 26121-PA",
    where="the drag coefficient; his velocity equation in field units follows from it",
    valid={"reynolds": (0.001, 1e4), "sphericity": (0.2, 1.0)},
    diameter="volume-equivalent",
    note="Made for drilled cuttings. Its creeping limit is 30/Re whatever the sphericity, 25 % above a sphere; at "
    "sphericity 1 it is 32 % low at Re 100. In mud the author takes the viscosity at the shear rate V/d.",
)
def chien(reynolds: FloatArray, sphericity: FloatArray) -> FloatArray:
    """Drag coefficient of drilled cuttings by sphericity."""
    return 30 / reynolds + 67.289 * np.exp(-5.03 * sphericity)


@published(
    "swamee-ojha-1991",
    source="Swamee & Ojha (1991), J. Hydraul. Eng. 117, 660-667, doi 10.1061/(ASCE)0733-9429(1991)117:5(660)",
    where="natural sediment, drag coefficient",
    valid={"reynolds": (1.0, 1e4), "corey_shape_factor": (0.3, 1.0)},
    diameter="volume-equivalent",
    note="The outer exponent 1.25 rests on memory and on the sphere limit: without it the law is 54 % low at Re 1. "
    "It has no creeping limit (Cd goes as Re^-0.8).",
    confirmed=False,
)
def swamee_ojha(reynolds: FloatArray, corey_shape_factor: FloatArray) -> FloatArray:
    """Drag coefficient of natural grains by the Corey shape factor."""
    b = corey_shape_factor
    viscous = 48.5 / ((1 + 4.5 * b**0.35) ** 0.8 * reynolds**0.64)
    inertial = (reynolds / (reynolds + 100 + 100 * b)) ** 0.32 / (b**18 + 1.05 * b**0.8)
    return np.asarray((viscous + inertial) ** 1.25)


@published(
    "coelho-massarani-1996",
    source="Coelho & Massarani (1996), report of the chemical engineering programme, COPPE/UFRJ",
    where="as given in course texts, after Pettyjohn & Christiansen (1948)",
    valid={"reynolds": (0.0, 5e4), "sphericity": (0.65, 1.0)},
    diameter="volume-equivalent",
    note="Joins the creeping and Newton ends of Pettyjohn and Christiansen by a sum of powers. The constants have "
    "two witnesses; the citation is from memory.",
)
def coelho_massarani(reynolds: FloatArray, sphericity: FloatArray) -> FloatArray:
    """Drag coefficient of isometric particles by sphericity, with the true limits at both ends."""
    k_stokes = 0.843 * np.log10(sphericity / 0.065)
    newton = 5.31 - 4.88 * sphericity
    return np.asarray(((24 / (k_stokes * reynolds)) ** 0.85 + newton**0.85) ** (1 / 0.85))


@published(
    "wu-wang-2006",
    source="Wu & Wang (2006), J. Hydraul. Eng. 132 (8), 858-862",
    valid={"reynolds": (0.0, 1e5), "corey_shape_factor": (0.2, 1.0)},
    diameter="volume-equivalent",
    note="Natural sediment, on the nominal diameter. At shape factor 1 a well-rounded grain, not a sphere "
    "(27.9/Re in creeping flow). The ranges are those of its data, from memory.",
)
def wu_wang(reynolds: FloatArray, corey_shape_factor: FloatArray) -> FloatArray:
    """Drag coefficient of natural sediment by the Corey shape factor."""
    m = 53.5 * np.exp(-0.65 * corey_shape_factor)
    n = 5.65 * np.exp(-2.5 * corey_shape_factor)
    power = 0.7 + 0.9 * corey_shape_factor
    return np.asarray(((m / reynolds) ** (1 / power) + n ** (1 / power)) ** power)


@published(
    "bagheri-bonadonna-2016",
    source="Bagheri & Bonadonna (2016), Powder Technol. 301, 526-544, doi 10.1016/j.powtec.2016.06.015",
    where="random orientation, volume taken as that of the ellipsoid of the three axes",
    valid={"reynolds": (0.0, 3e5)},
    diameter="volume-equivalent",
    note="Irregular volcanic particles in air and liquids. Its exponents are read as exp(2.5 log r) + 30 and exp(3 "
    "log r) + 100: with the constants inside the exponential, as typeset, they would not depend on r. Logarithms to "
    "base 10. For a sphere it is 11 to 18 % low at Re 10 to 1000.",
)
def bagheri_bonadonna(
    reynolds: FloatArray, flatness: FloatArray, elongation: FloatArray, density_ratio: FloatArray
) -> FloatArray:
    """Drag coefficient of irregular particles by flatness, elongation and density ratio."""
    drag_stokes, drag_newton = bagheri_bonadonna_factors(flatness, elongation, density_ratio)
    scaled = reynolds * drag_newton / drag_stokes
    viscous = 24 * drag_stokes / reynolds * (1 + 0.125 * scaled ** (2 / 3))
    return np.asarray(viscous + 0.46 * drag_newton / (1 + 5330 / scaled))


def bagheri_bonadonna_factors(
    flatness: FloatArray, elongation: FloatArray, density_ratio: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """Drag over that of the sphere in creeping flow and at high Re, kS and kN (2016), in random orientation."""
    form_stokes = flatness * elongation**1.3
    form_newton = np.minimum(flatness**2 * elongation, 1.0)
    a = 0.45 + 10 / (np.exp(2.5 * np.log10(density_ratio)) + 30)
    b = 1 - 37 / (np.exp(3 * np.log10(density_ratio)) + 100)
    drag_stokes = (form_stokes ** (1 / 3) + form_stokes ** (-1 / 3)) / 2
    return np.asarray(drag_stokes), np.asarray(10 ** (a * (-np.log10(form_newton)) ** b))
