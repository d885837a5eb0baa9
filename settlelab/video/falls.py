"""Which of the followed objects are falls, and which of their points count."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from settlelab.video.linking import Sighting
from settlelab.video.model import FloatArray

FEWEST_POINTS = 6
SHORTEST_TRAVEL = 8.0  # px along gravity
TRAVEL_IN_DIAMETERS = 1.0
STEADY = 0.8  # net over total travel along gravity, noise smoothed out
SEEN_SHARE = 0.5  # of the frames between its first and its last
AT_REST = 0.15  # of the fastest part of the path
WHOLE = 0.93  # of the usual area: a silhouette below it at an end of the path is still partly hidden
SMOOTHED_TRAVEL = 2.0  # px, over which speed is judged
MENTIONED_TRAVEL = 3.0  # px; what moves less and is seen briefly is noise, not an object worth a line


class Points:
    """The series of one path as arrays, (N,) each."""

    def __init__(self, path: Sequence[Sighting], times: FloatArray) -> None:
        self.index: NDArray[np.int64] = np.array([one.index for one in path], dtype=np.int64)
        self.time = times[self.index]  # frame intervals
        self.x = np.array([one.x for one in path])
        self.y = np.array([one.y for one in path])
        self.area = np.array([one.area for one in path])
        self.cut = np.array([one.cut for one in path])

    @property
    def diameter(self) -> float:
        """Usual area-equivalent diameter, px."""
        whole = self.area[~self.cut] if not self.cut.all() else self.area
        return float(np.sqrt(4 * np.median(whole) / np.pi))


def counting_points(path: Sequence[Sighting], times: FloatArray) -> list[Sighting]:
    """The points of a path that enter the velocity: wholly in view and in motion.

    Left out are points cut by the edge of the picture, those at either end where the silhouette has not yet its usual
    area (coming out of a meniscus, a stopper, a gripper), and those before and after the motion, with the last
    diameter before the place of rest.
    """
    kept = [one for one in path if not one.cut]
    if len(kept) < FEWEST_POINTS:
        return kept
    points = Points(kept, times)
    first, last = _in_motion(points)
    kept = kept[first:last]
    if len(kept) < FEWEST_POINTS:
        return kept
    area = np.array([one.area for one in kept])
    whole = np.flatnonzero(area >= WHOLE * np.median(area))
    return kept[int(whole[0]) : int(whole[-1]) + 1] if len(whole) else []


def speeds(points: Points) -> FloatArray:
    """Speed along gravity at each point, px per frame interval, over enough points to travel a few pixels."""
    count = len(points.y)
    mean = abs(points.y[-1] - points.y[0]) / max(points.time[-1] - points.time[0], 1.0)
    reach = int(np.clip(np.ceil(SMOOTHED_TRAVEL / max(mean, 1e-6) / 2), 1, max(1, count // 8)))
    before = np.maximum(np.arange(count) - reach, 0)
    after = np.minimum(np.arange(count) + reach, count - 1)
    return np.asarray((points.y[after] - points.y[before]) / (points.time[after] - points.time[before]))


def _in_motion(points: Points) -> tuple[int, int]:
    """First and one past the last index of the part that moves."""
    speed = np.abs(speeds(points))
    moving = np.flatnonzero(speed > AT_REST * np.quantile(speed, 0.98))
    if len(moving) == 0:
        return 0, len(speed)
    first, last = int(moving[0]), int(moving[-1]) + 1
    if last <= len(speed) - 3:  # it came to rest in view
        near_rest = np.abs(points.y - points.y[-1]) < points.diameter
        while last > first and near_rest[last - 1]:
            last -= 1
    return first, last


def why_not_a_fall(path: Sequence[Sighting], kept: Sequence[Sighting], times: FloatArray) -> str | None:
    """The reason for refusing a path, empty for a fall; None for noise that is not worth a line."""
    whole = Points(path, times)
    if len(path) < FEWEST_POINTS or np.hypot(np.ptp(whole.x), np.ptp(whole.y)) < MENTIONED_TRAVEL:
        moved = np.hypot(np.ptp(whole.x), np.ptp(whole.y)) > 10 * MENTIONED_TRAVEL and len(path) > 2
        return "seen in too few frames" if moved else None
    if whole.cut.all():
        return "never wholly in view"
    if len(kept) < FEWEST_POINTS:
        return "wholly in view and in motion in too few frames"
    return _why_not_falling(Points(kept, times))


def _why_not_falling(points: Points) -> str:
    down, across = float(points.y[-1] - points.y[0]), float(points.x[-1] - points.x[0])
    needed = max(SHORTEST_TRAVEL, TRAVEL_IN_DIAMETERS * points.diameter)
    if abs(down) < needed and abs(across) < needed:
        return "stays about where it is"
    if abs(across) > abs(down):
        return "moves across gravity"
    if down < 0:
        return "rises"
    if len(points.y) < SEEN_SHARE * (points.index[-1] - points.index[0] + 1):
        return "seen in too few of the frames on its way"
    speed = speeds(points)
    if abs(speed.sum()) < STEADY * np.abs(speed).sum():
        return "wanders, with no steady way down"
    return ""
