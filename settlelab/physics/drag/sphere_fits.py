"""Further fits of the sphere curve: older ones, those of the textbooks, and re-fits.

None is better than `cheng-2009`, `clift-gauvin-1971` or the standard curve; they are what other reports used.
Deviations quoted in notes are from the standard curve of Clift, Grace & Weber (1978), table 5.2, at Re 0.1, 1, 10, ...
"""

from __future__ import annotations

import numpy as np

from settlelab.physics.constants import FloatArray
from settlelab.physics.drag.registry import published

_BROWN_LAWLER = "Brown & Lawler (2003), J. Environ. Eng. 129, 222-231, doi 10.1061/(ASCE)0733-9372(2003)129:3(222)"


@published(
    "oseen-1910",
    source="Oseen (1910), Ark. Mat. Astron. Fys. 6, no. 29",
    valid={"reynolds": (0.0, 0.5)},
    diameter="sphere",
    note="First correction of Stokes' law for inertia. Above Re 0.5 it is too high, without limit.",
)
def oseen(reynolds: FloatArray) -> FloatArray:
    """Drag coefficient of a sphere in nearly creeping flow."""
    return 24 / reynolds * (1 + 3 / 16 * reynolds)


@published(
    "dallavalle-1948",
    source="Dallavalle (1948), Micromeritics, 2nd ed., Pitman",
    valid={"reynolds": (0.0, 1e5)},
    diameter="sphere",
    note="Two constants: up to 30 % high around Re 1000. Some books print 0.632 for 0.63; the upper end of the range "
    "is ours.",
)
def dallavalle(reynolds: FloatArray) -> FloatArray:
    """Drag coefficient of a sphere, two-constant form."""
    return np.asarray((0.63 + 4.8 / np.sqrt(reynolds)) ** 2)


@published(
    "abraham-1970",
    source="Abraham (1970), Phys. Fluids 13, 2194-2195",
    valid={"reynolds": (0.0, 5000.0)},
    diameter="sphere",
    note="From a boundary-layer picture of the flow; 9 % high at Re 1.",
)
def abraham(reynolds: FloatArray) -> FloatArray:
    """Drag coefficient of a sphere with its boundary layer."""
    return np.asarray(0.2924 * (1 + 9.06 / np.sqrt(reynolds)) ** 2)


@published(
    "concha-almendra-1979",
    source="Concha & Almendra (1979), Int. J. Miner. Process. 5, 349-367",
    valid={"reynolds": (0.0, 1e4)},
    diameter="sphere",
    note="Its creeping limit is 22.98/Re, 4 % low; 18 % low at Re 1e4. The upper end of the range is ours.",
)
def concha_almendra(reynolds: FloatArray) -> FloatArray:
    """Drag coefficient of a sphere with its boundary layer, re-fitted."""
    return np.asarray(0.28 * (1 + 9.06 / np.sqrt(reynolds)) ** 2)


@published(
    "perry-three-piece",
    source="Cutlip et al. (1997), ten problems in numerical methods, no. 5",
    where="after Perry's Chemical Engineers' Handbook, section 5",
    valid={"reynolds": (0.0, 3.5e5)},
    diameter="sphere",
    note="In pieces: Cd jumps by 3 % at Re 0.1 and by 2 % at 1000, and falls at 3.5e5, the drag crisis. The piece "
    "beyond, 0.19 - 8e4/Re, is negative at first; 0.03 stands there.",
)
def perry(reynolds: FloatArray) -> FloatArray:
    """Drag coefficient of a sphere as handbooks give it."""
    middle = 24 / reynolds * (1 + 0.14 * reynolds**0.7)
    pieces = [24 / reynolds, middle, np.full_like(reynolds, 0.44), 0.19 - 8e4 / np.maximum(reynolds, 1.0)]
    value = np.select([reynolds < 0.1, reynolds <= 1000, reynolds <= 3.5e5], pieces[:3], pieces[3])
    return np.where(np.isnan(reynolds), np.nan, np.maximum(value, 0.03))


_MORSI_ALEXANDER = (
    # a/Re + b/Re^2 + c, by the upper end of each segment
    (0.1, 24.0, 0.0, 0.0),
    (1.0, 22.73, 0.0903, 3.69),
    (10.0, 29.1667, -3.8889, 1.222),
    (100.0, 46.5, -116.67, 0.6167),
    (1e3, 98.33, -2778.0, 0.3644),
    (5e3, 148.62, -4.75e4, 0.357),
    (1e4, -490.546, 57.87e4, 0.46),
    (5e4, -1662.5, 5.4167e6, 0.5191),
)


