"""One look through a recording while it is decoded: where something changed, and what is needed to measure it later.

What a pixel shows when nothing is there is known at the end only. So what changed against the scene as known so far is
kept, in windows, and measured against the background of the whole recording. Where the scene as known so far was wrong,
as when an object was in view from the start, and where the store of windows is full, the recording is decoded again.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, field
from typing import Any, NamedTuple

import cv2
import numpy as np
from numpy.typing import NDArray

from settlelab.video.background import (
    Background,
    Coarse,
    Image,
    Mask,
    Sampler,
    coarse_of,
    detection_factor,
    row_gains,
    shrink,
)
from settlelab.video.silhouettes import Silhouette, silhouettes, window_of, without_marks
from settlelab.video.source import Frame, Picture, Source, read_ahead

FIRST_FRAMES = 8  # from which the scene is known first, and about as many later
REVISIONS = frozenset(32 * 8**power for power in range(8))  # frames after which it is taken anew
STORE_BYTES = 60_000_000  # of windows
WINDOW_MARGIN = 10  # px around what changed
MOST_OBJECTS = 200  # in a frame; more is a damaged picture or another light, and nothing to follow

Box = tuple[int, int, int, int]  # left, top, right, bottom, px


class Cut(NamedTuple):
    """A window cut out of a frame."""

    box: Box
    picture: Picture


@dataclass(kw_only=True)
class Survey:
    """What one look through a recording gives, frame by frame."""

    container_time: list[float] = field(default_factory=list)  # s
    number: list[int] = field(default_factory=list)
    gains: list[Image] = field(default_factory=list)  # brightness of the rows against the scene of that time
    cuts: list[list[Cut]] = field(default_factory=list)
    scenes: list[tuple[int, Coarse]] = field(default_factory=list)  # first frame of each, as known from there on
    samples: list[Picture] = field(default_factory=list)
    stored_until: int | None = None  # frame at which the store of windows was full
    passed_over: int = 0  # frames with more objects than can be followed

    def epochs(self) -> Iterator[tuple[range, Coarse]]:
        """The frames looked at with each scene."""
        ends = [first for first, _ in self.scenes[1:]] + [len(self.number)]
        for (first, scene), end in zip(self.scenes, ends, strict=True):
            yield range(first, end), scene


def _shrunk(source: Source) -> Iterator[tuple[Frame, Image]]:
    """Every frame with its small picture; that is cheap while the frame is fresh in the processor's cache."""
    factor = detection_factor(source.size)
    return read_ahead((frame, shrink(frame.picture, factor, source.black)) for frame in source.frames())


