"""A still of a recording with a labelled grid of pixels, to read marks from."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import cv2
import numpy as np
from numpy.typing import NDArray

from settlelab.errors import RecordingError, SettlelabError
from settlelab.video.source import Source

__all__ = ["first_picture", "pixel_grid", "write_still"]

LINE = np.array([0, 120, 240], dtype=np.float64)  # blue, green, red: an orange seen on dark and bright columns
INK, PAPER = (0, 0, 0), (245, 245, 245)
MAJOR, MINOR = 100, 10  # px between labelled lines, and between ticks


def first_picture(source: Source) -> NDArray[Any]:
    """The first frame of a recording as decoded, not turned: marks are pixels of this picture.

    Raises
    ------
    RecordingError
        Not one frame can be decoded.
    """
    for frame in source.frames():
        return frame.picture
    raise RecordingError(f"{source.path}: not one frame can be decoded")


def pixel_grid(picture: NDArray[Any]) -> NDArray[np.uint8]:
    """The picture in colour, same size, with lines every 100 px, ticks every 10 px and labels.

    A pixel of the result is the same pixel of the recording, so that the pointer of an image viewer tells it as well.
    """
    grey = np.clip(picture, 0, 255).astype(np.uint8)
    drawn = cv2.cvtColor(grey, cv2.COLOR_GRAY2BGR).astype(np.float64)
    height, width = grey.shape
    on_line = np.zeros((height, width), dtype=bool)
    on_line[::MAJOR], on_line[:, ::MAJOR] = True, True
    for offset in range(-3, 4):  # ticks across the lines
        rows, columns = (np.arange(MAJOR, size, MAJOR) + offset for size in (height, width))
        on_line[np.ix_(rows[rows < height], np.arange(0, width, MINOR))] = True
        on_line[np.ix_(np.arange(0, height, MINOR), columns[columns < width])] = True
    drawn[on_line] = 0.45 * drawn[on_line] + 0.55 * LINE
    shown: NDArray[np.uint8] = drawn.astype(np.uint8)
    for x in range(MAJOR, width - 30, MAJOR):
        for y in {14, height - 6}:  # above and below, one of them in a very small picture
            _label(shown, str(x), (x + 3, y))
    for y in range(MAJOR, height - 30, MAJOR):
        for x in {4, width - 44}:
            _label(shown, str(y), (x, y - 5))
    return shown


def write_still(source: Source, path: Path) -> Path:
    """Write the first picture of a recording with its pixel grid as PNG.

    Raises
    ------
    RecordingError
        Not one frame can be decoded.
    SettlelabError
        The file cannot be written.
    """
    there, code = cv2.imencode(".png", pixel_grid(first_picture(source)))
    try:
        path.parent.mkdir(parents=True, exist_ok=True)
        path.write_bytes(code.tobytes())  # not imwrite: it fails on names outside its encoding
    except OSError as error:
        raise SettlelabError(f"{path} cannot be written ({error.strerror})") from error
    assert there
    return path


def _label(picture: NDArray[np.uint8], text: str, place: tuple[int, int]) -> None:
    """Text on a light card; `place` is the lower left corner of the text."""
    (width, height), _ = cv2.getTextSize(text, cv2.FONT_HERSHEY_SIMPLEX, 0.42, 1)
    x, y = place
    cv2.rectangle(picture, (x - 1, y - height - 2), (x + width + 1, y + 3), PAPER, cv2.FILLED)
    cv2.putText(picture, text, place, cv2.FONT_HERSHEY_SIMPLEX, 0.42, INK, 1, cv2.LINE_AA)
