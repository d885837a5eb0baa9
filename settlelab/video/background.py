"""The scene without moving objects, and the brightness of each frame against it.

The background comes from frames spread over the whole recording, so that an object has to rest in one place for half of
it before it is swallowed. What rests for less shows up as an object that does not move, which is told later.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import dataclass

import cv2
import numpy as np
from numpy.typing import NDArray

from settlelab.video.source import Frame, Picture

Image = NDArray[np.float32]
Mask = NDArray[np.uint8]

SAMPLE_BYTES = 100_000_000  # of kept frames
MOST_SAMPLES, FEWEST_SAMPLES = 49, 9
DETECTION_PIXELS = 120_000  # of the small picture on which changes are looked for
SMOOTHED = {1: 1.2, 2: 0.7}  # standard deviation in blocks, by the side of a block
LARGEST_FACTOR = 4  # a particle of 3 px must still show in the small picture
QUIET, QUIET_FLOOR = 3.5, 1.0  # times the noise of a block, or grey levels: nothing is there
NOISE_SAMPLES = 12
MAD_TO_SD = 1.4826  # normal distribution
REACH_OF_A_VALUE = 4.0  # px, side of the square over which a value of the small picture is a mean
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
    """Block means, smoothed where the blocks are small; rows and columns that fill no block are left out.

    Either way a value holds about the light of a particle of 3 px, so that a faint one stands out of the noise.
    """
    height, width = picture.shape[0] // factor, picture.shape[1] // factor
    whole = picture[: height * factor, : width * factor]
    blocks = cv2.resize(whole, (width, height), interpolation=cv2.INTER_AREA) if factor > 1 else whole
    small = blocks.astype(np.float32)
    if factor in SMOOTHED:
        cv2.GaussianBlur(small, (0, 0), SMOOTHED[factor], dst=small)
    return small


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
        kept.append(frame.picture)
    return kept


def background_of(samples: list[Picture], black: float) -> Background:
    """The background of a recording from frames spread over it.

    Block by block the median over time tells in which samples nothing was there; every pixel is the mean of those,
    after each sample was brought to the same brightness. A mean of whole grey levels resolves a fraction of a level.
    """
    height, width = samples[0].shape
    factor = detection_factor((width, height))
    smalls = np.stack([shrink(picture, factor) - np.float32(black) for picture in samples])
    rough = _median(smalls)
    gains = np.stack([row_gains(small, rough) for small in smalls])
    smalls /= gains[:, :, None]
    small = _median(smalls)
    away = np.abs(smalls - small)
    small_noise = np.float32(MAD_TO_SD) * _median(away)
    usual = max(float(np.median(small_noise)), ROUNDING_NOISE / REACH_OF_A_VALUE)
    small_noise = np.maximum(cv2.blur(small_noise, (3, 3)), np.float32(usual))
    quiet = (away < np.maximum(QUIET * small_noise, QUIET_FLOOR)).astype(np.uint8)

    def evened(some: slice) -> Iterator[Image]:
        return (_evened(one, gain, factor, black) for one, gain in zip(samples[some], gains[some], strict=True))

    level = _mean(evened(slice(None)), quiet, factor)
    some = slice(None, None, max(1, len(samples) // NOISE_SAMPLES))
    scatter = _mean((np.abs(one - level) for one in evened(some)), quiet[some], factor)
    noise = np.float32(np.sqrt(np.pi / 2)) * scatter  # from the mean absolute deviation of a normal distribution
    usual = max(float(np.median(noise[::3, ::3])), ROUNDING_NOISE)
    return Background(
        level=level,
        noise=np.maximum(cv2.blur(noise, (5, 5)), np.float32(usual)),
        black=black,
        factor=factor,
        small=shrink(level, factor),
        small_noise=np.maximum(small_noise, np.float32(usual / REACH_OF_A_VALUE)),
        small_texture=shrink(cv2.dilate(texture(level), np.ones((2 * factor - 1, 2 * factor - 1), np.uint8)), factor),
    )


def _median(stack: Image) -> Image:
    """Median over the first axis; numpy sorts faster along the last."""
    return np.median(np.ascontiguousarray(np.moveaxis(stack, 0, -1)), axis=-1, overwrite_input=True).astype(np.float32)


def _evened(picture: Picture, gains: Image, factor: int, black: float) -> Image:
    """A sample at the brightness of the background."""
    evened = picture.astype(np.float32)
    evened -= np.float32(black)
    evened /= full_rows(gains, factor, picture.shape[0])[:, None]
    return evened


def _mean(pictures: Iterable[Image], quiet: Mask, factor: int) -> Image:
    """Mean over time of each pixel, of the samples in which its block and those around it are quiet.

    Where that is never so, as at the rim of a ripple, it is the mean of all.
    """
    still = np.stack([cv2.erode(one, np.ones((3, 3), np.uint8)) for one in quiet])
    still[:, still.sum(axis=0) == 0] = 1
    total = None
    for picture, blocks in zip(pictures, still, strict=True):
        total = np.zeros_like(picture) if total is None else total
        cv2.accumulate(picture, total, _full(blocks, factor, picture.shape))
    assert total is not None
    count = _full(still.sum(axis=0, dtype=np.uint8), factor, total.shape)
    return np.divide(total, count, dtype=np.float32)


def _full(blocks: Mask, factor: int, shape: tuple[int, ...]) -> Mask:
    """Blocks as pixels; rows and columns beyond the last whole block belong to it."""
    low, right = shape[0] - blocks.shape[0] * factor, shape[1] - blocks.shape[1] * factor
    pixels = np.repeat(np.repeat(blocks, factor, axis=0), factor, axis=1)
    return np.pad(pixels, ((0, low), (0, right)), mode="edge") if low or right else pixels


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
