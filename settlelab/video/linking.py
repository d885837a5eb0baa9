"""Linking: which object of this frame is which of the last, by prediction and the best assignment of all at once."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, field
from typing import Any

import numpy as np
from numpy.typing import NDArray
from scipy.optimize import linear_sum_assignment

from settlelab.video.model import FloatArray

MEMORY = 8  # points from which the next one is predicted
CONFIRMED = 3  # points after which a prediction is trusted
FIRST_STEP = 0.15  # of the picture height: the farthest an object moves before its speed is known
GATE_FLOOR = 3.0  # px
NEW_JUMP = np.log(2.5)  # of the area from one frame to the next, before an object is known well
SETTLED = 5  # points after which it is
SETTLED_JUMP = np.log(1.35)  # then, besides what noise does to a small area
NOISE_JUMP = 1.5  # px, over the square root of the area
SIZE_WEIGHT = 0.5  # of a size jump against a missed prediction, both over their largest
GAP_TRAVEL, GAP_DIAMETERS = 20.0, 6.0  # px, and diameters: how far it may pass unseen, behind a mark or another object
SHORTEST_GAP, LONGEST_GAP = 5.0, 150.0  # frame intervals
UNKNOWN_GAP = 1.5  # frame intervals that an object may be lost before its speed is known
TRUST, FIRST_TRUST = 0.3, 0.7  # of the speed, by which it may be wrong once confirmed, and before
FORBIDDEN = 1e6


@dataclass(frozen=True, slots=True, kw_only=True)
class Sighting:
    """One object in one frame, in the picture turned so that y grows along gravity."""

    index: int  # of the frame among those decoded
    x: float
    y: float
    area: float
    aspect_ratio: float
    circularity: float
    orientation: float
    edge_width: float
    contrast: float
    cut: bool

    @property
    def diameter(self) -> float:
        """Area-equivalent diameter, px."""
        return float(np.sqrt(4 * self.area / np.pi))


@dataclass(slots=True)
class _Path:
    """An object being followed."""

    sightings: list[Sighting] = field(default_factory=list)
    velocity: tuple[float, float] | None = None  # px per frame interval
    seen: float = 0.0  # time of the last sighting, frame intervals

    def add(self, sighting: Sighting, times: FloatArray) -> None:
        self.sightings.append(sighting)
        self.seen = float(times[sighting.index])
        recent = self.sightings[-MEMORY:]
        if len(recent) > 1:
            t = times[[one.index for one in recent]] - self.seen
            place = np.array([(one.x, one.y) for one in recent])
            spread = t - t.mean()
            slope = spread @ (place - place.mean(axis=0)) / (spread @ spread)
            self.velocity = (float(slope[0]), float(slope[1]))

    @property
    def largest_jump(self) -> float:
        """Of the logarithm of the area, that the next sighting may show; a plate that tumbles has shown such before."""
        if len(self.sightings) < SETTLED:
            return float(NEW_JUMP)
        areas = np.log([one.area for one in self.sightings[-MEMORY:]])
        noise = NOISE_JUMP / np.sqrt(self.sightings[-1].area)
        return float(max(SETTLED_JUMP + noise, 1.5 * np.abs(np.diff(areas)).max()))

    def patience(self) -> float:
        """How long it may stay unseen, frame intervals."""
        if len(self.sightings) < CONFIRMED:
            return UNKNOWN_GAP
        assert self.velocity is not None
        speed = float(np.hypot(*self.velocity))
        travel = GAP_DIAMETERS * self.sightings[-1].diameter + GAP_TRAVEL
        return float(np.clip(travel / max(speed, 1e-6), SHORTEST_GAP, LONGEST_GAP))


class Linker:
    """Joins sightings to paths, frame by frame."""

    def __init__(self, height: int) -> None:
        """`height` of the turned picture, px."""
        self._first_step = FIRST_STEP * height
        self._followed: list[_Path] = []
        self._ended: list[_Path] = []

    def add(self, now: float, sightings: Sequence[Sighting], times: FloatArray) -> None:
        """Take in the objects of the next frame, seen at time `now` [frame intervals]; `times` of the frames so far."""
        waiting = [path for path in self._followed if now - path.seen <= path.patience()]
        self._ended += [path for path in self._followed if now - path.seen > path.patience()]
        left = list(sightings)
        # those whose speed is known best choose first
        settled = [path for path in waiting if len(path.sightings) >= CONFIRMED]
        second = [path for path in waiting if path.velocity is not None and len(path.sightings) < CONFIRMED]
        fresh = [path for path in waiting if path.velocity is None]
        for paths in (settled, second, fresh):
            pairs = self._assign(paths, left, now)
            for path, sighting in pairs:
                path.add(sighting, times)
            taken = {id(sighting) for _, sighting in pairs}
            left = [sighting for sighting in left if id(sighting) not in taken]
        for sighting in left:
            path = _Path()
            path.add(sighting, times)
            waiting.append(path)
        self._followed = waiting

    def paths(self) -> list[list[Sighting]]:
        """All paths so far, in order of appearance."""
        every = [path.sightings for path in self._ended + self._followed]
        return sorted(every, key=lambda one: (one[0].index, one[0].y, one[0].x))

    def _assign(self, paths: list[_Path], sightings: list[Sighting], now: float) -> list[tuple[_Path, Sighting]]:
        if not paths or not sightings:
            return []
        cost = self._cost(paths, sightings, now)
        rows, columns = linear_sum_assignment(cost)
        return [
            (paths[row], sightings[column])
            for row, column in zip(rows, columns, strict=True)
            if cost[row, column] < FORBIDDEN
        ]

    def _cost(self, paths: list[_Path], sightings: list[Sighting], now: float) -> FloatArray:
        """Missed distance and size jump of every pair, each over the largest that is allowed; (paths, sightings)."""
        last = [path.sightings[-1] for path in paths]
        jump = np.abs(_differences(np.log, "area", last, sightings)) / _upright([path.largest_jump for path in paths])
        cut = _upright([one.cut for one in last]) | np.array([one.cut for one in sightings])
        same_side = _upright([one.contrast > 0 for one in last]) == np.array([one.contrast > 0 for one in sightings])
        across = _differences(np.positive, "x", last, sightings)
        down = _differences(np.positive, "y", last, sightings)
        passed = _upright([now - path.seen for path in paths])
        diameter = _upright([one.diameter for one in last])
        if paths[0].velocity is None:
            miss = self._first_miss(across, down, diameter, passed)
        else:
            miss = _miss(paths, across, down, diameter, passed)
        allowed = same_side & (miss <= 1) & ((jump <= 1) | cut)
        return np.where(allowed, miss + SIZE_WEIGHT * jump, FORBIDDEN)

    def _first_miss(self, across: FloatArray, down: FloatArray, diameter: FloatArray, passed: FloatArray) -> FloatArray:
        """Without a known speed: anything along gravity that is not too far, little across."""
        farthest = np.maximum(self._first_step, 2 * diameter) * passed
        aside = GATE_FLOOR + 0.5 * diameter + 0.25 * np.abs(down)
        return np.hypot(down / farthest, across / aside)


def _miss(
    paths: list[_Path], across: FloatArray, down: FloatArray, diameter: FloatArray, passed: FloatArray
) -> FloatArray:
    """Distance from the predicted place over the largest that is allowed."""
    vx, vy = (_upright(values) for values in zip(*(path.velocity or (0.0, 0.0) for path in paths), strict=True))
    trust = _upright([TRUST if len(path.sightings) >= CONFIRMED else FIRST_TRUST for path in paths])
    gate = GATE_FLOOR + (trust * np.hypot(vx, vy) + 0.1) * passed + 0.15 * diameter
    return np.asarray(np.hypot(across - vx * passed, down - vy * passed) / gate)


def _differences(
    scale: Callable[[FloatArray], FloatArray], name: str, last: list[Sighting], sightings: list[Sighting]
) -> FloatArray:
    """How much larger a quantity is in each sighting (columns) than in each path's last (rows)."""
    before, after = (scale(np.array([getattr(one, name) for one in each])) for each in (last, sightings))
    return after - before[:, None]


def _upright(values: Sequence[float]) -> NDArray[Any]:
    """One row for each path."""
    return np.array(values)[:, None]
