"""`settlelab calibrate` through the command line."""

from __future__ import annotations

import json
from pathlib import Path

import pandas as pd
import pytest
from click.testing import CliRunner, Result

from settlelab.cli import main
from settlelab.measure.model import Drop
from settlelab.units import with_headings
from tests.calibrate.lots import Lots, draw, power_law_of_shape, published


def run(*arguments: str) -> Result:
    return CliRunner().invoke(main, ["calibrate", *arguments])


def typed(drops: pd.DataFrame, path: Path) -> Path:
    """A table as someone types it: the velocity is the measured one."""
    names = {"unbounded_velocity": "velocity", "unbounded_velocity_u": "velocity_u"}
    with_headings(drops.rename(columns=names), Drop).to_csv(path, index=False)
    return path


def test_a_table_typed_by_hand(tmp_path: Path) -> None:
    table = typed(draw(power_law_of_shape(), Lots(), 3), tmp_path / "paper.csv")
    result = run(str(table), "--out", str(tmp_path / "out"), "--by", "nobody", "--date", "2031-05-02")
    assert result.exit_code == 0, result.output
    assert "stokes-newton-power of sphericity is used" in " ".join(result.output.split())
    assert "b = 3." in result.output
    assert "note: No column diameter is given" in result.output
    ranking = pd.read_csv(tmp_path / "out" / "ranking.csv")
    assert ranking.columns[:9].tolist() == [
        "method", "kind", "drops", "particles", "in_range_percent", "bias_percent", "rms_percent", "max_percent",
        "within_10_percent",
    ]  # fmt: skip
    assert {"within_20_percent", "cv_rms_percent"} <= set(ranking.columns)
    assert ranking["method"].iloc[0] == "stokes-newton-power of sphericity"
    card = json.loads((tmp_path / "out" / "calibration.json").read_text(encoding="utf-8"))
    assert (card["title"], card["by"], card["date"]) == ("paper.csv", "nobody", "2031-05-02")
    predictions = pd.read_csv(tmp_path / "out" / "predictions.csv")
    assert {"drop", "method", "predicted_velocity_mm_s", "deviation_percent", "in_range"} <= set(predictions.columns)
    assert len(list((tmp_path / "out" / "figures").glob("*.svg"))) >= 3
    for line in result.output.splitlines():
        if line.startswith("wrote "):
            assert Path(line.removeprefix("wrote ")).exists()


def test_noise_keeps_the_published_law(tmp_path: Path) -> None:
    table = typed(draw(published("ganser-1993"), Lots(scatter=0.11, particles=24), 5), tmp_path / "t.csv")
    result = run(str(table), "--out", str(tmp_path / "out"))
    assert result.exit_code == 0, result.output
    assert "is kept" in result.output
    assert json.loads((tmp_path / "out" / "calibration.json").read_text(encoding="utf-8"))["law"]["kind"] == "published"


@pytest.mark.parametrize(
    ("options", "sentence"),
    [
        (["--form", "facto"], 'Error: "facto" is not a calibrated form (did you mean "factor"?)'),
        (["--descriptor", "roundness"], "Error: the descriptor roundness is known for fewer than 80% of the drops"),
    ],
)
def test_a_choice_that_cannot_be_met(tmp_path: Path, options: list[str], sentence: str) -> None:
    table = typed(draw(power_law_of_shape(), Lots(particles=6), 3), tmp_path / "t.csv")
    result = run(str(table), "--out", str(tmp_path / "out"), *options)
    assert result.exit_code == 1
    assert sentence in result.output
    assert not (tmp_path / "out").exists()


def test_a_bad_table_is_one_message(tmp_path: Path) -> None:
    table = tmp_path / "t.csv"
    table.write_text("velocity [mm/s],sphericity\nfast,2\n", encoding="utf-8")
    result = run(str(table), "--out", str(tmp_path / "out"))
    assert result.exit_code == 1
    assert '"fast" is not a velocity' in result.output
    assert '"2" is not a number above 0 and at most 1' in result.output
    assert "particle density [kg/m3]" in result.output
    assert "Traceback" not in result.output


def test_a_missing_table(tmp_path: Path) -> None:
    result = run(str(tmp_path / "none.csv"), "--out", str(tmp_path / "out"))
    assert result.exit_code == 1
    assert "none.csv: missing, expected a table that can be read" in result.output


def test_out_is_needed(tmp_path: Path) -> None:
    assert run(str(tmp_path / "t.csv")).exit_code == 2
