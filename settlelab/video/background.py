"""The scene without moving objects, and the brightness of each frame against it.

The background comes from frames spread over the whole recording, so that an object has to rest in one place for half of
it before it is swallowed. What rests for less shows up as an object that does not move, which is told later.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import cv2
import numpy as np
from numpy.typing import NDArray

from settlelab.video.source import Picture

Image = NDArray[np.float32]
Mask = NDArray[np.uint8]

SAMPLE_BYTES = 84_000_000  # of kept frames
MOST_SAMPLES, FEWEST_SAMPLES = 16, 8
DETECTION_PIXELS = 120_000  # of the small picture on which changes are looked for
SMOOTHED = {1: 1.2, 2: 0.7}  # standard deviation in blocks, by the side of a block
LARGEST_FACTOR = 4  # a particle of 3 px must still show in the small picture
QUIET, QUIET_FLOOR = 3.5, 1.0  # times the noise of a block, or grey levels: nothing is there
NOISE_SAMPLES = 6
STRIP = 128  # rows worked on at once, so that they stay in the processor's cache
MAD_TO_SD = 1.4826  # normal distribution
REACH_OF_A_VALUE = 4.0  # px, side of the square over which a value of the small picture is a mean
ROUNDING_NOISE = 0.3  # grey levels, of rounding to whole levels: 1/sqrt(12)
DARKEST = 8.0  # grey levels; darker places say nothing on the lamp
LIT_SHARE = 0.05  # of the picture, that must be brighter than that
ROW_SMOOTHING = 4.0  # small rows; flicker bands of a rolling shutter are wider
FEW = 40  # rows and columns from which the brightness of a frame is told roughly
FAIR_COLUMNS = 90  # from which the brightness of a row is told
SEEN = 4.5  # times the noise: something changed
CERTAIN = 1.4  # times that limit, or of what is seen beside it: it is no mark of the codec
FAINTEST = 1.5  # grey levels; below that compression leaves marks of its own
TEXTURE_SHARE = 0.08  # of the difference of neighbouring pixels: what a shake of a tenth of a pixel changes


@dataclass(frozen=True, slots=True, kw_only=True)
class Coarse:
    """The scene at rest as a small picture, on which changes are looked for. Grey levels above black."""

    factor: int  # side of the blocks of pixels that become one small pixel
    black: float
    level: Image  # (height // factor, width // factor), block means
    noise: Image  # same shape: standard deviation of a block over time
    limit: Image  # same shape: change of a block that is more than noise
    inverse: Image  # same shape: 1 / level where the scene is lit, else 0

    def change(self, small: Image, gains: Image) -> Mask:
        """255 where a small picture differs from the scene by more than noise.

        A block that does so by little counts with two others beside it only: alone it is a mark of the codec.
        """
        difference = cv2.absdiff(small, self.level * gains[:, None])
        changed = cv2.compare(difference, self.limit, cv2.CMP_GT)
        if not cv2.countNonZero(changed):
            return np.asarray(changed, dtype=np.uint8)
        together = cv2.inRange(cv2.boxFilter(changed, cv2.CV_16U, (3, 3), normalize=False), 3 * 255, 9 * 255)
        certain = cv2.compare(difference, np.float32(CERTAIN) * self.limit, cv2.CMP_GT)
        return np.asarray(cv2.bitwise_or(cv2.bitwise_and(changed, together), certain), dtype=np.uint8)


@dataclass(frozen=True, slots=True, kw_only=True)
class Background:
    """The scene at rest. Grey levels are counted from the black level of the recording."""

    level: Image  # (height, width), grey levels
    noise: Image  # (height // factor, width // factor), grey levels: standard deviation of one pixel over time
    texture: Mask  # (height, width), grey levels: difference of neighbouring pixels
    coarse: Coarse


def shrink(picture: Picture, factor: int, black: float) -> Image:
    """Block means above black, smoothed where the blocks are small; what fills no block at the rim is left out.

    Either way a value holds about the light of a particle of 3 px, so that a faint one stands out of the noise.
    """
    small = _block_means(picture, factor)
    if black:
        small -= np.float32(black)
    if factor in SMOOTHED:
        cv2.GaussianBlur(small, (0, 0), SMOOTHED[factor], dst=small)
    return small


def _block_means(picture: Picture, factor: int) -> Image:
    """Halved again and again: several times faster than a shrink by four at once.

    Only the first halving rounds to whole grey levels.
    """
    height, width = picture.shape[0] // factor, picture.shape[1] // factor
    means = picture[: height * factor, : width * factor]
    if factor == 1:
        return means.astype(np.float32)
    while factor > 1:
        factor //= 2
        means = cv2.resize(means, (width * factor, height * factor), interpolation=cv2.INTER_AREA)
        means = means.astype(np.float32, copy=False)
    return means


def detection_factor(size: tuple[int, int]) -> int:
    """Block side for a picture of this width and height: a power of two."""
    halvings = round(float(np.log2(max(1.0, np.sqrt(size[0] * size[1] / DETECTION_PIXELS)))))
    return int(min(2**halvings, LARGEST_FACTOR))


class Sampler:
    """Keeps frames evenly spread over a recording of unknown length, in bounded memory.

    Every `step`-th frame is kept; when the store is full every other one goes and the step doubles.
    """

    def __init__(self) -> None:
        """An empty store."""
        self.kept: list[Picture] = []
        self._step = 1
        self._most = 0

    def add(self, count: int, picture: Picture) -> None:
        """Take in the frame of this number among those decoded."""
        if count == 0:
            self._most = int(np.clip(SAMPLE_BYTES // picture.nbytes, FEWEST_SAMPLES, MOST_SAMPLES))
        if count % self._step:
            return
        if len(self.kept) == self._most:
            del self.kept[1::2]
            self._step *= 2
            if count % self._step:
                return
        self.kept.append(picture)


def coarse_of(samples: Sequence[Picture], black: float) -> Coarse:
    """The small scene at rest, of frames spread over a recording or a part of it."""
    return _settled(samples, black)[0]


def _settled(samples: Sequence[Picture], black: float) -> tuple[Coarse, Image, Mask]:
    """The small scene at rest; the brightness of the rows of each sample, and 1 where nothing was there in it.

    Block by block the median over time is the scene; each sample is brought to its brightness first.
    """
    height, width = samples[0].shape
    factor = detection_factor((width, height))
    smalls = [shrink(picture, factor, black) for picture in samples]
    rough = _inverse(_median(smalls))
    gains = np.stack([row_gains(small, rough) for small in smalls])
    for small, gain in zip(smalls, gains, strict=True):
        np.divide(small, gain[:, None], out=small)
    level = _median(smalls)
    for small in smalls:
        cv2.absdiff(small, level, dst=small)
    noise = np.float32(MAD_TO_SD) * _median(smalls)
    usual = max(middle_of(noise[::3, ::3]), ROUNDING_NOISE / REACH_OF_A_VALUE)
    noise = np.maximum(cv2.blur(noise, (3, 3)), np.float32(usual))
    quiet = np.stack([one < np.maximum(QUIET * noise, QUIET_FLOOR) for one in smalls]).astype(np.uint8)
    steepest = cv2.dilate(texture(_eight_bit(samples[-1])), np.ones((2 * factor - 1, 2 * factor - 1), np.uint8))
    limit = np.maximum(SEEN * noise, FAINTEST) + TEXTURE_SHARE / factor * shrink(steepest, factor, 0.0)
    coarse = Coarse(factor=factor, black=black, level=level, noise=noise, limit=limit, inverse=_inverse(level))
    return coarse, gains, quiet


def _inverse(level: Image) -> Image:
    """1 / level where the scene is lit, else 0."""
    return np.divide(1.0, level, out=np.zeros_like(level), where=level > DARKEST)


def background_of(samples: Sequence[Picture], black: float) -> Background:
    """The background of a recording from frames spread over it.

    Every pixel is the mean of the samples in which nothing was there. A mean of whole grey levels resolves a fraction
    of a level. Where something always was there, as at the rim of a ripple, it is the mean of all.
    """
    coarse, gains, quiet = _settled(samples, black)
    still = np.stack([cv2.erode(one, np.ones((3, 3), np.uint8)) for one in quiet]).astype(np.uint8)
    level = np.empty(samples[0].shape, np.float32)
    noise = np.empty(coarse.level.shape, np.float32)
    brightness = np.stack([1 / full_rows(gain, coarse.factor, 0, len(level)) for gain in gains]).astype(np.float32)
    some = slice(None, None, max(1, len(samples) // NOISE_SAMPLES))
    for rows, blocks in _strips(len(level), coarse.factor):
        level[rows] = _mean(_evened(samples, brightness, rows, black), still[:, blocks], coarse.factor)
        scatter = (_apart(one, level[rows]) for one in _evened(samples[some], brightness[some], rows, black))
        noise[blocks] = _block_means(_mean(scatter, still[some, blocks], coarse.factor), coarse.factor)
    noise *= np.float32(np.sqrt(np.pi / 2))  # from the mean absolute deviation of a normal distribution
    noise = np.maximum(cv2.blur(noise, (3, 3)), np.float32(max(float(np.median(noise)), ROUNDING_NOISE)))
    return Background(level=level, noise=noise, texture=texture(_eight_bit(level)), coarse=coarse)


def _strips(height: int, factor: int) -> Iterator[tuple[slice, slice]]:
    """Rows of the full picture and the small rows that they become; rows beyond the last block go with it."""
    count = height // factor
    step = STRIP // factor
    for top in range(0, count, step):
        bottom = min(top + step, count)
        yield slice(top * factor, height if bottom == count else bottom * factor), slice(top, bottom)


def _evened(samples: Sequence[Picture], brightness: Image, rows: slice, black: float) -> Iterator[Image]:
    """Some rows of each sample at the brightness of the background."""
    for picture, per_row in zip(samples, brightness, strict=True):
        part = picture[rows].astype(np.float32)
        if black:
            part -= np.float32(black)
        part *= per_row[rows, None]
        yield part


def _mean(pictures: Iterator[Image], still: Mask, factor: int) -> Image:
    """Mean over time of each pixel, of the pictures in which its block is still; where there are none, of all."""
    still = still.copy()
    still[:, still.sum(axis=0) == 0] = 1
    total = None
    for picture, blocks in zip(pictures, still, strict=True):
        total = np.zeros_like(picture) if total is None else total
        cv2.accumulate(picture, total, _full(blocks, factor, picture.shape))
    assert total is not None
    return np.divide(total, _full(still.sum(axis=0, dtype=np.uint8), factor, total.shape), dtype=np.float32)


def _full(blocks: Mask, factor: int, shape: tuple[int, ...]) -> Mask:
    """Blocks as pixels; rows and columns beyond the last whole block belong to it."""
    low, right = shape[0] - blocks.shape[0] * factor, shape[1] - blocks.shape[1] * factor
    size = (blocks.shape[1] * factor, blocks.shape[0] * factor)
    pixels = cv2.resize(blocks, size, interpolation=cv2.INTER_NEAREST)
    return np.asarray(np.pad(pixels, ((0, low), (0, right)), mode="edge") if low or right else pixels, dtype=np.uint8)


def _apart(one: Image, other: Image) -> Image:
    return np.asarray(cv2.absdiff(one, other), dtype=np.float32)


def _median(pictures: Sequence[Image]) -> Image:
    """Median over time of each pixel: sorted by exchanging neighbours, which is quick on whole pictures."""
    ranked = [picture.copy() for picture in pictures]
    lower = np.empty_like(ranked[0])
    for turn in range(len(ranked)):
        for one in range(turn % 2, len(ranked) - 1, 2):
            cv2.min(ranked[one], ranked[one + 1], dst=lower)
            cv2.max(ranked[one], ranked[one + 1], dst=ranked[one + 1])
            ranked[one], lower = lower, ranked[one]
    middle = len(ranked) // 2
    return ranked[middle] if len(ranked) % 2 else (ranked[middle - 1] + ranked[middle]) / np.float32(2)


def texture(level: Mask) -> Mask:
    """Difference of neighbouring pixels: where it is large, a shake or the codec changes the picture a lot."""
    return np.asarray(cv2.morphologyEx(level, cv2.MORPH_GRADIENT, np.ones((3, 3), np.uint8)), dtype=np.uint8)


def _eight_bit(picture: Picture) -> Mask:
    return np.asarray(picture if picture.dtype == np.uint8 else cv2.convertScaleAbs(picture), dtype=np.uint8)


def row_gains(small: Image, inverse: Image) -> Image:
    """Brightness of each row of a small picture over that of the scene, objects left out.

    Rows, because mains flicker and a rolling shutter make bands across the picture as decoded.

    Parameters
    ----------
    small : (H, W) array
        Grey levels above black.
    inverse : (H, W) array
        1 / grey level of the scene, 0 where it is too dark to tell.

    Returns
    -------
    (H,) array
        Gains [-]; 1 where the scene is too dark to tell.
    """
    apart = max(1, small.shape[1] // FAIR_COLUMNS)
    ratio = small[:, ::apart] * inverse[:, ::apart]
    few = ratio[:: max(1, len(ratio) // FEW), :: max(1, ratio.shape[1] // FEW)]
    told = few[few > 0]
    if len(told) < LIT_SHARE * few.size:
        return np.ones(len(small), np.float32)
    middle = middle_of(told)
    reach = max(5 * MAD_TO_SD * middle_of(np.abs(told - middle)), 0.02 * middle)
    fair = cv2.inRange(ratio, max(middle - reach, 1e-6), middle + reach)
    sums = cv2.reduce(cv2.multiply(ratio, fair, scale=1 / 255, dtype=cv2.CV_32F), 1, cv2.REDUCE_SUM)
    counts = cv2.reduce(fair, 1, cv2.REDUCE_SUM, dtype=cv2.CV_32F) / np.float32(255)
    total = cv2.GaussianBlur(sums, (1, 0), sigmaX=0.1, sigmaY=ROW_SMOOTHING)
    count = cv2.GaussianBlur(counts, (1, 0), sigmaX=0.1, sigmaY=ROW_SMOOTHING)
    gains = np.where(count > 1.0, total / np.maximum(count, 1.0), middle)
    return gains[:, 0].astype(np.float32)


def middle_of(values: Image) -> float:
    """The middle value; far quicker than a median for few of them."""
    return float(np.sort(values, axis=None)[values.size // 2])


def full_rows(gains: Image, factor: int, top: int, bottom: int) -> Image:
    """Gains of the full rows from `top` to `bottom`, interpolated between the centres of the small ones."""
    centres = (np.arange(len(gains)) + 0.5) * factor - 0.5
    return np.interp(np.arange(top, bottom), centres, gains).astype(np.float32)
