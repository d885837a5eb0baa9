"""Turning a recording so that gravity points down, without turning every frame: only points and finished pictures."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from settlelab.study.model import Gravity
from settlelab.video.model import FloatArray

# counter-clockwise quarter turns that bring the named side of a picture to its bottom
QUARTER_TURNS: dict[Gravity, int] = {"down": 0, "left": 1, "up": 2, "right": 3}


@dataclass(frozen=True, slots=True)
class Turn:
    """Counter-clockwise quarter turns of pictures of one size."""

    quarters: int  # 0..3
    width: int  # px, of the picture as decoded
    height: int

    @classmethod
    def to_gravity(cls, gravity: Gravity, rotation: int, size: tuple[int, int]) -> Turn:
        """The turn for a camera whose container asks for `rotation` degrees clockwise before showing."""
        return cls((QUARTER_TURNS[gravity] - rotation // 90) % 4, *size)

    @property
    def size(self) -> tuple[int, int]:
        """Width and height after the turn, px."""
        return (self.height, self.width) if self.quarters % 2 else (self.width, self.height)

    def picture(self, picture: NDArray[Any]) -> NDArray[Any]:
        """The picture, turned."""
        return np.ascontiguousarray(np.rot90(picture, self.quarters))

    def points(self, x: FloatArray, y: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Positions in the turned picture, px; pixel centres have whole coordinates."""
        right, low = self.width - 1.0, self.height - 1.0
        turned = ((x, y), (y, right - x), (right - x, low - y), (low - y, x))
        return turned[self.quarters]

    def orientation(self, angle: FloatArray) -> FloatArray:
        """Angles of an axis against the vertical of the picture, rad, after the turn; -pi/2..pi/2."""
        turned = angle + np.pi / 2 * (self.quarters % 2)
        return (turned + np.pi / 2) % np.pi - np.pi / 2
