from __future__ import annotations

import math

import pytest

from settlelab.measure.particle import Grain, grain_of
from settlelab.study.model import Particle
from settlelab.units import Quantity

MASS, DENSITY = Quantity(88e-6, 0.1e-6), Quantity(2650.0, 8.0)
AXES = {
    "long_axis": Quantity(5e-3, 2e-5),
    "intermediate_axis": Quantity(4e-3, 2e-5),
    "short_axis": Quantity(3e-3, 2e-5),
}


def changes(grain: Grain, source: str, of: str) -> float:
    return math.hypot(*(effect.change.get(of, 0.0) for effect in grain.effects if effect.source == source))


def test_the_most_trusted_route_is_taken() -> None:
    sphere = Quantity(4e-3, 5e-6)
    routes = {
        "typed": Particle(name="A", diameter=sphere, mass=MASS, density=DENSITY, **AXES),
        "mass and density": Particle(name="A", mass=MASS, density=DENSITY, **AXES),
        "calipers": Particle(name="A", mass=MASS, **AXES),
        "silhouette": Particle(name="A", density=DENSITY, long_axis=AXES["long_axis"]),
    }
    assert {route: grain_of(particle, 4.2e-3).diameter_from for route, particle in routes.items()} == {
        route: route for route in routes
    }


def test_weighed_diameter_and_its_uncertainty() -> None:
    """d = (6 m/(pi rho))^(1/3), u(d)/d = (1/3) sqrt((u_m/m)^2 + (u_rho/rho)^2): reference sheet, section 6."""
    grain = grain_of(Particle(name="A", mass=MASS, density=DENSITY), 4.2e-3)
    assert grain.diameter == pytest.approx((6 * 88e-6 / (math.pi * 2650)) ** (1 / 3))
    total = math.hypot(changes(grain, "size", "diameter"), changes(grain, "particle density", "diameter"))
    assert total / grain.diameter == pytest.approx(math.hypot(0.1 / 88, 8 / 2650) / 3, rel=1e-6)
    assert (grain.assumed, grain.doubts) == ((), ())


def test_heavier_means_smaller_where_the_mass_is_known() -> None:
    grain = grain_of(Particle(name="A", mass=MASS, density=DENSITY), 4.2e-3)
    (change,) = (effect.change for effect in grain.effects if effect.source == "particle density")
    assert change["particle_density"] > 0 > change["diameter"]


def test_calipers_carry_the_doubt_about_the_ellipsoid() -> None:
    grain = grain_of(Particle(name="A", density=DENSITY, **AXES), 4.2e-3)
    assert grain.diameter == pytest.approx((60e-9) ** (1 / 3))
    assert changes(grain, "size", "diameter") / grain.diameter == pytest.approx(0.05, rel=0.01)
    assert grain.assumed == (
        "particle A: volume not weighed; taken as that of the ellipsoid of its axes, ± 5 % in size",
    )


def test_a_silhouette_follows_the_scale() -> None:
    grain = grain_of(Particle(name="A", density=DENSITY), 4.2e-3)
    assert (grain.diameter, grain.silhouette) == (4.2e-3, True)
    assert changes(grain, "size", "diameter") == pytest.approx(0.12 * 4.2e-3)
    assert grain.assumed == ("particle A: size not measured; taken from its silhouette, ± 12 %",)


def test_descriptors_of_an_ellipsoid() -> None:
    """Surface of the (3, 2, 1) ellipsoid 48.8821 (reference sheet, section 6), hence its sphericity."""
    axes = {"long_axis": Quantity(6.0), "intermediate_axis": Quantity(4.0), "short_axis": Quantity(2.0)}
    grain = grain_of(Particle(name="A", **axes), 1.0)
    assert grain.sphericity == pytest.approx(4 * math.pi * 6 ** (2 / 3) / 48.8821, rel=1e-5)
    assert grain.sphericity_from == "ellipsoid of the axes"
    assert grain.corey_shape_factor == pytest.approx(2 / math.sqrt(24))
    assert (grain.flatness, grain.elongation) == pytest.approx((0.5, 2 / 3))


def test_a_typed_sphericity_counts_before_that_of_the_axes() -> None:
    grain = grain_of(Particle(name="A", sphericity=Quantity(0.77), **AXES), 1.0)
    assert (grain.sphericity, grain.sphericity_from) == (0.77, "typed")


def test_what_was_not_measured_stays_unknown() -> None:
    grain = grain_of(Particle(name="A", density=DENSITY), 4.2e-3)
    unknown = (grain.sphericity, grain.corey_shape_factor, grain.flatness, grain.elongation, grain.circularity)
    assert all(math.isnan(value) for value in unknown)


def test_density_of_a_weighed_sphere() -> None:
    sphere = Particle(name="S", diameter=Quantity(6e-3, 6e-6), mass=Quantity(250e-6, 0.25e-6))
    grain = grain_of(sphere, 6e-3)
    assert grain.density == pytest.approx(250e-6 / (math.pi / 6 * 6e-3**3))
    assert changes(grain, "size", "particle_density") / grain.density == pytest.approx(3e-3)
    assert changes(grain, "particle density", "particle_density") / grain.density == pytest.approx(1e-3)


def test_a_missing_density_is_told() -> None:
    grain = grain_of(Particle(name="A", mass=MASS), 4.2e-3)
    assert math.isnan(grain.density)
    assert grain.doubts == ("particle A: its density is missing, so there is no drag coefficient",)


def test_weight_and_calipers_that_contradict_each_other_are_told() -> None:
    ten_times = Quantity(880e-6, 1e-6)
    (doubt,) = grain_of(Particle(name="A", mass=ten_times, density=DENSITY, **AXES), 4.2e-3).doubts
    assert doubt == (
        "particle A: its axes give an equivalent diameter of 3.91 mm, mass and density one of 8.59 mm; check both"
    )
