"""Which of the followed objects are falls, and which of their points count."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

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
WHOLE = 0.95  # of the area a little further on: a silhouette below it at an end of the path is still partly hidden
SMOOTHED_TRAVEL = 2.0  # px, over which speed is judged
WANDER = 0.01  # of the way along gravity
WANDER_FLOOR = 0.2  # px
BESIDE = 0.5  # diameters along gravity, by which a reflection may lie above or below its object
AS_FAST, AS_STRAIGHT = 0.004, 0.01  # of the speed: along gravity, and of the mirrored one across
FAINTER = 0.75  # of the contrast of the object
TOGETHER = 0.8  # of its frames, in which the object is seen too
SAME_SPEED, SAME_SIZE = 0.03, 0.25  # relative differences between two pieces of one fall
MISS_SHARE = 0.02  # of the way between the two, by which one may miss the other
FAR_SLOWER, UNEXPLAINED = 0.1, 0.4  # see `drifting`
SLOW = 0.5  # px per frame interval
EVEN = 0.05  # of the way
FAR = 30.0  # px; what was seen now and then on such a way down may have been a fall, and is told
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
        self.contrast = np.array([one.contrast for one in path])

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
    hidden_first = _partly_hidden(kept)
    hidden_last = _partly_hidden(kept[::-1])
    return kept[hidden_first : len(kept) - hidden_last]


def _partly_hidden(path: Sequence[Sighting]) -> int:
    """How many points at the start of a path show less than the whole object.

    An object that comes out of hiding is whole after a way of its own diameter; until then its area is held against
    that on the next two diameters.
    """
    way = np.hypot([one.x - path[0].x for one in path], [one.y - path[0].y for one in path])
    area = np.array([one.area for one in path])
    diameter = np.sqrt(4 * np.median(area) / np.pi)
    emerging = way < diameter
    after = area[~emerging & (way < 3 * diameter)]
    if len(after) == 0:
        return 0
    hidden = np.flatnonzero(emerging & (area < WHOLE * np.median(after)))
    return int(hidden[-1]) + 1 if len(hidden) else 0


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
    if len(path) < FEWEST_POINTS:
        return "seen in too few frames" if len(path) > 2 and _keeps_going(whole) else None
    if _flickers(whole):
        return "seen in too few of the frames on its way" if whole.y[-1] - whole.y[0] > FAR else None
    if np.hypot(np.ptp(whole.x), np.ptp(whole.y)) < MENTIONED_TRAVEL:
        return None
    if whole.cut.all():
        return "never wholly in view"
    if len(kept) < FEWEST_POINTS:
        in_view = Points([one for one in path if not one.cut], times)
        return _why_not_falling(in_view) or "wholly in view and in motion in too few frames"
    return _why_not_falling(Points(kept, times))


def _flickers(points: Points) -> bool:
    """Whether something is seen now and then only: a speck at the limit of the noise, or a mark of the codec."""
    return len(points.index) < SEEN_SHARE * float(points.index[-1] - points.index[0] + 1)


def _keeps_going(points: Points) -> bool:
    """Whether a few points lie on an even way along gravity, with an even area: an object, not noise."""
    down = float(points.y[-1] - points.y[0])
    line = np.polyval(np.polyfit(points.time, points.y, 1), points.time)
    even = np.abs(points.y - line).max() < EVEN * down and np.ptp(points.x) < 0.5 * down
    return down > MENTIONED_TRAVEL and bool(even) and float(points.area.max() / points.area.min()) < 1.5


def _why_not_falling(points: Points) -> str:
    down, across = float(points.y[-1] - points.y[0]), float(points.x[-1] - points.x[0])
    needed = max(SHORTEST_TRAVEL, TRAVEL_IN_DIAMETERS * points.diameter)
    if abs(down) < needed and abs(across) < needed:
        return "stays about where it is"
    if abs(across) > abs(down):
        return "moves across gravity"
    if down < 0:
        return "rises"
    speed = speeds(points)
    if abs(speed.sum()) < STEADY * np.abs(speed).sum() or _wanders(points):
        return "drifts, with no even speed"
    return ""


def _wanders(points: Points) -> bool:
    """A slow object that strays from an even, or evenly changing, speed by more than its place is uncertain."""
    down = abs(float(points.y[-1] - points.y[0]))
    if down > SLOW * (points.time[-1] - points.time[0]):
        return False
    middle, half = points.time.mean(), np.ptp(points.time) / 2
    scaled = (points.time - middle) / half
    stray = points.y - np.polyval(np.polyfit(scaled, points.y, 2), scaled)
    return float(stray.std()) > max(WANDER_FLOOR, WANDER * down)


def drifting(all_falls: Mapping[int, Points]) -> set[int]:
    """Which falls are specks that drift with the fluid: ten times slower than others, and slower than size explains.

    Of two particles of one density the smaller is slower by the square of the diameter at most (Stokes' law). A speck
    that falls at less than 0.4 of that is not of their kind.
    """
    velocity = {
        index: float((points.y[-1] - points.y[0]) / (points.time[-1] - points.time[0]))
        for index, points in all_falls.items()
    }
    return {
        index
        for index, points in all_falls.items()
        if any(
            velocity[index] < FAR_SLOWER * velocity[other]
            and velocity[index] < UNEXPLAINED * velocity[other] * (points.diameter / that.diameter) ** 2
            for other, that in all_falls.items()
        )
    }


def reflections(all_falls: Mapping[int, Points]) -> set[int]:
    """Which falls are reflections of others in a side wall of the column.

    A reflection is seen while its object is, at the same height and speed, moves across the other way, and is fainter.
    Two particles side by side hardly agree in speed to 0.4 % and in height to half a diameter all the way.
    """
    return {
        index
        for index, points in all_falls.items()
        if any(_mirrors(points, other) for number, other in all_falls.items() if number != index)
    }


def _mirrors(points: Points, other: Points) -> bool:
    _, mine, theirs = np.intersect1d(points.index, other.index, assume_unique=True, return_indices=True)
    if len(mine) < max(FEWEST_POINTS, TOGETHER * len(points.index)):
        return False
    if np.median(np.abs(points.contrast)) > FAINTER * np.median(np.abs(other.contrast)):
        return False
    beside = np.abs(points.y[mine] - other.y[theirs])
    if beside.max() > BESIDE * max(points.diameter, other.diameter):
        return False
    time = points.time[mine] - points.time[mine].mean()
    down, across = time @ other.y[theirs] / (time @ time), time @ (points.x[mine] + other.x[theirs]) / (time @ time)
    slower = time @ (points.y[mine] - other.y[theirs]) / (time @ time)
    return bool(abs(slower) < AS_FAST * abs(down) and abs(across) < AS_STRAIGHT * abs(down))


def shorter_pieces(all_falls: Mapping[int, Points]) -> set[int]:
    """Which falls are pieces of others: in a crowd one may be lost and found again too differently to be joined.

    Two pieces never seen together are of one fall where one, going on at its speed, meets the other at its time within
    a diameter. The one with more points stands for the fall.
    """
    by_length = sorted(all_falls, key=lambda index: -len(all_falls[index].index))
    pieces: set[int] = set()
    for rank, index in enumerate(by_length):
        longer = (all_falls[other] for other in by_length[:rank] if other not in pieces)
        if any(_same_fall(other, all_falls[index]) for other in longer):
            pieces.add(index)
    return pieces


def _same_fall(one: Points, other: Points) -> bool:
    if one.index[0] <= other.index[-1] and other.index[0] <= one.index[-1]:
        return False
    if abs(one.diameter / other.diameter - 1) > SAME_SIZE or np.median(one.contrast) * np.median(other.contrast) < 0:
        return False
    middle, then = one.time.mean(), other.time.mean()
    time = one.time - middle
    vx, vy = time @ one.x / (time @ time), time @ one.y / (time @ time)
    theirs = other.time - then
    if abs(theirs @ other.y / (theirs @ theirs) - vy) > SAME_SPEED * abs(vy):
        return False
    across = other.x.mean() - one.x.mean() - vx * (then - middle)
    down = other.y.mean() - one.y.mean() - vy * (then - middle)
    return bool(np.hypot(across, down) < one.diameter + MISS_SHARE * abs(vy * (then - middle)))
