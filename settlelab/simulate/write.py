"""Writes pictures into a video that every OpenCV wheel reads back.

The container decides the codec: `.mp4` MPEG-4 part 2 (small; skips faint changes, as phones do), `.avi` Motion JPEG
(every picture for itself), `.mkv` FFV1 (lossless, large). H.264 is not among them: the wheels cannot write it.
"""

from __future__ import annotations

from collections.abc import Iterable
from pathlib import Path

import cv2
import numpy as np
from numpy.typing import NDArray

from settlelab.errors import RecordingError

CODECS = {".mp4": "mp4v", ".avi": "MJPG", ".mkv": "FFV1"}
TURNS = {"down": 0, "right": 1, "up": 2, "left": 3}  # quarter turns anticlockwise that bring gravity there from down


def write_video(path: Path, pictures: Iterable[NDArray[np.uint8]], *, size: tuple[int, int], rate: float) -> Path:
    """Write grey pictures (height, width) as a video of `size` (width, height) [px] at `rate` [Hz].

    Raises
    ------
    RecordingError
        The file name ends otherwise than in .mp4, .avi or .mkv, or the file cannot be written.
    """
    codec = CODECS.get(path.suffix.lower())
    if codec is None:
        raise RecordingError(f'{path}: "{path.suffix}" is not one of {", ".join(CODECS)}')
    writer = cv2.VideoWriter(
        str(path), cv2.CAP_FFMPEG, cv2.VideoWriter.fourcc(*codec), rate, size, [cv2.VIDEOWRITER_PROP_IS_COLOR, 0]
    )
    if not writer.isOpened():
        raise RecordingError(f"{path}: a video cannot be written there")
    try:
        for picture in pictures:
            writer.write(picture)
    finally:
        writer.release()
    return path


def turned(picture: NDArray[np.uint8], gravity: str) -> NDArray[np.uint8]:
    """A picture drawn with gravity down, turned so that gravity points `down`, `right`, `up` or `left`."""
    return np.ascontiguousarray(np.rot90(picture, TURNS[gravity]))


def turned_point(x: float, y: float, size: tuple[int, int], gravity: str) -> tuple[float, float]:
    """Where the point x, y [px] of a picture of `size` (width, height) with gravity down goes when it is turned."""
    width, height = size
    return {
        "down": (x, y),
        "right": (y, width - 1 - x),
        "up": (width - 1 - x, height - 1 - y),
        "left": (height - 1 - y, x),
    }[gravity]
