"""The picture without particles: lamp, column walls, graduation marks, surface, bottom, bubbles and dust."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from settlelab.simulate.grains import Sphere
from settlelab.simulate.scene import Bubble, Column, Lamp, Scene
from settlelab.simulate.silhouettes import Pose, silhouette

FloatArray = NDArray[np.float64]

MARK_WIDTH = 0.4e-3  # m
SHORT_MARK, LONG_MARK = 4e-3, 8e-3  # m, every fifth is long
MENISCUS = 2.2e-3  # m, thickness of the dark band at the surface
CAPILLARY_LENGTH = 2.5e-3  # m, how far the meniscus climbs along from the wall
RELEASE_TUBE = 9e-3  # m, outer width
BOTTOM_PLATE = 6e-3  # m, thickness


@dataclass(frozen=True, slots=True)
class Backdrop:
    """Draws the picture without particles; made once for a scene."""

    scene: Scene
    still: FloatArray  # (height, width) grey levels, what never moves
    dust: FloatArray  # (D, 5): x, y, drift x, drift y [px, px/s], strength

    def at(self, time: float) -> FloatArray:
        """Grey levels (height, width) at a time [s], free of noise."""
        picture = self.still * brightness(self.scene.lamp, time)
        self._surface(picture, time)
        for bubble in self.scene.nuisances.bubbles:
            self._bubble(picture, bubble, time)
        for speck in self.dust:
            _soft_speck(picture, speck[0] + speck[2] * time, speck[1] + speck[3] * time, speck[4])
        return picture

    def _surface(self, picture: FloatArray, time: float) -> None:
        column, scale = self.scene.column, self.scene.camera.metre_per_px
        if column.surface < -2 * MENISCUS:
            return
        x = view_x(self.scene)
        offset = np.abs(x - column.axis)
        inside = offset < column.bore / 2
        climb = MENISCUS * np.exp(-(column.bore / 2 - np.minimum(offset, column.bore / 2)) / CAPILLARY_LENGTH)
        wave = self.scene.nuisances.ripple * np.sin(2 * np.pi * (x / 0.021 - 2.3 * time))
        low = (column.surface + wave) / scale
        high = (column.surface + wave - MENISCUS - climb) / scale
        band = _overlap(np.arange(picture.shape[0], dtype=np.float64)[:, None], high, low) * inside
        picture *= 1 - 0.82 * band

    def _bubble(self, picture: FloatArray, bubble: Bubble, time: float) -> None:
        """A dark ring: light is bent away at the rim and comes straight through the middle."""
        camera = self.scene.camera
        y = bubble.y - bubble.speed * time
        if y < self.scene.column.surface + bubble.diameter / 2:
            return
        x = bubble.x + bubble.sway * np.sin(2 * np.pi * y / (12 * bubble.diameter))
        pose = [Pose(*to_pixels(self.scene, x, y), np.eye(3))]
        for diameter, transmission in ((bubble.diameter, 0.25), (0.45 * bubble.diameter, 3.2)):
            silhouette(Sphere(diameter), pose, camera.metre_per_px, camera.softness).darken(picture, transmission)


def backdrop(scene: Scene, rng: np.random.Generator) -> Backdrop:
    """The backdrop of a scene; `rng` places the dust."""
    camera, nuisances = scene.camera, scene.nuisances
    scattered = np.column_stack(
        [
            rng.uniform(0, camera.width, nuisances.dust),
            rng.uniform(0, camera.height, nuisances.dust),
            rng.normal(0, nuisances.dust_speed / camera.metre_per_px, (nuisances.dust, 2)),
            rng.uniform(0.03, 0.12, nuisances.dust),
        ]
    )
    return Backdrop(scene, _lamp_field(scene) * _column_transmission(scene), scattered)


def brightness(lamp: Lamp, time: float) -> float:
    """Brightness of the lamp at a time [s], 1 at its nominal level."""
    return float(1 + lamp.flicker * np.sin(2 * np.pi * lamp.flicker_rate * time + 0.7) + lamp.drift * time)


def view_x(scene: Scene) -> FloatArray:
    """Places [m] of the pixel columns (width,) across the view."""
    column = np.arange(scene.camera.width, dtype=np.float64)
    return (column - (scene.camera.width - 1) / 2) * scene.camera.metre_per_px


def to_pixels(scene: Scene, x: float, y: float) -> tuple[float, float]:
    """Pixel coordinates of a point of the view [m], in the picture with gravity down."""
    scale = scene.camera.metre_per_px
    return x / scale + (scene.camera.width - 1) / 2, y / scale - 0.5


def _lamp_field(scene: Scene) -> FloatArray:
    camera, lamp = scene.camera, scene.lamp
    across = np.linspace(-0.5, 0.5, camera.width)[None, :]
    down = np.linspace(-0.5, 0.5, camera.height)[:, None]
    return lamp.level * (1 + lamp.tilt[0] * across + lamp.tilt[1] * down - 2 * lamp.vignette * (across**2 + down**2))


def _column_transmission(scene: Scene) -> FloatArray:
    """Share (height, width) of the lamp's light that column, marks, bottom and release tube let through."""
    camera, column = scene.camera, scene.column
    scale = camera.metre_per_px
    x, y = view_x(scene), (np.arange(camera.height, dtype=np.float64) + 0.5) * scale
    light = np.tile(_walls(np.abs(x - column.axis), column, scale), (camera.height, 1))
    if column.graduation is not None:
        light *= 1 - 0.75 * _marks(x - column.axis, y, column, scale)
    if column.bottom is not None:
        plate = _overlap(y, column.bottom, column.bottom + BOTTOM_PLATE, scale)
        beyond = _overlap(y, column.bottom + BOTTOM_PLATE, np.inf, scale)
        light *= (1 - 0.9 * plate - 0.6 * beyond)[:, None]
    if column.release_tube and scene.drops:
        tube = _overlap(x - scene.drops[0].x, -RELEASE_TUBE / 2, RELEASE_TUBE / 2, scale)
        light *= 1 - 0.93 * tube * np.clip((scene.drops[0].y - y) / scale + 0.5, 0, 1)[:, None]
    return light


