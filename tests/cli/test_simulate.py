"""`settlelab simulate` through the command line."""

from __future__ import annotations

from pathlib import Path

import cv2
import pandas as pd
import pytest
from click.testing import CliRunner

from settlelab.cli import main
from settlelab.study import read_study

SMALL = ("--size", "160", "200", "--bore", "30", "--frame-rate", "60", "--depth", "-150", "--diameter", "3")


def simulate(*arguments: str, code: int = 0) -> str:
    outcome = CliRunner().invoke(main, ["simulate", *arguments])
    assert outcome.exit_code == code, outcome.output
    return outcome.output


def test_writes_a_recording_its_truth_and_a_study_that_can_be_read(tmp_path: Path) -> None:
    said = simulate(str(tmp_path), "--number", "2", *SMALL)
    files = ["study.toml", "particles.csv", "recording.mp4", "truth.csv"]
    assert said.splitlines() == [f"wrote {tmp_path / name}" for name in files]
    truth = pd.read_csv(tmp_path / "truth.csv")
    assert list(truth["particle"]) == ["C-01", "C-02"]
    assert truth["equivalent_diameter_mm"].tolist() == pytest.approx([3.0, 3.0])
    assert truth["velocity_mm_s"].between(50, 300).all()
    study = read_study(tmp_path)
    assert study.recordings[0].particles == ("C-01", "C-02")
    assert "Simulated" in study.notes
    capture = cv2.VideoCapture(str(tmp_path / "recording.mp4"), cv2.CAP_FFMPEG)
    assert capture.read()[1].shape[:2] == (200, 160)


def test_spheres_become_controls_and_a_polymer_gets_its_viscometer(tmp_path: Path) -> None:
    balls = ("--particle", "sphere", "--number", "1", "--suffix", ".avi")
    simulate(str(tmp_path), *balls, "--power-law", "0.1", "0.7", *SMALL)
    study = read_study(tmp_path)
    assert study.particles[0].control
    assert study.fluids[0].readings is not None
    truth = pd.read_csv(tmp_path / "truth.csv")
    assert truth["corey_shape_factor"].tolist() == [1.0]


def test_seed_decides(tmp_path: Path) -> None:
    tables = []
    for name, seed in (("one", "1"), ("again", "1"), ("other", "2")):
        simulate(str(tmp_path / name), "--number", "1", "--seed", seed, *SMALL)
        tables.append((tmp_path / name / "truth.csv").read_bytes())
    assert tables[0] == tables[1] != tables[2]


def test_particles_that_float_are_refused(tmp_path: Path) -> None:
    said = simulate(str(tmp_path / "out"), "--density", "900", code=1)
    assert "do not sink in a fluid of 1180 kg/m3: give a density above that" in said
    assert not (tmp_path / "out").exists()


def test_particles_too_large_for_the_column_are_refused(tmp_path: Path) -> None:
    said = simulate(str(tmp_path), "--particle", "sphere", "--diameter", "6", "--bore", "10", code=1)
    assert said.strip() == "Error: particles 6.0 mm long need a column at least twice as wide, the bore is 10.0 mm"


def test_wrong_usage(tmp_path: Path) -> None:
    assert "--number" in simulate(str(tmp_path), "--number", "0", code=2)
    assert "--particle" in simulate(str(tmp_path), "--particle", "cube", code=2)


@pytest.mark.slow
def test_field_study_is_drawn_as_it_is_stored(tmp_path: Path) -> None:
    simulate("--field-study", str(tmp_path))
    project = Path(__file__).parents[2]
    for name in ("sample_tables/study.toml", "sample_tables/particles.csv", "tests/sample_truth.csv"):
        assert (tmp_path / name).read_bytes() == (project / name).read_bytes()
    drawn = sorted((tmp_path / "sample_videos").glob("*.mp4"))
    assert [path.name for path in drawn] == [path.name for path in sorted((project / "sample_videos").glob("*.mp4"))]
