"""`settlelab track` through the command line: files, lines, refusals."""

from __future__ import annotations

import csv
import re
from pathlib import Path

import cv2
import numpy as np
import pytest
from click.testing import CliRunner

from settlelab.cli import main
from tests.video.rendering import Disc, Scene, as_folder, as_video

FALLING = Disc(x=80, y=-20, diameter=16, vy=4.0)
RISING = Disc(x=120, y=330, diameter=9, vy=-5.0)


def run(*arguments: str) -> tuple[int, str]:
    """Exit code and everything that was printed."""
    result = CliRunner().invoke(main, ["track", *arguments])
    assert result.exception is None or isinstance(result.exception, SystemExit)
    return result.exit_code, result.output


def rows(file: Path) -> list[dict[str, str]]:
    with file.open(encoding="utf-8", newline="") as lines:
        return list(csv.DictReader(lines))


def test_a_recording_gives_tracks_drops_and_a_picture(tmp_path: Path) -> None:
    video = as_video(Scene(discs=[FALLING, RISING]), tmp_path / "a.mp4", rate=30.0)
    out = tmp_path / "out"
    code, text = run(str(video), "--mm-per-px", "0.1", "--frame-rate", "120", "--out", str(out))
    assert code == 0, text
    assert re.search(r"^fall 1: 4[78]\.\d+ ± 0\.\d+ mm/s, 1\.6\d? mm wide", text, re.MULTILINE), text
    assert "not counted, 1 object: rises" in text
    for name in ("tracks.csv", "drops.csv", "overlay.png"):
        assert f"wrote {out / name}" in text
    (drop,) = rows(out / "drops.csv")
    assert float(drop["velocity_mm_s"]) == pytest.approx(0.1 * 4.0 * 120, rel=1e-3)
    assert float(drop["projected_diameter_mm"]) == pytest.approx(1.6, rel=0.01)
    assert drop["accepted"] == "true"
    points = rows(out / "tracks.csv")
    assert {point["drop"] for point in points} == {"1"}
    assert list(points[0])[:6] == ["drop", "frame", "time_s", "x_mm", "y_mm", "area_mm2"]
    time, y = (np.array([float(point[name]) for point in points]) for name in ("time_s", "y_mm"))
    assert np.polyfit(time, y, 1)[0] == pytest.approx(48.0, rel=1e-3)
    assert cv2.imread(str(out / "overlay.png")) is not None


def test_a_folder_of_pictures_with_gravity_to_the_left(tmp_path: Path) -> None:
    folder = as_folder(Scene(discs=[FALLING]), tmp_path / "frames", turns=3)
    out = tmp_path / "out"
    code, text = run(str(folder), "--mm-per-px", "0.1", "--frame-rate", "100", "--gravity", "left", "--out", str(out))
    assert code == 0, text
    (drop,) = rows(out / "drops.csv")
    assert float(drop["velocity_mm_s"]) == pytest.approx(40.0, rel=1e-3)


def test_an_empty_recording_is_no_error(tmp_path: Path) -> None:
    video = as_video(Scene(frames=30), tmp_path / "a.mp4")
    code, text = run(str(video), "--mm-per-px", "0.1", "--frame-rate", "100", "--out", str(tmp_path / "out"))
    assert code == 0, text
    assert "note: a.mp4: nothing fell in this recording" in text
    assert rows(tmp_path / "out" / "drops.csv") == []


def test_what_cannot_be_done_is_one_sentence_and_exit_1(tmp_path: Path) -> None:
    code, text = run(str(tmp_path / "none.mp4"), "--mm-per-px", "0.1", "--out", str(tmp_path / "out"))
    assert code == 1
    assert text == f"Error: {tmp_path / 'none.mp4'}: there is no such recording\n"
    folder = as_folder(Scene(frames=3), tmp_path / "frames")
    code, text = run(str(folder), "--mm-per-px", "0.1", "--out", str(tmp_path / "out"))
    assert code == 1
    assert text.count("\n") == 1
    assert "state the true capture rate" in text


@pytest.mark.parametrize("wrong", [["--mm-per-px", "0"], ["--mm-per-px", "0.1", "--gravity", "north"], []])
def test_wrong_usage_is_exit_2(wrong: list[str], tmp_path: Path) -> None:
    code, _ = run("a.mp4", *wrong, "--out", str(tmp_path / "out"))
    assert code == 2


def test_says_what_the_uncertainty_leaves_out(tmp_path: Path) -> None:
    pictures = as_folder(Scene(discs=[Disc(x=80, y=-20, diameter=14, vy=6.0)], frames=70), tmp_path / "pictures")
    code, told = run(str(pictures), "--mm-per-px", "0.1", "--frame-rate", "50", "--out", str(tmp_path / "out"))
    assert code == 0
    assert "the scale is taken as exact" in told
