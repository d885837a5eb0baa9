"""Drag laws of a smooth rigid sphere in steady, unbounded Newtonian flow.

Deviations quoted in notes are from the standard curve of Clift, Grace & Weber (1978), table 5.2.
"""

from __future__ import annotations

import numpy as np

from settlelab.physics.constants import FloatArray
from settlelab.physics.drag.registry import published

# Relative standard uncertainty of the drag coefficient by any good law for spheres: they spread by 5 % (k = 2) from
# Re 0.01 to 1e4.
SPHERE_LAW_U = 0.025


@published(
    "stokes-1851",
    source="Stokes (1851), Trans. Camb. Phil. Soc. 9 (II), 8-106",
    valid={"reynolds": (0.0, 0.1)},
    diameter="sphere",
    note="Creeping flow. The standard curve lies 1 % higher at Re 0.05 and 2 % higher at Re 0.1.",
)
def stokes(reynolds: FloatArray) -> FloatArray:
    """Drag coefficient of a sphere in creeping flow."""
    return 24 / reynolds


@published(
    "schiller-naumann-1933",
    source="Schiller & Naumann (1933), Z. Ver. Dtsch. Ing. 77, 318-320",
    where="as given by Clift, Grace & Weber (1978), table 5.1",
    valid={"reynolds": (0.0, 800.0)},
    diameter="sphere",
    note="Within 5.3 % of the standard curve up to Re 800, 7 % low at Re 1000. Often stretched to Re 1000 and joined "
    "to a constant 0.44 there; that addition is not part of it.",
)
def schiller_naumann(reynolds: FloatArray) -> FloatArray:
    """Drag coefficient of a sphere: Stokes' law with a power-law correction."""
    return 24 / reynolds * (1 + 0.15 * reynolds**0.687)


@published(
    "clift-gauvin-1971",
    source="Clift & Gauvin (1971), Can. J. Chem. Eng. 49, 439-448",
    valid={"reynolds": (0.0, 3e5)},
    diameter="sphere",
    note="Within 6.2 % of the standard curve (at Re 260), mostly 3 %. Other constants go round under this name "
    "(0.152, 0.677, 0.417, 5070, -0.94); those are a later re-fit of another form by Brown & Lawler (2003).",
)
def clift_gauvin(reynolds: FloatArray) -> FloatArray:
    """Drag coefficient of a sphere: Schiller and Naumann's law carried on to the Newton regime."""
    return schiller_naumann(reynolds) + 0.42 / (1 + 42500 * reynolds**-1.16)


@published(
    "clift-grace-weber-1978",
    source="Clift, Grace & Weber (1978), Bubbles, Drops, and Particles, Academic Press",
    where="table 5.2, p. 112",
    valid={"reynolds": (0.0, 1e6)},
    diameter="sphere",
    note="The standard curve of a smooth sphere, in ten segments, the drag crisis included. Its segments miss each "
    "other by up to 0.8 % (at Re 20), and by 21 % at Re 4e5. Segment 4e5 to 1e6 is 0.1 log Re - 0.49: the 0.19 that "
    "is sometimes printed there gives 0.65 where the next segment starts at 0.11.",
)
def clift_grace_weber(reynolds: FloatArray) -> FloatArray:
    """Drag coefficient of a sphere: the recommended standard drag curve."""
    w = np.log10(reynolds)
    v = np.clip(w, 2, 6)  # the polynomials run away far outside their segments
    upper = np.array([0.01, 20, 260, 1500, 1.2e4, 4.4e4, 3.38e5, 4e5, 1e6])
    segment = np.digitize(reynolds, upper, right=True)
    value = np.select(
        [segment == number for number in range(10)],
        [
            3 / 16 + 24 / reynolds,
            24 / reynolds * (1 + 0.1315 * reynolds ** (0.82 - 0.05 * w)),
            24 / reynolds * (1 + 0.1935 * reynolds**0.6305),
            10 ** np.polyval([0.1558, -1.1242, 1.6435], v),
            10 ** np.polyval([0.1049, -0.9295, 2.5558, -2.4571], v),
            10 ** np.polyval([-0.0636, 0.6370, -1.9181], v),
            10 ** np.polyval([-0.1546, 1.5809, -4.3390], v),
            29.78 - 5.3 * w,
            0.1 * w - 0.49,
            0.19 - 8e4 / reynolds,
        ],
    )
    return np.where(np.isnan(reynolds), np.nan, value)


@published(
    "haider-levenspiel-1989-sphere",
    source="Haider & Levenspiel (1989), Powder Technol. 58, 63-70, doi 10.1016/0032-5910(89)80008-7",
    where="eq. 6",
    valid={"reynolds": (0.0, 2.6e5)},
    diameter="sphere",
    note="Fitted to 408 points, rms 2.4 %. Not the sphericity-1 value of the law for non-spherical particles.",
)
def haider_levenspiel_sphere(reynolds: FloatArray) -> FloatArray:
    """Drag coefficient of a sphere, four-constant form."""
    return 24 / reynolds * (1 + 0.1806 * reynolds**0.6459) + 0.4251 / (1 + 6880.95 / reynolds)


@published(
    "swamee-ojha-1991-sphere",
    source="Swamee & Ojha (1991), J. Hydraul. Eng. 117, 660-667, doi 10.1061/(ASCE)0733-9429(1991)117:5(660)",
    where="eq. 17",
    valid={"reynolds": (0.0, 1.5e5)},
    diameter="sphere",
    note="9.5 % above the standard curve at Re 180, 10 % below it at Re 1500.",
)
def swamee_ojha_sphere(reynolds: FloatArray) -> FloatArray:
    """Drag coefficient of a sphere by blending of powers."""
    viscous = (24 / reynolds) ** 1.6 + (130 / reynolds) ** 0.72
    inertial = ((40000 / reynolds) ** 2 + 1) ** -0.25
    # 0.5 (16 viscous^2.5 + inertial)^0.25, with the power taken out that would overflow at a vanishing Reynolds number
    return 0.5 * viscous**0.625 * (16 + inertial * viscous**-2.5) ** 0.25


@published(
    "brown-lawler-2003",
    source="Brown & Lawler (2003), J. Environ. Eng. 129, 222-231, doi 10.1061/(ASCE)0733-9372(2003)129:3(222)",
    where="eq. 19",
    valid={"reynolds": (0.0, 2e5)},
    diameter="sphere",
    note="Fitted to 480 historic points after a wall correction: velocities compared with it must be unbounded ones.",
)
def brown_lawler(reynolds: FloatArray) -> FloatArray:
    """Drag coefficient of a sphere, fitted to wall-corrected historic data."""
    return 24 / reynolds * (1 + 0.150 * reynolds**0.681) + 0.407 / (1 + 8710 / reynolds)


@published(
    "cheng-2009",
    source="Cheng (2009), Powder Technol. 189, 395-398, doi 10.1016/j.powtec.2008.07.006",
    where="eq. 1",
    valid={"reynolds": (0.0, 2e5)},
    diameter="sphere",
    note="Smooth over its whole range; within 3.3 % of the standard curve up to Re 1000, 6.4 % up to 1e5.",
)
def cheng(reynolds: FloatArray) -> FloatArray:
    """Drag coefficient of a sphere in one smooth expression."""
    return 24 / reynolds * (1 + 0.27 * reynolds) ** 0.43 + 0.47 * (1 - np.exp(-0.04 * reynolds**0.38))