def survey(source: Source) -> Survey:
    """Look through a recording once."""
    seen, sampler = Survey(), Sampler()
    waiting: list[tuple[Picture, Image]] = []
    stored = 0
    for count, (frame, small) in enumerate(_shrunk(source)):
        seen.container_time.append(frame.time)
        seen.number.append(frame.number)
        sampler.add(count, frame.picture)
        waiting.append((frame.picture, small))
        if not seen.scenes:
            if len(waiting) < FIRST_FRAMES:
                continue
            seen.scenes.append((0, coarse_of([picture for picture, _ in waiting], source.black)))
        elif count in REVISIONS:
            few = sampler.kept[:: 1 + len(sampler.kept) // FIRST_FRAMES]
            seen.scenes.append((count, coarse_of(few, source.black)))
        stored += sum(_keep(*one, seen, stored) for one in waiting)
        waiting.clear()
    if waiting:
        seen.scenes.append((0, coarse_of([picture for picture, _ in waiting], source.black)))
        stored += sum(_keep(*one, seen, stored) for one in waiting)
    seen.samples = sampler.kept
    return seen


def _keep(picture: Picture, small: Image, seen: Survey, stored: int) -> int:
    """Add what changed in a frame to what was seen; its bytes."""
    scene = seen.scenes[-1][1]
    gains = row_gains(small, scene.inverse)
    cuts = []
    if stored < STORE_BYTES:
        for left, top, right, bottom in changed_boxes(scene.change(small, gains), scene.factor, picture.shape):
            cuts.append(Cut((left, top, right, bottom), picture[top:bottom, left:right].copy()))
    elif seen.stored_until is None:
        seen.stored_until = len(seen.gains)
    seen.gains.append(gains)
    seen.cuts.append(cuts)
    return sum(cut.picture.nbytes for cut in cuts)


def measured(seen: Survey, source: Source, background: Background) -> list[list[Silhouette]]:
    """Every object of every frame, measured against the background of the whole recording.

    `seen` gives its windows away as they are measured.
    """
    scene = background.coarse
    found: list[list[Silhouette]] = [[] for _ in seen.number]
    again: set[int] = set(range(len(found))[seen.stored_until :]) if seen.stored_until is not None else set()
    for frames, then in seen.epochs():
        now = row_gains(then.level, scene.inverse)
        if scene.change(then.level, now).any():
            again.update(frames)
            continue
        for index in frames:
            found[index] = _objects(seen.cuts[index], seen.gains[index] * now, background, seen)
            seen.cuts[index] = []
    seen.cuts.clear()
    if again:
        for index, (frame, small) in enumerate(_shrunk(source)):
            if index in again:
                gains = row_gains(small, scene.inverse)
                boxes = changed_boxes(scene.change(small, gains), scene.factor, frame.picture.shape)
                cuts = [Cut(box, frame.picture[box[1] : box[3], box[0] : box[2]]) for box in boxes]
                found[index] = _objects(cuts, gains, background, seen)
            if index >= max(again):
                break
    return found


def _objects(cuts: list[Cut], gains: Image, background: Background, seen: Survey) -> list[Silhouette]:
    """The objects in the windows of one frame; none, and the frame counted as passed over, where they are too many."""
    found: list[Silhouette] = []
    for cut in cuts:
        found += silhouettes(window_of(cut.picture, cut.box, gains, background))
        if len(found) > MOST_OBJECTS:
            seen.passed_over += 1
            return []
    return without_marks(found)


def changed_boxes(changed: Mask, factor: int, shape: tuple[int, ...]) -> list[Box]:
    """Boxes of the full picture, of that height and width, around what changed in the small one.

    Overlapping boxes are joined, so that no object is met twice.
    """
    if not cv2.countNonZero(changed):
        return []
    reach = WINDOW_MARGIN // factor + 1
    joined = cv2.dilate(changed, np.ones((2 * reach + 1, 2 * reach + 1), np.uint8))
    contours, _ = cv2.findContours(joined, cv2.RETR_EXTERNAL, cv2.CHAIN_APPROX_SIMPLE)
    rows, columns = changed.shape
    return [
        (
            left * factor,
            top * factor,
            shape[1] if right == columns else right * factor,
            shape[0] if bottom == rows else bottom * factor,
        )
        for left, top, right, bottom in _disjoint([_box(contour) for contour in contours])
    ]


def _box(contour: NDArray[Any]) -> Box:
    left, top, wide, high = cv2.boundingRect(contour)
    return left, top, left + wide, top + high


def _disjoint(boxes: list[Box]) -> list[Box]:
    """The boxes, those that overlap replaced by their common hull until none do."""
    waiting, done = list(boxes), list[Box]()
    while waiting:
        box = waiting.pop(0)
        met = next((other for other in done if _overlap(box, other)), None)
        if met is None:
            done.append(box)
            continue
        done.remove(met)
        waiting.insert(0, (min(box[0], met[0]), min(box[1], met[1]), max(box[2], met[2]), max(box[3], met[3])))
    return sorted(done, key=lambda one: (one[1], one[0]))


def _overlap(one: Box, other: Box) -> bool:
    return one[0] < other[2] and other[0] < one[2] and one[1] < other[3] and other[1] < one[3]
