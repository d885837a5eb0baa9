"""One decoding is enough where it can be, and a second one gives the same where it cannot."""

from __future__ import annotations

import itertools
from collections.abc import Iterator
from pathlib import Path

import cv2
import numpy as np
import pytest

from settlelab.study.model import Camera
from settlelab.units import Quantity
from settlelab.video import TrackedRecording, follow_falls, survey
from settlelab.video.source import Frame, PictureFolder
from settlelab.video.survey import changed_boxes
from tests.video.rendering import Disc, Scene, as_folder

CAMERA = Camera(frame_rate=Quantity(100.0), metre_per_px=Quantity(1e-4))
INTO_VIEW = Disc(x=80, y=-80, diameter=16, vy=4.0)
IN_VIEW = Disc(x=80, y=40, diameter=16, vy=0.8)


def followed(folder: Path, monkeypatch: pytest.MonkeyPatch) -> tuple[TrackedRecording, int]:
    """The recording, and how often its first frame was decoded."""
    decoded: list[int] = []
    plain = PictureFolder.frames

    def counted(source: PictureFolder) -> Iterator[Frame]:
        for frame in plain(source):
            decoded.append(frame.number)
            yield frame

    with monkeypatch.context() as patched:
        patched.setattr(PictureFolder, "frames", counted)
        return follow_falls(folder, camera=CAMERA), decoded.count(0)


@pytest.mark.parametrize(("disc", "times"), [(INTO_VIEW, 1), (IN_VIEW, 2)], ids=["into view", "in view"])
def test_decoded_again_only_where_something_was_there_from_the_start(
    disc: Disc, times: int, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    folder = as_folder(Scene(discs=[disc], frames=200), tmp_path / "frames")
    tracked, decoded = followed(folder, monkeypatch)
    assert decoded == times
    (fall,) = tracked.falls
    assert np.polyfit(fall.frame, fall.y, 1)[0] == pytest.approx(disc.vy, rel=1e-3)
    if disc is IN_VIEW:
        assert fall.frame[0] < 3


def test_a_full_store_changes_nothing_of_note(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    folder = as_folder(Scene(discs=[INTO_VIEW], frames=120), tmp_path / "frames")
    kept, once = followed(folder, monkeypatch)
    monkeypatch.setattr(survey, "STORE_BYTES", 20_000)
    again, twice = followed(folder, monkeypatch)
    assert (once, twice) == (1, 2)
    np.testing.assert_array_equal(again.falls[0].frame, kept.falls[0].frame)
    np.testing.assert_allclose(again.falls[0].y, kept.falls[0].y, atol=0.02)


def test_boxes_around_changes_are_disjoint_and_reach_the_rim() -> None:
    changed = np.zeros((40, 30), np.uint8)
    changed[5:8, 5:8] = changed[5:8, 12:14] = changed[39, 29] = 255
    boxes = changed_boxes(changed, 4, (162, 123))
    assert boxes == [(8, 8, 68, 44), (104, 144, 123, 162)]
    assert changed_boxes(np.zeros_like(changed), 4, (162, 123)) == []


def test_a_damaged_picture_is_passed_over_and_told(tmp_path: Path) -> None:
    """Decoding errors scatter blocks over the picture; hundreds of objects are nothing to follow."""
    rng = np.random.default_rng(8)
    for number in range(24):
        picture = rng.normal(180, 1, (480, 320))
        picture[20 * number : 20 * number + 12, 150:162] = 40
        if number == 9:
            for y, x in itertools.product(range(12, 470, 18), range(12, 310, 18)):
                picture[y : y + 6, x : x + 6] = rng.choice([30, 250])
        cv2.imencode(".png", picture.astype(np.uint8))[1].tofile(tmp_path / f"{number:03}.png")
    camera = Camera(metre_per_px=Quantity(1e-4), frame_rate=Quantity(50.0))
    tracked = follow_falls(tmp_path, camera=camera)
    assert any("1 of 24 frames passed over" in note for note in tracked.notes), tracked.notes
    assert len(tracked.falls) == 1
    assert 9 not in tracked.falls[0].frame
