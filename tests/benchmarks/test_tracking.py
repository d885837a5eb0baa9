"""Speed of tracking against decoding alone, and against a plain script, on the same clip in the same process."""

from __future__ import annotations

import time
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import cv2
import numpy as np
import pytest
from pytest_benchmark.fixture import BenchmarkFixture

from settlelab.study.model import Camera
from settlelab.units import Quantity
from settlelab.video import follow_falls
from tests.video.rendering import Disc, Scene, as_video

CAMERA = Camera(frame_rate=Quantity(120.0), metre_per_px=Quantity(1e-4))
PORTRAIT = (1080, 1920)  # px, width and height


@pytest.fixture(scope="module")
def clip(tmp_path_factory: pytest.TempPathFactory, request: pytest.FixtureRequest) -> Path:
    """Three grains in a tall picture, one after another, before a lit column with marks, with noise of its own each."""
    discs = [
        Disc(x=540.3, y=-40, diameter=30, vy=44.13),
        Disc(x=500.1, y=-1000, diameter=40, vy=53.21),
        Disc(x=560.7, y=-1400, diameter=20, vy=60.33),
    ]
    slower = 4.0 if request.config.getoption("benchmark_enable") else 1.0
    discs = [replace(disc, y=disc.y * min(slower, 2.0), vy=disc.vy / slower) for disc in discs]
    scene = Scene(discs=discs, size=PORTRAIT, frames=int(75 * slower), marks=100, walls=(100.0, 980.0))
    return as_video(scene, tmp_path_factory.mktemp("clip") / "clip.mp4", rate=120.0)


def decode_only(clip: Path) -> None:
    """Every frame to undecoded luma, and nothing else."""
    capture = cv2.VideoCapture(str(clip), cv2.CAP_FFMPEG)
    capture.set(cv2.CAP_PROP_CONVERT_RGB, 0)
    while capture.read()[0]:
        pass
    capture.release()


def plain_script(clip: Path) -> list[list[tuple[float, float]]]:
    """What one would write first: colour frames, mixture background, opening, contours, nearest neighbour."""
    capture = cv2.VideoCapture(str(clip), cv2.CAP_FFMPEG)
    mixture, kernel = cv2.createBackgroundSubtractorMOG2(), np.ones((3, 3), np.uint8)
    tracks: list[list[tuple[float, float]]] = []
    while (read := capture.read())[0]:
        mask = cv2.morphologyEx(mixture.apply(read[1]), cv2.MORPH_OPEN, kernel)
        for contour in cv2.findContours(mask, cv2.RETR_EXTERNAL, cv2.CHAIN_APPROX_SIMPLE)[0]:
            x, y = contour.reshape(-1, 2).mean(axis=0)
            near = [track for track in tracks if np.hypot(track[-1][0] - x, track[-1][1] - y) < 50]
            (near[0] if near else tracks.append([]) or tracks[-1]).append((float(x), float(y)))
    capture.release()
    return tracks


def quickest(work: Callable[[], object], rounds: int = 3) -> float:
    """Seconds of the fastest of some rounds."""
    times = []
    for _ in range(rounds):
        start = time.perf_counter()
        work()
        times.append(time.perf_counter() - start)
    return min(times)


def test_tracking_keeps_pace_with_decoding(
    benchmark: BenchmarkFixture, clip: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    tracked = benchmark.pedantic(follow_falls, args=(clip,), kwargs={"camera": CAMERA}, rounds=3)
    assert len(tracked.falls) == 3
    if benchmark.enabled:
        taken = benchmark.stats.stats.min
        share = quickest(lambda: decode_only(clip)) / taken
        times = quickest(lambda: plain_script(clip)) / taken
        benchmark.extra_info.update({"share of decoding speed": share, "times the speed of a plain script": times})
        with capsys.disabled():
            print(f"\ntracking: {share:.2f} of the speed of decoding alone, {times:.1f} times that of a plain script")
