"""Size, density and shape of a particle from what the bench measured, and from its silhouette where it did not."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass, field

from settlelab.measure.propagation import Effect
from settlelab.physics import shape
from settlelab.study.model import Particle
from settlelab.units import Quantity

__all__ = ["Grain", "grain_of"]

# How far the diameter by a route may be from the volume-equivalent one of an irregular grain, relative and k = 1.
# Ellipsoid of the axes: angular grains fill it more or less. Silhouette: a grain that falls broadside with a Corey
# shape factor of 0.5 to 1 shows a diameter up to 26 % too large (rectangular over that range).
ROUTE_U = {"calipers": 0.05, "silhouette": 0.12}
TOLD_APART = 0.25  # relative difference between weighed and calipered diameter from which it is told


@dataclass(frozen=True, slots=True, kw_only=True)
class Grain:
    """A particle as the fall sees it: lengths in m, densities in kg/m3, nan where unknown.

    `effects` are changes of `diameter` and `particle_density` by the sources "size" and "particle density", and
    `silhouette` tells that the diameter follows the scale of the recording.
    """

    diameter: float
    diameter_from: str
    density: float
    effects: tuple[Effect, ...]
    silhouette: bool = False
    sphericity: float = math.nan
    sphericity_from: str = ""
    corey_shape_factor: float = math.nan
    flatness: float = math.nan
    elongation: float = math.nan
    circularity: float = math.nan  # typed
    descriptors: Mapping[str, float] = field(default_factory=dict)
    assumed: tuple[str, ...] = ()
    doubts: tuple[str, ...] = ()


def grain_of(particle: Particle, projected_diameter: float) -> Grain:
    """Equivalent diameter by the most trusted route that is open, density and shape descriptors.

    In order of trust: a diameter typed for a sphere, mass and density, the ellipsoid of three caliper axes, the
    silhouette. Axes and silhouette carry a doubt of 5 % and 12 % (k = 1) beyond what was measured.

    Parameters
    ----------
    particle : Particle
        As typed; axes in order.
    projected_diameter : float
        Diameter of the circle of equal area of its silhouette [m].
    """
    diameter, route, of_size = _size(particle, projected_diameter)
    density, effects = _density(particle, diameter, route, of_size)
    sphericity, sphericity_from = _sphericity(particle)
    a, b, c = particle.long_axis, particle.intermediate_axis, particle.short_axis
    sphere = particle.diameter is not None
    return Grain(
        diameter=diameter,
        diameter_from=route,
        density=density,
        effects=effects,
        silhouette=route == "silhouette",
        sphericity=sphericity,
        sphericity_from=sphericity_from,
        corey_shape_factor=float(shape.corey_shape_factor(a.value, b.value, c.value))
        if a and b and c
        else _one(sphere),
        flatness=float(shape.flatness(b.value, c.value)) if b and c else _one(sphere),
        elongation=float(shape.elongation(a.value, b.value)) if a and b else _one(sphere),
        circularity=particle.circularity.value if particle.circularity else math.nan,
        descriptors=particle.descriptors,
        assumed=_assumed(particle, route),
        doubts=_doubts(particle, diameter, density),
    )


def _one(sphere: bool) -> float:
    return 1.0 if sphere else math.nan


def _axes(particle: Particle) -> tuple[Quantity, Quantity, Quantity] | None:
    axes = (particle.long_axis, particle.intermediate_axis, particle.short_axis)
    long, intermediate, short = axes
    return (long, intermediate, short) if long and intermediate and short else None


def _size(particle: Particle, projected_diameter: float) -> tuple[float, str, tuple[Effect, ...]]:
    """Diameter, the route it was found by, and the effects of what was measured for it."""
    if particle.diameter is not None:
        return particle.diameter.value, "typed", (Effect("size", {"diameter": particle.diameter.u}),)
    mass, density = particle.mass, particle.density
    if mass is not None and density is not None:
        diameter = float(shape.diameter_from_mass(mass.value, density.value))
        return diameter, "mass and density", (Effect("size", {"diameter": diameter * mass.u / (3 * mass.value)}),)
    if (axes := _axes(particle)) is not None:
        diameter = float(shape.diameter_from_axes(*(axis.value for axis in axes)))
        relative = [axis.u / (3 * axis.value) for axis in axes] + [ROUTE_U["calipers"]]
        return diameter, "calipers", tuple(Effect("size", {"diameter": diameter * u}) for u in relative)
    effect = Effect("size", {"diameter": projected_diameter * ROUTE_U["silhouette"]})
    return projected_diameter, "silhouette", (effect,)


def _density(
    particle: Particle, diameter: float, route: str, of_size: tuple[Effect, ...]
) -> tuple[float, tuple[Effect, ...]]:
    """Density, and the effects on size and density together: where one made the other, they move together."""
    if particle.density is not None:
        density, u = particle.density.value, particle.density.u
        change = {"particle_density": u}
        if route == "mass and density":
            change["diameter"] = -diameter * u / (3 * density)
        return density, (*of_size, Effect("particle density", change))
    if particle.diameter is not None and particle.mass is not None:
        density = 6 * particle.mass.value / (math.pi * diameter**3)
        u, u_mass = particle.diameter.u, particle.mass.u
        by_size = Effect("size", {"diameter": u, "particle_density": -3 * density * u / diameter})
        by_mass = Effect("particle density", {"particle_density": density * u_mass / particle.mass.value})
        return density, (by_size, by_mass)
    return math.nan, of_size


def _sphericity(particle: Particle) -> tuple[float, str]:
    if particle.sphericity is not None:
        return particle.sphericity.value, "typed"
    if particle.diameter is not None:
        return 1.0, "typed"  # a diameter is typed for spheres only
    if (axes := _axes(particle)) is not None:
        return float(shape.ellipsoid_sphericity(*(axis.value for axis in axes))), "ellipsoid of the axes"
    return math.nan, ""


def _assumed(particle: Particle, route: str) -> tuple[str, ...]:
    if route == "calipers":
        return (
            f"particle {particle.name}: volume not weighed; taken as that of the ellipsoid of its axes, ± 5 % in size",
        )
    if route == "silhouette":
        return (f"particle {particle.name}: size not measured; taken from its silhouette, ± 12 %",)
    return ()


def _doubts(particle: Particle, diameter: float, density: float) -> tuple[str, ...]:
    told = []
    if math.isnan(density):
        told.append(f"particle {particle.name}: its density is missing, so there is no drag coefficient")
    if (axes := _axes(particle)) is not None:
        calipered = float(shape.diameter_from_axes(*(axis.value for axis in axes)))
        if abs(calipered / diameter - 1) > TOLD_APART:
            told.append(
                f"particle {particle.name}: its axes give an equivalent diameter of {1e3 * calipered:.3g} mm, "
                f"mass and density one of {1e3 * diameter:.3g} mm; check both"
            )
    return tuple(told)
