"""The scale: stated, from marks, from the graduation in the picture, from a checkerboard."""

from __future__ import annotations

from pathlib import Path

import cv2
import numpy as np
import pytest

from settlelab.errors import RecordingError
from settlelab.study.model import Camera
from settlelab.units import Quantity
from settlelab.video.optics import scale_of
from settlelab.video.walls import find_walls
from tests.video.rendering import Scene, lamp

BLANK = lamp(Scene(size=(200, 300)))


def graduated(spacing: float, noise: float = 0.3) -> np.ndarray:
    scene = Scene(size=(240, 420), marks=spacing, walls=(30.0, 210.0))
    picture = cv2.GaussianBlur(lamp(scene), (0, 0), 0.8)
    return picture + np.random.default_rng(2).normal(0, noise, picture.shape)


def board(step: float, *, tilt: float = 0.0, count: tuple[int, int] = (7, 9)) -> np.ndarray:
    """A checkerboard of `count` squares, drawn with a perspective that shortens its rows by `tilt`."""
    rows, columns = count
    fine = np.full((rows * 40 + 160, columns * 40 + 160), 235, np.uint8)
    for row in range(rows):
        for column in range(columns):
            if (row + column) % 2 == 0:
                fine[80 + row * 40 : 120 + row * 40, 80 + column * 40 : 120 + column * 40] = 30
    scale = step / 40
    size = (int(fine.shape[1] * scale) + 1, int(fine.shape[0] * scale) + 1)
    matrix = np.array([[scale, 0.0, 0.0], [0.0, scale * (1 - tilt), 0.0], [0.0, 0.0, 1.0]])
    return cv2.warpPerspective(fine, matrix, size, flags=cv2.INTER_AREA, borderValue=235)


def write(picture: np.ndarray, file: Path) -> Path:
    file.write_bytes(cv2.imencode(".png", picture)[1].tobytes())
    return file


def test_two_marks() -> None:
    camera = Camera(marks=((10.0, 20.0), (13.0, 420.0)), marks_apart=Quantity(0.1, 1e-4))
    scale, _ = scale_of(camera, BLANK, "a.mp4")
    pixels = np.hypot(3.0, 400.0)
    assert scale.value == pytest.approx(0.1 / pixels)
    assert scale.u / scale.value == pytest.approx(np.hypot(1e-3, np.sqrt(2) * 0.5 / pixels))


def test_two_marks_in_one_place() -> None:
    camera = Camera(marks=((10.0, 20.0), (10.0, 21.0)), marks_apart=Quantity(0.1))
    with pytest.raises(RecordingError, match="the two marks are the same point"):
        scale_of(camera, BLANK, "a.mp4")


def test_no_scale_at_all() -> None:
    with pytest.raises(RecordingError, match="accepted are mm_per_px, marks with marks_apart, graduation"):
        scale_of(Camera(), BLANK, "a.mp4")


@pytest.mark.parametrize("spacing", [11.3, 24.67, 47.5])
def test_graduation_is_found_and_its_uncertainty_holds(spacing: float) -> None:
    scale, notes = scale_of(Camera(graduation=Quantity(0.01, 2e-6)), graduated(spacing), "a.mp4")
    assert abs(scale.value - 0.01 / spacing) < 3 * scale.u
    assert scale.u / scale.value < 2e-3
    assert "marks of the graduation" in notes[0]


def test_no_graduation_is_a_clear_refusal() -> None:
    with pytest.raises(RecordingError, match=r"a\.mp4: no graduation is found .* at least five evenly spaced marks"):
        scale_of(Camera(graduation=Quantity(0.01)), BLANK, "a.mp4")


def test_checkerboard(tmp_path: Path) -> None:
    file = write(board(31.4), tmp_path / "board.png")
    scale, notes = scale_of(Camera(checkerboard=file, square=Quantity(0.01, 1e-6)), BLANK, "a.mp4")
    assert scale.value == pytest.approx(0.01 / 31.4, rel=1e-3)
    assert "48 inner corners" in notes[0]
    assert len(notes) == 1


def test_a_tilted_checkerboard_is_told(tmp_path: Path) -> None:
    file = write(board(31.4, tilt=0.05), tmp_path / "board.png")
    scale, notes = scale_of(Camera(checkerboard=file, square=Quantity(0.01)), BLANK, "a.mp4")
    assert "the board was tilted" in notes[1]
    assert scale.u / scale.value > 0.01


def test_no_checkerboard(tmp_path: Path) -> None:
    file = write(np.full((200, 200), 128, np.uint8), tmp_path / "board.png")
    with pytest.raises(RecordingError, match="no checkerboard is found"):
        scale_of(Camera(checkerboard=file, square=Quantity(0.01)), BLANK, "a.mp4")
    with pytest.raises(RecordingError, match="there is no such picture of a checkerboard"):
        scale_of(Camera(checkerboard=tmp_path / "none.png", square=Quantity(0.01)), BLANK, "a.mp4")


@pytest.mark.parametrize("bore", [180.0, 175.0, 185.0])
def test_walls_are_found_a_little_off_the_stated_bore(bore: float) -> None:
    walls = find_walls(graduated(25.0), bore)
    assert walls is not None
    assert walls[0] == pytest.approx(30.0, abs=2.6)  # either side of a wall 3 px thick
    assert walls[1] == pytest.approx(210.0, abs=2.6)


def test_no_walls_where_there_are_none_or_the_bore_is_another() -> None:
    noisy = BLANK + np.random.default_rng(1).normal(0, 0.5, BLANK.shape)
    assert find_walls(noisy, 150.0) is None
    assert find_walls(graduated(25.0), 120.0) is None
