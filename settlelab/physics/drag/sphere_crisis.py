"""Fits of the sphere curve that follow it into the drag crisis, and others of many constants."""

from __future__ import annotations

import numpy as np

from settlelab.physics.constants import FloatArray
from settlelab.physics.drag.registry import published

_BARATI = "Barati, Neyshabouri & Ahmadi (2014), Powder Technol. 257, 11-19, doi 10.1016/j.powtec.2014.02.045"
_MIKHAILOV = "Mikhailov & Silva Freire (2013), Powder Technol. 237, 432-435, doi 10.1016/j.powtec.2012.12.033"


@published(
    "almedeij-2008",
    source="Almedeij (2008), Powder Technol. 186, 218-223, doi 10.1016/j.powtec.2007.12.006",
    valid={"reynolds": (0.0, 1e6)},
    diameter="sphere",
    note="Includes the drag crisis of a smooth sphere; else 10 % off the standard curve at Re 1 and at Re 100.",
)
def almedeij(reynolds: FloatArray) -> FloatArray:
    """Drag coefficient of a sphere by matched powers, the drag crisis included."""
    with np.errstate(over="ignore"):  # a reciprocal of infinity is the 0 that is meant
        p1 = (24 / reynolds) ** 10 + (21 * reynolds**-0.67) ** 10 + (4 * reynolds**-0.33) ** 10 + 0.4**10
        p2 = 1 / ((0.148 * reynolds**0.11) ** -10 + 0.5**-10)
        p3 = (1.57e8 * reynolds**-1.625) ** 10
        p4 = 1 / ((6e-17 * reynolds**2.63) ** -10 + 0.2**-10)
    return np.asarray((1 / (1 / (p1 + p2) + 1 / p3) + p4) ** 0.1)


@published(
    "barati-2014-eq22",
    source=_BARATI,
    where="eq. 22",
    valid={"reynolds": (0.0, 2e5)},
    diameter="sphere",
    note="Within 2 % of the standard curve at decades of Re to 1e4, 7 % low at 1e5. From genetic programming.",
)
def barati_22(reynolds: FloatArray) -> FloatArray:
    """Drag coefficient of a sphere by hyperbolic tangents."""
    terms = ((5.4856e9, 4.3774e-9), (0.0709, 700.6574), (0.3894, 74.1539), (-0.1198, 7429.0843))
    value = 0.4744 + 1.7174 * np.tanh(9.9851 / (reynolds + 2.3384))
    for factor, scale in terms:
        value = value + factor * np.tanh(scale / reynolds)
    return value


@published(
    "barati-2014-eq23",
    source=_BARATI,
    where="eq. 23",
    valid={"reynolds": (0.0, 1e6)},
    diameter="sphere",
    note="Includes the drag crisis of a smooth sphere. From genetic programming. One public copy drops the "
    "last term, 2.4795. Beyond its range the value at its end is kept.",
)
def barati_23(reynolds: FloatArray) -> FloatArray:
    """Drag coefficient of a sphere by a fit that includes the drag crisis."""
    re = np.minimum(reynolds, 1e6)
    crisis = 0.4119 * np.exp(-2.08e43 / (re + re**2) ** 4)
    trend = 8e-6 * ((re / 6530) ** 2 + np.tanh(re) - 8 * np.log10(re))
    bend = 2.1344 * np.exp(-(np.log10(re**2 + 10.7563) ** 2 + 9.9867) / re)
    late = 0.1357 * np.exp(-((re / 1620) ** 2 + 10370) / re)
    viscous = 8.5e-3 * (2 * np.log10(np.tanh(np.tanh(re))) - 2825.7162) / re
    return np.asarray(trend - crisis - bend + late - viscous + 2.4795)


@published(
    "mikhailov-silvafreire-2013-i",
    source=_MIKHAILOV,
    where="first rational form",
    valid={"reynolds": (0.0, 1.183e5)},
    diameter="sphere",
    note="15 % high at Re 1e4. The range is that of both forms together; this one serves up to Re 10. "
    "Beyond the range the value at its end is kept.",
)
def mikhailov_silvafreire_i(reynolds: FloatArray) -> FloatArray:
    """Drag coefficient of a sphere, rational form for low Reynolds numbers."""
    re = np.minimum(reynolds, 1.183e5)
    above = 3808 * (1617933 / 2030 + 178861 / 1063 * re + 1219 / 1084 * re**2)
    return np.asarray(above / (681 * re * (77531 / 422 + 13529 / 976 * re - re**2 / 71154)))


@published(
    "mikhailov-silvafreire-2013-ii",
    source=_MIKHAILOV,
    where="second rational form, with the last sign negative",
    valid={"reynolds": (0.0, 1.183e5)},
    diameter="sphere",
    note="10 % high at Re 0.1 and at Re 1e4; serves above Re 10. The last sign is said to be printed as plus; minus "
    "gives the table of the same paper (0.5241 at Re 1e5, where plus gives 0.364). Beyond the range the value at its "
    "end is kept.",
)
def mikhailov_silvafreire_ii(reynolds: FloatArray) -> FloatArray:
    """Drag coefficient of a sphere, rational form for high Reynolds numbers."""
    re = np.minimum(reynolds, 1.183e5)
    above = 777 * (669806 / 875 + 114976 / 1155 * re + 707 / 1380 * re**2)
    return np.asarray(above / (646 * re * (32869 / 952 + 924 / 643 * re - re**2 / 385718)))


@published(
    "concha-barrientos-1982",
    source="Concha & Barrientos (1982), Int. J. Miner. Process. 9, 167-172",
    where="checked against values of its table I",
    valid={"reynolds": (0.0, 3e5)},
    diameter="sphere",
    note="A polynomial carries the boundary-layer form to the start of the drag crisis; useless above Re 3e5, where "
    "its value there is kept.",
)
def concha_barrientos(reynolds: FloatArray) -> FloatArray:
    """Drag coefficient of a sphere with its boundary layer, to the start of the drag crisis."""
    inside = np.minimum(reynolds, 3e5)
    polynomial = np.polyval(
        [7.437237e-27, -7.159345e-21, 2.476861e-15, -3.938611e-10, 2.736461e-5, 9.620833e-1], inside
    )
    return np.asarray(0.284153 * (1 + 9.04 / np.sqrt(inside)) ** 2 * polynomial)
