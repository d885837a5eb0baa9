"""The drag laws on board: `DRAG`, and the decorator that enters one.

A new law is one decorated function in one of the modules beside this one; the inputs it needs beyond the Reynolds
number are its parameters. A law in print gives either the drag coefficient by `reynolds`, or the Reynolds number of the
terminal velocity by `dstar`, the dimensionless diameter Ar^(1/3) with Ar = g |rho_s - rho| rho d^3 / mu^2. Both say the
same, because Cd Re^2 = 4/3 Ar at terminal velocity, and both are used in the same way. `reynolds`, `dstar` and the
drag coefficient are built on the diameter that `diameter` names.
"""

from __future__ import annotations

from collections.abc import Collection
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from settlelab.physics.constants import BoolArray, FloatArray
from settlelab.physics.registry import Entry, Registry
from settlelab.physics.roots import bracketed_root

# What the shape descriptors are, in the words of the bench; the keys are the only names that a law may ask for.
DESCRIPTORS = {
    "sphericity": "surface of the volume-equivalent sphere over the surface of the particle (Wadell)",
    "corey_shape_factor": "short axis over the root of long times intermediate axis",
    "flatness": "short over intermediate axis",
    "elongation": "intermediate over long axis",
    "circularity": "root of 4 pi area over perimeter squared, of the silhouette",
    "density_ratio": "particle density over fluid density",
    "projected_area_ratio": "area of the silhouette seen along the fall over the cross-section of the "
    "volume-equivalent sphere; a camera at the side of the column does not see it",
    "projected_circularity": "circularity of the silhouette seen along the fall, of a smooth outline",
    "largest_circularity": "circularity of the largest silhouette of the particle, of a smooth outline",
    "powers_roundness": "roundness by eye on the scale of Powers, 0 (very angular) to 6 (perfectly round)",
}


# Descriptors that follow from other measurements: columns of a bench table that give them, by one route or another.
_AXES = ("long_axis", "intermediate_axis", "short_axis")
DERIVED = {
    "sphericity": (_AXES,),  # as that of the ellipsoid
    "corey_shape_factor": (_AXES,),
    "flatness": (_AXES,),
    "elongation": (_AXES,),
    "density_ratio": (("density",), ("particle_density", "fluid_density")),
}

_FLOW = ("reynolds", "dstar")  # parameters that are no descriptors
_CREEPING = 1e-7  # Reynolds number below which the flow is creeping beyond any doubt


@dataclass(frozen=True, slots=True, kw_only=True)
class Method(Entry):
    """A published drag law."""

    diameter: str  # what Re and Cd are built on: "sphere" or "volume-equivalent"

    @property
    def needs(self) -> tuple[str, ...]:
        """The shape descriptors that the law asks for beyond the Reynolds number."""
        return tuple(name for name in self.parameters if name not in _FLOW)

    @property
    def takes(self) -> str:
        """What the formula in print takes: "reynolds" for Cd(Re), "dstar" for Re(d*) at terminal velocity."""
        return next(name for name in _FLOW if name in self.parameters)

    def drag_coefficient(self, reynolds: ArrayLike, **descriptors: ArrayLike) -> FloatArray:
        """Drag coefficient [-] at a Reynolds number above 0; descriptors broadcast, those not needed are passed over.

        Outside the validity range the value of the formula is returned all the same; `within` marks it. Below Re 1e-7
        Cd Re is kept, so that no formula is asked where its powers overflow. A law in d* is solved for the d* of this
        Reynolds number, to 1e-12.

        Raises
        ------
        ValueError
            A descriptor that the law needs was not given, or arrays that do not broadcast.
        """
        given = np.asarray(reynolds, dtype=np.float64)
        inside = np.maximum(given, _CREEPING)
        if self.takes == "reynolds":
            cd = self.evaluate(reynolds=inside, **descriptors)
        else:
            cd = 4 / 3 * self.dstar(inside, **descriptors) ** 3 / inside**2
        return np.asarray(cd * (inside / given))

    def dstar(self, reynolds: ArrayLike, **descriptors: ArrayLike) -> FloatArray:
        """Dimensionless diameter Ar^(1/3) [-] of the particle that falls at this Reynolds number under the law.

        A law in d* is solved for it, among drag coefficients of a twentieth to 1e4 times 24/Re + 0.4.

        Raises
        ------
        ValueError
            A descriptor that the law needs was not given.
        """
        if self.takes == "reynolds":
            cd = self.drag_coefficient(reynolds, **descriptors)
            return np.cbrt(0.75 * cd * np.square(reynolds))
        shapes = self._taken(self.needs, descriptors)
        full = self._common_shape({"reynolds": np.asarray(reynolds, dtype=np.float64), **shapes})
        re = np.broadcast_to(np.asarray(reynolds, dtype=np.float64), full)
        usual = np.log(18 * re + 0.3 * re**2) / 3

        def excess(log_dstar: FloatArray) -> FloatArray:
            with np.errstate(divide="ignore"):
                return np.log(self.evaluate(dstar=np.exp(log_dstar), **shapes) / re)

        return np.exp(bracketed_root(excess, usual - np.log(20) / 3, usual + np.log(1e4) / 3))

    def within(self, **inputs: ArrayLike) -> BoolArray:
        """Where every range that the source states is kept, at a Reynolds number; an unknown (nan) input keeps none.

        Only stated ranges are checked: a law for spheres states none for shape, and `diameter` tells that it is one.

        Raises
        ------
        ValueError
            An input of the formula, or a quantity with a stated range, was not given.
        """
        if self.takes == "dstar" and "dstar" not in inputs:
            self._taken(("reynolds",), inputs)
            inputs = {**inputs, "dstar": self.dstar(**inputs)}
        return Entry.within(self, **inputs)


DRAG: Registry[Method] = Registry(Method)
published = DRAG.published


def available_descriptors(columns: Collection[str]) -> dict[str, str]:
    """Descriptors that a bench table gives, and how each is found.

    Parameters
    ----------
    columns : collection of str
        Names of the columns that are filled in, such as `long_axis`. A particle table with `density` is taken to be
        used with a fluid of known density.

    Returns
    -------
    dict of str
        Descriptor -> "typed", or the columns that it is computed from.
    """
    found = {name: "typed" for name in DESCRIPTORS if name in columns}
    for name, routes in DERIVED.items():
        for route in routes:
            if all(column in columns for column in route):
                found.setdefault(name, "from " + ", ".join(column.replace("_", " ") for column in route))
    return found


def usable_methods(available: Collection[str]) -> tuple[tuple[Method, ...], dict[str, str]]:
    """The drag laws that the available descriptors allow, and for each law left out the reason.

    Parameters
    ----------
    available : collection of str
        Names of descriptors that are known, as in `DESCRIPTORS`.

    Returns
    -------
    usable : tuple of Method
    left_out : dict of str
        Reason by the name of the law.
    """
    missing = {name: [need for need in method.needs if need not in available] for name, method in DRAG.items()}
    usable = tuple(DRAG[name] for name, needs in missing.items() if not needs)
    left_out = {name: f"needs {' and '.join(needs)}" for name, needs in missing.items() if needs}
    return usable, left_out
