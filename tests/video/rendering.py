"""A small renderer for tests of the tracker only: discs with known places, anti-aliased, before a lamp."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass
from pathlib import Path

import cv2
import numpy as np
from numpy.typing import NDArray

FINE = 8  # sub-pixels a side


@dataclass(frozen=True, kw_only=True)
class Disc:
    """A disc that moves evenly; positions in px at frame 0, velocity in px per frame."""

    x: float
    y: float
    diameter: float
    vx: float = 0.0
    vy: float = 0.0
    light: float = 0.15  # share of the scene's light that passes; above 1 for a bright object
    frames: tuple[int, int] = (0, 1_000_000)  # first, and one past the last, in which it is there
    path: Callable[[int], tuple[float, float]] | None = None  # place at a frame, instead of even motion

    def place(self, frame: int) -> tuple[float, float]:
        if self.path is not None:
            return self.path(frame)
        return self.x + self.vx * frame, self.y + self.vy * frame


@dataclass(frozen=True, kw_only=True)
class Scene:
    """What the camera sees."""

    discs: Sequence[Disc] = ()
    size: tuple[int, int] = (160, 320)  # width, height
    frames: int = 90
    lamp: float = 190.0  # grey levels
    gradient: float = 0.2  # relative change of the lamp from side to side and from top to bottom
    noise: float = 1.5  # grey levels
    flicker: float = 0.0  # relative
    marks: float = 0.0  # px between dark graduation marks at the left; 0: none
    walls: tuple[float, float] | None = None
    blur: float = 0.7  # px, standard deviation of the lens
    seed: int = 1


def coverage(disc: Disc, frame: int, size: tuple[int, int]) -> tuple[slice, slice, NDArray[np.float64]]:
    """Share of each pixel that the disc covers, in the box around it."""
    (x, y), radius = disc.place(frame), disc.diameter / 2
    left, right = max(0, int(x - radius) - 2), min(size[0], int(x + radius) + 4)
    top, bottom = max(0, int(y - radius) - 2), min(size[1], int(y + radius) + 4)
    if left >= right or top >= bottom:
        return slice(0, 0), slice(0, 0), np.zeros((0, 0))
    fine = (np.arange(FINE) + 0.5) / FINE - 0.5
    xs = (np.arange(left, right)[:, None] + fine).ravel() - x
    ys = (np.arange(top, bottom)[:, None] + fine).ravel() - y
    inside = (xs[None, :] ** 2 + ys[:, None] ** 2 <= radius**2).astype(np.float64)
    means = inside.reshape(bottom - top, FINE, right - left, FINE).mean(axis=(1, 3))
    return slice(top, bottom), slice(left, right), means


def lamp(scene: Scene) -> NDArray[np.float64]:
    width, height = scene.size
    x, y = np.linspace(-0.5, 0.5, width)[None, :], np.linspace(-0.5, 0.5, height)[:, None]
    light = scene.lamp * (1 + scene.gradient * x + 0.5 * scene.gradient * y)
    if scene.marks:
        for mark in np.arange(scene.marks, height - 3, scene.marks):
            rows = np.arange(height)
            dark = np.clip(1.0 - (np.abs(rows - mark) - 0.5), 0, 1)
            light[:, 6:22] *= (1 - 0.6 * dark)[:, None]
    for wall in scene.walls or ():
        dark = np.clip(2.5 - np.abs(np.arange(width) - wall), 0, 1)
        light *= (1 - 0.5 * dark)[None, :]
    return light


def pictures(scene: Scene) -> Iterator[NDArray[np.uint8]]:
    random, light = np.random.default_rng(scene.seed), lamp(scene)
    for frame in range(scene.frames):
        passed = np.ones(scene.size[::-1])
        for disc in scene.discs:
            if disc.frames[0] <= frame < disc.frames[1]:
                rows, columns, covered = coverage(disc, frame, scene.size)
                passed[rows, columns] *= 1 - (1 - disc.light) * covered
        picture = light * passed * (1 + scene.flicker * np.sin(2.4 * frame))
        picture = cv2.GaussianBlur(picture, (0, 0), scene.blur) if scene.blur else picture
        picture = picture + random.normal(0, scene.noise, picture.shape)
        yield np.clip(np.rint(picture), 0, 255).astype(np.uint8)


def as_video(scene: Scene, file: Path, *, codec: str = "mp4v", rate: float = 100.0, turns: int = 0) -> Path:
    """Write a video; `turns` counter-clockwise quarter turns of the camera's picture."""
    writer = None
    for picture in pictures(scene):
        turned = np.ascontiguousarray(np.rot90(picture, turns))
        if writer is None:
            size = (turned.shape[1], turned.shape[0])
            writer = cv2.VideoWriter(str(file), cv2.CAP_FFMPEG, cv2.VideoWriter_fourcc(*codec), rate, size, True)
            assert writer.isOpened()
        writer.write(cv2.cvtColor(turned, cv2.COLOR_GRAY2BGR))
    assert writer is not None
    writer.release()
    return file


def as_folder(scene: Scene, folder: Path, *, turns: int = 0, suffix: str = ".png") -> Path:
    """Write numbered pictures."""
    folder.mkdir()
    for number, picture in enumerate(pictures(scene)):
        turned = np.ascontiguousarray(np.rot90(picture, turns))
        (folder / f"{number:04d}{suffix}").write_bytes(cv2.imencode(suffix, turned)[1].tobytes())
    return folder
