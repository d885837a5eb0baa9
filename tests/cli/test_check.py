"""`settlelab check` through the command line: the summary, the faults, the stills."""

from __future__ import annotations

from pathlib import Path

import cv2
import numpy as np
from click.testing import CliRunner

from settlelab.cli import main
from tests.study.folder import write_study

SIZE = (160, 240)  # px, width and height


def write_video(path: Path) -> None:
    """Three grey frames; motion JPEG in AVI, which every OpenCV reads whatever the file is called."""
    own = path.with_suffix(".avi")
    writer = cv2.VideoWriter(str(own), cv2.VideoWriter_fourcc(*"MJPG"), 30.0, SIZE)
    for number in range(3):
        writer.write(np.full((SIZE[1], SIZE[0], 3), 100 + 20 * number, dtype=np.uint8))
    writer.release()
    own.replace(path)


def run(*arguments: str) -> tuple[int, str]:
    """Exit code and everything that was printed."""
    result = CliRunner().invoke(main, arguments)
    assert result.exception is None or isinstance(result.exception, SystemExit)
    return result.exit_code, result.output


def study_with_videos(folder: Path, *changes: tuple[str, str]) -> Path:
    write_study(folder, *changes)
    for video in ("a1.mp4", "b1.mp4"):
        write_video(folder / video)
    return folder


def test_summary_of_a_study_that_is_right(tmp_path: Path) -> None:
    code, output = run("check", str(study_with_videos(tmp_path)))
    assert code == 0
    assert "Fluids      glycerol: glycerol-water, 62.00 ± 0.30 % glycerol by mass, 21.40 ± 0.20 °C\n" in output
    assert "Recordings  a1.mp4: 3 drops in glycerol: A-01, A-02, S-1\n" in output
    assert "Videos      a1.mp4: opens, 160 x 240 px, about 3 frames\n" in output
    assert "Assumed     particles.csv: no uncertainty is stated for" in output
    assert output.endswith(f"ready: settlelab run {tmp_path} (recordings: 2, drops: 5)\n")
    assert max(map(len, output.splitlines()[:-1])) <= 100


def test_nothing_is_run_or_written(tmp_path: Path) -> None:
    study_with_videos(tmp_path)
    before = sorted(path.name for path in tmp_path.iterdir())
    run("check", str(tmp_path / "study.toml"))
    assert sorted(path.name for path in tmp_path.iterdir()) == before


def test_all_faults_and_exit_code_1(tmp_path: Path) -> None:
    study = study_with_videos(tmp_path, ("gravity =", "gravty ="), ('"1200 mm"', '"1200 mn"'))
    code, output = run("check", str(study))
    assert code == 1
    assert 'study.toml, camera: "gravty" is not a key of [camera] (did you mean "gravity"?)' in output
    assert 'study.toml, column, height: "1200 mn" is not a length' in output
    assert "Traceback" not in output


def test_a_video_that_cannot_be_read(tmp_path: Path) -> None:
    study_with_videos(tmp_path)
    (tmp_path / "b1.mp4").write_bytes(b"no video at all" * 100)
    code, output = run("check", str(tmp_path))
    assert code == 1
    assert "a1.mp4: opens" in output
    assert f"Error: {tmp_path / 'b1.mp4'}: cannot be read as a video" in output


def test_stills_carry_a_grid_on_the_pixels_of_the_recording(tmp_path: Path) -> None:
    code, output = run("check", str(study_with_videos(tmp_path)), "--stills", str(tmp_path / "stills"))
    assert code == 0
    paths = [tmp_path / "stills" / "01_a1.png", tmp_path / "stills" / "02_b1.png"]
    assert all(f"wrote {path}\n" in output for path in paths)
    picture = cv2.imdecode(np.fromfile(paths[0], dtype=np.uint8), cv2.IMREAD_COLOR)
    assert picture.shape == (SIZE[1], SIZE[0], 3)
    colourful = np.ptp(picture.astype(int), axis=2) > 40
    assert colourful[150, 100]  # the vertical line of x = 100
    assert colourful[100, 77]  # the horizontal line of y = 100
    assert colourful[102, 120]  # a tick of the line y = 100
    assert not colourful[150, 77]  # and the picture between them is untouched
    assert abs(int(picture[150, 77].mean()) - 100) < 4
