"""Recordings: what is drawn is where the truth says, with the noise that was asked for."""

from __future__ import annotations

import hashlib
from dataclasses import replace
from pathlib import Path

import cv2
import numpy as np
import pytest

from settlelab.errors import RecordingError
from settlelab.simulate import Bubble, Camera, Column, Lamp, Nuisances, Scene, pictures, positions, recording
from settlelab.simulate.backdrop import backdrop
from settlelab.simulate.write import turned, turned_point
from tests.simulate.scenes import DARK_ROOM, small_scene


def read(video: Path) -> np.ndarray:
    """Frames (N, height, width) of a video, grey."""
    capture = cv2.VideoCapture(str(video), cv2.CAP_FFMPEG)
    frames = []
    while (grabbed := capture.read())[0]:
        frames.append(grabbed[1][..., 0])
    return np.array(frames)


def centroids(scene: Scene, frames: list[np.ndarray], numbers: np.ndarray) -> np.ndarray:
    """Grey-weighted centroid x, y [px] (N, 2) of what is darker than an empty picture, the slow and plain way."""
    empty = replace(scene, drops=())
    behind = backdrop(empty, np.random.default_rng(0))
    rows, columns = np.mgrid[: frames[0].shape[0], : frames[0].shape[1]]
    found = []
    for number in numbers:
        dark = behind.at(float(scene.times[number])) - frames[number]
        dark[dark < 20] = 0
        found.append(((dark * columns).sum() / dark.sum(), (dark * rows).sum() / dark.sum()))
    return np.array(found)


def test_sphere_is_where_the_truth_says() -> None:
    scene = small_scene()
    table = positions(scene)
    found = centroids(scene, list(pictures(scene, 3)), table["frame"].to_numpy())
    missed = found - table[["x_px", "y_px"]].to_numpy()
    assert len(table) > 8
    assert np.abs(missed).max() < 0.06  # noise of one frame
    assert np.abs(missed.mean(axis=0)).max() < 0.015


def test_noise_has_the_stated_spread() -> None:
    camera = Camera(width=200, height=200, electrons_per_grey=50.0, read_noise=0.7)
    scene = replace(small_scene(camera=camera), drops=(), duration=0.1)
    frames = np.array(list(pictures(scene, 1)), dtype=float)
    level = frames.mean()
    expected = np.sqrt(level / 50.0 + 0.7**2 + 1 / 12)  # shot, read and rounding noise in squares
    assert np.diff(frames, axis=0).std() / np.sqrt(2) == pytest.approx(expected, rel=0.02)


def test_lamp_flickers_and_drifts_as_stated() -> None:
    lamp = replace(DARK_ROOM, flicker=0.02, flicker_rate=7.0, drift=-0.01)
    scene = replace(small_scene(), drops=(), lamp=lamp, duration=1.0)
    level = np.array([frame.mean() for frame in pictures(scene, 2)])
    wave = 1 + 0.02 * np.sin(2 * np.pi * 7.0 * scene.times + 0.7) - 0.01 * scene.times
    assert level / level.mean() == pytest.approx(wave / wave.mean(), abs=2e-4)


def test_column_shows_walls_marks_bottom_and_surface() -> None:
    camera = Camera(width=400, height=600)
    column = Column(bore=0.06, wall=0.003, surface=0.02, bottom=0.1, graduation=0.01)
    scene = Scene(
        liquid=small_scene().liquid, drops=(), duration=0.1, camera=camera, column=column, lamp=DARK_ROOM,
        nuisances=Nuisances(ripple=0.0),
    )  # fmt: skip
    picture = backdrop(scene, np.random.default_rng(0)).at(0.0)
    middle, wall = 199.5, 0.03 / 2e-4
    assert picture[300, 200] == pytest.approx(200.0, rel=1e-3)
    assert picture[300, round(middle - wall)] < 80  # inner rim of the wall
    assert picture[550, 200] < 100  # below the bottom at 0.1 m = 500 px
    assert picture[94:99, 200].mean() < 60  # the meniscus ends at 0.02 m = 100 px
    marks = picture[:, round(middle - wall + 15)] < 100
    rows = np.flatnonzero(np.diff(marks[110:490].astype(int)) == 1) + 111
    assert np.diff(rows) == pytest.approx(50.0, abs=1)  # 10 mm at 0.2 mm/px


