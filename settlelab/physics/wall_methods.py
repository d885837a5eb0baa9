"""Published and tabulated wall factors of a round tube: velocity on its axis over velocity in unbounded fluid.

`ratio` is particle diameter over bore. Drag factors K (drag with the wall over drag without, at equal velocity) are
turned into velocity factors only in creeping flow, where one is the reciprocal of the other.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from scipy.interpolate import CubicSpline

from settlelab.physics.constants import FloatArray
from settlelab.physics.registry import Entry, Registry


@dataclass(frozen=True, slots=True, kw_only=True)
class WallMethod(Entry):
    """A wall factor of a round tube."""

    regime: str  # what it is made for


WALLS: Registry[WallMethod] = Registry(WallMethod)

_CREEPING = (0.0, 0.1)
COMPUTED = "Computed for settlelab (2025), unpublished"


@WALLS.published(
    "faxen-1922",
    source="Faxén (1922), Ark. Mat. Astron. Fys. 17, no. 27",
    regime="creeping flow",
    valid={"ratio": (0.0, 0.2), "reynolds_unbounded": _CREEPING},
    note="Its drag is 1.3 % low at ratio 0.4.",
)
def faxen(ratio: FloatArray) -> FloatArray:
    """Wall factor in creeping flow by a short series."""
    return 1 - 2.10444 * ratio + 2.08877 * ratio**3 - 0.94813 * ratio**5


@WALLS.published(
    "bohlin-1960",
    source="Bohlin (1960), Trans. R. Inst. Technol. Stockholm 155",
    where="as given by Happel & Brenner (1965), sec. 7-3",
    regime="creeping flow",
    valid={"ratio": (0.0, 0.5), "reynolds_unbounded": _CREEPING},
    note="Its drag is 0.4 % low at ratio 0.5; it diverges beyond 0.65.",
)
def bohlin(ratio: FloatArray) -> FloatArray:
    """Wall factor in creeping flow by a longer series."""
    return np.asarray(
        1
        - 2.10443 * ratio
        + 2.08877 * ratio**3
        - 0.94813 * ratio**5
        - 1.372 * ratio**6
        + 3.87 * ratio**8
        - 4.19 * ratio**10
    )


@WALLS.published(
    "haberman-sayre-1958",
    source="Haberman & Sayre (1958), David Taylor Model Basin report 1143",
    where="rational form for a sphere moving in a liquid at rest",
    regime="creeping flow",
    valid={"ratio": (0.0, 0.6), "reynolds_unbounded": _CREEPING},
    note="Its drag is 0.3 % low at ratio 0.4, 1.3 % at 0.5, 4.5 % at 0.6 and 34 % at 0.8, though it is often quoted "
    "as valid to there.",
)
def haberman_sayre(ratio: FloatArray) -> FloatArray:
    """Wall factor in creeping flow by a rational function."""
    numerator = 1 - 2.1050 * ratio + 2.0865 * ratio**3 - 1.7068 * ratio**5 + 0.72603 * ratio**6
    return numerator / (1 - 0.75857 * ratio**5)


# Drag factor of a sphere on the axis, creeping flow: multipole and Fourier-Bessel collocation, converged to the digits.
_TUBE_RATIO = (0.0, 0.1, 0.2, 0.3, 0.4, 0.5, 0.6, 0.7, 0.8)
_TUBE_DRAG = (1.0, 1.26321, 1.67948, 2.37009, 3.59137, 5.94737, 11.0919, 24.6760, 74.670)
_tube_spline = CubicSpline(_TUBE_RATIO, np.log(_TUBE_DRAG), bc_type=((1, 2.10444), "not-a-knot"))


@WALLS.published(
    "tube-creeping",
    source=COMPUTED,
    where="computed: multipole and Fourier-Bessel solution of the flow about a sphere in a tube",
    regime="creeping flow",
    valid={"ratio": (0.0, 0.8), "reynolds_unbounded": _CREEPING},
    note="Spline of the computed drag factor; good to 0.01 % to ratio 0.5 and 0.2 % at 0.65. Beyond 0.8 the drag is "
    "carried on as (1 - ratio)^-5/2, the lubrication limit.",
)
def tube_creeping(ratio: FloatArray) -> FloatArray:
    """Wall factor in creeping flow, exact solution."""
    last = _TUBE_RATIO[-1]
    narrow = ((1 - ratio) / (1 - last)) ** 2.5 / _TUBE_DRAG[-1]
    return np.where(ratio > last, narrow, np.exp(-_tube_spline(np.minimum(ratio, last))))


@WALLS.published(
    "kehlenbeck-difelice-1999",
    source="Kehlenbeck & Di Felice (1999), Chem. Eng. Technol. 22, 303",
    regime="intermediate Reynolds number",
    valid={"reynolds_unbounded": (2.0, 185.0), "ratio": (0.0, 0.9)},
    note="From memory, but its two branches meet at Re 35, and it agrees with computed values within 7 % to ratio "
    "0.3; at 0.5 it is 13 % high at Re 1 and 9 % low at Re 100.",
    confirmed=False,
)
def kehlenbeck_difelice(ratio: FloatArray, reynolds_unbounded: FloatArray) -> FloatArray:
    """Wall factor at intermediate Reynolds number, fitted to falling spheres."""
    low = 1.44 + 0.5466 * reynolds_unbounded**0.434
    power = np.where(reynolds_unbounded <= 35, low, 2.3 + 37.3 * np.maximum(reynolds_unbounded, 35) ** -0.8686)
    inertia = 0.041 * reynolds_unbounded**0.524
    middle = (0.283 + 1.2 * inertia) / (1 + inertia)  # from (l0 - 0.283)/(1.2 - l0) = inertia
    return (1 - ratio**power) / (1 + (ratio / middle) ** power)


# Sphere on the axis, steady axisymmetric Navier-Stokes flow by finite elements; rows by Reynolds number in unbounded
# fluid, columns by ratio. Absolute error below 0.002.
_RATIO = (0.0, 0.05, 0.1, 0.2, 0.3, 0.5)
_REYNOLDS = (0.3, 1.0, 3.0, 10.0, 20.0, 35.0, 60.0, 100.0, 150.0)
_FINITE = (
    (1.0, 0.934, 0.829, 0.624, 0.443, 0.177),
    (1.0, 0.971, 0.887, 0.677, 0.480, 0.192),
    (1.0, 0.989, 0.948, 0.774, 0.560, 0.224),
    (1.0, 0.996, 0.979, 0.888, 0.712, 0.301),
    (1.0, 0.997, 0.986, 0.924, 0.792, 0.377),
    (1.0, 0.998, 0.990, 0.941, 0.834, 0.454),
    (1.0, 0.998, 0.992, 0.951, 0.860, 0.526),
    (1.0, 0.999, 0.993, 0.956, 0.875, 0.576),
    (1.0, 0.999, 0.993, 0.959, 0.880, 0.599),
)
_finite_splines = CubicSpline(_RATIO, np.transpose(_FINITE))  # one per Reynolds number


def _between_rows(rows: FloatArray, position: FloatArray, nodes: tuple[float, ...]) -> FloatArray:
    """Linear interpolation between the entries of the last axis of `rows` that belong to `nodes`."""
    inside = np.clip(position, nodes[0], nodes[-1])
    right = np.clip(np.searchsorted(nodes, inside), 1, len(nodes) - 1)
    left_node, right_node = np.asarray(nodes)[right - 1], np.asarray(nodes)[right]
    share = (inside - left_node) / (right_node - left_node)
    left_value, right_value = (np.take_along_axis(rows, at[..., None], axis=-1)[..., 0] for at in (right - 1, right))
    return np.asarray(left_value + share * (right_value - left_value))


@WALLS.published(
    "tube-finite-reynolds",
    source=COMPUTED,
    where="computed: axisymmetric finite elements, Navier-Stokes equations",
    regime="intermediate Reynolds number",
    valid={"reynolds_unbounded": (0.3, 150.0), "ratio": (0.0, 0.5)},
    note="Cubic in the ratio, linear in ln Re; absolute error 0.002. Below Re 0.3 it goes over, linearly in Re, into "
    "the creeping value (as drag without walls departs from Stokes' law); beyond ratio 0.5 it is a power of it.",
)
def tube_finite_reynolds(ratio: FloatArray, reynolds_unbounded: FloatArray) -> FloatArray:
    """Wall factor at intermediate Reynolds number, computed."""
    ratio, reynolds = np.broadcast_arrays(ratio, reynolds_unbounded)
    rows = np.minimum(_finite_splines(np.minimum(ratio, _RATIO[-1])), 1.0)
    value = _between_rows(rows, np.log(np.maximum(reynolds, 1e-300)), tuple(np.log(_REYNOLDS)))
    value = value ** _beyond_table(ratio)
    creeping = tube_creeping(ratio)
    low = creeping + (value - creeping) * reynolds / _REYNOLDS[0]
    return np.where(reynolds < _REYNOLDS[0], low, value)


def _beyond_table(ratio: FloatArray) -> FloatArray:
    """Power to which the last value of a table is raised beyond its last ratio, as in creeping flow; 1 within it."""
    last = np.asarray(_RATIO[-1])
    return np.asarray(np.log(tube_creeping(np.maximum(ratio, last))) / np.log(tube_creeping(last)))


# Sphere on the axis, creeping power-law flow by finite elements; rows by flow index. Absolute error below 0.002.
_FLOW_INDEX = (0.3, 0.4, 0.5, 0.6, 0.7, 0.8, 0.9, 1.0)
_POWER_RATIO = (0.0, 0.05, 0.1, 0.2, 0.3, 0.4, 0.5)
_POWER = (
    (1.0, 1.000, 0.999, 0.955, 0.819, 0.603, 0.370),
    (1.0, 0.998, 0.988, 0.906, 0.740, 0.528, 0.324),
    (1.0, 0.996, 0.973, 0.858, 0.675, 0.471, 0.289),
    (1.0, 0.989, 0.950, 0.808, 0.617, 0.424, 0.260),
    (1.0, 0.977, 0.922, 0.757, 0.565, 0.384, 0.234),
    (1.0, 0.958, 0.886, 0.705, 0.516, 0.347, 0.211),
    (1.0, 0.931, 0.842, 0.651, 0.469, 0.312, 0.189),
    (1.0, 0.895, 0.792, 0.595, 0.422, 0.278, 0.168),
)
_power_splines = CubicSpline(_POWER_RATIO, np.transpose(_POWER))


@WALLS.published(
    "tube-power-law",
    source=COMPUTED,
    where="computed: axisymmetric finite elements, creeping flow",
    regime="creeping flow, power law",
    valid={"flow_index": (0.3, 1.0), "ratio": (0.0, 0.5), "reynolds_unbounded": _CREEPING},
    note="Cubic in the ratio, linear in the flow index; absolute error 0.002. A flow index outside takes the value "
    "at the nearest end; beyond ratio 0.5 it is a power of the Newtonian value.",
)
def tube_power_law(ratio: FloatArray, flow_index: FloatArray) -> FloatArray:
    """Wall factor in creeping power-law flow, computed."""
    ratio, flow_index = np.broadcast_arrays(ratio, flow_index)
    rows = np.minimum(_power_splines(np.minimum(ratio, _POWER_RATIO[-1])), 1.0)
    return np.asarray(_between_rows(rows, flow_index, _FLOW_INDEX) ** _beyond_table(ratio))


@WALLS.published(
    "newton-1687",
    source="Newton (1687), Principia, book II",
    regime="Newton regime",
    valid={"ratio": (0.0, 0.8), "reynolds_unbounded": (1e3, 2e5)},
    note="Formula from memory. Values computed at Re 150 lie nearer to it than to munroe-1888.",
    confirmed=False,
)
def newton(ratio: FloatArray) -> FloatArray:
    """Wall factor at high Reynolds number."""
    return np.asarray((1 - ratio**2) * np.sqrt(1 - 0.5 * ratio**2))


@WALLS.published(
    "munroe-1888",
    source="Munroe (1888), Trans. Am. Inst. Min. Eng. 17",
    regime="Newton regime",
    valid={"ratio": (0.1, 0.8), "reynolds_unbounded": (1e3, 3e3)},
    note="Formula and citation from memory.",
    confirmed=False,
)
def munroe(ratio: FloatArray) -> FloatArray:
    """Wall factor at high Reynolds number, fitted to falling spheres."""
    return np.asarray(1 - ratio**1.5)
