"""Water and glycerol-water against tables, standards and the `iapws` package."""

from __future__ import annotations

import iapws
import numpy as np
import pytest

from settlelab.physics.liquids import (
    LIQUIDS,
    LiquidProperty,
    glycerol_water_density,
    glycerol_water_viscosity,
    water_density,
    water_viscosity,
)
from tests.physics.outside import inputs, published

ROWS = published("liquids.csv")


@pytest.mark.parametrize("row", ROWS, ids=lambda row: f"{row['method']}-{row['temperature']}-{row['mass_fraction']}")
def test_value_from_outside(row: dict[str, str]) -> None:
    value = float(row["value"])
    found = LIQUIDS[row["method"]].evaluate(**inputs(row, "value"))
    allowed = float(row["half_digit"]) + float(row["allowance"]) * value
    assert found == pytest.approx(value, abs=allowed), row["source"]


def test_every_equation_has_a_value_from_outside() -> None:
    assert set(LIQUIDS) == {row["method"] for row in ROWS}


@pytest.mark.parametrize("celsius", [1, 10, 20, 25, 35])
def test_water_against_iapws(celsius: float) -> None:
    """IAPWS-95 density and R12-08 viscosity by the package; stated agreement 1e-6 and 4e-5."""
    temperature = celsius + 273.15
    water = iapws.IAPWS95(T=temperature, P=0.101325)
    assert water_density(temperature) == pytest.approx(water.rho, rel=1e-6)
    assert water_viscosity(temperature) == pytest.approx(water.mu, rel=5e-5)


def test_glycerol_water_without_glycerol_is_water() -> None:
    """Within the stated standard uncertainties (cheng-2008 lies 0.33 % high at 20 °C, says the reference sheet)."""
    temperature = np.linspace(288.15, 303.15, 7)
    assert glycerol_water_density(0.0, temperature) == pytest.approx(water_density(temperature), rel=3e-4)
    assert glycerol_water_viscosity(0.0, temperature) == pytest.approx(water_viscosity(temperature), rel=0.01)


@pytest.mark.parametrize(("mass_fraction", "per_kelvin"), [(0.5, -0.038), (0.8, -0.061), (0.9, -0.074), (1.0, -0.092)])
def test_sensitivity_to_temperature(mass_fraction: float, per_kelvin: float) -> None:
    """Relative change of viscosity per kelvin at 20 °C, reference sheet."""
    low, high = glycerol_water_viscosity(mass_fraction, [292.65, 293.65])
    assert np.log(high / low) == pytest.approx(per_kelvin, abs=6e-4)


@pytest.mark.parametrize("entry", LIQUIDS.values(), ids=lambda entry: entry.name)
def test_contract(entry: LiquidProperty) -> None:
    low, high = entry.valid["temperature"]
    temperature = np.array([low, (low + high) / 2, high, low - 0.1, high + 0.1, np.nan])
    value = entry.evaluate(temperature=temperature, mass_fraction=0.4)
    assert np.all(value[:5] > 0)
    assert np.isnan(value[5])
    assert np.all(np.diff(value[:3]) < 0)  # both fall with temperature, but for cold water (not in this grid)
    marks = entry.within(temperature=temperature, mass_fraction=0.4)
    assert marks.tolist() == [True, True, True, False, False, False]
    assert 0 < entry.relative_u < 0.05
    assert entry.purpose.endswith(".")


def test_glycerol_arrays_broadcast_and_ends_are_safe() -> None:
    density = glycerol_water_density([[0.0], [0.5], [1.0]], [290.0, 300.0])
    assert density.shape == (3, 2)
    assert np.all(np.diff(density, axis=0) > 0)
    assert glycerol_water_density(1.0, 293.15) == pytest.approx(1273.3 - 0.6121 * 20, abs=1e-6)  # pure, Volk & Kähler
