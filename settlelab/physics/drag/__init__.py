"""Drag laws and terminal velocity.

In: Reynolds numbers and shape descriptors, or the properties of particle and fluid. Out: drag coefficients and
terminal velocities in unbounded fluid. `DRAG` holds the published laws, `MUD` those made for one kind of mud; importing
the modules below fills them.
"""

from __future__ import annotations

from settlelab.physics.drag import (
    chips,
    explicit,
    nonspherical,
    sediment,
    silhouettes,
    sphere_crisis,
    sphere_fits,
    spheres,
)
from settlelab.physics.drag.many import velocities_of_many
from settlelab.physics.drag.mud import MUD, MudMethod, mud_terminal_velocity, wilson_terminal_velocity
from settlelab.physics.drag.nonnewtonian import (
    CRITICAL_YIELD_NUMBER,
    creeping_correction,
    generalised_reynolds,
    held,
    power_law_correction,
)
from settlelab.physics.drag.nonspherical import ganser_factors, scaled_drag
from settlelab.physics.drag.registry import (
    DERIVED,
    DESCRIPTORS,
    DRAG,
    Method,
    available_descriptors,
    published,
    usable_methods,
)
from settlelab.physics.drag.solver import (
    DragLaw,
    Settling,
    drag_coefficient_from_velocity,
    drag_in_fluid,
    terminal_velocity,
)
from settlelab.physics.drag.spheres import SPHERE_LAW_U

__all__ = [
    "CRITICAL_YIELD_NUMBER",
    "DERIVED",
    "DESCRIPTORS",
    "DRAG",
    "MUD",
    "SPHERE_LAW_U",
    "DragLaw",
    "Method",
    "MudMethod",
    "Settling",
    "available_descriptors",
    "chips",
    "creeping_correction",
    "drag_coefficient_from_velocity",
    "drag_in_fluid",
    "explicit",
    "ganser_factors",
    "generalised_reynolds",
    "held",
    "mud_terminal_velocity",
    "nonspherical",
    "power_law_correction",
    "published",
    "scaled_drag",
    "sediment",
    "silhouettes",
    "sphere_crisis",
    "sphere_fits",
    "spheres",
    "terminal_velocity",
    "usable_methods",
    "velocities_of_many",
    "wilson_terminal_velocity",
]
