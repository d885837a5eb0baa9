"""Objects that pass in front of each other: for a while there is one silhouette where two are expected."""

from __future__ import annotations

import itertools
from collections.abc import Collection, Iterator, Sequence
from dataclasses import replace
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from settlelab.video.linking import Sighting

SHARE = 0.5  # of a path's frames, in which another one is hidden by it
KNOWN = 8  # points from which the speed at an end is known
UNSEEN_WAY, UNSEEN_FRAMES = 3.0, 60  # diameters that an object may pass unseen at an end of its path, frames at most
HALO = 3.0  # px between two silhouettes within which they blur into one


class Gap(NamedTuple):
    """Where one path is lost and where it is found again."""

    path: int
    before: Sighting
    after: Sighting


def gaps_of(paths: Sequence[Sequence[Sighting]]) -> list[Gap]:
    """Every gap of every path."""
    return [
        Gap(number, before, after)
        for number, path in enumerate(paths)
        for before, after in itertools.pairwise(path)
        if after.index > before.index + 1
    ]


def unseen_ends(paths: Sequence[Sequence[Sighting]], joint: Collection[int]) -> list[Gap]:
    """A short way before the first and after the last sighting of each path, at the speed it has there.

    Two objects that overlap where one of them comes into view, or goes out of it, leave no gap. `joint` paths are of
    several objects and lead nowhere.
    """
    ends = []
    for number, path in enumerate(paths):
        if len(path) < KNOWN or number in joint:
            continue
        for end, other in ((path[0], path[KNOWN - 1]), (path[-1], path[-KNOWN])):
            per_frame = np.array([end.x - other.x, end.y - other.y]) / (end.index - other.index)
            speed = float(np.hypot(*per_frame))
            if speed * UNSEEN_FRAMES < UNSEEN_WAY * end.diameter:
                continue  # it rests, or nearly so
            frames = int(np.ceil(UNSEEN_WAY * end.diameter / speed)) * (1 if end is path[-1] else -1)
            x, y = np.array([end.x, end.y]) + per_frame * frames
            away = replace(end, index=end.index + frames, x=float(x), y=float(y))
            ends.append(Gap(number, end, away) if frames > 0 else Gap(number, away, end))
    return ends


def joint_views(paths: Sequence[Sequence[Sighting]], gaps: Sequence[Gap]) -> set[int]:
    """Which paths are not of one object, but of several seen as one.

    Such a path begins where another is lost and ends where that is found again: the place of the other, interpolated
    over its gap, lies within the silhouette.
    """
    return {
        number
        for number, path in enumerate(paths)
        if any(np.count_nonzero(hidden) > SHARE * len(path) for hidden in _hidden(number, path, gaps))
    }


def alone(number: int, path: Sequence[Sighting], gaps: Sequence[Gap]) -> list[Sighting]:
    """The points of a path in which no other object is unseen because it is within its silhouette or close by."""
    disturbed = np.zeros(len(path), dtype=bool)
    for hidden in _hidden(number, path, gaps):
        disturbed |= hidden
    return [one for one, is_disturbed in zip(path, disturbed, strict=True) if not is_disturbed]


def _hidden(number: int, path: Sequence[Sighting], gaps: Sequence[Gap]) -> Iterator[NDArray[np.bool_]]:
    """For each gap of another path: in which points of this one that object is expected within its silhouette."""
    first, last = path[0].index, path[-1].index
    near = [gap for gap in gaps if gap.path != number and gap.before.index < last and gap.after.index > first]
    if not near:
        return
    index, x, y, radius = np.array([(one.index, one.x, one.y, one.diameter / 2) for one in path]).T
    for _, before, after in near:
        inside = (index > before.index) & (index < after.index)
        share = (index - before.index) / (after.index - before.index)
        away_x, away_y = before.x + share * (after.x - before.x) - x, before.y + share * (after.y - before.y) - y
        yield inside & (np.hypot(away_x, away_y) < radius + before.diameter / 2 + HALO)
