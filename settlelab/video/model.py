"""What the tracker hands on: objects followed through a recording.

Lengths are pixels of a picture turned so that y grows along gravity.
"""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from settlelab.units import Quantity

FloatArray = NDArray[np.float64]


@dataclass(frozen=True, slots=True, kw_only=True)
class Clock:
    """Where the frame times come from and how far they can be trusted."""

    frame_rate: float  # Hz, mean true capture rate
    u_relative: float  # relative standard uncertainty of every time interval
    source: Literal["stated", "container"]
    irregular: bool  # frame intervals scatter or frames are missing: flag `clock`
    missing_frames: int = 0


@dataclass(frozen=True, slots=True, kw_only=True)
class Track:
    """One object followed through a recording; every array is (N,), one entry per frame in which it was seen."""

    frame: NDArray[np.int64]  # frame number in the recording, from 0
    time: FloatArray  # s, true clock, 0 at the first frame of the recording
    x: FloatArray  # px, grey-weighted centroid, across gravity
    y: FloatArray  # px, grey-weighted centroid, along gravity
    area: FloatArray  # px2, silhouette corrected for blur where that is known
    aspect_ratio: FloatArray  # [-] smallest over largest Feret diameter, 0..1
    circularity: FloatArray  # [-] ISO 9276-6: sqrt(4 pi A / P^2), 0..1
    orientation: FloatArray  # rad, long axis of the silhouette against gravity, -pi/2..pi/2
    wall_distance: FloatArray  # px, centre to the nearer side wall; nan where no wall is known
    flags: tuple[
        str, ...
    ] = ()  # of the design's list: near-wall, neighbour, rising, short-track, blurred, edge, gap, clock
    reason: str = ""  # why it was refused; empty for an accepted fall


@dataclass(frozen=True, slots=True, kw_only=True)
class TrackedRecording:
    """Everything that was followed in one recording."""

    video: Path
    frame_count: int
    size: tuple[int, int]  # px, width and height of the picture after turning gravity down
    clock: Clock
    scale: Quantity  # m/px in the plane of fall
    falls: tuple[Track, ...]  # accepted by the tracker, in order of appearance
    refused: tuple[Track, ...]  # other moving objects, each with its reason
    background: NDArray[np.uint8]  # (height, width), turned like the tracks
    walls: tuple[float, float] | None  # px, x of the inner column walls, found or given
    notes: tuple[str, ...] = ()  # assumptions and doubts, one sentence each
