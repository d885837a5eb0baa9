"""The grid of pixels drawn over a still."""

from __future__ import annotations

import numpy as np
import pytest

from settlelab.video.stills import pixel_grid


@pytest.mark.parametrize("size", [(1, 1), (20, 300), (300, 20), (101, 101)])
def test_any_size_keeps_its_size(size: tuple[int, int]) -> None:
    assert pixel_grid(np.full(size, 128, dtype=np.uint8)).shape == (*size, 3)


def test_pictures_of_more_than_8_bits_keep_their_grey() -> None:
    drawn = pixel_grid(np.full((60, 60), 90.6, dtype=np.float32))
    assert drawn.dtype == np.uint8
    assert drawn[33, 33].tolist() == [90, 90, 90]


def test_the_picture_given_is_not_changed() -> None:
    picture = np.full((250, 250), 128, dtype=np.uint8)
    pixel_grid(picture)
    assert (picture == 128).all()
