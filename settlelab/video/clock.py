"""True frame times: what the container says, corrected by the stated capture rate, and whether frames are missing."""

from __future__ import annotations

import numpy as np

from settlelab.errors import RecordingError
from settlelab.units import Quantity
from settlelab.video.model import Clock, FloatArray

QUARTZ_U = 1e-4  # relative, of a stated rate without uncertainty: a camera's free-running oscillator
NTSC_U = 1e-3 / np.sqrt(3)  # a container may call 30000/1001 Hz 30 Hz: rectangular, half width 0.1 %
TIMESTAMP_RESOLUTION = 1.05e-3  # s, Matroska and WebM round to 1 ms
SCATTER_LIMIT = 0.02  # of the frame interval: above it the times are irregular


def frame_times(container: FloatArray, number: np.ndarray, stated: Quantity | None) -> tuple[FloatArray, Clock]:
    """True time of every frame and how far it can be trusted.

    Parameters
    ----------
    container : (N,) array
        Times on the recording's own clock [s], 0 at the first frame; nan where it has none.
    number : (N,) array of int
        Frame numbers; holes are missing frames.
    stated : Quantity or None
        True capture rate [Hz]. A slow-motion container has another rate: its times are scaled.

    Returns
    -------
    (N,) array and Clock
        Times [s], 0 at the first frame.

    Raises
    ------
    RecordingError
        Neither a clock in the container nor a stated rate.
    """
    ticks, own_rate, regular = _ticks(container, number)
    if own_rate is None and stated is None:
        raise RecordingError("the recording has no clock of its own: state the true capture rate (frame rate)")
    rate = stated.value if stated is not None else own_rate
    assert rate is not None
    steps = np.rint(np.diff(ticks)).astype(np.int64)
    missing = int(np.sum(np.maximum(steps - 1, 0)))
    clock = Clock(
        frame_rate=float(rate),
        u_relative=rate_u(stated),
        source="container" if stated is None else "stated",
        irregular=missing > 0 or not regular,
        missing_frames=missing,
    )
    return ticks / rate, clock


def rate_u(stated: Quantity | None) -> float:
    """Relative standard uncertainty of time intervals: of a stated rate, or of the container's clock (None)."""
    if stated is None:
        return float(NTSC_U)
    return stated.u / stated.value if stated.u > 0 else QUARTZ_U


def _ticks(container: FloatArray, number: np.ndarray) -> tuple[FloatArray, float | None, bool]:
    """Times in frame intervals, the container's own frame rate, and whether the intervals are regular.

    Times that lie on an even grid within the resolution of the time stamps are put on it, so that their rounding does
    not enter the velocity.
    """
    counted = (number - number[0]).astype(np.float64)
    intervals = np.diff(container)
    if len(intervals) == 0 or not np.all(np.isfinite(container)) or np.any(intervals <= 0):
        return counted, None, bool(len(intervals) == 0 or not np.all(np.isfinite(container)))
    interval = float(intervals[intervals < 1.6 * np.median(intervals)].mean())
    for _ in range(3):  # rounded time stamps bias single intervals; the whole length does not
        whole = np.maximum(np.rint(intervals / interval), 1)
        interval = float(container[-1] / whole.sum())
    grid = np.concatenate([[0.0], np.cumsum(whole)])
    slope, start = np.polyfit(grid, container, 1)
    scatter = container - (slope * grid + start)
    on_grid = np.abs(scatter).max() <= max(TIMESTAMP_RESOLUTION, SCATTER_LIMIT * slope)
    return (grid if on_grid else container / slope), float(1 / slope), bool(on_grid)
