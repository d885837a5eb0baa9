"""Which falls count once several of them are held against each other."""

from __future__ import annotations

import numpy as np
import pytest

from settlelab.video.falls import Points, shorter_pieces
from settlelab.video.linking import Sighting

TIMES = np.arange(200.0)


def series(frames: range, *, x: float, y: float, vy: float, diameter: float = 10.0) -> Points:
    """An even fall that would be at `y` in frame 0."""
    path = [
        Sighting(
            index=frame,
            x=x,
            y=y + vy * frame,
            area=np.pi / 4 * diameter**2,
            aspect_ratio=1.0,
            circularity=1.0,
            orientation=0.0,
            edge_width=2.0,
            contrast=100.0,
            cut=False,
        )
        for frame in frames
    ]
    return Points(path, TIMES)


FIRST = series(range(10, 60), x=80, y=0, vy=4.0)


@pytest.mark.parametrize(
    ("other", "is_piece"),
    [
        (series(range(80, 100), x=81, y=0, vy=4.02), True),
        (series(range(80, 100), x=81, y=0, vy=4.02, diameter=14), False),  # of another size
        (series(range(80, 100), x=81, y=-60, vy=4.0), False),  # behind it by sixty pixels
        (series(range(80, 100), x=81, y=-20, vy=4.3), False),  # faster
        (series(range(50, 70), x=81, y=8, vy=4.0), False),  # both seen in the same frames
    ],
    ids=["piece", "size", "place", "speed", "together"],
)
def test_a_piece_of_a_fall_that_is_counted(other: Points, is_piece: bool) -> None:
    assert shorter_pieces({3: other, 5: FIRST}) == ({3} if is_piece else set())
