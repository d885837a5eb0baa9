"""Points turn with their picture."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from settlelab.study.model import Gravity
from settlelab.video.turning import QUARTER_TURNS, Turn


@given(
    quarters=st.integers(0, 3),
    width=st.integers(2, 9),
    height=st.integers(2, 9),
    place=st.tuples(*[st.integers(0, 99)] * 2),
)
def test_a_marked_pixel_is_where_its_point_goes(quarters: int, width: int, height: int, place: tuple[int, int]) -> None:
    column, row = place[0] % width, place[1] % height
    picture = np.zeros((height, width), np.uint8)
    picture[row, column] = 1
    turn = Turn(quarters, width, height)
    turned = turn.picture(picture)
    x, y = turn.points(np.array(float(column)), np.array(float(row)))
    assert turned.shape == turn.size[::-1]
    assert turned[int(y), int(x)] == 1


@pytest.mark.parametrize(("gravity", "side"), [("down", (4, 9)), ("up", (4, 0)), ("left", (0, 5)), ("right", (7, 5))])
def test_the_named_side_goes_to_the_bottom(gravity: Gravity, side: tuple[float, float]) -> None:
    turn = Turn.to_gravity(gravity, 0, (8, 10))
    _, y = turn.points(np.array(float(side[0])), np.array(float(side[1])))
    assert y == turn.size[1] - 1


@pytest.mark.parametrize("rotation", [0, 90, 180, 270])
def test_rotation_of_the_container_comes_first(rotation: int) -> None:
    """A container that asks for 90 degrees clockwise shows the left side of its picture at the top."""
    turn = Turn.to_gravity("down", rotation, (8, 10))
    picture = np.arange(80, dtype=np.uint8).reshape(10, 8)
    np.testing.assert_array_equal(turn.picture(picture), np.rot90(picture, -rotation // 90))


@given(st.sampled_from(sorted(QUARTER_TURNS)), st.floats(-1.5, 1.5))
def test_an_axis_turns_with_its_end_points(gravity: Gravity, angle: float) -> None:
    turn = Turn.to_gravity(gravity, 0, (100, 100))
    x, y = turn.points(50 + 20 * np.array([0.0, np.sin(angle)]), 50 + 20 * np.array([0.0, np.cos(angle)]))
    expected = np.arctan2(x[1] - x[0], y[1] - y[0])
    difference = float(turn.orientation(np.array(angle)) - expected)
    assert np.sin(difference) == pytest.approx(0.0, abs=1e-9)  # an axis has no direction: equal modulo pi
    assert abs(float(turn.orientation(np.array(angle)))) <= np.pi / 2
