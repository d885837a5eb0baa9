"""Every flag of the tracker, raised where its rule says so and quiet where not."""

from __future__ import annotations

from pathlib import Path

import pytest

from settlelab.study.model import Camera, Column
from settlelab.units import Quantity
from settlelab.video import Track, follow_falls
from tests.video.rendering import Disc, Scene, as_folder

CAMERA = Camera(frame_rate=Quantity(100.0), metre_per_px=Quantity(1e-4))
COLUMN = Column(section="round", inner_diameter=Quantity(0.0120))  # 120 px


def fall_of(scene: Scene, folder: Path) -> Track:
    (fall, *_) = follow_falls(as_folder(scene, folder / "frames"), camera=CAMERA, column=COLUMN).falls
    return fall


def one(disc: Disc, frames: int = 90) -> Scene:
    return Scene(discs=[disc], walls=(20.0, 140.0), frames=frames)


@pytest.mark.parametrize(("x", "raised"), [(33.0, True), (80.0, False)])
def test_near_wall(x: float, raised: bool, tmp_path: Path) -> None:
    fall = fall_of(one(Disc(x=x, y=-20, diameter=10, vy=4.0)), tmp_path)
    assert ("near-wall" in fall.flags) == raised
    assert fall.wall_distance.mean() == pytest.approx(min(x - 20, 140 - x), abs=2.6)


@pytest.mark.parametrize(("behind", "raised"), [(60.0, True), (160.0, False)])
def test_neighbour(behind: float, raised: bool, tmp_path: Path) -> None:
    discs = [Disc(x=80, y=-20, diameter=10, vy=4.0), Disc(x=85, y=-20 - behind, diameter=10, vy=4.0)]
    fall = fall_of(Scene(discs=discs, frames=140), tmp_path)
    assert ("neighbour" in fall.flags) == raised


@pytest.mark.parametrize(("speed", "raised"), [(38.0, True), (4.0, False)])
def test_short_track(speed: float, raised: bool, tmp_path: Path) -> None:
    fall = fall_of(one(Disc(x=80, y=-50, diameter=12, vy=speed)), tmp_path)
    assert ("short-track" in fall.flags) == raised


@pytest.mark.parametrize(("blur", "raised"), [(4.0, True), (0.8, False)])
def test_blurred(blur: float, raised: bool, tmp_path: Path) -> None:
    scene = Scene(discs=[Disc(x=80, y=-20, diameter=14, vy=4.0)], blur=blur)
    assert ("blurred" in fall_of(scene, tmp_path).flags) == raised


@pytest.mark.parametrize(("swing", "raised"), [(14.0, True), (4.0, False)])
def test_edge(swing: float, raised: bool, tmp_path: Path) -> None:
    def path(frame: int) -> tuple[float, float]:
        return 14.0 - swing * max(0.0, 1 - abs(frame - 40) / 12), -20 + 4.0 * frame

    fall = fall_of(Scene(discs=[Disc(x=0, y=0, diameter=14, path=path)]), tmp_path)
    assert ("edge" in fall.flags) == raised


@pytest.mark.parametrize("raised", [True, False])
def test_gap(raised: bool, tmp_path: Path) -> None:
    before, after = ((0, 40), (44, 100)) if raised else ((0, 40), (40, 100))
    discs = [
        Disc(x=80, y=-20, diameter=14, vy=4.0, frames=before),
        Disc(x=80, y=-20, diameter=14, vy=4.0, frames=after),
    ]
    fall = fall_of(Scene(discs=discs), tmp_path)
    assert ("gap" in fall.flags) == raised
    assert fall.frame[-1] > 70


@pytest.mark.parametrize("raised", [True, False])
def test_clock(raised: bool, tmp_path: Path) -> None:
    folder = as_folder(one(Disc(x=80, y=-20, diameter=14, vy=4.0)), tmp_path / "frames")
    if raised:
        (folder / "0050.png").unlink()
    (fall,) = follow_falls(folder, camera=CAMERA).falls
    assert ("clock" in fall.flags) == raised
    assert "gap" not in fall.flags
