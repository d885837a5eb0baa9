"""Unit spellings to SI and back, for numbers and arrays."""

from __future__ import annotations

import subprocess
import sys

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from settlelab.units import difference_to_si, from_si, si_unit, to_si, unit_known
from settlelab.units.spelling import SI

ALL_UNITS = sorted({unit for kind in SI.values() for unit in kind.units})


@pytest.mark.parametrize("unit", ALL_UNITS)
@given(value=st.floats(-1e6, 1e6))
def test_there_and_back(unit: str, value: float) -> None:
    assert from_si(to_si(value, unit), unit) == pytest.approx(value, rel=1e-9, abs=1e-7)


def test_arrays_keep_their_shape_and_are_not_changed() -> None:
    typed = np.array([[12.0, 20.0], [np.nan, 0.0]])
    before = typed.copy()
    np.testing.assert_allclose(to_si(typed, "°C"), [[285.15, 293.15], [np.nan, 273.15]])
    np.testing.assert_array_equal(typed, before)


def test_a_difference_has_no_offset() -> None:
    assert difference_to_si(1.8, "°F") == pytest.approx(1.0)
    assert difference_to_si(0.2, "°C") == 0.2


@pytest.mark.parametrize("spelling", ["kg/m3", "kg/m³", "kg / m^3", "kg m-3", "kg·m⁻³", "kg/(m3)"])
def test_spellings_of_one_unit(spelling: str) -> None:
    assert to_si(1.0, spelling) == 1.0
    assert si_unit(spelling) == "kg/m3"


@pytest.mark.parametrize("spelling", ["fps", "C", "F", "parsec", "mm/", "m^7", "kg m3s", "/", "MPa"])
def test_not_on_the_list(spelling: str) -> None:
    assert not unit_known(spelling)


def test_importing_units_does_not_load_the_units_library() -> None:
    code = "import sys, settlelab.units; sys.exit('pint' in sys.modules or 'pandas' in sys.modules)"
    assert subprocess.run([sys.executable, "-c", code], check=False).returncode == 0
