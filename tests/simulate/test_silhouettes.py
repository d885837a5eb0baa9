"""Silhouettes: area and centroid of what is drawn, to a small part of a pixel."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.spatial import ConvexHull

from settlelab.simulate import Sphere, angular_grain
from settlelab.simulate.silhouettes import Patch, Pose, silhouette, subexposures

SCALE = 2e-4  # m/px
STILL = np.eye(3)
inside = st.floats(40.0, 60.0)


def centroid(patch: Patch) -> tuple[float, float]:
    rows, columns = np.mgrid[: patch.coverage.shape[0], : patch.coverage.shape[1]]
    total = patch.coverage.sum()
    return (
        patch.left + (patch.coverage * columns).sum() / total,
        patch.top + (patch.coverage * rows).sum() / total,
    )


@given(x=inside, y=inside, diameter=st.floats(8.0, 40.0), softness=st.sampled_from([0.0, 0.7, 1.5]))
@settings(max_examples=60, deadline=None)
def test_disc_has_the_area_and_the_place_of_the_sphere(x: float, y: float, diameter: float, softness: float) -> None:
    patch = silhouette(Sphere(diameter * SCALE), [Pose(x, y, STILL)], SCALE, softness)
    drawn = np.sqrt(4 * patch.coverage.sum() / np.pi)
    assert drawn == pytest.approx(diameter, abs=3e-3)
    # an edge averaged over square pixels moves the centroid a little: 0.003 px at 8 px, less on larger discs
    assert centroid(patch) == pytest.approx((x, y), abs=8e-3)
    assert centroid(patch) == pytest.approx((x, y), abs=0.2 / diameter)
    assert patch.coverage.min() >= 0
    assert patch.coverage.max() <= 1 + 1e-12


@given(seed=st.integers(0, 500), x=inside, y=inside)
@settings(max_examples=15, deadline=None)
def test_grain_is_drawn_as_a_fine_raster_shows_it(seed: int, x: float, y: float) -> None:
    rng = np.random.default_rng(seed)
    grain = angular_grain(rng, equivalent_diameter=20 * SCALE)
    patch = silhouette(grain, [Pose(x, y, STILL)], SCALE)
    # the slow way: which of 12 x 12 points in each pixel lie inside the projected outline, side by side
    fine = (np.arange(12) + 0.5) / 12 - 0.5
    rows, columns = patch.coverage.shape
    across = (patch.left + np.arange(columns)[:, None] + fine).ravel()
    down = (patch.top + np.arange(rows)[:, None] + fine).ravel()
    points = np.stack(np.meshgrid((across - x) * SCALE, (down - y) * SCALE), axis=-1)
    sides = ConvexHull(grain.vertices[:, :2]).equations
    covered = np.all([points @ side[:2] + side[2] <= 0 for side in sides], axis=0)
    raster = covered.reshape(rows, 12, columns, 12).mean(axis=(1, 3))
    assert patch.coverage.sum() == pytest.approx(raster.sum(), rel=2e-3)
    assert np.abs(patch.coverage - raster).max() < 0.1


def test_exposure_smears_along_the_way_and_keeps_the_middle() -> None:
    sphere = Sphere(10 * SCALE)
    way = 4.0
    count = subexposures(way)
    poses = [Pose(50.0, 50.0 + ((step + 0.5) / count - 0.5) * way, STILL) for step in range(count)]
    patch = silhouette(sphere, poses, SCALE)
    middle = patch.coverage[:, 50 - patch.left]
    assert centroid(patch) == pytest.approx((50.0, 50.0), abs=2e-3)
    assert patch.coverage.sum() == pytest.approx(np.pi * 25, rel=1e-3)
    assert np.count_nonzero(middle > 1e-9) == 10 + way + 1  # from 43 to 57, cut at half pixels
    assert middle.max() == pytest.approx(1.0)


def test_darkening_cuts_at_the_border_of_the_picture() -> None:
    picture = np.full((20, 30), 100.0)
    silhouette(Sphere(10 * SCALE), [Pose(0.0, 19.0, STILL)], SCALE).darken(picture, 0.1)
    assert picture[19, 0] == pytest.approx(10.0)
    assert picture[0, 29] == 100.0
    before = picture.copy()
    silhouette(Sphere(10 * SCALE), [Pose(-50.0, 10.0, STILL)], SCALE).darken(picture, 0.1)
    assert np.array_equal(picture, before)
