"""Drop tables typed by hand, from a paper, or written by a study."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pandas as pd
import pytest

from settlelab.calibrate import assumptions, calibrate_drops, read_drop_table
from settlelab.errors import InputFaults
from settlelab.measure.model import Drop
from settlelab.physics.rheology import Rheology
from settlelab.physics.walls import unbounded_velocity
from settlelab.units import with_headings
from tests.calibrate.lots import Lots, draw, power_law_of_shape

HEAD = "velocity [mm/s];equivalent diameter [mm];particle density [kg/m3];fluid density [kg/m3];viscosity [mPa s]"


def table(folder: Path, text: str, name: str = "drops.csv") -> Path:
    path = folder / name
    path.write_text(text, encoding="utf-8")
    return path


def test_the_smallest_table(tmp_path: Path) -> None:
    drops = read_drop_table(table(tmp_path, f"{HEAD}\n82,5 ± 0,4;2,50;2650;1155;11,1\n"))
    row = drops.iloc[0]
    assert row["velocity"] == pytest.approx(0.0825)
    assert row["unbounded_velocity"] == pytest.approx(0.0825)
    assert row["unbounded_velocity_u"] == pytest.approx(0.0004)
    assert row["equivalent_diameter_from"] == "typed"
    assert row["consistency"] == row["viscosity"] == pytest.approx(0.0111)
    assert row["flow_index"] == 1.0
    assert row["reynolds"] == pytest.approx(1155 * 0.0825 * 0.0025 / 0.0111)
    assert row["drag_coefficient"] == pytest.approx(4 * 9.80665 * 0.0025 * (2650 / 1155 - 1) / (3 * 0.0825**2))
    assert row["drag_coefficient_u"] == pytest.approx(2 * 0.0004 / 0.0825 * row["drag_coefficient"])
    assert row["reynolds_u"] == pytest.approx(0.0004 / 0.0825 * row["reynolds"])
    assert bool(row["accepted"])
    assert "No column diameter is given" in assumptions(drops)[0]


def test_a_column_diameter_corrects_for_the_wall(tmp_path: Path) -> None:
    drops = read_drop_table(table(tmp_path, f"{HEAD};column diameter [mm]\n82.5;2.50;2650;1155;11.1;50\n"))
    expected, wall = unbounded_velocity(
        0.0825, diameter=0.0025, bore=0.05, fluid_density=1155.0, rheology=Rheology(consistency=0.0111)
    )
    assert drops.loc[0, "unbounded_velocity"] == pytest.approx(float(expected))
    assert drops.loc[0, "wall_factor"] == pytest.approx(float(wall.factor))
    assert drops.loc[0, "unbounded_velocity_u"] > 0  # the doubt of the wall factor
    assert drops.loc[0, "velocity"] < drops.loc[0, "unbounded_velocity"]
    assert f"wall factor {float(wall.factor):.3f}" in assumptions(drops)[0]


def test_size_and_shape_from_three_axes(tmp_path: Path) -> None:
    head = HEAD.replace("equivalent diameter [mm]", "long axis [mm];intermediate axis [mm];short axis [mm]")
    row = read_drop_table(table(tmp_path, f"{head}\n80;4;2;1;2650;1155;11.1\n")).iloc[0]
    assert row["equivalent_diameter"] == pytest.approx(2e-3)  # (4 2 1)^(1/3)
    assert row["equivalent_diameter_from"] == "calipers"
    assert row["corey_shape_factor"] == pytest.approx(1 / np.sqrt(8))
    assert row["flatness"] == pytest.approx(0.5)
    assert row["elongation"] == pytest.approx(0.5)
    assert row["sphericity_from"] == "ellipsoid of the axes"


def test_size_from_mass(tmp_path: Path) -> None:
    head = HEAD.replace("equivalent diameter [mm]", "mass [mg]")
    drops = read_drop_table(table(tmp_path, f"{head}\n80;21.68 ± 0.3;2650 ± 5;1155;11.1\n"))
    volume = 21.68e-6 / 2650
    assert drops.loc[0, "equivalent_diameter"] == pytest.approx((6 * volume / np.pi) ** (1 / 3))
    relative = np.hypot(0.3 / 21.68, 5 / 2650) / 3
    assert drops.loc[0, "equivalent_diameter_u"] == pytest.approx(relative * drops.loc[0, "equivalent_diameter"])
    assert "Equivalent diameters are computed from mass and density." in assumptions(drops)


def test_a_power_law_fluid(tmp_path: Path) -> None:
    head = HEAD.replace("viscosity [mPa s]", "consistency [Pa s^n];flow index [-];yield stress [Pa]")
    row = read_drop_table(table(tmp_path, f"{head}\n80;2;2650;1005;0.4;0.6;\n")).iloc[0]
    rate = 0.08 / 0.002
    assert row["viscosity"] == pytest.approx(0.4 * rate**-0.4)
    assert row["reynolds"] == pytest.approx(1005 * 0.08**1.4 * 0.002**0.6 / 0.4)
    assert row["yield_stress"] == 0.0


def test_other_words_and_units(tmp_path: Path) -> None:
    text = "settling velocity (cm/s),diameter / mm,density_g_cm3,fluid density [lbm/gal],viscosity [cP],roundness\n"
    row = read_drop_table(table(tmp_path, text + "8.25,2.5,2.65,9.64,11.1,0.4\n")).iloc[0]
    assert row["velocity"] == pytest.approx(0.0825)
    assert row["particle_density"] == pytest.approx(2650)
    assert row["fluid_density"] == pytest.approx(1155, rel=1e-3)
    assert row["roundness"] == 0.4


def test_drops_of_a_study_come_back(tmp_path: Path) -> None:
    """drops.csv as written, with its own unbounded velocities, Reynolds numbers and routes."""
    drawn = draw(power_law_of_shape(), Lots(particles=9, replicates=1), 1)
    complete = read_drop_table(_typed(drawn, tmp_path)).assign(
        wall_factor=0.95,
        wall_factor_u=0.01,
        wall_method="kehlenbeck-difelice-1999",
        equivalent_diameter_from="silhouette",
    )
    complete["velocity"] = 0.95 * complete["unbounded_velocity"]
    complete["accepted"] = [True] * 8 + [False]
    complete["drop"] = range(11, 20)
    path = tmp_path / "drops.csv"
    shown = with_headings(complete, Drop)
    shown["accepted"] = shown["accepted"].map({True: "true", False: "false"})
    shown.to_csv(path, index=False)
    again = read_drop_table(path)
    columns = [name for name in Drop.__dataclass_fields__ if name in complete.columns and name != "control"]
    pd.testing.assert_frame_equal(again[columns], complete[columns], check_dtype=False, rtol=1e-9)
    assert assumptions(again)[0].startswith("Velocities are corrected for the wall")


def _typed(drawn: pd.DataFrame, folder: Path) -> Path:
    shown = with_headings(
        drawn.rename(columns={"unbounded_velocity": "velocity", "unbounded_velocity_u": "velocity_u"}), Drop
    )
    path = folder / "typed.csv"
    shown.to_csv(path, index=False)
    return path


def test_a_typed_table_calibrates_like_the_numbers_in_it(tmp_path: Path) -> None:
    drawn = draw(power_law_of_shape(), Lots(), 3)
    typed, direct = calibrate_drops(read_drop_table(_typed(drawn, tmp_path))), calibrate_drops(drawn)
    assert typed.chosen is not None
    assert direct.chosen is not None
    np.testing.assert_allclose(typed.chosen.values, direct.chosen.values, rtol=1e-6)


@pytest.mark.parametrize(
    ("text", "sentences"),
    [
        (
            "velocity [mm/s],sphericity\n80,0.8\n",
            [
                'drops.csv: missing, expected a column "particle density [kg/m3]"',
                'drops.csv: missing, expected a column "fluid density [kg/m3]"',
                'drops.csv: missing, expected a column "viscosity [mPa s]", or "consistency [Pa s^n]"',
                'drops.csv: missing, expected a column "equivalent diameter [mm]"',
            ],
        ),
        (
            f"{HEAD}\nfast;2.5;2650;1155;11.1\n80;-2;2650;1155;11.1\n",
            [
                'drops.csv, row 2, column "velocity [mm/s]": "fast" is not a velocity',
                'drops.csv, row 3, column "equivalent diameter [mm]": "-2" is not a length above 0',
            ],
        ),
        (
            f"{HEAD}\n;2.5;2650;1155;11.1\n",
            ['row 2, column "velocity [mm/s]": missing, expected the velocity of this drop'],
        ),
        (f"{HEAD}\n-8;2.5;2650;1155;11.1\n", ['row 2, column "velocity [mm/s]": "-8" is not a velocity above 0']),
        (f"{HEAD};accepted\n80;2.5;2650;1155;11.1;maybe\n", ['column "accepted": "maybe" is not true or false']),
        (f"{HEAD};spericity\n80;2.5;2650;1155;11.1;0.8\n", ['(did you mean "sphericity"?)']),
        (f"{HEAD};sphericity\n80;2.5;2650;1155;11.1;1.4\n", ['"1.4" is not a number above 0 and at most 1']),
        (
            f"{HEAD};column diameter [mm]\n80;2.5;2650;1155;11.1;2\n",
            ['column "column diameter [mm]": "2" is not wider than the particle of 2.5 mm'],
        ),
    ],
)
def test_bad_tables_are_refused_with_every_fault(tmp_path: Path, text: str, sentences: list[str]) -> None:
    with pytest.raises(InputFaults) as caught:
        read_drop_table(table(tmp_path, text))
    for sentence in sentences:
        assert sentence in str(caught.value)
    assert len(caught.value.faults) == len(sentences)


def test_a_refused_drop_may_lack_its_velocity(tmp_path: Path) -> None:
    text = f"{HEAD};accepted\n80;2.5;2650;1155;11.1;true\n;2.5;2650;1155;11.1;false\n"
    assert read_drop_table(table(tmp_path, text))["accepted"].tolist() == [True, False]
