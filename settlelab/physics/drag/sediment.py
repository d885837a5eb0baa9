"""Settling laws of natural sediment, most of them in the dimensionless diameter d*; all on the nominal diameter.

The nominal diameter is that of the sphere of equal volume. A sieve passes sand of 0.9 times its nominal diameter, more
or less: a sieve size is not to be put in here.
"""

from __future__ import annotations

import numpy as np

from settlelab.physics.constants import FloatArray
from settlelab.physics.drag.registry import published


def ferguson_church_form(dstar: FloatArray, viscous: float, inertial: float) -> FloatArray:
    """Terminal Reynolds number by the constants C1 and C2 of Ferguson & Church (2004)."""
    archimedes = dstar**3
    return np.asarray(archimedes / (viscous + np.sqrt(0.75 * inertial * archimedes)))


@published(
    "ferguson-church-2004",
    source="Ferguson & Church (2004), J. Sediment. Res. 74, 933-937",
    where="natural grains on the nominal diameter, C1 = 20 and C2 = 1.1",
    valid={"reynolds": (0.0, 1e5)},
    diameter="volume-equivalent",
    note="Natural sand and gravel; 18 and 1.0 are its constants for sieve diameters, 24 and 1.2 those for angular "
    "grains. The upper end of the range is ours.",
)
def ferguson_church(dstar: FloatArray) -> FloatArray:
    """Terminal Reynolds number of natural sediment."""
    return ferguson_church_form(dstar, 20.0, 1.1)


@published(
    "cheng-1997",
    source="Cheng (1997), J. Hydraul. Eng. 123, 149-152",
    valid={"reynolds": (0.0, 1e5)},
    diameter="volume-equivalent",
    note="Natural sand; not a sphere law (25 % slow in creeping flow). Its drag coefficient ((32/Re)^(2/3) + 1)^1.5 "
    "is the same but for the rounding of 1.211 to 1.2 (0.6 %). The upper end of the range is ours.",
)
def cheng_sand(dstar: FloatArray) -> FloatArray:
    """Terminal Reynolds number of natural sand."""
    # (sqrt(25 + x) - 5)^1.5 with x = 1.2 d*^2, without the difference of nearly equal numbers
    x = 1.2 * dstar**2
    return np.asarray((x / (np.sqrt(25 + x) + 5)) ** 1.5)


@published(
    "jimenez-madsen-2003",
    source="Jimenez & Madsen (2003), J. Waterw. Port Coast. Ocean Eng. 129, 70-78",
    valid={"dstar": (1.5, 25.0)},
    diameter="volume-equivalent",
    note="Quartz sand; the range is that of 0.063 to 1 mm in water at 20 °C. Some print 5.121 for 5.12.",
)
def jimenez_madsen(dstar: FloatArray) -> FloatArray:
    """Terminal Reynolds number of quartz sand."""
    root = dstar**1.5
    return np.asarray(root / (0.954 + 4 * 5.12 / root))


@published(
    "dietrich-1982",
    source="Dietrich (1982), Water Resour. Res. 18, 1615-1626",
    where="eqs 8, 9 and later; his D* is the Archimedes number",
    valid={"dstar": (0.3685, 1709.0), "corey_shape_factor": (0.2, 1.0), "powers_roundness": (0.0, 6.0)},
    diameter="volume-equivalent",
    note="Natural grains. The range is Ar 0.05 to 5e9. Below it print has Stokes' law of a sphere whatever the "
    "shape; here the velocity at Ar 0.05 is carried on in proportion to Ar instead, without that jump. Of a sphere 8 "
    "to 10 % slow at Ar 18 to 100, else within 5 %. The shape terms have one witness; at a shape factor of 0.15 and "
    "less there is no value.",
)
def dietrich(dstar: FloatArray, corey_shape_factor: FloatArray, powers_roundness: FloatArray) -> FloatArray:
    """Terminal Reynolds number of natural grains by Corey shape factor and roundness."""
    archimedes = np.maximum(dstar**3, 0.05)
    x = np.log10(archimedes)
    flat = 1 - corey_shape_factor
    step = np.tanh(x - 4.6)
    size = np.polyval([0.00056, -0.00575, -0.09815, 1.92944, -3.76715], x)
    base = np.where(flat < 0.85, 1 - flat / 0.85, np.nan)
    form = np.log10(base) - flat**2.3 * step + 0.3 * (0.5 - corey_shape_factor) * flat**2 * (x - 4.6)
    rough = (0.65 - corey_shape_factor / 2.83 * step) ** (1 + (3.5 - powers_roundness) / 2.5)
    # W* = V^3 / (R g nu), so that Re^3 = Ar W*
    return np.asarray(np.cbrt(archimedes * rough * 10 ** (size + form)) * (dstar**3 / archimedes))


@published(
    "camenen-2007",
    source="Camenen (2007), J. Hydraul. Eng. 133, 229-233",
    valid={"reynolds": (0.0, 1e5), "corey_shape_factor": (0.2, 1.0), "powers_roundness": (0.0, 6.0)},
    diameter="volume-equivalent",
    note="Natural grains. One witness, but it gives a sphere its limits (24, 0.39), and natural sand the velocity of "
    "wu-wang-2006 within 1 %. The upper end of the Reynolds range is ours.",
    confirmed=False,
)
def camenen(reynolds: FloatArray, corey_shape_factor: FloatArray, powers_roundness: FloatArray) -> FloatArray:
    """Drag coefficient of natural grains by Corey shape factor and roundness."""
    s = np.sin(np.pi / 2 * corey_shape_factor)
    flat = np.maximum(1 - s, 0.0)
    viscous = 24 + 100 * flat ** (2.1 + 0.06 * powers_roundness)
    inertial = 0.39 + 0.22 * (6 - powers_roundness) + 20 * flat ** (1.75 + 0.35 * powers_roundness)
    power = (1.2 + 0.12 * powers_roundness) * s**0.47
    return np.asarray(((viscous / reynolds) ** (1 / power) + inertial ** (1 / power)) ** power)