@published(
    "morsi-alexander-1972",
    source="Morsi & Alexander (1972), J. Fluid Mech. 55, 193-208, doi 10.1017/S0022112072001806",
    where="eight segments; table 1 holds the curve that they are fitted to",
    valid={"reynolds": (0.0, 5e4)},
    diameter="sphere",
    note="Kinked where its segments meet; within 5 % of the standard curve. Beyond its range it levels out at 0.52.",
)
def morsi_alexander(reynolds: FloatArray) -> FloatArray:
    """Drag coefficient of a sphere in eight segments."""
    upper, a, b, c = np.transpose(_MORSI_ALEXANDER)
    segment = np.minimum(np.searchsorted(upper, reynolds, side="right"), len(upper) - 1)
    return np.where(np.isnan(reynolds), np.nan, (a[segment] + b[segment] / reynolds) / reynolds + c[segment])


@published(
    "turton-levenspiel-1986",
    source="Turton & Levenspiel (1986), Powder Technol. 47, 83-86, doi 10.1016/0032-5910(86)80012-2",
    where="eq. 5",
    valid={"reynolds": (0.0, 2e5)},
    diameter="sphere",
    note="Within 6 % of the standard curve at decades of Re.",
)
def turton_levenspiel(reynolds: FloatArray) -> FloatArray:
    """Drag coefficient of a sphere, five-constant form."""
    return 24 / reynolds * (1 + 0.173 * reynolds**0.657) + 0.413 / (1 + 16300 * reynolds**-1.09)


@published(
    "flemmer-banks-1986",
    source="Flemmer & Banks (1986), Powder Technol. 48, 217-221, doi 10.1016/0032-5910(86)80044-4",
    valid={"reynolds": (0.0, 8.6e4)},
    diameter="sphere",
    note="5 % low at Re 1, 13 % at 1e5. The constants that go round under this name are often the re-fit of Brown & "
    "Lawler (2003). Above Re 3e5 the value there is kept.",
)
def flemmer_banks(reynolds: FloatArray) -> FloatArray:
    """Drag coefficient of a sphere: Stokes' law times a power of ten."""
    return _flemmer_banks_form(reynolds, 0.261, 0.369, 0.105, 0.431, 0.124)


def _flemmer_banks_form(reynolds: FloatArray, a: float, b: float, c: float, d: float, e: float) -> FloatArray:
    re = np.minimum(reynolds, 3e5)  # far above, the exponent runs away
    return np.asarray(24 / re * 10 ** (a * re**b - c * re**d - e / (1 + np.log10(re) ** 2)))


@published(
    "khan-richardson-1987",
    source="Khan & Richardson (1987), Chem. Eng. Commun. 62, 135-150, doi 10.1080/00986448708912056",
    where="eq. 15a",
    valid={"reynolds": (0.01, 3e5)},
    diameter="sphere",
    note="15 % low at Re 1e5. It has no creeping limit: Cd goes as Re^-1.07. The constants that go round under this "
    "name are often the re-fit of Brown & Lawler (2003).",
)
def khan_richardson(reynolds: FloatArray) -> FloatArray:
    """Drag coefficient of a sphere by a power of two powers."""
    return np.asarray((2.25 * reynolds**-0.31 + 0.36 * reynolds**0.06) ** 3.45)


@published(
    "brown-lawler-2003-turton-levenspiel",
    source=_BROWN_LAWLER,
    where="their re-fit of the form of Turton & Levenspiel, eq. 17",
    valid={"reynolds": (0.0, 2e5)},
    diameter="sphere",
    note="Fitted after a wall correction. Often met under the name of Clift and Gauvin, whose law is another.",
)
def brown_lawler_turton_levenspiel(reynolds: FloatArray) -> FloatArray:
    """Drag coefficient of a sphere, five-constant form, fitted to wall-corrected historic data."""
    return 24 / reynolds * (1 + 0.152 * reynolds**0.677) + 0.417 / (1 + 5070 * reynolds**-0.94)


@published(
    "brown-lawler-2003-khan-richardson",
    source=_BROWN_LAWLER,
    where="their re-fit of the form of Khan & Richardson",
    valid={"reynolds": (0.01, 2e5)},
    diameter="sphere",
    note="Fitted after a wall correction. It has no creeping limit: Cd goes as Re^-1.04. The range is that of its "
    "form.",
)
def brown_lawler_khan_richardson(reynolds: FloatArray) -> FloatArray:
    """Drag coefficient of a sphere by a power of two powers, fitted to wall-corrected historic data."""
    return np.asarray((2.49 * reynolds**-0.328 + 0.34 * reynolds**0.067) ** 3.18)


@published(
    "brown-lawler-2003-flemmer-banks",
    source=_BROWN_LAWLER,
    where="their re-fit of the form of Flemmer & Banks",
    valid={"reynolds": (0.0, 2e5)},
    diameter="sphere",
    note="Fitted after a wall correction. Often met under the name of Flemmer and Banks.",
)
def brown_lawler_flemmer_banks(reynolds: FloatArray) -> FloatArray:
    """Drag coefficient of a sphere: Stokes' law times a power of ten, fitted to wall-corrected historic data."""
    return _flemmer_banks_form(reynolds, 0.383, 0.356, 0.207, 0.396, 0.143)
