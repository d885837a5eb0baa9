"""Older fits of the wall factor of a round tube, to compare with; the chain of `wall_factor` uses none of them."""

from __future__ import annotations

import numpy as np

from settlelab.physics.constants import FloatArray
from settlelab.physics.wall_methods import WALLS


@WALLS.published(
    "ladenburg-1907",
    source="Ladenburg (1907), Ann. Phys. 327, 287-308, and 328, 447-458",
    regime="creeping flow",
    valid={"ratio": (0.0, 0.1), "reynolds_unbounded": (0.0, 0.1)},
    note="Of history: the coefficient 2.4 overcorrects, 2.104 is exact. The range is ours.",
)
def ladenburg(ratio: FloatArray) -> FloatArray:
    """Wall factor in creeping flow, first estimate."""
    return 1 / (1 + 2.4 * ratio)


@WALLS.published(
    "francis-1933",
    source="Francis (1933), Physics 4, 403-406",
    regime="creeping flow",
    valid={"ratio": (0.0, 0.9), "reynolds_unbounded": (0.0, 0.1)},
    note="From memory; 0.7, 5 and 10 % above the exact factor at ratio 0.1, 0.3 and 0.5.",
    confirmed=False,
)
def francis(ratio: FloatArray) -> FloatArray:
    """Wall factor in creeping flow, fitted to falling balls."""
    return np.asarray(((1 - ratio) / (1 - 0.475 * ratio)) ** 4)


@WALLS.published(
    "difelice-1996",
    source="Di Felice (1996), Int. J. Multiphase Flow 22, 527-533",
    regime="any Reynolds number",
    valid={"ratio": (0.0, 0.9), "reynolds_unbounded": (0.0, 1e5)},
    note="From memory; right at both ends, but 12 % low at Re 10 and ratio 0.1, 18 % at 0.2, against computed "
    "values: not to be used for a correction. The limits are ours.",
    confirmed=False,
)
def difelice(ratio: FloatArray, reynolds_unbounded: FloatArray) -> FloatArray:
    """Wall factor from creeping flow to the Newton regime."""
    inertia = 0.1 * reynolds_unbounded
    power = (3.3 + 0.85 * inertia) / (1 + inertia)  # from (3.3 - m)/(m - 0.85) = inertia
    return np.asarray(((1 - ratio) / (1 - 0.33 * ratio)) ** power)