def _walls(offset: FloatArray, column: Column, scale: float) -> FloatArray:
    """Light through the column at a distance `offset` [m] from its axis: dark rims, darker liquid close to the wall."""
    radius = column.bore / 2
    outer = radius + column.wall
    liquid = 1 - 0.30 * np.exp(-np.clip(radius - offset, 0, None) / (0.02 * radius))
    wall = _overlap(offset, radius, outer, scale)
    rims = sum(_overlap(offset, rim - 0.3e-3, rim + 0.3e-3, scale) for rim in (radius, outer))
    inside = np.clip((radius - offset) / scale + 0.5, 0, 1)
    return np.asarray((inside * liquid + (1 - inside) * 0.85) * (1 - 0.45 * wall) * (1 - 0.7 * np.clip(rims, 0, 1)))


def _marks(x: FloatArray, y: FloatArray, column: Column, scale: float) -> FloatArray:
    """Darkness (height, width) of the graduation marks on the left side of the column."""
    assert column.graduation is not None
    number = np.round(y / column.graduation)
    row = np.clip((MARK_WIDTH / 2 - np.abs(y - number * column.graduation)) / scale + 0.5, 0, 1)
    start = -column.bore / 2 + 1.0e-3
    short, long = (_overlap(x, start, start + length, scale) for length in (SHORT_MARK, LONG_MARK))
    return np.where((number % 5 == 0)[:, None], long[None, :], short[None, :]) * row[:, None]


def _overlap(place: FloatArray, low: FloatArray | float, high: FloatArray | float, size: float = 1.0) -> FloatArray:
    """Share of pixels of that size about `place` that lie between `low` and `high`."""
    upper = np.minimum(place + size / 2, high)
    lower = np.maximum(place - size / 2, low)
    return np.clip((upper - lower) / size, 0.0, 1.0)


def _soft_speck(picture: FloatArray, x: float, y: float, strength: float, size: float = 1.3) -> None:
    """A speck out of focus, a few pixels wide."""
    height, width = picture.shape
    left, top = int(x) - 5, int(y) - 5
    if left < 0 or top < 0 or left + 11 > width or top + 11 > height:
        return
    across = np.exp(-0.5 * ((np.arange(left, left + 11) - x) / size) ** 2)
    down = np.exp(-0.5 * ((np.arange(top, top + 11) - y) / size) ** 2)
    picture[top : top + 11, left : left + 11] *= 1 - strength * np.outer(down, across)
