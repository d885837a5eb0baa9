"""The scene without moving objects, and the brightness of each frame against it.

The background comes from frames spread over the whole recording, so that an object has to rest in one place for half of
it before it is swallowed. What rests for less shows up as an object that does not move, which is told later.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from typing import Any

import cv2
import numpy as np
from numpy.typing import NDArray

from settlelab.video.source import Frame, Picture

Image = NDArray[np.float32]

SAMPLE_BYTES = 100_000_000  # of kept frames
MOST_SAMPLES, FEWEST_SAMPLES = 49, 9
DETECTION_PIXELS = 120_000  # of the small picture on which changes are looked for
LARGEST_FACTOR = 4  # a particle of 3 px must still show in the small picture
MAD_TO_SD = 1.4826  # normal distribution
ROUNDING_NOISE = 0.3  # grey levels, of rounding to whole levels: 1/sqrt(12)
DARKEST = 8.0  # grey levels; darker places say nothing on the lamp
ROW_SMOOTHING = 4.0  # small rows; flicker bands of a rolling shutter are wider


@dataclass(frozen=True, slots=True, kw_only=True)
class Background:
    """The scene at rest. Grey levels are counted from the black level of the recording."""

    level: Image  # (height, width), grey levels
    noise: Image  # (height, width), grey levels: standard deviation of one pixel over time, ripples included
    black: float
    factor: int  # side of the blocks of pixels that become one small pixel
    small: Image  # (height // factor, width // factor), block means of `level`
    small_noise: Image  # same shape, of the block means
    small_texture: Image  # same shape: largest difference of neighbouring pixels of `level` in the block


def shrink(picture: Picture, factor: int) -> Image:
    """Block means, float32; rows and columns that fill no block are left out."""
    height, width = picture.shape[0] // factor, picture.shape[1] // factor
    whole = picture[: height * factor, : width * factor]
    if factor == 1:
        return whole.astype(np.float32)
    return cv2.resize(whole, (width, height), interpolation=cv2.INTER_AREA).astype(np.float32)


def detection_factor(size: tuple[int, int]) -> int:
    """Block side for a picture of this width and height."""
    return int(np.clip(np.round(np.sqrt(size[0] * size[1] / DETECTION_PIXELS)), 1, LARGEST_FACTOR))


def sample(frames: Iterable[Frame]) -> list[Picture]:
    """Frames evenly spread over a recording of unknown length, in bounded memory.

    Every `step`-th frame is kept; when the store is full every other one goes and the step doubles.
    """
    kept: list[Picture] = []
    step, most = 1, 0
    for count, frame in enumerate(frames):
        if count == 0:
            most = int(np.clip(SAMPLE_BYTES // frame.picture.nbytes, FEWEST_SAMPLES, MOST_SAMPLES))
        if count % step:
            continue
        if len(kept) == most:
            del kept[1::2]
            step *= 2
            if count % step:
                continue
        kept.append(frame.picture.copy())
    return kept


def background_of(samples: list[Picture], black: float) -> Background:
    """The background of a recording from frames spread over it.

    Each pixel is the mean of the samples near their median, after every sample was brought to the same brightness: a
    mean of whole grey levels resolves a fraction of a level.
    """
    height, width = samples[0].shape
    factor = detection_factor((width, height))
    smalls = np.stack([shrink(picture, factor) - np.float32(black) for picture in samples])
    rough = np.median(smalls, axis=0)
    gains = np.stack([row_gains(small, rough) for small in smalls])
    evened = smalls / gains[:, :, None]
    small = np.median(evened, axis=0)
    small_noise = MAD_TO_SD * np.median(np.abs(evened - small), axis=0)
    level, noise = np.empty((height, width), np.float32), np.empty((height, width), np.float32)
    for rows in _strips(height, width, len(samples)):
        stack = np.stack([picture[rows].astype(np.float32) - np.float32(black) for picture in samples])
        stack /= np.stack([full_rows(gain, factor, height)[rows] for gain in gains])[:, :, None]
        level[rows], noise[rows] = _centre(stack)
    usual = max(float(np.median(noise[::3, ::3])), ROUNDING_NOISE)
    return Background(
        level=level,
        noise=np.maximum(cv2.blur(noise, (5, 5)), np.float32(usual)),
        black=black,
        factor=factor,
        small=shrink(level, factor),
        small_noise=np.maximum(cv2.blur(small_noise, (3, 3)), np.float32(usual / factor)),
        small_texture=shrink(cv2.dilate(texture(level), np.ones((2 * factor - 1, 2 * factor - 1), np.uint8)), factor),
    )


def texture(level: Image) -> Image:
    """Difference of neighbouring pixels: where it is large, a shake or the codec changes the picture a lot."""
    return np.asarray(cv2.morphologyEx(level, cv2.MORPH_GRADIENT, np.ones((3, 3), np.uint8)), dtype=np.float32)


def row_gains(small: Image, reference: Image) -> Image:
    """Brightness of each row of a small picture over that of the reference, objects left out.

    Rows, because mains flicker and a rolling shutter make bands across the picture as decoded.

    Parameters
    ----------
    small, reference : (H, W) arrays
        Grey levels above black.

    Returns
    -------
    (H,) array
        Gains [-]; 1 where the scene is too dark to tell.
    """
    lit = reference > DARKEST
    if np.count_nonzero(lit) < 0.05 * lit.size:
        return np.ones(len(small), np.float32)
    ratio = np.divide(small, reference, out=np.ones_like(small), where=lit)
    few = ratio[:: max(1, len(ratio) // 64), :: max(1, ratio.shape[1] // 64)]
    told = few[lit[:: max(1, len(ratio) // 64), :: max(1, ratio.shape[1] // 64)]]
    middle = float(np.median(told))
    reach = max(5 * MAD_TO_SD * float(np.median(np.abs(told - middle))), 0.02 * middle)
    fair = (lit & (np.abs(ratio - middle) < reach)).astype(np.float32)
    total = cv2.GaussianBlur((ratio * fair).sum(axis=1, keepdims=True), (1, 0), sigmaX=0.1, sigmaY=ROW_SMOOTHING)
    count = cv2.GaussianBlur(fair.sum(axis=1, keepdims=True), (1, 0), sigmaX=0.1, sigmaY=ROW_SMOOTHING)
    gains = np.where(count > 1.0, total / np.maximum(count, 1.0), middle)
    return gains[:, 0].astype(np.float32)


def full_rows(gains: Image, factor: int, height: int) -> Image:
    """Gains of the full rows, interpolated between the centres of the small ones."""
    centres = (np.arange(len(gains)) + 0.5) * factor - 0.5
    return np.interp(np.arange(height), centres, gains).astype(np.float32)


def _strips(height: int, width: int, samples: int) -> Iterator[slice]:
    """Bands of rows that keep the stack of samples small."""
    rows = max(1, 4_000_000 // (width * samples))
    for start in range(0, height, rows):
        yield slice(start, min(start + rows, height))


def _centre(stack: NDArray[Any]) -> tuple[Image, Image]:
    """Mean of the samples near the median, and the noise of each pixel."""
    middle = np.median(stack, axis=0)
    away = np.abs(stack - middle)
    noise = MAD_TO_SD * np.median(away, axis=0)
    near = away < 3 * max(float(np.median(noise)), ROUNDING_NOISE)
    count = near.sum(axis=0)
    mean = np.where(count > 0, (stack * near).sum(axis=0) / np.maximum(count, 1), middle)
    return mean.astype(np.float32), noise.astype(np.float32)
