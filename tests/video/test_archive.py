"""A tracked recording survives the way to disk and back, unchanged and in equal bytes."""

from __future__ import annotations

import dataclasses
from pathlib import Path

import numpy as np

from settlelab.units import Quantity
from settlelab.video.archive import load_tracked, save_tracked
from settlelab.video.model import Clock, Track, TrackedRecording


def _track(seed: int, **facts: object) -> Track:
    rng = np.random.default_rng(seed)
    series = {
        field.name: rng.normal(size=7)
        for field in dataclasses.fields(Track)
        if field.name not in ("frame", "flags", "reason")
    }
    return Track(frame=np.arange(7, dtype=np.int64), **series, **facts)


def _tracked() -> TrackedRecording:
    return TrackedRecording(
        video=Path("a1.mp4"),
        frame_count=99,
        size=(12, 8),
        clock=Clock(frame_rate=120.0, u_relative=1e-4, source="stated", irregular=False),
        scale=Quantity(2e-4, 3e-7),
        falls=(_track(1, flags=("gap", "blurred")), _track(2)),
        refused=(_track(3, reason="rises: a bubble"),),
        background=np.arange(96, dtype=np.uint8).reshape(8, 12),
        walls=(1.5, 10.25),
        notes=("no uncertainty of the scale stated",),
    )


def test_what_was_saved_comes_back_equal(tmp_path: Path) -> None:
    tracked = _tracked()
    save_tracked(tracked, tmp_path / "a1.npz")
    back = load_tracked(tmp_path / "a1.npz")
    for field in dataclasses.fields(TrackedRecording):
        if field.name not in ("falls", "refused", "background"):
            assert getattr(back, field.name) == getattr(tracked, field.name), field.name
    np.testing.assert_array_equal(back.background, tracked.background)
    for kind in ("falls", "refused"):
        for ours, theirs in zip(getattr(tracked, kind), getattr(back, kind), strict=True):
            for field in dataclasses.fields(Track):
                np.testing.assert_array_equal(getattr(theirs, field.name), getattr(ours, field.name), field.name)


def test_a_recording_without_walls_or_tracks(tmp_path: Path) -> None:
    empty = dataclasses.replace(_tracked(), falls=(), refused=(), walls=None)
    save_tracked(empty, tmp_path / "empty.npz")
    back = load_tracked(tmp_path / "empty.npz")
    assert back.falls == ()
    assert back.walls is None


def test_equal_recordings_give_equal_bytes(tmp_path: Path) -> None:
    for name in ("one.npz", "two.npz"):
        save_tracked(_tracked(), tmp_path / name)
    assert (tmp_path / "one.npz").read_bytes() == (tmp_path / "two.npz").read_bytes()
    assert not list(tmp_path.glob("*.part"))
