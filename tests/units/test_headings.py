"""Headings in the styles of the design, and tables to SI and back."""

from __future__ import annotations

import io
from dataclasses import dataclass
from typing import Annotated

import numpy as np
import pandas as pd
import pytest

from settlelab.measure.model import Drop
from settlelab.units import Heading, Unit, from_headings, heading, parse_heading, with_headings


@pytest.mark.parametrize(
    ("field", "unit", "expected"),
    [
        ("velocity_u", "mm/s", "velocity_u_mm_s"),
        ("particle_density", "kg/m3", "particle_density_kg_m3"),
        ("viscosity", "mPa s", "viscosity_mPa_s"),
        ("consistency", "Pa s^n", "consistency_Pa_s_n"),
        ("reynolds", "1", "reynolds"),
        ("first_time", "s", "first_time_s"),
        ("bias", "%", "bias_percent"),
        ("temperature", "°C", "temperature_degC"),
    ],
)
def test_heading_as_written(field: str, unit: str, expected: str) -> None:
    assert heading(field, unit) == expected


@pytest.mark.parametrize(
    ("typed", "name", "unit", "is_uncertainty"),
    [
        ("mass [mg]", "mass", "mg", False),
        ("mass (mg)", "mass", "mg", False),
        ("mass / mg", "mass", "mg", False),
        ("mass/mg", "mass", "mg", False),
        ("mass_mg", "mass", "mg", False),
        (" Mass  [ mg ] ", "mass", "mg", False),
        ("u(mass) [mg]", "mass", "mg", True),
        ("u(mass) / mg", "mass", "mg", True),
        ("u(mass [mg])", "mass", "mg", True),
        ("u(mass)", "mass", None, True),
        ("mass_u_mg", "mass", "mg", True),
        ("long axis [mm]", "long_axis", "mm", False),
        ("Long-Axis", "long_axis", None, False),
        ("shear rate [1/s]", "shear_rate", "1/s", False),
        ("shear rate / 1/s", "shear_rate", "1/s", False),
        ("velocity / (mm/s)", "velocity", "mm/s", False),
        ("velocity_u_mm_s", "velocity", "mm/s", True),
        ("wall_factor_u", "wall_factor", None, True),
        ("viscosity_Pa_s", "viscosity", "Pa s", False),
        ("consistency_Pa_s_n", "consistency", "Pa s^n", False),
        ("consistency [Pa s^n]", "consistency", "Pa s^n", False),
        ("flow index [-]", "flow_index", "-", False),
        ("temperature [°C]", "temperature", "°C", False),
        ("lot", "lot", None, False),
    ],
)
def test_heading_as_typed(typed: str, name: str, unit: str | None, is_uncertainty: bool) -> None:
    assert parse_heading(typed) == Heading(name, unit, is_uncertainty)


def test_an_expanded_uncertainty_column_is_refused() -> None:
    with pytest.raises(ValueError, match=r'certain: give the standard uncertainty \(k = 1\) as "u\(mass\)"'):
        parse_heading("U(mass) [mg]")


@dataclass(frozen=True)
class Row:
    """A small schema: text, truth, count, plain number, numbers with units."""

    lot: str
    accepted: bool
    frames: int
    reynolds: Annotated[float, Unit("1")]
    velocity: Annotated[float, Unit("mm/s")]
    temperature: Annotated[float, Unit("°C")]


FRAME = pd.DataFrame(
    {
        "velocity": [0.0825, np.nan],
        "lot": ["007", ""],
        "accepted": [True, False],
        "frames": [81, 3],
        "reynolds": [12.5, 0.1],
        "temperature": [294.55, 273.15],
        "angularity": [0.3, 0.4],
    }
)


def test_columns_are_converted_named_and_kept_in_order() -> None:
    before = FRAME.copy(deep=True)
    shown = with_headings(FRAME, Row)
    assert list(shown.columns) == [
        "velocity_mm_s",
        "lot",
        "accepted",
        "frames",
        "reynolds",
        "temperature_degC",
        "angularity",
    ]
    np.testing.assert_allclose(shown["velocity_mm_s"], [82.5, np.nan])
    np.testing.assert_allclose(shown["temperature_degC"], [21.4, 0.0], atol=1e-9)
    pd.testing.assert_frame_equal(FRAME, before)


def test_there_and_back() -> None:
    pd.testing.assert_frame_equal(from_headings(with_headings(FRAME, Row), Row), FRAME)


def test_back_from_text_as_a_file_gives_it() -> None:
    file = io.StringIO()
    shown = with_headings(FRAME, Row)
    shown.assign(accepted=["true", "false"]).to_csv(file, index=False)
    file.seek(0)
    back = from_headings(pd.read_csv(file, dtype=str, keep_default_na=False), Row)
    known = [name for name in FRAME.columns if name != "angularity"]
    pd.testing.assert_frame_equal(back[known], FRAME[known], check_dtype=False)
    assert back["accepted"].dtype == bool
    assert back["lot"].tolist() == ["007", ""]
    assert back["angularity"].tolist() == ["0.3", "0.4"]  # unknown columns are left as they are


def test_a_cell_that_does_not_fit_names_its_column() -> None:
    with pytest.raises(ValueError, match='column "accepted": "maybe" is not true or false'):
        from_headings(pd.DataFrame({"accepted": ["maybe"]}), Row)


def test_the_drop_table_has_the_headings_of_the_design() -> None:
    shown = with_headings(
        pd.DataFrame({name: [1.0] for name in ("velocity_u", "viscosity", "drag_coefficient_u")}), Drop
    )
    assert list(shown.columns) == ["velocity_u_mm_s", "viscosity_mPa_s", "drag_coefficient_u"]
