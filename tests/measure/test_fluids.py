from __future__ import annotations

import math
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from settlelab.errors import SettlelabError
from settlelab.measure import FluidState, fluid_state
from settlelab.measure.fluids import PROPERTIES
from settlelab.study.model import Fluid, ViscometerReadings
from settlelab.units import Quantity

GLYCEROL = Fluid(
    name="glycerol",
    liquid="glycerol-water",
    temperature=Quantity(293.15, 0.2),
    mass_fraction=Quantity(0.5, 0.003),
)
WATER = Fluid(name="water", liquid="water", temperature=Quantity(293.15, 0.1))


def relative_u(state: FluidState, source: str) -> float:
    """Relative uncertainty of the viscosity by one source."""
    return math.hypot(*(e.change.get("log_consistency", 0.0) for e in state.effects if e.source == source))


def test_water_at_20_degrees() -> None:
    """998.2067 kg/m3 (Tanaka et al. 2001) and 1.0016 mPa s (ISO/TR 3666); -2.45 %/K by the reference sheet, 7.1."""
    state = fluid_state(WATER)
    assert state.density == pytest.approx(998.2067, abs=1e-4)
    assert float(state.rheology.viscosity(1.0)) == pytest.approx(1.0016e-3, abs=5e-8)
    assert relative_u(state, "temperature") == pytest.approx(0.1 * 0.0245, rel=0.02)
    assert relative_u(state, "viscosity") == pytest.approx(0.0017)


def test_glycerol_water_with_both_its_uncertainties() -> None:
    """1126.23 kg/m3 (Volk & Kähler 2018); -3.8 %/K at 50 % by mass and 2 % for the equation (reference sheet, 7)."""
    state = fluid_state(GLYCEROL)
    assert state.density == pytest.approx(1126.23, abs=0.01)
    assert float(state.rheology.viscosity(1.0)) == pytest.approx(6.00e-3, rel=0.03)  # Segur & Oberstar 1951
    assert relative_u(state, "temperature") == pytest.approx(0.2 * 0.038, rel=0.03)
    assert relative_u(state, "viscosity") == pytest.approx(0.02)
    # from 40 to 60 % the table of Segur & Oberstar goes from 3.72 to 10.8: 5.3 % per percent on average
    assert relative_u(state, "mass fraction") == pytest.approx(0.3 * 0.053, rel=0.15)


def test_temperature_moves_density_and_viscosity_together() -> None:
    covariance = fluid_state(replace(WATER, temperature=Quantity(293.15, 1.0))).covariance
    correlation = covariance[0, 1] / math.sqrt(covariance[0, 0] * covariance[1, 1])
    assert correlation > 0.99  # both fall with temperature, and nothing else is uncertain by as much


def test_typed_properties() -> None:
    state = fluid_state(
        Fluid(name="oil", liquid="measured", density=Quantity(970.0, 0.5), viscosity=Quantity(0.4, 0.01))
    )
    assert (state.density, state.density_u) == (970.0, 0.5)
    assert relative_u(state, "viscosity") == pytest.approx(0.025)
    assert state.assumed == ()


def test_what_is_computed_is_told_as_assumed() -> None:
    assert fluid_state(WATER).assumed == (
        'fluid "water": density not measured; computed for water by tanaka-2001',
        'fluid "water": viscosity not measured; computed for water by iapws-sr6-08',
    )


def test_outside_the_range_of_an_equation() -> None:
    state = fluid_state(replace(GLYCEROL, temperature=Quantity(313.15, 0.2)))
    assert state.doubts == ('fluid "glycerol": density by volk-kaehler-2018 outside the range it is made for',)


def test_pure_glycerol_keeps_its_uncertainty() -> None:
    """Above 95 % each percent of water lowers the viscosity by about 20 % (reference sheet, 7.2)."""
    state = fluid_state(replace(GLYCEROL, mass_fraction=Quantity(1.0, 0.002)))
    assert relative_u(state, "mass fraction") == pytest.approx(0.2 * 0.2, rel=0.25)


def readings(stress: np.ndarray, rate: np.ndarray, u: np.ndarray) -> Fluid:
    table = ViscometerReadings(file=Path("viscometer.csv"), shear_rate=rate, shear_stress=stress, u_shear_stress=u)
    return Fluid(name="polymer", liquid="measured", density=Quantity(1006.0, 0.5), readings=table)


RATE = np.array([5.1, 10.2, 51.0, 102.0, 170.0, 340.0, 511.0, 1021.0])


def test_a_flow_curve_from_readings() -> None:
    stress = 0.8 * RATE**0.6
    noisy = stress * (1 + 0.01 * np.random.default_rng(1).standard_normal(len(RATE)))
    state = fluid_state(replace(readings(noisy, RATE, 0.01 * stress), rheology="power-law"))
    density, rheology = state.draw(np.random.default_rng(2), 20_000)
    consistency, flow_index, _ = rheology.arrays()
    assert np.std(density) == pytest.approx(0.5, rel=0.02)
    assert np.corrcoef(np.log(consistency), flow_index)[0, 1] < -0.8  # strongly negative (reference sheet, 7.3)
    assert float(np.mean(flow_index)) == pytest.approx(0.6, abs=3 * float(np.std(flow_index)))
    # K and n together give the stress in the middle of the readings to better than one reading
    assert np.std(rheology.shear_stress(80.0)) / np.mean(rheology.shear_stress(80.0)) < 0.005
    drawn = np.cov(np.vstack([np.log(consistency), flow_index]))
    assert drawn == pytest.approx(state.covariance[1:3, 1:3], rel=0.05)


def test_the_best_model_is_told() -> None:
    stress = 2.0 + 0.02 * RATE
    state = fluid_state(readings(stress, RATE, 0.01 * stress))
    assert state.assumed == ('fluid "polymer": flow curve from viscometer.csv; bingham fits it best',)


def test_readings_that_scatter_widen_the_flow_curve_and_are_doubted() -> None:
    stress = 0.8 * RATE**0.6
    scattered = stress * (1 + 0.04 * np.array([1, -1, 1, -1, -1, 1, -1, 1]))
    calm = fluid_state(replace(readings(stress, RATE, 0.01 * stress), rheology="power-law"))
    wild = fluid_state(replace(readings(scattered, RATE, 0.01 * stress), rheology="power-law"))
    assert wild.covariance[2, 2] > 9 * calm.covariance[2, 2]
    assert wild.doubts[0].startswith('fluid "polymer": viscometer readings scatter about the power-law curve')
    assert calm.doubts == ()


@pytest.mark.parametrize(
    ("fluid", "message"),
    [
        (replace(WATER, temperature=None), 'fluid "water": its temperature is missing'),
        (replace(GLYCEROL, mass_fraction=None), 'fluid "glycerol": its mass fraction is missing'),
        (Fluid(name="oil", liquid="measured", viscosity=Quantity(0.4)), 'fluid "oil": its density is missing'),
        (
            Fluid(name="oil", liquid="measured", density=Quantity(970.0)),
            'fluid "oil": its viscosity or a table of viscometer readings is missing',
        ),
    ],
)
def test_what_is_missing_is_named(fluid: Fluid, message: str) -> None:
    with pytest.raises(SettlelabError, match=message):
        fluid_state(fluid)


def test_draws_follow_the_covariance() -> None:
    state = fluid_state(GLYCEROL)
    density, rheology = state.draw(np.random.default_rng(3), 50_000)
    drawn = np.cov(np.vstack([density, np.log(rheology.consistency)]))
    assert drawn == pytest.approx(state.covariance[:2, :2], rel=0.03)
    assert len(PROPERTIES) == len(state.covariance)
