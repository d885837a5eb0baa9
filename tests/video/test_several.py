"""Several particles at once: nearly touching, overtaking, lost behind something for long."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from settlelab.study.model import Camera
from settlelab.units import Quantity
from settlelab.video import TrackedRecording, follow_falls
from tests.video.rendering import Disc, Scene, as_folder

CAMERA = Camera(frame_rate=Quantity(100.0), metre_per_px=Quantity(1e-4))


def followed(scene: Scene, folder: Path) -> TrackedRecording:
    return follow_falls(as_folder(scene, folder / "frames"), camera=CAMERA)


def velocities(tracked: TrackedRecording) -> list[float]:
    """px per frame, in order of appearance."""
    return [float(np.polyfit(fall.frame, fall.y, 1)[0]) for fall in tracked.falls]


def test_two_discs_four_pixels_apart_are_measured_apart(tmp_path: Path) -> None:
    discs = [Disc(x=70, y=-18, diameter=14, vy=4.0), Disc(x=90, y=-22, diameter=18, vy=4.02)]
    tracked = followed(Scene(discs=discs), tmp_path)
    assert velocities(tracked) == [pytest.approx(4.0, rel=1e-3), pytest.approx(4.02, rel=1e-3)]
    sizes = [float(np.sqrt(4 * np.median(fall.area) / np.pi)) for fall in tracked.falls]
    assert sizes == [pytest.approx(14, rel=0.02), pytest.approx(18, rel=0.02)]


def test_overtaking_through_one_another_keeps_both_and_counts_no_third(tmp_path: Path) -> None:
    discs = [Disc(x=80, y=-20, diameter=14, vy=2.5), Disc(x=84, y=-140, diameter=18, vy=4.5)]
    tracked = followed(Scene(discs=discs, frames=150), tmp_path)
    assert velocities(tracked) == [pytest.approx(2.5, rel=1e-3), pytest.approx(4.5, rel=1e-3)]
    assert all("gap" in fall.flags and "neighbour" in fall.flags for fall in tracked.falls)
    assert "two objects seen as one" in {track.reason for track in tracked.refused}


def test_pieces_before_and_behind_a_wide_bar_are_one_fall(tmp_path: Path) -> None:
    # hidden for 40 frames, longer than the linking waits for an object of this speed
    discs = [
        Disc(x=80, y=-20, diameter=8, vy=2.6, frames=(0, 50)),
        Disc(x=80, y=-20, diameter=8, vy=2.6, frames=(90, 200)),
    ]
    tracked = followed(Scene(discs=discs, frames=140), tmp_path)
    assert velocities(tracked) == [pytest.approx(2.6, rel=1e-3)]
    assert tracked.falls[0].flags == ("gap",)


def test_a_second_particle_on_the_same_line_is_not_taken_for_the_first(tmp_path: Path) -> None:
    discs = [
        Disc(x=80, y=-20, diameter=8, vy=2.6, frames=(0, 60)),
        Disc(x=80, y=-20 - 2.6 * 70, diameter=8, vy=2.6),
    ]
    tracked = followed(Scene(discs=discs, frames=180), tmp_path)
    assert velocities(tracked) == [pytest.approx(2.6, rel=1e-3), pytest.approx(2.6, rel=1e-3)]
    assert tracked.falls[0].frame[-1] < 60


@pytest.mark.parametrize(("speed", "light", "is_reflection"), [(4.0, 0.6, True), (4.1, 0.6, False), (4.0, 0.2, False)])
def test_a_reflection_in_the_wall_is_no_fall(speed: float, light: float, is_reflection: bool, tmp_path: Path) -> None:
    # mirrored about x = 125: as fast, fainter, drifting the other way
    discs = [Disc(x=100, y=-20, diameter=14, vx=0.05, vy=4.0)]
    discs.append(Disc(x=150, y=-20, diameter=12, vx=-0.05, vy=speed, light=light))
    tracked = followed(Scene(discs=discs), tmp_path)
    assert len(tracked.falls) == (1 if is_reflection else 2)
    reasons = {track.reason for track in tracked.refused}
    assert ("reflection of another object in the column wall" in reasons) == is_reflection
    assert min(velocities(tracked)) == pytest.approx(4.0, rel=1e-3)


def test_a_cloud(tmp_path: Path) -> None:
    random = np.random.default_rng(11)
    discs = [
        Disc(
            x=float(random.uniform(20, 300)),
            y=float(-random.uniform(20, 600)),
            diameter=float(random.uniform(7, 12)),
            vy=float(random.uniform(3, 5)),
        )
        for _ in range(20)
    ]
    tracked = followed(Scene(discs=discs, frames=260, size=(320, 320)), tmp_path)
    found = velocities(tracked)
    for disc in discs:
        nearest = min(found, key=lambda velocity: abs(velocity - disc.vy))
        assert nearest == pytest.approx(disc.vy, rel=2e-3)
