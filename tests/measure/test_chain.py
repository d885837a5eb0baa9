from __future__ import annotations

import math
from dataclasses import replace
from itertools import pairwise

import numpy as np
import pytest

from settlelab.errors import SettlelabError
from settlelab.measure import Velocity, fluid_state
from settlelab.measure.chain import Bore, Fallen, Setup, bore_of, fallen, wall_excess
from settlelab.measure.particle import Grain, grain_of
from settlelab.physics.drag import drag_coefficient_from_velocity, generalised_reynolds
from settlelab.physics.rheology import Rheology
from settlelab.physics.walls import unbounded_velocity
from settlelab.study.model import Column, Fluid, Particle
from settlelab.units import Quantity

WIDE = Bore(math.inf, ())


def steady(value: float, u: float = 0.0) -> Velocity:
    return Velocity(value=value, u=u, fraction_of_terminal=1.0, first=0, last=100)


def measured(density: float, viscosity: float, *, u: float = 0.0) -> Fluid:
    typed = Quantity(density, u * density), Quantity(viscosity, u * viscosity)
    return Fluid(name="oil", liquid="measured", density=typed[0], viscosity=typed[1])


def setup_of(fluid: Fluid, bore: Bore = WIDE, *, scale_u: float = 0.0, clock_u: float = 0.0) -> Setup:
    return Setup(scale_u=scale_u, clock_u=clock_u, bore=bore, fluid=fluid_state(fluid))


def sphere(diameter: float, density: float) -> Grain:
    return grain_of(Particle(name="S", diameter=Quantity(diameter), density=Quantity(density)), diameter)


def test_reynolds_number_of_a_textbook_example() -> None:
    """Steel sphere of 0.4 mm in oil, 0.051 m/s: Re 1.667 (Coulson & Richardson vol. 2, example 3.1; from memory)."""
    found = fallen(steady(0.051), sphere(4e-4, 7870.0), setup_of(measured(820.0, 0.01)))
    assert found.reynolds.value == pytest.approx(1.667, abs=0.05)
    # the book's (R'/rho u^2) Re^2, which is Cd Re^2 / 2, is 24.2
    assert found.drag_coefficient.value * found.reynolds.value**2 / 2 == pytest.approx(24.2, abs=0.3)


def test_drag_coefficient_of_a_cutting_in_print() -> None:
    """0.25 in, 12 lbm/gal, 6 cP, relative density 2.7, 0.5166 ft/s: Re 240, Cd 2.935 (drag sheet, cv-fang-ex)."""
    fluid = measured(12 * 119.8264, 6e-3)
    cutting = sphere(0.25 * 0.0254, 2.7 * 8.33 * 119.8264)
    found = fallen(steady(0.5166 * 0.3048), cutting, setup_of(fluid))
    assert found.reynolds.value == pytest.approx(240, abs=0.5)
    assert found.drag_coefficient.value == pytest.approx(2.935, abs=0.01)


def test_wall_correction_in_creeping_flow() -> None:
    """Sphere in a tube, creeping flow, ratio 0.2: f = 0.59542 exactly (reference sheet, 4.1)."""
    fluid = measured(970.0, 60.0)
    found = fallen(steady(1e-4), sphere(4e-3, 2600.0), setup_of(fluid, Bore(0.02, ())))
    assert found.wall_factor.value == pytest.approx(0.59542, abs=1e-4)
    assert found.unbounded_velocity.value == pytest.approx(1e-4 / 0.59542, rel=2e-4)


@pytest.mark.parametrize(
    ("density", "viscosity", "uinf", "reynolds"), [(970.0, 0.373, 0.038, 1.5), (960.0, 0.058, 0.128, 31.9)]
)
def test_reynolds_numbers_of_ten_cate(density: float, viscosity: float, uinf: float, reynolds: float) -> None:
    """Re 1.5 and 31.9 on the unbounded velocities 0.038 and 0.128 m/s: ten Cate et al. (2002), table (from memory)."""
    found = fallen(steady(uinf), sphere(0.015, 1120.0), setup_of(measured(density, viscosity)))
    assert found.reynolds.value == pytest.approx(reynolds, rel=0.02)