def test_bubble_rises_and_stops_at_the_surface() -> None:
    bubble = Bubble(diameter=2e-3, x=0.004, y=0.04, speed=0.05)
    column = Column(bore=0.06, surface=0.01, graduation=None)
    scene = replace(small_scene(), drops=(), column=column, nuisances=Nuisances(bubbles=(bubble,)))
    behind = backdrop(scene, np.random.default_rng(0))
    empty = backdrop(replace(scene, nuisances=Nuisances()), np.random.default_rng(0))

    def rows(time: float) -> np.ndarray:
        return np.flatnonzero(np.abs(behind.at(time) - empty.at(time)).max(axis=1) > 10)

    assert rows(0.0).mean() - rows(0.2).mean() == pytest.approx(0.05 * 0.2 / 2e-4, abs=0.6)
    assert len(rows(0.6)) == 0


@pytest.mark.parametrize("gravity", ["down", "right", "up", "left"])
def test_turned_picture_and_turned_points_agree(gravity: str) -> None:
    picture = np.zeros((7, 5), dtype=np.uint8)
    picture[6, 1] = 255
    x, y = turned_point(1, 6, (5, 7), gravity)
    assert turned(picture, gravity)[int(y), int(x)] == 255
    towards = {"down": (0, 1), "right": (1, 0), "up": (0, -1), "left": (-1, 0)}[gravity]
    higher = turned_point(1, 5, (5, 7), gravity)
    assert (x - higher[0], y - higher[1]) == towards


@pytest.mark.parametrize("suffix", [".mp4", ".avi", ".mkv"])
def test_video_reads_back(tmp_path: Path, suffix: str) -> None:
    scene = replace(small_scene(camera=Camera(width=160, height=240, frame_rate=60.0, gravity="right")), duration=0.4)
    drawn = np.array(list(pictures(scene, 4)), dtype=float)
    recording(scene, tmp_path / f"take{suffix}", 4)
    found = read(tmp_path / f"take{suffix}").astype(float)
    assert found.shape == drawn.shape == (24, 160, 240)
    difference = found - drawn
    assert abs(difference.mean()) < 1.0
    assert difference.std() < (0.01 if suffix == ".mkv" else 1.6)


def test_container_rate_is_what_the_file_claims(tmp_path: Path) -> None:
    camera = Camera(width=160, height=240, frame_rate=120.0, container_rate=30.0)
    recording(replace(small_scene(camera=camera), duration=0.2), tmp_path / "slow.mp4", 1)
    capture = cv2.VideoCapture(str(tmp_path / "slow.mp4"), cv2.CAP_FFMPEG)
    assert capture.get(cv2.CAP_PROP_FPS) == pytest.approx(30.0)
    assert len(read(tmp_path / "slow.mp4")) == 24


@pytest.mark.parametrize("suffix", [".mp4", ".avi"])
def test_same_seed_same_bytes(tmp_path: Path, suffix: str) -> None:
    scene = replace(small_scene(), nuisances=Nuisances(dust=5), duration=0.2)
    hashes = []
    for name, seed in (("one", 7), ("two", 7), ("other", 8)):
        recording(scene, tmp_path / f"{name}{suffix}", seed)
        hashes.append(hashlib.sha256((tmp_path / f"{name}{suffix}").read_bytes()).hexdigest())
    assert hashes[0] == hashes[1] != hashes[2]


def test_video_that_cannot_be_written(tmp_path: Path) -> None:
    with pytest.raises(RecordingError, match=r'"\.gif" is not one of \.mp4, \.avi, \.mkv'):
        recording(small_scene(), tmp_path / "take.gif", 1)
    with pytest.raises(RecordingError, match="cannot be written there"):
        recording(small_scene(), tmp_path / "missing" / "take.mp4", 1)


def test_brighter_lamp_than_the_sensor_takes_is_cut_at_white() -> None:
    scene = replace(small_scene(), lamp=Lamp(level=400.0), duration=0.05)
    assert next(iter(pictures(scene, 1))).max() == 255
