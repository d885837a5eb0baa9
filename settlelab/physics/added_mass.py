"""Added mass of ellipsoids: the share of the displaced fluid's mass that is accelerated with a body."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike
from scipy.special import elliprd

from settlelab.physics.constants import FloatArray


def added_mass_coefficient(along: ArrayLike, across: ArrayLike, third: ArrayLike) -> FloatArray:
    """Added-mass coefficient of an ellipsoid that accelerates along one of its axes, in unbounded fluid.

    Parameters
    ----------
    along : (N,) array
        Axis in the direction of motion, in any unit, above 0.
    across, third : (N,) array
        The two others, in that unit.

    Returns
    -------
    (N,) array
        A / (2 - A), A = (2/3) a b c R_D(b^2, c^2, a^2) on the semi-axes [-]: 1/2 for a sphere. A grain of axes a, b, c
        that falls flat moves along c.

    References
    ----------
    Lamb (1932), Hydrodynamics, 6th ed., art. 114; his printed table is off in the third digit. R_D: Carlson's integral,
    NIST Digital Library of Mathematical Functions, 19.16.
    """
    a, b, c = (np.asarray(axis, dtype=np.float64) / 2 for axis in (along, across, third))
    share = 2 / 3 * a * b * c * elliprd(b**2, c**2, a**2)
    return np.asarray(share / (2 - share))
