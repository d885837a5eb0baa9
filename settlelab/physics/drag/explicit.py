"""Terminal Reynolds number of a sphere in one step, without iteration: laws in the dimensionless diameter d*.

Deviations quoted in notes are of the Reynolds number from that of the standard curve, at Archimedes numbers 1 to 1e7.
"""

from __future__ import annotations

import numpy as np

from settlelab.physics.constants import FloatArray
from settlelab.physics.drag.registry import published


@published(
    "turton-clark-1987",
    source="Turton & Clark (1987), Powder Technol. 53, 127-129",
    valid={"reynolds": (0.0, 2.6e5)},
    diameter="sphere",
    note="Within 9 %. Constants from memory; its limits, Stokes' law and a constant Cd, come out exactly. The range "
    "is that of the sphere data it rests on.",
    confirmed=False,
)
def turton_clark(dstar: FloatArray) -> FloatArray:
    """Terminal Reynolds number of a sphere by blending the two limits."""
    return np.asarray(dstar * ((18 / dstar**2) ** 0.824 + (0.321 / dstar) ** 0.412) ** -1.214)


@published(
    "haider-levenspiel-1989-explicit",
    source="Haider & Levenspiel (1989), Powder Technol. 58, 63-70, doi 10.1016/0032-5910(89)80008-7",
    where="the explicit form for isometric particles",
    valid={"reynolds": (0.0, 2.5e4), "sphericity": (0.5, 1.0)},
    diameter="volume-equivalent",
    note="Of a sphere 18 % fast at Re 23. Its creeping limit is Stokes' law for every sphericity.",
)
def haider_levenspiel_explicit(dstar: FloatArray, sphericity: FloatArray) -> FloatArray:
    """Terminal Reynolds number by sphericity."""
    return np.asarray(dstar / (18 / dstar**2 + (2.3348 - 1.7439 * sphericity) / np.sqrt(dstar)))


@published(
    "khan-richardson-1987-explicit",
    source="Khan & Richardson (1987), Chem. Eng. Commun. 62, 135-150, doi 10.1080/00986448708912056",
    where="the explicit form",
    valid={"reynolds": (0.1, 3e5)},
    diameter="sphere",
    note="Within 3 % for 1 < Re < 1000; fails at Archimedes numbers below 1 (44 % slow at 0.1). Constants from memory.",
    confirmed=False,
)
def khan_richardson_explicit(dstar: FloatArray) -> FloatArray:
    """Terminal Reynolds number of a sphere by a power of two powers."""
    return np.asarray(np.maximum(2.33 * dstar**0.054 - 1.53 * dstar**-0.048, 0.0) ** 13.3)


@published(
    "brown-lawler-2003-explicit",
    source="Brown & Lawler (2003), J. Environ. Eng. 129, 222-231, doi 10.1061/(ASCE)0733-9372(2003)129:3(222)",
    where="the explicit form",
    valid={"reynolds": (0.0, 4000.0)},
    diameter="sphere",
    note="Within 2 % over its range, the best explicit form; above it Re / d* levels out (17 % slow at Ar 1e8). "
    "Constants from memory.",
    confirmed=False,
)
def brown_lawler_explicit(dstar: FloatArray) -> FloatArray:
    """Terminal Reynolds number of a sphere by a rational function."""
    below = 0.0258 * dstar**4.046 + 2.81 * dstar**3.046 + 18 * dstar**2.046 + 405
    return np.asarray(dstar**3 * (22.5 + dstar**2.046) / below)


@published(
    "cheng-2009-explicit",
    source="Cheng (2009), Powder Technol. 189, 395-398, doi 10.1016/j.powtec.2008.07.006",
    where="the explicit form",
    valid={"reynolds": (0.0, 2e5)},
    diameter="sphere",
    note="Within 2 % to Re 2000, 4 % at 6000. Constants from memory.",
    confirmed=False,
)
def cheng_explicit(dstar: FloatArray) -> FloatArray:
    """Terminal Reynolds number of a sphere by its drag coefficient in d*."""
    cubed = dstar**3
    cd = 432 / cubed * (1 + 0.022 * cubed) ** 0.54 + 0.47 * (1 - np.exp(-0.15 * dstar**0.45))
    return np.asarray(np.sqrt(4 / 3 * cubed / cd))


@published(
    "zigrang-sylvester-1981",
    source="Zigrang & Sylvester (1981), AIChE J. 27, 1043-1044",
    valid={"reynolds": (0.0, 1e5)},
    diameter="sphere",
    note="The exact inverse of dallavalle-1948, with its error: 14 % slow at Re 500. The range is that given there.",
)
def zigrang_sylvester(dstar: FloatArray) -> FloatArray:
    """Terminal Reynolds number of a sphere, inverse of a two-constant law."""
    # (sqrt(14.51 + x) - 3.81)^2 with x = 1.83 d*^1.5, without the difference of nearly equal numbers
    x = 1.83 * dstar**1.5
    return np.asarray((x / (np.sqrt(3.81**2 + x) + 3.81)) ** 2)


@published(
    "concha-almendra-1979-explicit",
    source="Concha & Almendra (1979), Int. J. Miner. Process. 5, 349-367",
    where="their dimensionless diameter is (4/3 Ar)^(1/3), 1.1006 times d*",
    valid={"reynolds": (0.0, 1e4)},
    diameter="sphere",
    note="The exact inverse of concha-almendra-1979. With d* put in for their diameter it would be 13 to 25 % slow.",
)
def concha_almendra_explicit(dstar: FloatArray) -> FloatArray:
    """Terminal Reynolds number of a sphere with its boundary layer."""
    x = 0.0921 * np.sqrt(4 / 3) * dstar**1.5
    return np.asarray(20.52 * (x / (np.sqrt(1 + x) + 1)) ** 2)


@published(
    "coelho-massarani-1996-sphere",
    source="Coelho & Massarani (1996), report of the chemical engineering programme, COPPE/UFRJ",
    where="as given in course texts",
    valid={"reynolds": (0.0, 5e4)},
    diameter="sphere",
    note="16 % fast at Re 23. One witness.",
    confirmed=False,
)
def coelho_massarani_sphere(dstar: FloatArray) -> FloatArray:
    """Terminal Reynolds number of a sphere by a sum of powers of its two limits."""
    product = 4 / 3 * dstar**3
    return np.asarray(((product / 24) ** -0.95 + (product / 0.43) ** -0.475) ** (-1 / 0.95))


@published(
    "coelho-massarani-1996-explicit",
    source="Coelho & Massarani (1996), report of the chemical engineering programme, COPPE/UFRJ",
    where="as given in course texts, after Pettyjohn & Christiansen (1948)",
    valid={"reynolds": (0.0, 5e4), "sphericity": (0.65, 1.0)},
    diameter="volume-equivalent",
    note="The same two limits as coelho-massarani-1996, joined anew: the two differ by 4 % at an Archimedes number "
    "of 1e4.",
)
def coelho_massarani_explicit(dstar: FloatArray, sphericity: FloatArray) -> FloatArray:
    """Terminal Reynolds number of isometric particles by sphericity, with the true limits at both ends."""
    product = 4 / 3 * dstar**3
    creeping = 0.843 * np.log10(sphericity / 0.065) * product / 24
    return np.asarray((creeping**-1.2 + (product / (5.31 - 4.88 * sphericity)) ** -0.6) ** (-1 / 1.2))
