"""Descriptors of form; single published values are in test_values.py."""

from __future__ import annotations

import numpy as np
import pytest

from settlelab.physics import form, shape

AXES = ("krumbein_sphericity", "maximum_projection_sphericity", "janke_form_factor", "aschenbrenner_sphericity")


@pytest.mark.parametrize("name", AXES)
def test_equal_axes(name: str) -> None:
    expected = 0.956 if name == "aschenbrenner_sphericity" else 1.0  # reference sheet
    assert getattr(form, name)(2.0, 2.0, 2.0) == pytest.approx(expected, abs=5e-4)
    with pytest.raises(ValueError, match="in order"):
        getattr(form, name)(1.0, 2.0, 1.0)


def test_relations() -> None:
    """Sneed-Folk is the Corey shape factor to 2/3; a block lies below the ellipsoid of its axes."""
    a, b, c = np.array([9.0, 5.0]), np.array([5.0, 4.0]), np.array([2.0, 3.5])
    assert form.maximum_projection_sphericity(a, b, c) == pytest.approx(shape.corey_shape_factor(a, b, c) ** (2 / 3))
    assert np.all(form.box_sphericity(a, b, c) < shape.ellipsoid_sphericity(a, b, c))
    assert form.wentworth_flatness(9.0, 5.0, 2.0) == 3.5
    assert np.isnan(form.oblate_prolate_index(2.0, 2.0, 2.0))
    assert form.oblate_prolate_index(4.0, 4.0, 1.0) == -20.0  # disc: 10 (0 - 1/2) 4


def test_zingg() -> None:
    found = form.zingg_class([4.0, 4.0, 9.0, 9.0], [3.5, 3.5, 3.0, 4.0], [3.0, 1.0, 2.5, 1.0])
    assert found.tolist() == ["equant", "disc", "rod", "blade"]


def test_powers() -> None:
    """Limits of Powers (1953), from memory."""
    found = form.powers_class([0.10, 0.16, 0.20, 0.30, 0.40, 0.60, 0.80])
    assert found.tolist() == [
        "very angular", "very angular", "angular", "subangular", "subrounded", "rounded", "well rounded",
    ]  # fmt: skip


def test_silhouette_of_a_square() -> None:
    """Unit square by hand: diagonal sqrt 2, circle of equal area 2/sqrt pi."""
    root = np.sqrt(2)
    assert form.perimeter_diameter(4.0) == pytest.approx(4 / np.pi)
    assert form.form_factor(1.0, 4.0) == pytest.approx(np.pi / 4)
    assert form.form_factor(1.0, 4.0) == pytest.approx(shape.circularity(1.0, 4.0) ** 2)
    assert form.compactness(1.0, root) == pytest.approx(2 / np.sqrt(np.pi) / root)
    assert form.aspect_ratio(1.0, root) == pytest.approx(1 / root)
    assert form.extent(1.0, root, root) == pytest.approx(0.5)
    assert form.box_ratio(1.0, 1.0) == 1
    assert form.solidity(1.0, 1.0) == 1
    assert form.convexity(4.0, 4.0) == 1
    assert form.irregularity(1.0, root) == pytest.approx(1 / root)


def test_silhouette_of_a_bent_fibre() -> None:
    assert form.geodesic_elongation(1.0, 20.0) == 0.05
    assert form.straightness(15.0, 20.0) == 0.75
    assert form.ellipse_ratio(2.0, 8.0) == 0.25
