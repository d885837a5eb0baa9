"""Opening and decoding: every refusal is one sentence, and what is readable is read."""

from __future__ import annotations

from pathlib import Path

import cv2
import numpy as np
import pytest

from settlelab.errors import RecordingError
from settlelab.study.model import Camera
from settlelab.units import Quantity
from settlelab.video import follow_falls
from settlelab.video.source import open_recording
from tests.video.rendering import Disc, Scene, as_folder, as_video

SCENE = Scene(discs=[Disc(x=80, y=-20, diameter=16, vy=4.0)], frames=40, noise=0.5)
CAMERA = Camera(frame_rate=Quantity(100.0), metre_per_px=Quantity(1e-4))


@pytest.mark.parametrize(
    ("codec", "name"),
    [("mp4v", "a.mp4"), ("MJPG", "a.avi"), ("FFV1", "a.mkv"), ("VP80", "a.webm"), ("mp4v", "a.mov")],
)
def test_grey_levels_count_from_black_whatever_the_codec(codec: str, name: str, tmp_path: Path) -> None:
    source = open_recording(as_video(SCENE, tmp_path / name, codec=codec))
    frames = list(source.frames())
    assert len(frames) == SCENE.frames
    assert frames[0].picture.shape == SCENE.size[::-1]
    assert [frame.number for frame in frames] == list(range(SCENE.frames))
    light = (frames[20].picture.astype(float) - source.black) * (255 / 219 if source.black else 1.0)
    assert np.median(light) == pytest.approx(SCENE.lamp, rel=0.03)
    assert light[56:64, 76:84].mean() == pytest.approx(0.15 * SCENE.lamp, abs=8)
    np.testing.assert_allclose(np.diff([frame.time for frame in frames]), 0.01, atol=1.1e-3)


def test_a_missing_recording(tmp_path: Path) -> None:
    with pytest.raises(RecordingError, match="there is no such recording"):
        open_recording(tmp_path / "a.mp4")


def test_a_file_that_is_no_video(tmp_path: Path, capfd: pytest.CaptureFixture[str]) -> None:
    (tmp_path / "a.mp4").write_bytes(b"not a video at all" * 100)
    with pytest.raises(RecordingError, match="cannot be read as a video; accepted are"):
        open_recording(tmp_path / "a.mp4")
    assert capfd.readouterr().err == ""


def test_a_video_that_opens_but_yields_no_frame_names_its_codec(
    tmp_path: Path, capfd: pytest.CaptureFixture[str]
) -> None:
    video = as_video(SCENE, tmp_path / "a.avi", codec="MJPG")
    header, movie = video.read_bytes().split(b"movi", 1)
    video.write_bytes(header + b"movi" + movie.replace(b"\xff", b"\x00"))  # no marker of a picture is left
    with pytest.raises(RecordingError, match=r'not one frame can be decoded \(codec "MJPG"\).*H\.264'):
        open_recording(video)
    assert capfd.readouterr().err == ""


def test_a_truncated_video_is_analysed_up_to_where_it_breaks(tmp_path: Path, capfd: pytest.CaptureFixture[str]) -> None:
    scene = Scene(discs=SCENE.discs, frames=90)
    whole = as_video(scene, tmp_path / "whole.avi", codec="MJPG")
    broken = tmp_path / "broken.avi"
    broken.write_bytes(whole.read_bytes()[: int(whole.stat().st_size * 0.6)])
    tracked = follow_falls(broken, camera=CAMERA)
    assert 30 < tracked.frame_count < 70
    assert len(tracked.falls) == 1
    assert any("breaks off after" in note for note in tracked.notes)
    assert capfd.readouterr().err == ""


def test_a_folder_needs_numbered_pictures(tmp_path: Path) -> None:
    (tmp_path / "notes.txt").write_text("no pictures here")
    with pytest.raises(RecordingError, match="holds no numbered pictures; accepted are PNG and TIFF"):
        open_recording(tmp_path)


def test_a_folder_needs_a_frame_rate(tmp_path: Path) -> None:
    folder = as_folder(SCENE, tmp_path / "frames")
    with pytest.raises(RecordingError, match="has no clock; state the true capture rate"):
        follow_folder_without_rate(folder)


def follow_folder_without_rate(folder: Path) -> None:
    follow_falls(folder, camera=Camera(metre_per_px=Quantity(1e-4)))


def test_two_pictures_of_one_number(tmp_path: Path) -> None:
    folder = as_folder(SCENE, tmp_path / "frames")
    (folder / "copy_0003.png").write_bytes((folder / "0003.png").read_bytes())
    with pytest.raises(RecordingError, match="have the same number"):
        open_recording(folder)


def test_missing_and_spoiled_pictures_leave_a_hole_in_time(tmp_path: Path) -> None:
    folder = as_folder(Scene(discs=SCENE.discs, frames=90), tmp_path / "frames")
    (folder / "0030.png").unlink()
    (folder / "0041.png").write_bytes(b"spoiled")
    tracked = follow_falls(folder, camera=CAMERA)
    (fall,) = tracked.falls
    assert tracked.clock.missing_frames == 2
    assert 30 not in fall.frame
    assert 41 not in fall.frame
    np.testing.assert_allclose(fall.time, fall.frame / 100.0, atol=1e-12)
    assert "clock" in fall.flags
    assert any("0041.png is not a readable picture" in note for note in tracked.notes)
    assert np.polyfit(fall.time, fall.y, 1)[0] == pytest.approx(400.0, rel=1e-3)


def test_sixteen_bit_tiff_keeps_its_depth(tmp_path: Path) -> None:
    (tmp_path / "frames").mkdir()
    deep = np.full((40, 60), 12345, np.uint16)
    (tmp_path / "frames" / "a1.tif").write_bytes(cv2.imencode(".tif", deep)[1].tobytes())
    (frame,) = open_recording(tmp_path / "frames").frames()
    assert frame.picture.dtype == np.float32
    np.testing.assert_allclose(frame.picture, 12345 / 257, rtol=1e-6)
