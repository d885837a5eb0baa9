from __future__ import annotations

import math
from dataclasses import fields, replace

import numpy as np
import pytest

from settlelab.measure import Drop, TrackPoint, measure_falls, track_table
from settlelab.units import from_headings, with_headings
from tests.measure.invented import SCALE, WALLS, track, tracked


def test_velocity_with_scale_and_clock() -> None:
    drop = measure_falls(tracked(track(0.1, circularity=1.0), clock_u=2e-3)).iloc[0]
    assert drop["velocity"] == pytest.approx(0.1, rel=1e-3)
    assert drop["velocity_u"] / 0.1 == pytest.approx(math.hypot(1e-3, 2e-3), rel=0.02)
    assert (drop["drop"], drop["recording"], drop["frames"]) == (1, "a1.mp4", 120)
    assert (drop["first_time"], drop["last_time"]) == pytest.approx((0.5, 0.5 + 119 / 120))
    assert bool(drop["accepted"])


def test_the_centre_of_an_angular_silhouette_may_wander() -> None:
    """3 % of 4 mm over 119/120 s, however steady the fall looks; a round silhouette has its centre for certain."""
    angular, round_one = (
        measure_falls(tracked(track(0.1, circularity=circularity, noise=0.001))).iloc[0] for circularity in (0.9, 1.0)
    )
    wander = 0.03 * 4e-3 / (119 / 120)
    assert angular["velocity_u"] == pytest.approx(math.hypot(round_one["velocity_u"], wander), rel=1e-2)


def test_the_silhouette() -> None:
    drop = measure_falls(tracked(track(0.1, diameter=5e-3))).iloc[0]
    assert drop["projected_diameter"] == pytest.approx(5e-3)
    assert (drop["circularity"], drop["aspect_ratio"]) == (0.95, 0.9)


def test_columns_are_those_of_the_drop_table() -> None:
    drops = measure_falls(tracked(track(0.1), track(0.12, seed=2)))
    assert list(drops.columns) == [field.name for field in fields(Drop)]
    assert drops["drop"].tolist() == [1, 2]
    assert drops["accepted"].dtype == np.bool_
    assert drops["particle"].tolist() == ["", ""]
    assert drops["drag_coefficient"].isna().all()


def test_a_recording_without_falls_gives_an_empty_table() -> None:
    assert measure_falls(tracked()).empty
    assert list(measure_falls(tracked()).columns) == [field.name for field in fields(Drop)]
    assert track_table(tracked()).empty


def test_flags_of_the_tracker_and_of_the_fit_are_joined() -> None:
    brief = track(0.1, seconds=0.05, flags=("gap",))
    drop = measure_falls(tracked(brief)).iloc[0]
    assert drop["flags"] == "short-track;gap"
    assert not drop["accepted"]
    assert math.isnan(drop["velocity"])


@pytest.mark.parametrize(
    ("share", "flags", "accepted"), [(0.3, "", True), (0.7, "near-wall", True), (0.9, "near-wall", False)]
)
def test_distance_from_the_axis(share: float, flags: str, accepted: bool) -> None:
    middle, radius = sum(WALLS) / 2, (WALLS[1] - WALLS[0]) / 2
    drop = measure_falls(tracked(track(0.1, x=middle + share * radius, flags=("near-wall",)))).iloc[0]
    assert (drop["flags"], bool(drop["accepted"])) == (flags, accepted)


def test_without_walls_the_tracker_decides() -> None:
    lonely = replace(track(0.1, flags=("near-wall",)), wall_distance=np.full(120, np.nan))
    drop = measure_falls(replace(tracked(lonely), walls=None)).iloc[0]
    assert (drop["flags"], bool(drop["accepted"])) == ("near-wall", True)


def test_every_point_of_every_fall_is_in_the_track_table() -> None:
    falls = (track(0.1), track(0.12, seed=2))
    table = track_table(tracked(*falls), first_drop=5)
    assert list(table.columns) == [field.name for field in fields(TrackPoint)]
    assert table["drop"].unique().tolist() == [5, 6]
    assert len(table) == sum(len(fall.time) for fall in falls)
    assert table["y"].to_numpy()[:120] == pytest.approx(falls[0].y * SCALE.value)
    assert table["area"].iloc[0] == pytest.approx(math.pi / 4 * 16e-6)
    assert table["orientation_deg"].iloc[0] == pytest.approx(math.degrees(0.3))


def test_the_track_table_is_written_with_units() -> None:
    written = with_headings(track_table(tracked(track(0.1))), TrackPoint)
    assert list(written.columns) == [
        "drop",
        "frame",
        "time_s",
        "x_mm",
        "y_mm",
        "area_mm2",
        "aspect_ratio",
        "circularity",
        "orientation_deg",
        "wall_distance_mm",
    ]
    assert written["x_mm"].iloc[0] == pytest.approx(100.0)


def test_the_drop_table_survives_writing_and_reading() -> None:
    drops = measure_falls(tracked(track(0.1)))
    again = from_headings(with_headings(drops, Drop), Drop)
    assert again["velocity"].to_numpy() == pytest.approx(drops["velocity"].to_numpy())
    assert again["accepted"].tolist() == drops["accepted"].tolist()
