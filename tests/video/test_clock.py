"""Frame times: rounding, slow motion, dropped frames, irregular intervals."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from settlelab.errors import RecordingError
from settlelab.units import Quantity
from settlelab.video.clock import frame_times

NUMBER = np.arange(300)


@given(st.floats(20.0, 480.0))
def test_time_stamps_rounded_to_milliseconds_do_not_shift_the_rate(rate: float) -> None:
    exact = NUMBER / rate
    times, clock = frame_times(np.round(exact, 3), NUMBER, None)
    assert clock.source == "container"
    assert not clock.irregular
    # the ends of the recording are known to half a millisecond
    assert clock.frame_rate == pytest.approx(rate, rel=1.5e-3 / exact[-1])
    np.testing.assert_allclose(np.diff(times), 1 / clock.frame_rate, rtol=1e-9)


def test_a_stated_rate_scales_the_times_of_a_slow_motion_container() -> None:
    times, clock = frame_times(NUMBER / 30.0, NUMBER, Quantity(240.0, 0.24))
    np.testing.assert_allclose(times, NUMBER / 240.0, rtol=1e-9)
    assert (clock.source, clock.irregular, clock.missing_frames) == ("stated", False, 0)
    assert clock.u_relative == pytest.approx(1e-3)


def test_dropped_frames_leave_their_time() -> None:
    kept = np.delete(np.arange(300), [50, 51, 200])
    times, clock = frame_times(kept / 120.0, np.arange(len(kept)), Quantity(120.0))
    np.testing.assert_allclose(times, kept / 120.0, rtol=1e-9)
    assert clock.missing_frames == 3
    assert clock.irregular


def test_irregular_intervals_are_told_and_kept() -> None:
    random = np.random.default_rng(5)
    true = np.concatenate([[0.0], np.cumsum(random.uniform(0.006, 0.011, 299))])
    times, clock = frame_times(true, NUMBER, None)
    assert clock.irregular
    np.testing.assert_allclose(times, true, atol=1e-6)


def test_no_clock_at_all() -> None:
    with pytest.raises(RecordingError, match="state the true capture rate"):
        frame_times(np.full(5, np.nan), np.arange(5), None)


def test_a_rate_without_uncertainty_gets_that_of_a_camera_clock() -> None:
    assert frame_times(NUMBER / 100.0, NUMBER, Quantity(100.0))[1].u_relative == pytest.approx(1e-4)
    # half of the 0.1 % between 30 and 30000/1001 Hz, as a rectangle
    assert frame_times(NUMBER / 100.0, NUMBER, None)[1].u_relative == pytest.approx(1e-3 / np.sqrt(3))
