"""`settlelab predict` through the command line."""

from __future__ import annotations

from pathlib import Path

import pandas as pd
import pytest
from click.testing import CliRunner, Result

from settlelab.calibrate import calibrate_drops, write_card
from settlelab.cli import main
from tests.calibrate.lots import Lots, draw, power_law_of_shape

FLUID = ["--viscosity", "6 mPa s", "--fluid-density", "1150 kg/m3"]


@pytest.fixture(scope="module")
def card(tmp_path_factory: pytest.TempPathFactory) -> str:
    calibration = calibrate_drops(draw(power_law_of_shape(), Lots(), 3))
    return str(write_card(calibration.card, tmp_path_factory.mktemp("card") / "calibration.json"))


def run(*arguments: str) -> Result:
    return CliRunner().invoke(main, ["predict", *arguments])


def test_a_size_in_a_fluid(card: str) -> None:
    result = run(card, *FLUID, "--diameter", "2.5 mm", "--diameter", "40 mm", "--sphericity", "0.7")
    assert result.exit_code == 0, result.output
    rows = [line for line in result.output.splitlines() if " to " in line]
    assert rows[0].split()[0] == "2.5"
    assert "outside" not in rows[0]
    assert rows[1].endswith("outside the calibration: Reynolds number, equivalent diameter")
    assert "A column test in still fluid is not a hole-cleaning design" in result.output
    assert "note: The particle density is not given: 2600 kg/m3, the median of the calibration." in result.output


def test_sieve_sizes_unless_told_otherwise(card: str, tmp_path: Path) -> None:
    result = run(card, *FLUID, "--out", str(tmp_path))
    assert result.exit_code == 0, result.output
    table = pd.read_csv(tmp_path / "prediction.csv")
    assert {1.0, 1.18, 1.4, 2.0, 4.75} <= set(table["equivalent_diameter_mm"])
    assert table["velocity_mm_s"].is_monotonic_increasing
    assert (table["prediction_low_mm_s"] < table["velocity_mm_s"]).all()
    assert (tmp_path / "prediction.svg").read_bytes().startswith(b"<?xml")
    assert "Sizes are sieve openings (ASTM E11), taken as diameters of the sphere of equal volume." in result.output
    assert "The sphericity is not given" in result.output


def test_a_table_of_particles(card: str, tmp_path: Path) -> None:
    sizes = tmp_path / "sizes.csv"
    sizes.write_text("diameter [mm],particle density [g/cm3],sphericity\n2,2.6,0.8\n2,2.7,0.8\n", encoding="utf-8")
    result = run(card, *FLUID, "--particles", str(sizes), "--out", str(tmp_path))
    assert result.exit_code == 0, result.output
    table = pd.read_csv(tmp_path / "prediction.csv")
    assert table["particle_density_kg_m3"].tolist() == [2600, 2700]
    assert table["velocity_mm_s"].is_monotonic_increasing
    assert "median" not in result.output


def test_a_liquid_in_print_and_a_fluid_of_the_card(card: str) -> None:
    water = run(card, "--liquid", "water", "--temperature", "20 °C", "--diameter", "2 mm")
    assert water.exit_code == 0, water.output
    assert "in water by properties in print" in water.output
    named = run(card, "--fluid", "fluid 2", "--diameter", "2 mm")
    assert 'in the fluid "fluid 2" of the calibration' in named.output
    same = run(card, *FLUID, "--diameter", "2 mm")
    assert named.output.splitlines()[4:] == same.output.splitlines()[4:]


def test_a_power_law_fluid_slows(card: str) -> None:
    mud = ["--consistency", "0.5 Pa s^n", "--flow-index", "0.6", "--fluid-density", "1150 kg/m3", "--diameter", "3 mm"]
    result = run(card, *mud)
    assert result.exit_code == 0, result.output
    assert "flow index" in result.output  # outside: no power-law fluid in the calibration
    held = run(card, *mud, "--yield-stress", "20 Pa")
    assert "0 to 0" in held.output


