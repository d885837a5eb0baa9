"""Silhouettes with sub-pixel edges: how much of each pixel a body covers.

Pixel (i, j) spans i - 1/2 to i + 1/2; coordinates are pixels, x across and y down. Along a line the covered length is
exact; lines stand SUBLINES to a pixel.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import NamedTuple

import cv2
import numpy as np
from numpy.typing import NDArray

from settlelab.simulate.grains import Body

FloatArray = NDArray[np.float64]

SUBLINES = 16
BLUR_STEP = 0.2  # px, way of the particle between two sub-exposures
SUBEXPOSURES = 24  # at most


class Pose(NamedTuple):
    """Where a body is (its mass centre, px) and how it is turned."""

    x: float
    y: float
    rotation: FloatArray


@dataclass(frozen=True, slots=True)
class Patch:
    """Coverage (h, w), 0 to 1, of the pixels from column `left` and row `top` on."""

    left: int
    top: int
    coverage: FloatArray

    def darken(self, picture: FloatArray, transmission: float) -> None:
        """Put the body in front of `picture`, which is changed; what lies outside is cut off."""
        height, width = picture.shape
        rows = slice(max(self.top, 0), min(self.top + self.coverage.shape[0], height))
        columns = slice(max(self.left, 0), min(self.left + self.coverage.shape[1], width))
        if rows.start >= rows.stop or columns.start >= columns.stop:
            return
        part = self.coverage[
            rows.start - self.top : rows.stop - self.top, columns.start - self.left : columns.stop - self.left
        ]
        picture[rows, columns] *= 1 - (1 - transmission) * part


def silhouette(body: Body, poses: list[Pose], metre_per_px: float, softness: float = 0.0) -> Patch:
    """Mean coverage over `poses` (the sub-exposures of one frame), blurred by a Gaussian of `softness` [px]."""
    margin = body.reach / metre_per_px + 4 * softness + 1.5
    left = int(np.floor(min(pose.x for pose in poses) - margin))
    right = int(np.ceil(max(pose.x for pose in poses) + margin))
    top = int(np.floor(min(pose.y for pose in poses) - margin))
    bottom = int(np.ceil(max(pose.y for pose in poses) + margin))
    lines = top - 0.5 + (np.arange((bottom - top + 1) * SUBLINES) + 0.5) / SUBLINES
    borders = left - 0.5 + np.arange(right - left + 2, dtype=np.float64)
    total = np.zeros((bottom - top + 1, right - left + 1))
    for pose in poses:
        ends = body.chords((lines - pose.y) * metre_per_px, pose.rotation)
        start, stop = (end / metre_per_px + pose.x for end in ends)
        total += _covered(start, stop, borders).reshape(*total.shape[:1], SUBLINES, -1).mean(axis=1)
    total /= len(poses)
    if softness > 0:
        total = np.asarray(cv2.GaussianBlur(total, (0, 0), softness, borderType=cv2.BORDER_CONSTANT), dtype=np.float64)
    return Patch(left, top, total)


def _covered(start: FloatArray, stop: FloatArray, borders: FloatArray) -> FloatArray:
    """Share (L, W) of each pixel between `borders` (W + 1,) that the chords from `start` to `stop` (L,) cover."""
    before_stop = np.clip(stop[:, None] - borders[:-1], 0.0, 1.0)
    before_start = np.clip(start[:, None] - borders[:-1], 0.0, 1.0)
    return before_stop - before_start


def subexposures(blur: float) -> int:
    """How many sub-exposures show a blur of that many pixels smoothly."""
    return int(np.clip(np.ceil(blur / BLUR_STEP), 1, SUBEXPOSURES))
