from __future__ import annotations

import math

import pandas as pd
import pytest

from settlelab.report.views import Show, UnitSystem, quantity_text, table_view

FRAME = pd.DataFrame(
    {
        "drop": [1, 2],
        "velocity": [0.0508, math.nan],
        "velocity_u": [0.000508, math.nan],
        "density": [1198.264, 1198.264],
        "predicted": [0.0508, math.nan],
        "deviation": [0.0123, math.nan],
        "flags": ["edge;gap", ""],
        "accepted": [True, False],
        "reason": ["", ""],
    }
)


@pytest.mark.parametrize(
    ("system", "heading", "cell", "density_heading", "density"),
    [
        ("lab", "velocity, mm/s", "50.80 ± 0.51", "density, kg/m³", "1198"),
        ("field", "velocity, ft/min", "10.00 ± 0.10", "density, lbm/gal", "10.00"),  # 1 ft/min = 5.08 mm/s exactly
        ("si", "velocity, m/s", "0.05080 ± 0.00051", "density, kg/m³", "1198"),
    ],
)
def test_units_of_the_reader(system: UnitSystem, heading: str, cell: str, density_heading: str, density: str) -> None:
    columns = (Show(heading="velocity", field="velocity", u="velocity_u", unit="mm/s"),)
    columns += (Show(heading="density", field="density", unit="kg/m3"),)
    view = table_view(FRAME, columns, system)
    assert [cell.text for cell in view.headings] == [heading, density_heading]
    assert [[cell.text for cell in row] for row in view.rows] == [[cell, density], ["–", density]]


def test_text_numbers_and_deviations() -> None:
    columns = [
        Show(heading="drop", field="drop", unit="1"),
        Show(heading="predicted", field="predicted", unit="mm/s", deviation="deviation"),
        Show(heading="flags", field="flags"),
        Show(heading="accepted", field="accepted"),
    ]
    view = table_view(FRAME, columns, kind=lambda row: "" if row["accepted"] else "refused")
    assert [[cell.text for cell in row] for row in view.rows] == [
        ["1", "50.80 (+1.2 %)", "edge, gap", "yes"],
        ["2", "–", "", "no"],
    ]
    assert view.kinds == ("", "refused")
    assert [cell.number for cell in view.headings] == [True, True, False, False]


def test_columns_that_are_empty_throughout_fall_away() -> None:
    view = table_view(FRAME, [Show(heading="reason", field="reason"), Show(heading="lot", field="lot")])
    assert view.headings == ()


def test_a_temperature_keeps_its_uncertainty_as_a_difference() -> None:
    assert quantity_text(294.55, 0.2, "°C") == "21.40 ± 0.20 °C"


def test_a_quantity_without_uncertainty() -> None:
    assert quantity_text(0.19, math.nan, "mm", "field") == "7.480 in"