@pytest.mark.parametrize(
    ("arguments", "sentence"),
    [
        (["--viscosity", "6 mm", "--fluid-density", "1150 kg/m3"], '"6 mm" is not a viscosity such as'),
        (["--viscosity", "6 mPa s"], "a fluid needs --fluid-density and --viscosity"),
        (["--liquid", "water"], "--liquid needs --temperature"),
        (["--liquid", "glycerol-water", "--temperature", "20 °C"], "glycerol-water needs --mass-fraction"),
        ([*FLUID, "--fluid", "fluid 2"], "describe the fluid in one way"),
        ([*FLUID, "--diameter", "2 mm", "--particles", "p.csv"], "either --diameter or --particles"),
    ],
)
def test_wrong_usage_is_2(card: str, arguments: list[str], sentence: str) -> None:
    result = run(card, *arguments)
    assert result.exit_code == 2
    assert sentence in result.output


@pytest.mark.parametrize(
    ("arguments", "sentence"),
    [
        ([], "Error: the card was made in several fluids: name one of"),
        (["--fluid", "fluid 7"], '"fluid 7" is not a fluid of the card'),
        (
            [*FLUID, "--particle-density", "900 kg/m3"],
            "a particle that is not denser than the fluid does not settle in it",
        ),
        ([*FLUID, "--sphericity", "1.3"], "the sphericity must be at most 1"),
    ],
)
def test_what_cannot_be_predicted_is_1(card: str, arguments: list[str], sentence: str) -> None:
    result = run(card, *arguments)
    assert result.exit_code == 1
    assert sentence in result.output
    assert "Traceback" not in result.output


def test_bad_sizes_are_named(card: str, tmp_path: Path) -> None:
    sizes = tmp_path / "sizes.csv"
    sizes.write_text("diameter [mm],sphericity\n-2,0.8\nbig,1.8\n", encoding="utf-8")
    result = run(card, *FLUID, "--particles", str(sizes))
    assert result.exit_code == 1
    assert 'sizes.csv, row 2, column "diameter [mm]": "-2" is not a length above 0' in result.output
    assert "row 3" in result.output


def test_a_vertical_annulus(card: str, tmp_path: Path) -> None:
    """Transport ratio 1 - slip/annular velocity (Sifferman et al. 1974)."""
    sizes = ["--diameter", "2 mm", "--diameter", "8 mm"]
    result = run(card, *FLUID, *sizes, "--annular-velocity", "0.4 m/s", "--out", str(tmp_path))
    assert result.exit_code == 0, result.output
    assert "in a vertical annulus at 0.4 m/s" in result.output
    assert "Flowing mud is sheared" in result.output
    table = pd.read_csv(tmp_path / "annulus.csv")
    slip = pd.read_csv(tmp_path / "prediction.csv")["velocity_mm_s"]
    assert table["rise_velocity_mm_s"].to_numpy() == pytest.approx((400 - slip).to_numpy(), rel=1e-4)
    assert table["transport_ratio"].to_numpy() == pytest.approx((1 - slip / 400).to_numpy(), rel=1e-4)
    assert (table["transport_ratio_low"] < table["transport_ratio"]).all()
    assert (table["transport_ratio"] < table["transport_ratio_high"]).all()


def test_a_slow_annulus_carries_nothing_and_says_so(card: str, tmp_path: Path) -> None:
    result = run(card, *FLUID, "--diameter", "5 mm", "--annular-velocity", "2 cm/s", "--out", str(tmp_path))
    assert pd.read_csv(tmp_path / "annulus.csv")["rise_velocity_mm_s"][0] < 0
    assert "may fall below 0.5" in result.output


@pytest.mark.parametrize(
    ("arguments", "code", "sentence"),
    [
        (["0.5 m/s", "--inclination", "35"], 1, "no transport ratio at 35 degrees from vertical"),
        (["0 m/s"], 1, "the annular velocity must be above 0"),
        (["0.5 m/s", "--inclination", "-3"], 2, "--inclination"),
        (["5 mm"], 2, '"5 mm" is not a velocity such as'),
        (["0.5 m/s", "--inclination", "30"], 0, "transport"),
    ],
)
def test_an_annulus_that_tells_nothing_is_refused(card: str, arguments: list[str], code: int, sentence: str) -> None:
    result = run(card, *FLUID, "--diameter", "2 mm", "--annular-velocity", *arguments)
    assert result.exit_code == code
    assert sentence in result.output