GRAIN = Particle(name="A", mass=Quantity(88e-6, 0.4e-6), density=Quantity(2650.0, 12.0))
GLYCEROL = Fluid(
    name="glycerol",
    liquid="glycerol-water",
    temperature=Quantity(294.55, 0.2),
    mass_fraction=Quantity(0.62, 0.003),
)
ROUND = bore_of(Column(section="round", inner_diameter=Quantity(0.05, 0.0005)))


def by_monte_carlo(count: int) -> dict[str, np.ndarray]:
    """The whole measurement drawn anew, written out without the code under test."""
    rng = np.random.default_rng(20)
    state = fluid_state(GLYCEROL)
    fluid_density, rheology = state.draw(rng, count)
    velocity = rng.normal(0.17, 0.0004, count) * rng.normal(1, 1e-3, count) * rng.normal(1, 5e-4, count)
    mass, density = rng.normal(88e-6, 0.4e-6, count), rng.normal(2650.0, 12.0, count)
    diameter = np.cbrt(6 * mass / (np.pi * density))
    bore = rng.normal(0.05, 0.0005, count)
    unbounded, wall = unbounded_velocity(
        velocity, diameter=diameter, bore=bore, fluid_density=fluid_density, rheology=rheology
    )
    factor = wall.factor + rng.standard_normal(count) * wall.u
    unbounded = velocity / factor
    return {
        "velocity": velocity,
        "unbounded_velocity": unbounded,
        "wall_factor": factor,
        "reynolds": generalised_reynolds(unbounded, diameter=diameter, fluid_density=fluid_density, rheology=rheology),
        "drag_coefficient": drag_coefficient_from_velocity(
            unbounded, diameter=diameter, particle_density=density, fluid_density=fluid_density
        ),
    }


def test_propagation_agrees_with_monte_carlo() -> None:
    """JCGM 101, section 8: the law of propagation is good here if a Monte Carlo run gives the same."""
    setup = setup_of(GLYCEROL, ROUND, scale_u=1e-3, clock_u=5e-4)
    found = fallen(steady(0.17, 0.0004), grain_of(GRAIN, 4e-3), setup)
    for name, drawn in by_monte_carlo(20_000).items():
        estimate = getattr(found, name)
        assert float(np.mean(drawn)) == pytest.approx(estimate.value, abs=0.05 * estimate.u), name
        assert float(np.std(drawn)) == pytest.approx(estimate.u, rel=0.03), name


def test_the_budget_names_what_matters() -> None:
    setup = setup_of(GLYCEROL, ROUND, scale_u=1e-3, clock_u=5e-4)
    found = fallen(steady(0.17, 0.0004), grain_of(GRAIN, 4e-3), setup)
    assert set(found.velocity.shares) - {name for name, share in found.velocity.shares.items() if share == 0} == {
        "track",
        "scale",
        "clock",
    }
    largest = {name: max(shares, key=lambda source: shares[source]) for name, shares in shares_of(found).items()}
    assert largest["velocity"] == "track"
    assert largest["reynolds"] == "viscosity"
    for shares in shares_of(found).values():
        assert sum(shares.values()) == pytest.approx(1.0)


def shares_of(found: Fallen) -> dict[str, dict[str, float]]:
    names = ("velocity", "unbounded_velocity", "reynolds", "drag_coefficient")
    return {name: dict(getattr(found, name).shares) for name in names}


def test_density_counts_once_in_buoyancy_and_diameter() -> None:
    """Cd ~ d (rho_s - rho)/rho with d ~ rho_s^(-1/3): the two partly cancel; taken apart they would add up."""
    found = fallen(steady(0.17), grain_of(GRAIN, 4e-3), setup_of(measured(1155.0, 0.011)))
    relative = 12.0 / 2650.0 * (2650.0 / (2650.0 - 1155.0) - 1 / 3)
    share = found.drag_coefficient.shares["particle density"]
    u = math.sqrt(share) * found.drag_coefficient.u / found.drag_coefficient.value
    assert u == pytest.approx(relative, rel=1e-3)


