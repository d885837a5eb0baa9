"""A plan against what the same study then measures, on recordings drawn from it; nothing is adjusted in between."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pandas as pd
import pytest

from settlelab.measure import measure_study
from settlelab.plan import Aims, plan_study
from settlelab.simulate import Camera, Column, Order, draw_order, random_study
from settlelab.study import read_study
from settlelab.video import follow_falls

CAMERA = Camera(width=320, height=480, metre_per_px=2e-4, frame_rate=60.0, exposure=1e-3)
COLUMN = Column(bore=0.05, surface=-0.42)
ORDERS = {
    "grains": Order(number=3, camera=CAMERA, column=COLUMN, dust=0, seed=5),
    "plates": Order(number=3, proportions=(1.0, 0.9, 0.4), mass_fraction=0.6, camera=CAMERA, column=COLUMN, seed=8),
    "spheres": Order(particle="sphere", number=2, mass_fraction=0.75, camera=CAMERA, column=COLUMN, seed=6),
}


@pytest.fixture(scope="module", params=ORDERS)
def both(request: pytest.FixtureRequest, tmp_path_factory: pytest.TempPathFactory) -> pd.DataFrame:
    """Planned before the videos are there, then drawn and measured: one row per drop."""
    folder: Path = tmp_path_factory.mktemp(request.param)
    draw_order(ORDERS[request.param], folder)
    video = folder / "recording.mp4"
    away = video.rename(folder / "not_yet.mp4")
    plan = plan_study(read_study(folder, before_filming=True), Aims(picture_height=CAMERA.height))
    away.rename(video)
    study = read_study(folder)
    recording = study.recordings[0]
    tracked = follow_falls(recording.video, camera=recording.camera, column=recording.column)
    measured = measure_study(study, [tracked]).drops
    assert measured["accepted"].all()
    assert not any("px along gravity" in told for told in plan_study(study).assumed)  # the video tells
    return measured.merge(plan.setups[0].rows, on="particle", suffixes=("", "_planned"), validate="many_to_one")


def test_velocity_lies_within_its_stated_interval(both: pd.DataFrame) -> None:
    deviation = (both["velocity"] - both["velocity_planned"]).abs()
    assert (deviation <= 2 * both["velocity_u_planned"]).all()


def test_uncertainty_of_the_drag_coefficient_within_a_factor_of_one_and_a_half(both: pd.DataFrame) -> None:
    planned = both["drag_coefficient_u_planned"] / both["drag_coefficient_planned"]
    ratio = planned / (both["drag_coefficient_u"] / both["drag_coefficient"])
    assert ratio.between(1 / 1.5, 1.5).all(), ratio.tolist()


def test_size_and_frames_in_view(both: pd.DataFrame) -> None:
    size = both["projected_diameter"] / CAMERA.metre_per_px
    assert np.allclose(both["size_px"], size, rtol=0.2)  # a silhouette shows more than the equal sphere
    expected = both["frames_planned"] * both["velocity_planned"] / both["velocity"]
    assert np.allclose(both["frames"], expected, rtol=0.3)  # the steady window is a part of the view


@pytest.mark.slow
@pytest.mark.parametrize("seed", range(21, 25))
def test_on_studies_drawn_at_random(seed: int, tmp_path: Path) -> None:
    random_study(tmp_path, seed, recordings=2, drops=2)
    study = read_study(tmp_path)
    tracked = [follow_falls(each.video, camera=each.camera, column=each.column) for each in study.recordings]
    drops = measure_study(study, tracked).drops
    planned = pd.concat(
        [setup.rows.assign(recording=name) for setup in plan_study(study).setups for name in setup.recordings]
    )
    both = drops[drops["accepted"]].merge(planned, on=["recording", "particle"], suffixes=("", "_planned"))
    assert len(both) == len(drops)
    test_velocity_lies_within_its_stated_interval(both)
    test_uncertainty_of_the_drag_coefficient_within_a_factor_of_one_and_a_half(both)
