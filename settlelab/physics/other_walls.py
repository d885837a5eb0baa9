"""Walls that are not a round tube, and the ends of a column: published and computed velocity factors in creeping flow.

`nearness` is the particle's radius over the distance of its centre from the wall. Factors are velocity near the wall
over velocity in unbounded fluid, the reciprocal of the drag factors in print. For a rectangular column use
`walls.equivalent_bore`; for the bottom of a column the rule is to stop measuring one bore above it.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike
from scipy.interpolate import CubicSpline

from settlelab.physics.constants import FloatArray
from settlelab.physics.registry import Registry
from settlelab.physics.wall_methods import COMPUTED, WallMethod

OTHER_WALLS: Registry[WallMethod] = Registry(WallMethod)

_HAPPEL_BRENNER = "as given by Happel & Brenner (1965), eqs 7-4.28 and 7-4.29"


@OTHER_WALLS.published(
    "faxen-1923-slit",
    source="Faxén (1923), Ark. Mat. Astron. Fys. 17, no. 27",
    where=_HAPPEL_BRENNER,
    regime="midway between parallel walls",
    valid={"nearness": (0.0, 0.3)},
    note="Nearness is diameter over gap here. Computed values agree to 0.2 % up to 0.3; 2.4 % high at 0.5.",
)
def faxen_slit(nearness: FloatArray) -> FloatArray:
    """Velocity factor midway between two parallel walls."""
    return np.asarray(np.polyval([-0.169, 0.21, 0.418, 0.0, -1.004, 1.0], nearness))


@OTHER_WALLS.published(
    "faxen-1923-quarter",
    source="Faxén (1923), Ark. Mat. Astron. Fys. 17, no. 27",
    where=_HAPPEL_BRENNER,
    regime="a quarter of the gap from one of two parallel walls",
    valid={"nearness": (0.0, 0.3)},
    note="Distance to the nearer wall. The first coefficient is confirmed by computation, the others are from "
    "memory; the range is that of the slit.",
    confirmed=False,
)
def faxen_quarter(nearness: FloatArray) -> FloatArray:
    """Velocity factor in the quarter plane between two parallel walls."""
    return np.asarray(np.polyval([-0.0644, -0.131, 0.1475, 0.0, -0.6526, 1.0], nearness))


@OTHER_WALLS.published(
    "faxen-1921-wall",
    source="Faxén (1921), dissertation, Uppsala",
    where="as given by Happel & Brenner (1965)",
    regime="falling along one plane wall",
    valid={"nearness": (0.0, 0.43)},
    note="Within 0.1 % of the exact solution of Goldman, Cox & Brenner (1967), Chem. Eng. Sci. 22, 637, to nearness "
    "0.43, 1 % at 0.65. Citation from memory.",
)
def plane_wall(nearness: FloatArray) -> FloatArray:
    """Velocity factor of a sphere that falls along a plane wall without turning."""
    return np.asarray(np.polyval([-1 / 16, -45 / 256, 1 / 8, 0.0, -9 / 16, 1.0], nearness))


@OTHER_WALLS.published(
    "lorentz-1907",
    source="Lorentz (1907), Abh. theor. Phys. 1, 23-42",
    regime="falling towards a plane bottom",
    valid={"nearness": (0.0, 0.1)},
    note="First order; brenner-1961 is exact. Only for a column much wider than the distance. The range is ours.",
)
def lorentz(nearness: FloatArray) -> FloatArray:
    """Velocity factor of a sphere that falls towards a plane bottom, first order."""
    return 1 / (1 + 9 / 8 * nearness)


@OTHER_WALLS.published(
    "brenner-1961",
    source="Brenner (1961), Chem. Eng. Sci. 16, 242-251",
    regime="falling towards a plane bottom",
    valid={"nearness": (0.0, 0.999)},
    note="Exact series, summed to 1e-12. Only for a column much wider than the distance: in a narrow one the side "
    "walls screen the bottom, whose effect is below 0.3 % half a bore above it. Closer than a thousandth of the "
    "radius is not summed.",
)
def brenner(nearness: FloatArray) -> FloatArray:
    """Velocity factor of a sphere that falls towards a plane bottom, exact."""
    near = np.clip(np.asarray(nearness, dtype=np.float64), 1e-6, 0.9999)
    angle = np.arccosh(1 / near)
    total, term, n = np.zeros_like(angle), np.ones_like(angle), 0
    while np.any(np.abs(term) > 1e-13 * np.maximum(np.abs(total), 1e-300)) and n < 10_000:
        n += 1
        wide = (2 * n + 1) * angle
        # 2 sinh((2n+1)A) and 4 sinh^2((n+1/2)A) = 2 cosh((2n+1)A) - 2, both over e^((2n+1)A), so that none overflows
        fade = np.exp(-wide)
        squared = (2 * n + 1) ** 2 * np.sinh(angle) ** 2
        above = 1 - fade**2 + (2 * n + 1) * np.sinh(2 * angle) * fade
        below = 1 + fade**2 - 2 * fade - squared * fade
        term = n * (n + 1) / ((2 * n - 1) * (2 * n + 3)) * (above / below - 1)
        total = total + term
    factor = 1 / (4 / 3 * np.sinh(angle) * total)
    return np.where(np.isnan(nearness), np.nan, factor)


_SIDE_RATIO = (0.0, 0.1, 0.2, 0.3, 0.4, 0.5, 0.6)
_SQUARE_DRAG = (1.0, 1.2323, 1.5818, 2.1262, 3.0124, 4.537, 7.352)
_square_spline = CubicSpline(_SIDE_RATIO, np.log(_SQUARE_DRAG), bc_type=((1, 1.901), "not-a-knot"))


@OTHER_WALLS.published(
    "square-duct",
    source=COMPUTED,
    where="method of fundamental solutions; its first coefficient 1.901 agrees with Happel & Bart (1974)",
    regime="on the axis of a square column",
    valid={"side_ratio": (0.0, 0.6)},
    note="Side ratio is diameter over side. Spline of seven values good to 3e-4; beyond 0.6 the last value is kept.",
)
def square_duct(side_ratio: FloatArray) -> FloatArray:
    """Velocity factor of a sphere on the axis of a square column."""
    return np.asarray(np.exp(-_square_spline(np.minimum(side_ratio, _SIDE_RATIO[-1]))))


# First coefficient c of f = 1 - c d/D of a sphere off the axis of a round tube, by distance from the axis over radius
# of the bore: method of fundamental solutions, uncertain by 0.003, 0.01 and 0.03 in the last three.
_OFFSET = (0.0, 0.2, 0.4, 0.6, 0.7)
_OFF_AXIS = (2.104, 2.079, 2.043, 2.17, 2.45)
_off_axis_spline = CubicSpline(_OFFSET, _OFF_AXIS, bc_type=((1, 0.0), "not-a-knot"))


def off_axis_coefficient(offset: ArrayLike) -> FloatArray:
    """First coefficient c of the wall factor 1 - c d/D of a small sphere off the axis of a round tube, creeping flow.

    Parameters
    ----------
    offset : (N,) array
        Distance of the centre from the axis over the radius of the bore [-], 0 to 0.7.

    Returns
    -------
    (N,) array
        c [-]: 2.104 on the axis, least (2.04) near 0.4, rising steeply beyond 0.6; nan beyond 0.7. Computed for
        settlelab by fundamental solutions, unpublished.
    """
    offset = np.asarray(offset, dtype=np.float64)
    return np.where(offset <= _OFFSET[-1], _off_axis_spline(np.minimum(offset, _OFFSET[-1])), np.nan)