def test_a_silhouette_and_a_velocity_share_one_scale() -> None:
    """Cd ~ d/V^2 ~ 1/scale where both come from the picture: 1 % of scale is 1 % of Cd, not 2.2 %."""
    grain = replace(grain_of(Particle(name="A", density=Quantity(2650.0)), 4e-3), effects=())
    found = fallen(steady(0.17), grain, setup_of(measured(1155.0, 0.011), scale_u=0.01))
    assert found.drag_coefficient.u / found.drag_coefficient.value == pytest.approx(0.01, rel=1e-3)


def test_an_unknown_density_leaves_the_reynolds_number() -> None:
    grain = grain_of(Particle(name="A", diameter=Quantity(4e-3)), 4e-3)
    found = fallen(steady(0.17, 1e-3), grain, setup_of(measured(1155.0, 0.011)))
    assert found.reynolds.value == pytest.approx(1155 * 0.17 * 4e-3 / 0.011)
    assert math.isnan(found.drag_coefficient.value)


def test_an_unknown_velocity_leaves_nothing() -> None:
    found = fallen(steady(math.nan, math.nan), sphere(4e-3, 2650.0), setup_of(measured(1155.0, 0.011), ROUND))
    values = (found.velocity, found.unbounded_velocity, found.wall_factor, found.reynolds, found.drag_coefficient)
    assert all(math.isnan(estimate.value) for estimate in values)


def test_apparent_viscosity_at_the_shear_rate_of_the_fall() -> None:
    state = fluid_state(measured(1000.0, 1.0))
    polymer = replace(state, rheology=Rheology(consistency=0.8, flow_index=0.6), effects=())
    setup = Setup(scale_u=0.0, clock_u=0.0, bore=WIDE, fluid=polymer)
    found = fallen(steady(0.2), sphere(4e-3, 2650.0), setup)
    assert found.viscosity.value == pytest.approx(0.8 * 50**-0.4)
    assert found.reynolds.value == pytest.approx(1000 * 0.2 * 4e-3 / found.viscosity.value)


def test_a_particle_larger_than_the_column() -> None:
    with pytest.raises(SettlelabError, match="60 mm does not fit into a column of 50 mm"):
        fallen(steady(0.17), sphere(0.06, 2650.0), setup_of(measured(1155.0, 0.011), ROUND))


def test_square_columns_have_an_equivalent_bore() -> None:
    """1.107 times the side (reference sheet, 4.3); both sides carry their uncertainty."""
    bore = bore_of(Column(section="rectangular", width=Quantity(0.1, 1e-3), depth=Quantity(0.1, 1e-3)))
    assert bore.diameter == pytest.approx(0.1107, rel=1e-3)
    assert math.hypot(*(effect.change["bore"] for effect in bore.effects)) < 1.107e-3


def test_walls_act_more_strongly_off_the_axis() -> None:
    """First coefficient 2.104 on the axis, 2.17 and 2.45 at 0.6 and 0.7 of the radius (reference sheet, 4.3)."""
    assert wall_excess(math.nan) == wall_excess(0.0) == wall_excess(0.5) == 0.0
    assert wall_excess(0.6) == pytest.approx(2.17 / 2.104 - 1)
    assert wall_excess(0.7) == pytest.approx(2.45 / 2.104 - 1)
    steps = [wall_excess(share) for share in np.linspace(0.55, 0.99, 45)]
    assert all(later > earlier for earlier, later in pairwise(steps))


def test_the_wall_factor_is_less_sure_off_the_axis() -> None:
    setup = setup_of(measured(970.0, 60.0), Bore(0.02, ()))
    near, on_axis = (fallen(steady(1e-4), sphere(2e-3, 2600.0), setup, off_axis=share) for share in (0.7, 0.0))
    loss = 1 - on_axis.wall_factor.value
    assert near.wall_factor.u == pytest.approx(math.hypot(on_axis.wall_factor.u, loss * (2.45 / 2.104 - 1)))
    assert near.wall_factor.value == on_axis.wall_factor.value
