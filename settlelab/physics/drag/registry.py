"""The drag laws on board: `DRAG`, and the decorator that enters one.

A new law is one decorated function in one of the modules beside this one; the inputs it needs beyond the Reynolds
number are its parameters. `reynolds` and the returned drag coefficient are built on the diameter that `diameter` names.
"""

from __future__ import annotations

from collections.abc import Collection
from dataclasses import dataclass

from numpy.typing import ArrayLike

from settlelab.physics.constants import FloatArray
from settlelab.physics.registry import Entry, Registry

# What the shape descriptors are, in the words of the bench; the keys are the only names that a law may ask for.
DESCRIPTORS = {
    "sphericity": "surface of the volume-equivalent sphere over the surface of the particle (Wadell)",
    "corey_shape_factor": "short axis over the root of long times intermediate axis",
    "flatness": "short over intermediate axis",
    "elongation": "intermediate over long axis",
    "circularity": "root of 4 pi area over perimeter squared, of the silhouette",
    "density_ratio": "particle density over fluid density",
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


@dataclass(frozen=True, slots=True, kw_only=True)
class Method(Entry):
    """A published drag law."""

    diameter: str  # what Re and Cd are built on: "sphere" or "volume-equivalent"

    @property
    def needs(self) -> tuple[str, ...]:
        """The shape descriptors that the law asks for beyond the Reynolds number."""
        return tuple(name for name in self.parameters if name != "reynolds")

    def drag_coefficient(self, reynolds: ArrayLike, **descriptors: ArrayLike) -> FloatArray:
        """Drag coefficient [-] at a Reynolds number above 0; descriptors broadcast, those not needed are passed over.

        Outside the validity range the value of the formula is returned all the same; `within` marks it.

        Raises
        ------
        ValueError
            A descriptor that the law needs was not given.
        """
        return self.evaluate(reynolds=reynolds, **descriptors)


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
