"""Columns of bench tables in SI with their uncertainty, and the fault of each cell."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from settlelab.errors import Fault
from settlelab.study import read_quantities, read_table
from settlelab.study.limits import ABOVE_ZERO


def read(folder: Path, content: str, name: str, dimension: str) -> tuple[list[float], list[float], list[str]]:
    """Value, uncertainty, sentences."""
    path = folder / "table.csv"
    path.write_text(content, encoding="utf-8")
    faults: list[Fault] = []
    cells = read_quantities(read_table(path), name, dimension, faults, ABOVE_ZERO)
    assert cells is not None
    return cells.value.tolist(), cells.u.tolist(), [str(fault) for fault in faults]


@pytest.mark.parametrize(
    ("content", "u"),
    [
        ("mass [mg]\n12.4\n", 0.0),
        ("mass (mg)\n12.4 ± 0.1\n", 0.1),
        ("mass / mg\n12.4 +- 0.2 (k=2)\n", 0.1),
        ("mass_mg,mass_u_mg\n12.4,0.1\n", 0.1),
        ("mass [mg],u(mass) [mg]\n12.4,0.1\n", 0.1),
        ("mass [mg],u(mass) [g]\n12.4,0.0001\n", 0.1),
        ("mass [mg],u(mass) [%]\n12.4,1\n", 0.124),
        ("mass [mg]\n12.4 ± 1 %\n", 0.124),
        ("mass,u(mass)\nmg,mg\n12.4,0.1\n", 0.1),
        ("mass;lot\nmg;-\n12,4 ± 0,1;A\n", 0.1),
        ("mass;u(mass)\n[mg];[mg]\n12,4;0,1\n", 0.1),
        ("mass\n12.4 ± 0.1 mg\n", 0.1),
    ],
)
def test_styles_of_heading_and_uncertainty(tmp_path: Path, content: str, u: float) -> None:
    value, spread, faults = read(tmp_path, content, "mass", "kg")
    assert faults == []
    assert value == pytest.approx([12.4e-6])
    assert spread == pytest.approx([u * 1e-6])


def test_shares_in_percent(tmp_path: Path) -> None:
    value, u, faults = read(tmp_path, "sphericity [%],u(sphericity) [%]\n82,1\n", "sphericity", "1")
    assert (value, u, faults) == ([pytest.approx(0.82)], [pytest.approx(0.01)], [])
    value, u, faults = read(tmp_path, "sphericity,u(sphericity) [%]\n0.82,1\n", "sphericity", "1")
    assert (value, u, faults) == ([pytest.approx(0.82)], [pytest.approx(0.0082)], [])


def test_temperature_and_its_difference(tmp_path: Path) -> None:
    content = "temperature [°C],u(temperature) [°F]\n20,1.8\n"
    assert read(tmp_path, content, "temperature", "K") == ([293.15], [pytest.approx(1.0)], [])


def test_empty_cells_are_not_faults(tmp_path: Path) -> None:
    value, u, faults = read(tmp_path, "lot,mass [mg]\nA,\nB,2\n", "mass", "kg")
    np.testing.assert_array_equal(np.isnan([value, u]), [[True, False], [True, False]])
    assert faults == []


@pytest.mark.parametrize(
    ("cells", "sentence"),
    [
        ("-3,", 'column "mass [mg]": "-3" is not a mass above 0'),
        ("0,", 'column "mass [mg]": "0" is not a mass above 0'),
        ('"12,5.3",', 'column "mass [mg]": "12,5.3" is not a number such as 12.5 or 12,5'),
        ('"1,234",', 'column "mass [mg]": "1,234" is not certain: write 1234 or 1.234, whichever it is'),
        ("heavy,", 'column "mass [mg]": "heavy" is not a mass such as "12.4 ± 0.1 mg"'),
        ("3 ± 4,", 'column "mass [mg]": "3 ± 4" is not a mass larger than its uncertainty'),
        (",0.1", 'column "mass [mg]": missing, expected a value to the uncertainty 0.1 beside it'),
        ("3,-0.1", 'column "u(mass) [mg]": "-0.1" is not an uncertainty of 0 or above'),
        ("3,x", 'column "u(mass) [mg]": "x" is not a number such as 12.5 or 12,5'),
        (
            "3 ± 0.2,0.1",
            'column "u(mass) [mg]": "0.1" is not the only uncertainty: another one stands in column "mass [mg]"',
        ),
        (
            "3 mm,",
            'column "mass [mg]": "3 mm" is not a mass such as "12.4 ± 0.1 mg" (unit "mm" does not fit; '
            "known here: mg, g, kg, ug, lbm)",
        ),
    ],
)
def test_a_cell_at_fault(tmp_path: Path, cells: str, sentence: str) -> None:
    value, _, faults = read(tmp_path, f"lot,mass [mg],u(mass) [mg]\nA,1,0.1\nB,{cells}\n", "mass", "kg")
    assert faults == [f"table.csv, row 3, {sentence}"]
    assert value[0] == pytest.approx(1e-6)
    assert np.isnan(value[1])


@pytest.mark.parametrize(
    ("heading", "reason"),
    [
        ("mass", "its unit is missing"),
        ("mass [stone]", 'unit "stone" is unknown'),
        ("mass [mm]", 'unit "mm" does not fit'),
    ],
)
def test_a_heading_at_fault(tmp_path: Path, heading: str, reason: str) -> None:
    _, _, faults = read(tmp_path, f"lot,{heading}\nA,12.4\n", "mass", "kg")
    accepted = f"a heading with a unit of mass, such as [mg] ({reason}; known here: mg, g, kg, ug, lbm)"
    assert faults == [f'table.csv, row 1: "{heading}" is not {accepted}']
