"""Bodies: volume, surface, axes and silhouettes against solids with known answers."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from settlelab.simulate import Sphere, angular_grain, convex_grain
from settlelab.simulate.grains import rotation_about

PHI = (1 + np.sqrt(5)) / 2
PAIRS = [(a, b) for a in (-1, 1) for b in (-1, 1)]
CUBE = np.array([(x, y, z) for x in (0, 1) for y in (0, 1) for z in (0, 1)], dtype=float)
TETRAHEDRON = np.array([(1, 1, 1), (1, -1, -1), (-1, 1, -1), (-1, -1, 1)], dtype=float)
OCTAHEDRON = np.vstack([np.eye(3), -np.eye(3)])
ICOSAHEDRON = np.array([point for a, b in PAIRS for point in ((0, a, b * PHI), (a, b * PHI, 0), (b * PHI, 0, a))])

# Wadell sphericity, exact, as the lab reference lists it (section 6) from the solids' formulas
SPHERICITY = [
    (CUBE, 0.80600),
    (TETRAHEDRON, 0.67114),
    (OCTAHEDRON, 0.84558),
    (ICOSAHEDRON, 0.93933),
    (CUBE * (1, 1, 2), 0.76766),
    (CUBE * (1, 2, 4), 0.69085),
    (CUBE * (1, 5, 5), 0.59067),
]


@pytest.mark.parametrize(("points", "sphericity"), SPHERICITY)
def test_sphericity_of_a_solid(points: np.ndarray, sphericity: float) -> None:
    assert convex_grain(points).sphericity == pytest.approx(sphericity, abs=5e-6)


def test_volume_and_surface_of_a_tetrahedron() -> None:
    # edge length 2 sqrt 2: volume edge^3 / (6 sqrt 2), surface sqrt 3 edge^2 (school geometry)
    edge = 2 * np.sqrt(2)
    grain = convex_grain(TETRAHEDRON)
    assert grain.volume == pytest.approx(edge**3 / (6 * np.sqrt(2)))
    assert grain.surface == pytest.approx(np.sqrt(3) * edge**2)


def test_mass_centre_of_a_pyramid_lies_at_a_quarter_of_its_height() -> None:
    base = [(x, 0.0, z) for x in (-1, 1) for z in (-1, 1)]
    grain = convex_grain(np.array([*base, (0.0, 2.0, 0.0)]))
    assert grain.vertices[:, 1].min() == pytest.approx(-0.5)
    assert grain.vertices[:, 1].max() == pytest.approx(1.5)


@given(angle=st.floats(0, 6.2), axis=st.sampled_from([(1.0, 0.0, 0.0), (0.6, 0.0, 0.8), (0.48, 0.6, 0.64)]))
@settings(max_examples=20, deadline=None)
def test_calipers_find_the_sides_of_a_box_however_it_lies(angle: float, axis: tuple[float, float, float]) -> None:
    turned = (CUBE * (3.0, 2.0, 1.0)) @ rotation_about(np.array(axis), angle).T
    assert convex_grain(turned).axes == pytest.approx((3.0, 2.0, 1.0))


@given(seed=st.integers(0, 10_000), breaks=st.integers(6, 30), flat=st.floats(0.2, 1.0))
@settings(max_examples=40, deadline=None)
def test_a_grain_has_the_size_asked_for(seed: int, breaks: int, flat: float) -> None:
    rng = np.random.default_rng(seed)
    grain = angular_grain(rng, equivalent_diameter=3e-3, proportions=(1.0, 0.8, flat), breaks=breaks)
    long, intermediate, short = grain.axes
    assert grain.equivalent_diameter == pytest.approx(3e-3)
    assert long >= intermediate >= short > 0
    assert 0.3 < grain.sphericity < 1.0
    assert grain.volume < long * intermediate * short  # it fits into the box of its calipers
    assert grain.reach <= np.linalg.norm(grain.axes)
    # the mass centre by chance: mean of points thrown into the box that fall inside
    thrown = rng.uniform(-grain.reach, grain.reach, (20_000, 3))
    faces = [(normal, (grain.vertices @ normal).max()) for normal in grain.normals]
    inside = thrown[np.all([thrown @ normal <= offset for normal, offset in faces], axis=0)]
    spread = grain.reach / np.sqrt(len(inside))
    assert np.abs(inside.mean(axis=0)).max() < 4 * spread
    assert (2 * grain.reach) ** 3 * len(inside) / 20_000 == pytest.approx(grain.volume, rel=0.25)


def test_plates_are_flatter_than_blocks() -> None:
    rng = np.random.default_rng(4)
    plate, block = (
        angular_grain(rng, equivalent_diameter=4e-3, proportions=(1.0, 0.9, flat), breaks=14) for flat in (0.25, 0.9)
    )
    assert plate.axes[2] / plate.axes[0] < 0.4 < block.axes[2] / block.axes[0]
    assert plate.sphericity < block.sphericity


def test_chords_of_a_sphere() -> None:
    left, right = Sphere(2.0).chords(np.array([0.0, 0.6, -0.8, 1.5]), np.eye(3))
    assert right - left == pytest.approx([2.0, 1.6, 1.2, 0.0])  # Pythagoras


@given(seed=st.integers(0, 1000), angle=st.floats(0, 6.2))
@settings(max_examples=20, deadline=None)
def test_mean_shadow_of_a_convex_grain_is_a_quarter_of_its_surface(seed: int, angle: float) -> None:
    # Cauchy's theorem (1832): projected area averaged over all directions = surface / 4
    rng = np.random.default_rng(seed)
    grain = angular_grain(rng, equivalent_diameter=1.0)
    lines = np.linspace(-grain.reach, grain.reach, 801)
    shadows = []
    for place in range(60):  # directions spread evenly over the sphere
        height, turn = 1 - (2 * place + 1) / 60, place * np.pi * (3 - np.sqrt(5)) + angle
        tilt = rotation_about(np.array([1.0, 0.0, 0.0]), float(np.arccos(height)))
        rotation = tilt @ rotation_about(np.array([0.0, 0.0, 1.0]), turn)
        left, right = grain.chords(lines, rotation)
        shadows.append(np.sum(right - left) * (lines[1] - lines[0]))
    assert np.mean(shadows) == pytest.approx(grain.surface / 4, rel=0.01)
