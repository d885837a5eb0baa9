from __future__ import annotations

import math

import pandas as pd
import pytest

from settlelab.measure import FluidState, e_n
from settlelab.measure.chain import Bore, Setup
from settlelab.measure.controls import CONTROL_COLUMNS, chain_verdict, expected_velocity
from settlelab.measure.particle import Grain, grain_of
from settlelab.physics.rheology import Rheology
from settlelab.study.model import Particle
from settlelab.units import Quantity

WATER = FluidState(name="water", density=997.05, rheology=Rheology(consistency=8.9e-7 * 997.05), effects=())


def setup_in(fluid: FluidState, bore: float = math.inf) -> Setup:
    return Setup(scale_u=0.0, clock_u=0.0, bore=Bore(bore, ()), fluid=fluid)


def sphere(diameter: float, density: float, u: float = 0.0) -> Grain:
    return grain_of(Particle(name="S", diameter=Quantity(diameter, u), density=Quantity(density)), diameter)


@pytest.mark.parametrize(
    ("diameter", "density_ratio", "velocity"), [(5e-4, 2.56, 0.0741), (1.5e-3, 2.56, 0.218), (8e-4, 7.71, 0.316)]
)
def test_measured_spheres_in_water(diameter: float, density_ratio: float, velocity: float) -> None:
    """Mordant & Pinton (2000), Eur. Phys. J. B 18, 343: measured terminal velocities, as in reference sheet, 5."""
    expected = expected_velocity(sphere(diameter, density_ratio * WATER.density), setup_in(WATER))
    assert velocity == pytest.approx(expected.value, abs=3 * expected.u)


def test_uncertainty_of_the_drag_law() -> None:
    """2.5 % in Cd is 2.5 % in velocity where Stokes' law holds, 1.25 % where Cd is constant."""
    oil = FluidState(name="oil", density=970.0, rheology=Rheology(consistency=60.0), effects=())
    creeping = expected_velocity(sphere(4e-3, 2600.0), setup_in(oil))
    fast = expected_velocity(sphere(0.03, 7800.0), setup_in(WATER))
    assert creeping.u / creeping.value == pytest.approx(0.025, rel=0.01)
    assert fast.u / fast.value == pytest.approx(0.0125, rel=0.05)
    assert fast.shares == pytest.approx({"size": 0, "particle density": 0, "walls": 0, "drag law": 1})


def test_in_power_law_fluid_the_law_is_less_sure() -> None:
    oil = FluidState(name="oil", density=970.0, rheology=Rheology(consistency=60.0), effects=())
    polymer = FluidState(name="gel", density=970.0, rheology=Rheology(consistency=60.0, flow_index=0.6), effects=())
    newtonian, power_law = (expected_velocity(sphere(4e-3, 2600.0), setup_in(fluid)) for fluid in (oil, polymer))
    assert power_law.u / power_law.value > 1.3 * newtonian.u / newtonian.value


def test_walls_slow_the_expected_fall() -> None:
    """f = 0.59542 at a fifth of the bore in creeping flow (reference sheet, 4.1)."""
    oil = FluidState(name="oil", density=970.0, rheology=Rheology(consistency=60.0), effects=())
    free, walled = (expected_velocity(sphere(4e-3, 2600.0), setup_in(oil, bore)) for bore in (math.inf, 0.02))
    assert walled.value / free.value == pytest.approx(0.59542, abs=1e-3)


def test_diameter_enters_twice() -> None:
    """V ~ d^2 in Stokes' law: 1 % of diameter is 2 % of velocity."""
    oil = FluidState(name="oil", density=970.0, rheology=Rheology(consistency=60.0), effects=())
    found = expected_velocity(sphere(4e-3, 2600.0, u=4e-5), setup_in(oil))
    assert math.sqrt(found.shares["size"]) * found.u / found.value == pytest.approx(0.02, rel=0.01)


def test_e_n_by_its_definition() -> None:
    """ISO 13528: (x - X)/sqrt(U_x^2 + U_X^2) with expanded uncertainties."""
    assert e_n(10.5, 10.0, 0.3, 0.4) == pytest.approx(1.0)
    assert e_n(9.0, 10.0, 0.3, 0.4) == pytest.approx(-2.0)


def controls(*pairs: tuple[float, float]) -> pd.DataFrame:
    rows = [
        (n, "a1.mp4", f"S-{n}", 0.1, 0.001, 0.1 * (1 + deviation), 0.001, en, abs(en) <= 1)
        for n, (deviation, en) in enumerate(pairs, start=1)
    ]
    return pd.DataFrame(rows, columns=list(CONTROL_COLUMNS))


@pytest.mark.parametrize(
    ("pairs", "sentence"),
    [
        ([], "no control sphere was measured: scale, clock, fluid and wall correction are not checked together"),
        ([(0.01, 0.3)], "the one control drop agrees with the expected velocity (|E_n| 0.30)"),
        (
            [(0.01, 0.3), (-0.02, -0.6)],
            "all 2 control drops agree with the expected velocities (largest |E_n| 0.60)",
        ),
        (
            [(0.03, 0.9), (0.05, 1.4)],
            "1 of 2 control drops does not agree with the expected velocity (largest |E_n| 1.40); all are too fast, by "
            "4.0 % on average: check scale, clock and viscosity, which they share",
        ),
        (
            [(-0.06, -1.7), (0.05, 1.4)],
            "2 of 2 control drops do not agree with the expected velocity (largest |E_n| 1.70), some too fast and "
            "some too slow: check the spheres themselves and their order of release",
        ),
    ],
)
def test_what_the_control_drops_say(pairs: list[tuple[float, float]], sentence: str) -> None:
    assert chain_verdict(controls(*pairs)) == sentence
