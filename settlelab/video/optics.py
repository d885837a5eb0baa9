"""Scale in the plane of the fall: stated, or from two marks, the graduation of the column, or a checkerboard."""

from __future__ import annotations

from pathlib import Path

import cv2
import numpy as np
from numpy.typing import NDArray

from settlelab.errors import RecordingError
from settlelab.study.model import Camera
from settlelab.units import Quantity
from settlelab.video.graduation import graduation_spacing
from settlelab.video.model import FloatArray

POINTING_U = 0.5  # px, standard uncertainty of a mark pointed at by hand
SMALLEST_BOARD = (3, 3)  # inner corners


def scale_of(camera: Camera, background: NDArray[np.floating], name: str) -> tuple[Quantity, list[str]]:
    """Metres per pixel, and what should be known about it.

    Parameters
    ----------
    camera : Camera
        States one of: metre_per_px, marks with marks_apart, graduation, checkerboard with square.
    background : (H, W) array
        The still picture of the recording, turned so that y grows along gravity.
    name : str
        The recording, for messages.

    Raises
    ------
    RecordingError
        Nothing is stated, the marks coincide, or the graduation or the checkerboard is not found.
    """
    if camera.metre_per_px is not None:
        return camera.metre_per_px, []
    if camera.marks is not None and camera.marks_apart is not None:
        return _from_marks(camera.marks, camera.marks_apart, name), []
    if camera.graduation is not None:
        return _from_graduation(background, camera.graduation, name)
    if camera.checkerboard is not None and camera.square is not None:
        return _from_checkerboard(camera.checkerboard, camera.square)
    raise RecordingError(
        f"{name}: the camera has no scale; accepted are mm_per_px, marks with marks_apart, graduation, or checkerboard"
        " with square"
    )


def _from_marks(marks: tuple[tuple[float, float], tuple[float, float]], apart: Quantity, name: str) -> Quantity:
    pixels = float(np.hypot(marks[1][0] - marks[0][0], marks[1][1] - marks[0][1]))
    if pixels < 2:
        raise RecordingError(f"{name}: the two marks are the same point; accepted are two points far apart")
    relative = np.hypot(apart.u / apart.value, np.sqrt(2) * POINTING_U / pixels)
    return Quantity(apart.value / pixels, float(apart.value / pixels * relative))


def _from_graduation(background: NDArray[np.floating], graduation: Quantity, name: str) -> tuple[Quantity, list[str]]:
    found = graduation_spacing(background)
    if found is None:
        raise RecordingError(
            f"{name}: no graduation is found in the still picture; accepted are at least five evenly spaced marks, one"
            " below the other (or give mm_per_px or two marks)"
        )
    scale = graduation.value / found.spacing
    relative = np.hypot(graduation.u / graduation.value, found.spacing_u / found.spacing)
    note = (
        f"{name}: scale from {found.marks} marks of the graduation, {found.spacing:.3f} px apart;"
        " it holds at the depth of the marks"
    )
    return Quantity(scale, float(scale * relative)), [note]


def _from_checkerboard(file: Path, square: Quantity) -> tuple[Quantity, list[str]]:
    """Scale at the middle of the board, from the map of its plane to the picture."""
    if not file.exists():
        raise RecordingError(f"{file}: there is no such picture of a checkerboard")
    picture = cv2.imdecode(np.fromfile(file, dtype=np.uint8), cv2.IMREAD_GRAYSCALE)
    if picture is None:
        raise RecordingError(f"{file}: cannot be read as a picture (PNG, TIFF or JPEG)")
    flags = cv2.CALIB_CB_LARGER | cv2.CALIB_CB_EXHAUSTIVE | cv2.CALIB_CB_ACCURACY
    found, corners, meta = cv2.findChessboardCornersSBWithMeta(picture, SMALLEST_BOARD, flags)
    if not found:
        raise RecordingError(
            f"{file}: no checkerboard is found; accepted is a sharp picture of the whole board with a light margin"
        )
    rows, columns = meta.shape[:2]
    board = np.array([(column, row) for row in range(rows) for column in range(columns)], dtype=np.float64)
    along, across, scatter = _local_scale(board, np.asarray(corners, dtype=np.float64).reshape(-1, 2))
    pixels = float(np.sqrt(along * across))
    relative = np.hypot(square.u / square.value, scatter / (pixels * np.sqrt(len(board) / 12) * max(rows, columns)))
    notes = [f"{file.name}: scale from {rows * columns} inner corners, {pixels:.3f} px a square"]
    if abs(along / across - 1) > 0.01:
        notes.append(
            f"{file.name}: squares are {100 * abs(along / across - 1):.1f} % longer one way: the board was tilted"
        )
        relative = np.hypot(relative, abs(along / across - 1) / 2)
    return Quantity(square.value / pixels, float(square.value / pixels * relative)), notes


def _local_scale(board: FloatArray, corners: FloatArray) -> tuple[float, float, float]:
    """Pixels per square along both ways at the middle of the board, and the scatter of the corners, px."""
    to_picture, _ = cv2.findHomography(board.reshape(-1, 1, 2), corners.reshape(-1, 1, 2), 0)
    mapped = cv2.perspectiveTransform(board.reshape(-1, 1, 2), to_picture).reshape(-1, 2)
    scatter = float(np.sqrt(np.sum((mapped - corners) ** 2) / max(2 * len(board) - 8, 1)))
    ends = board.mean(axis=0) + np.array([(0.5, 0), (-0.5, 0), (0, 0.5), (0, -0.5)])
    right, left, low, top = cv2.perspectiveTransform(ends.reshape(-1, 1, 2), to_picture).reshape(-1, 2)
    return float(np.hypot(*(low - top))), float(np.hypot(*(right - left))), scatter
