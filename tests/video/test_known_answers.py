"""Recordings drawn by the tests' own renderer come back with the velocity they were drawn with."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from settlelab.study.model import Camera, Gravity
from settlelab.units import Quantity
from settlelab.video import Track, TrackedRecording, follow_falls
from tests.video.rendering import Disc, Scene, as_folder, as_video

CAMERA = Camera(frame_rate=Quantity(100.0), metre_per_px=Quantity(1e-4))


def slope(track: Track) -> float:
    """px/s by a straight line."""
    return float(np.polyfit(track.time, track.y, 1)[0])


def diameter(track: Track) -> float:
    return float(np.sqrt(4 * np.median(track.area) / np.pi))


def only(tracked: TrackedRecording) -> Track:
    assert len(tracked.falls) == 1, [len(fall.frame) for fall in tracked.falls]
    return tracked.falls[0]


@pytest.mark.parametrize("light", [0.15, 1.5], ids=["dark", "bright"])
@pytest.mark.parametrize("size", [6.0, 14.0, 60.0])
@pytest.mark.parametrize("codec", ["FFV1", "mp4v"])
def test_velocity_and_size_of_a_disc(size: float, light: float, codec: str, tmp_path: Path) -> None:
    disc = Disc(x=70.3, y=-40.0, diameter=size, vy=4.13, light=light)
    scene = Scene(discs=[disc], lamp=190 if light < 1 else 110, frames=100, flicker=0.02)
    fall = only(follow_falls(as_video(scene, tmp_path / "a.avi", codec=codec), camera=CAMERA))
    assert slope(fall) == pytest.approx(413.0, rel=1e-3)
    assert np.mean(fall.x) == pytest.approx(70.3, abs=0.1)
    assert diameter(fall) == pytest.approx(size, rel=0.06 if size < 10 else 0.01)
    assert len(fall.frame) > 50
    assert fall.flags == ()


@pytest.mark.parametrize("dark_background", [8.0, 20.0])
def test_a_bright_disc_before_a_dark_background(dark_background: float, tmp_path: Path) -> None:
    scene = Scene(discs=[Disc(x=80, y=-20, diameter=20, vy=3.3, light=150 / dark_background)], lamp=dark_background)
    fall = only(follow_falls(as_folder(scene, tmp_path / "frames"), camera=CAMERA))
    assert slope(fall) == pytest.approx(330.0, rel=5e-4)
    assert diameter(fall) == pytest.approx(20.0, rel=0.01)


def test_centroids_are_not_drawn_to_whole_pixels(tmp_path: Path) -> None:
    scene = Scene(discs=[Disc(x=80.37, y=30, diameter=9, vx=0.013, vy=0.5171)], frames=400, noise=0.8)
    fall = only(follow_falls(as_folder(scene, tmp_path / "frames"), camera=CAMERA))
    error = fall.y - (30 + 0.5171 * fall.frame)
    phase = np.exp(2j * np.pi * fall.y)
    assert abs(np.mean((error - error.mean()) * phase)) < 0.003
    assert np.std(error) < 0.03


def test_a_creeping_fall_is_not_swallowed_by_the_background(tmp_path: Path) -> None:
    scene = Scene(discs=[Disc(x=80, y=60, diameter=30, vy=0.15)], frames=600, size=(160, 240))
    fall = only(follow_falls(as_folder(scene, tmp_path / "frames"), camera=CAMERA))
    assert slope(fall) == pytest.approx(15.0, rel=2e-3)


@pytest.mark.parametrize(("gravity", "turns"), [("down", 0), ("right", 1), ("up", 2), ("left", 3)])
def test_gravity_in_any_direction_of_the_picture(gravity: Gravity, turns: int, tmp_path: Path) -> None:
    scene = Scene(discs=[Disc(x=50.2, y=-20, diameter=16, vx=0.3, vy=4.0)])
    camera = Camera(frame_rate=Quantity(100.0), metre_per_px=Quantity(1e-4), gravity=gravity)
    tracked = follow_falls(as_folder(scene, tmp_path / "frames", turns=turns), camera=camera)
    fall = only(tracked)
    assert tracked.size == scene.size
    assert tracked.background.shape == scene.size[::-1]
    np.testing.assert_allclose(fall.x, 50.2 + 0.3 * fall.frame, atol=0.15)
    np.testing.assert_allclose(fall.y, -20 + 4.0 * fall.frame, atol=0.15)


def test_a_slow_motion_container_is_read_at_the_stated_rate(tmp_path: Path) -> None:
    video = as_video(Scene(discs=[Disc(x=80, y=-20, diameter=16, vy=4.0)]), tmp_path / "slow.mp4", rate=30.0)
    stated = Camera(frame_rate=Quantity(240.0, 0.12), metre_per_px=Quantity(1e-4))
    tracked = follow_falls(video, camera=stated)
    assert slope(only(tracked)) == pytest.approx(4.0 * 240, rel=1e-3)
    assert tracked.clock.source == "stated"
    assert tracked.clock.u_relative == pytest.approx(0.0005)
    own = follow_falls(video, camera=Camera(metre_per_px=Quantity(1e-4)))
    assert slope(only(own)) == pytest.approx(4.0 * 30, rel=1e-3)
    assert own.clock.source == "container"
    assert any("no frame rate is stated" in note for note in own.notes)


def test_one_after_another_and_side_by_side(tmp_path: Path) -> None:
    speeds = (3.1, 4.7, 3.9, 2.6)
    discs = [
        Disc(x=50, y=-20, diameter=12, vy=speeds[0]),
        Disc(x=110, y=-30, diameter=20, vy=speeds[1]),
        Disc(x=60, y=-20 - 60 * speeds[2], diameter=15, vy=speeds[2]),
        Disc(x=100, y=-20 - 110 * speeds[3], diameter=9, vy=speeds[3]),
    ]
    tracked = follow_falls(as_folder(Scene(discs=discs, frames=260), tmp_path / "frames"), camera=CAMERA)
    assert [slope(fall) / 100 for fall in tracked.falls] == [pytest.approx(speed, rel=1e-3) for speed in speeds]
    assert "neighbour" in tracked.falls[0].flags
    assert "neighbour" not in tracked.falls[3].flags


def test_what_is_not_a_fall_is_refused_with_its_reason(tmp_path: Path) -> None:
    random = np.random.default_rng(3)
    steps = np.array([120.0, 90.0]) + np.cumsum(random.normal(0, 0.4, (200, 2)), axis=0)
    discs = [
        Disc(x=60, y=-20, diameter=14, vy=3.7),
        Disc(x=110, y=330, diameter=10, vy=-5.0),
        Disc(x=0, y=0, diameter=5, light=0.4, path=lambda frame: (float(steps[frame, 0]), float(steps[frame, 1]))),
        Disc(x=30, y=250, diameter=5, vx=0.5, vy=0.02, light=0.4),
    ]
    scene = Scene(discs=discs, frames=180, marks=20, flicker=0.02)
    tracked = follow_falls(as_folder(scene, tmp_path / "frames"), camera=CAMERA)
    assert slope(only(tracked)) == pytest.approx(370.0, rel=1e-3)
    reasons = {track.reason for track in tracked.refused}
    assert "rises" in reasons
    assert "moves across gravity" in reasons
    assert all(track.reason for track in tracked.refused)
    assert [track.flags for track in tracked.refused if track.reason == "rises"] == [("rising",)]


def test_a_particle_at_rest_on_the_bottom_is_no_fall_and_does_not_spoil_the_one_that_led_there(tmp_path: Path) -> None:
    def landing(start: int, bottom: float) -> Disc:
        return Disc(
            x=0,
            y=0,
            diameter=16,
            frames=(start, 1_000_000),
            path=lambda frame: (70.0 + start / 10, min(-20 + 4.0 * (frame - start), bottom)),
        )

    discs = [landing(0, 300.0), landing(100, 296.0)]
    tracked = follow_falls(as_folder(Scene(discs=discs, frames=240), tmp_path / "frames"), camera=CAMERA)
    assert [slope(fall) for fall in tracked.falls] == [pytest.approx(400.0, rel=1e-3)] * 2
    assert all(fall.y[-1] < 285 for fall in tracked.falls)


def test_an_empty_recording_says_so(tmp_path: Path) -> None:
    tracked = follow_falls(as_folder(Scene(flicker=0.03, frames=40), tmp_path / "frames"), camera=CAMERA)
    assert tracked.falls == ()
    assert tracked.refused == ()
    assert any("nothing fell" in note for note in tracked.notes)


def test_the_same_recording_gives_the_same_numbers(tmp_path: Path) -> None:
    video = as_video(Scene(discs=[Disc(x=80, y=-20, diameter=16, vy=4.0)], flicker=0.01), tmp_path / "a.mp4")
    first, second = only(follow_falls(video, camera=CAMERA)), only(follow_falls(video, camera=CAMERA))
    np.testing.assert_array_equal(first.y, second.y)
    np.testing.assert_array_equal(first.area, second.area)
