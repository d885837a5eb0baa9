"""A study that is read before it is filmed: what only filming gives may be missing, all else may not."""

from __future__ import annotations

from pathlib import Path

import pytest

from settlelab.errors import InputFaults
from settlelab.study import read_study
from tests.study.folder import write_study


def unfilmed(folder: Path, *changes: tuple[str, str]) -> Path:
    write_study(folder, *changes)
    for video in folder.glob("*.mp4"):
        video.unlink()
    return folder


def test_videos_may_be_missing(tmp_path: Path) -> None:
    study = read_study(unfilmed(tmp_path), before_filming=True)
    assert [recording.name for recording in study.recordings] == ["a1.mp4", "b1.mp4"]
    with pytest.raises(InputFaults, match=r"a1\.mp4"):
        read_study(tmp_path)


def test_the_scale_may_be_missing_but_not_be_given_twice(tmp_path: Path) -> None:
    text = (unfilmed(tmp_path) / "study.toml").read_text(encoding="utf-8")
    scale = next(line for line in text.splitlines() if line.startswith(("mm_per_px", "graduation", "marks =")))
    marks_apart = [line for line in text.splitlines() if line.startswith("marks_apart")]
    for line in (scale, *marks_apart):
        text = text.replace(line + "\n", "")
    (tmp_path / "study.toml").write_text(text, encoding="utf-8")
    assert read_study(tmp_path, before_filming=True).recordings[0].camera.metre_per_px is None
    twice = text.replace("[camera]\n", '[camera]\nmm_per_px = "0.2 mm/px"\ngraduation = "10 mm"\n')
    (tmp_path / "study.toml").write_text(twice, encoding="utf-8")
    with pytest.raises(InputFaults, match="one way of giving the scale"):
        read_study(tmp_path, before_filming=True)


def test_other_faults_are_told(tmp_path: Path) -> None:
    with pytest.raises(InputFaults, match="gravty"):
        read_study(unfilmed(tmp_path, ("gravity =", "gravty =")), before_filming=True)
