"""Silhouettes in a window of a frame: sub-pixel centroid, area and shape of every object in it.

A dark particle before a lamp is measured by the share of light it takes away, so that a lamp gradient does not shift
its centroid; a bright one by the light it adds, over the lamp's. The sums are linear in the grey levels: neither the
blur of the lens nor the position within a pixel biases them.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import cv2
import numpy as np
from numpy.typing import NDArray

from settlelab.video.background import (
    CERTAIN,
    DARKEST,
    FAINTEST,
    SEEN,
    TEXTURE_SHARE,
    Background,
    Image,
    full_rows,
    middle_of,
)

FloatArray = NDArray[np.float64]
Mask = NDArray[np.uint8]

SMOOTHING = 1.2  # px, standard deviation of the Gaussian before the threshold
NOISE_LEFT = 0.235  # of white noise after that smoothing: 1 / (2 sqrt(pi) 1.2)
LIGHT_SMOOTHING = 0.7  # px, before levels are read off
APART = 0.25  # of the peak: what is below lies between two objects
SMALLEST_SHARE = 0.05  # of the largest of objects side by side; less is a shred of its edge
REACH = 3  # px, how far beyond the mask an object's light is summed
SURROUNDINGS = REACH + 5  # px around the mask; nothing farther bears on an object
INSIDE = 3  # px from the edge of the half-level silhouette: certainly covered
SMALLEST_AREA = 3.0  # px2
MARK_CONTRAST = 0.05  # of a strong object's contrast: compression leaves marks that faint around it
MARK_REACH = 32.0  # px from its edge, two blocks of the codec
OUTLINE_SMOOTHING = 0.6  # px
EDGE_LEVELS = (0.15, 0.85)  # coverage between which the edge is measured
BORDER = 2  # px; an object nearer to the edge of the picture is cut
ANGLES = np.deg2rad(np.arange(0, 180, 5))


@dataclass(frozen=True, slots=True, kw_only=True)
class Silhouette:
    """One object in one frame; positions in the picture as decoded."""

    x: float  # px
    y: float  # px
    area: float  # px2, sum of the coverage: not biased by blur
    aspect_ratio: float  # smallest over largest Feret diameter
    circularity: float  # sqrt(4 pi A / P^2)
    orientation: float  # rad, long axis against the vertical of the picture
    edge_width: float  # px, over which the coverage rises from 0 to 1
    contrast: float  # grey levels, negative for an object brighter than the scene
    cut: bool  # reaches the edge of the picture


@dataclass(frozen=True, slots=True, kw_only=True)
class Window:
    """A part of a frame, set against the background."""

    left: int  # px, of its first column in the picture
    top: int
    taken: Image  # (h, w) grey levels that the scene has more than the frame
    scene: Image  # (h, w) grey levels of the background at the brightness of the frame
    limit: Image  # (h, w) change of the smoothed window that belongs to an object, grey levels
    size: tuple[int, int]  # px, width and height of the picture


def window_of(picture: NDArray[np.generic], box: tuple[int, int, int, int], gains: Image, scene: Background) -> Window:
    """Set a part of a frame, cut out at the box (left, top, right, bottom), against the background.

    `gains` is the brightness of each small row of the frame.
    """
    left, top, right, bottom = box
    coarse = scene.coarse
    part = picture.astype(np.float32)
    part -= np.float32(coarse.black)
    expected = scene.level[top:bottom, left:right] * full_rows(gains, coarse.factor, top, bottom)[:, None]
    taken = expected - part
    noise = cv2.resize(_blocks(scene, box), (right - left, bottom - top), interpolation=cv2.INTER_NEAREST)
    rim = np.concatenate([taken[:2].ravel(), taken[-2:].ravel(), taken[2:-2, :2].ravel(), taken[2:-2, -2:].ravel()])
    quiet = rim[np.abs(rim - middle_of(rim)) < 3 * noise.mean()]
    taken -= quiet.mean() if len(quiet) > len(rim) // 2 else 0.0  # a lamp that changed here only
    height, width = scene.level.shape
    limit = np.maximum(SEEN * NOISE_LEFT * noise, FAINTEST)
    limit += np.float32(TEXTURE_SHARE) * scene.texture[top:bottom, left:right]
    return Window(left=left, top=top, taken=taken, scene=expected, limit=limit, size=(width, height))


def _blocks(scene: Background, box: tuple[int, int, int, int]) -> Image:
    """Noise of the blocks of a box."""
    left, top, right, bottom = (edge // scene.coarse.factor for edge in box)
    return scene.noise[top : max(bottom, top + 1), left : max(right, left + 1)]


def silhouettes(window: Window) -> list[Silhouette]:
    """Every object of a window, in the order of the picture."""
    change = np.abs(cv2.GaussianBlur(window.taken, (0, 0), SMOOTHING)) / window.limit
    if change.max() < CERTAIN:
        return []
    smooth = np.asarray(cv2.GaussianBlur(window.taken, (0, 0), LIGHT_SMOOTHING), dtype=np.float32)
    lamp = _lamp(window.scene)
    count, labels, stats, _ = cv2.connectedComponentsWithStats((change > 1).astype(np.uint8), connectivity=8)
    found = []
    for label in range(1, count):
        if stats[label, cv2.CC_STAT_AREA] < SMALLEST_AREA:
            continue
        near = _around(stats[label], labels.shape)
        mask = (labels[near] == label).astype(np.uint8)
        if change[near][mask > 0].max() < CERTAIN:
            continue
        own = _part_of(window, near)
        for part in _parts(np.abs(smooth[near]), mask, own.limit):
            others = ((labels[near] > 0) & (part == 0)).astype(np.uint8)
            silhouette = _measure(own, smooth[near], lamp[near], part, others)
            if silhouette is not None:
                found.append(silhouette)
    return found


def _around(stats: NDArray[np.int32], shape: tuple[int, ...]) -> tuple[slice, slice]:
    """Rows and columns of a window that hold an object and all that is looked at to measure it."""
    left, top, width, height = (int(value) for value in stats[:4])
    return (
        slice(max(top - SURROUNDINGS, 0), min(top + height + SURROUNDINGS, shape[0])),
        slice(max(left - SURROUNDINGS, 0), min(left + width + SURROUNDINGS, shape[1])),
    )


def _part_of(window: Window, near: tuple[slice, slice]) -> Window:
    rows, columns = near
    return replace(
        window,
        left=window.left + columns.start,
        top=window.top + rows.start,
        taken=window.taken[near],
        scene=window.scene[near],
        limit=window.limit[near],
    )


def _parts(change: Image, mask: Mask, limit: Image) -> list[Mask]:
    """What falls apart at a quarter of the peak are objects side by side; each takes the pixels nearest to it."""
    level = APART * float(change[mask > 0].max())
    if level < limit[mask > 0].max():
        return [mask]
    count, labels, stats, _ = cv2.connectedComponentsWithStats(((change > level) & (mask > 0)).astype(np.uint8))
    area = stats[1:count, cv2.CC_STAT_AREA]
    cores = 1 + np.flatnonzero(area >= max(SMALLEST_AREA, SMALLEST_SHARE * area.max()))
    if len(cores) < 2:
        return [mask]
    away = [cv2.distanceTransform((labels != core).astype(np.uint8), cv2.DIST_L2, 3) for core in cores]
    nearest = np.argmin(away, axis=0)
    return [((nearest == number) & (mask > 0)).astype(np.uint8) for number in range(len(cores))]


def without_marks(found: list[Silhouette]) -> list[Silhouette]:
    """The objects of a frame without the traces that compression leaves around strong ones."""
    return [one for one in found if not any(_is_mark_of(one, other) for other in found)]


def _is_mark_of(one: Silhouette, other: Silhouette) -> bool:
    """Whether an object is so faint beside the other that it is a trace of compression around it."""
    if abs(one.contrast) > MARK_CONTRAST * abs(other.contrast):
        return False
    reach = MARK_REACH + np.sqrt(other.area / np.pi)
    return bool(np.hypot(one.x - other.x, one.y - other.y) < reach)


def _measure(window: Window, smooth: Image, lamp: Image, mask: Mask, others: Mask) -> Silhouette | None:
    """Coverage of every pixel of one object, and what follows from it; None for a trace of noise."""
    sign = 1.0 if smooth[mask > 0].sum() > 0 else -1.0
    scene = np.maximum(window.scene, 1.0) if sign > 0 else lamp
    weight = sign * window.taken / scene
    plateau = _plateau(sign * smooth / scene, mask)
    if not plateau > 0:
        return None
    half = _filled(((sign * smooth / scene > plateau / 2) & (mask > 0)).astype(np.uint8))
    support = cv2.dilate(mask, _disc(REACH))
    if others.any():
        support[cv2.dilate(others, _disc(1)) > 0] = 0
    coverage = np.where(support > 0, weight / plateau, 0.0)
    coverage[cv2.erode(half, _disc(INSIDE), borderValue=0) > 0] = 1.0
    area = float(coverage.sum())
    if area < SMALLEST_AREA:
        return None
    return _shape(window, coverage.astype(np.float32), half, area, sign * plateau * float(scene[half > 0].mean()))


def _shape(window: Window, coverage: Image, half: Mask, area: float, contrast: float) -> Silhouette | None:
    rows, columns = np.arange(coverage.shape[0], dtype=np.float64), np.arange(coverage.shape[1], dtype=np.float64)
    along, across = coverage.sum(axis=1, dtype=np.float64), coverage.sum(axis=0, dtype=np.float64)
    y, x = float(rows @ along / area), float(columns @ across / area)
    xx, yy = float(across @ (columns - x) ** 2), float(along @ (rows - y) ** 2)
    xy = float((rows - y) @ coverage.astype(np.float64) @ (columns - x))
    outline, perimeter = _outline(coverage)
    if perimeter <= 0:
        return None
    smallest, largest = _feret(outline)
    rising = np.count_nonzero((coverage > EDGE_LEVELS[0]) & (coverage < EDGE_LEVELS[1]))
    touched_rows, touched_columns = np.flatnonzero(half.any(axis=1)), np.flatnonzero(half.any(axis=0))
    left, top = window.left + touched_columns[0], window.top + touched_rows[0]
    right, bottom = window.left + touched_columns[-1], window.top + touched_rows[-1]
    width, height = window.size
    return Silhouette(
        x=window.left + x,
        y=window.top + y,
        area=area,
        aspect_ratio=smallest / largest,
        circularity=min(1.0, float(np.sqrt(4 * np.pi * area)) / perimeter),
        orientation=0.5 * float(np.arctan2(2 * xy, yy - xx)),
        edge_width=rising / (EDGE_LEVELS[1] - EDGE_LEVELS[0]) / perimeter,
        contrast=contrast,
        cut=bool(left <= BORDER or top <= BORDER or right >= width - 1 - BORDER or bottom >= height - 1 - BORDER),
    )


def _lamp(scene: Image) -> Image:
    """The slow part of the scene: what lights a bright particle, which does not let through what is behind it."""
    side = max(3, min(scene.shape) // 2)
    return np.maximum(cv2.blur(scene, (side, side)), np.float32(DARKEST))


def _plateau(change: Image, mask: Mask) -> float:
    """Change of a pixel that is wholly covered: the middle of the inside, or the peak where there is no inside."""
    values = change[mask > 0]
    values.sort()
    peak = float(values[int(0.95 * len(values))]) if len(values) > 40 else float(values[-1])
    core = _filled(((change > peak / 2) & (mask > 0)).astype(np.uint8))
    inside = change[cv2.erode(core, _disc(INSIDE), borderValue=0) > 0]
    return max(middle_of(inside), peak / 2) if len(inside) >= 5 else peak


def _outline(coverage: Image) -> tuple[FloatArray, float]:
    """Points where the outline at half coverage crosses the lines between pixel centres, and its length, px.

    Each square of four pixel centres holds a straight piece between the points on its sides, or two of them.
    """
    level = cv2.GaussianBlur(coverage, (0, 0), OUTLINE_SMOOTHING).astype(np.float64) - 0.5
    inside = level > 0
    on_rows, on_columns = inside[:, 1:] != inside[:, :-1], inside[1:] != inside[:-1]
    with np.errstate(divide="ignore", invalid="ignore"):
        right = level[:, :-1] / (level[:, :-1] - level[:, 1:])  # way from a centre to its right neighbour
        down = level[:-1] / (level[:-1] - level[1:])
    ys, xs = np.nonzero(on_rows)
    yc, xc = np.nonzero(on_columns)
    points = np.concatenate(
        [np.stack([xs + right[ys, xs], ys], axis=1), np.stack([xc, yc + down[yc, xc]], axis=1)]
    ).astype(np.float64)
    crossed = np.stack([on_rows[:-1], on_columns[:, :-1], on_rows[1:], on_columns[:, 1:]], axis=-1)
    sides_x = np.stack([right[:-1], np.zeros_like(down[:, 1:]), right[1:], np.ones_like(down[:, 1:])], axis=-1)
    sides_y = np.stack([np.zeros_like(right[1:]), down[:, :-1], np.ones_like(right[1:]), down[:, 1:]], axis=-1)
    pieces_x, pieces_y = sides_x[crossed].reshape(-1, 2), sides_y[crossed].reshape(-1, 2)
    length = np.hypot(pieces_x[:, 1] - pieces_x[:, 0], pieces_y[:, 1] - pieces_y[:, 0]).sum()
    return points, float(length)


def _feret(outline: FloatArray) -> tuple[float, float]:
    """Smallest and largest distance of two parallel tangents, px."""
    along = outline @ np.stack([np.cos(ANGLES), np.sin(ANGLES)])
    widths = np.ptp(along, axis=0)
    return float(widths.min()), float(widths.max())


def _filled(mask: Mask) -> Mask:
    """The mask with its holes closed: a glint inside a grain is part of the grain."""
    contours, _ = cv2.findContours(mask, cv2.RETR_EXTERNAL, cv2.CHAIN_APPROX_NONE)
    return np.asarray(cv2.drawContours(np.zeros_like(mask), contours, -1, 1, thickness=cv2.FILLED), dtype=np.uint8)


def _disc(radius: int) -> Mask:
    side = 2 * radius + 1
    return np.asarray(cv2.getStructuringElement(cv2.MORPH_ELLIPSE, (side, side)), dtype=np.uint8)
