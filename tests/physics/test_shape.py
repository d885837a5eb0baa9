"""Sizes and shapes against closed forms and tables."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from settlelab.physics import shape

AXES = (0.020, 0.014, 0.008)


@pytest.mark.parametrize(
    ("name", "volume", "surface", "printed"),
    [
        ("cube", 1.0, 6.0, 0.80600),
        ("regular tetrahedron", np.sqrt(2) / 12, np.sqrt(3), 0.67114),
        ("regular octahedron", np.sqrt(2) / 3, 2 * np.sqrt(3), 0.84558),
        ("cylinder 1:1", np.pi / 4, 1.5 * np.pi, 0.87358),
        ("box 1:2:4", 8.0, 28.0, 0.69085),
        ("hemisphere", 2 * np.pi / 3, 3 * np.pi, 0.83995),
        ("sphere", np.pi / 6, np.pi, 1.0),
    ],
)
def test_sphericity_of_bodies(name: str, volume: float, surface: float, printed: float) -> None:
    """Closed forms, reference sheet (print: 0.806, 0.670, 0.846)."""
    assert shape.sphericity(volume, surface) == pytest.approx(printed, abs=5e-6)


def test_ellipsoid() -> None:
    """Semi-axes 3, 2, 1: 48.8821; axes 20, 14, 8 mm: sphericity 0.89258 (reference sheet, exact integral)."""
    assert shape.ellipsoid_surface(6.0, 4.0, 2.0) == pytest.approx(48.8821, abs=5e-5)
    assert shape.ellipsoid_sphericity(*AXES) == pytest.approx(0.89258, abs=5e-6)


@given(st.floats(1.0, 9.0))
def test_spheroid_surface_closed_form(stretch: float) -> None:
    """Prolate spheroid: 2 pi a^2 (1 + c/(a e) asin e), textbook geometry."""
    e = np.sqrt(1 - 1 / stretch**2)
    closed = 2 * np.pi * (1 + stretch * (np.arcsin(e) / e if e > 1e-6 else 1.0))
    assert shape.ellipsoid_surface(2 * stretch, 2.0, 2.0) == pytest.approx(closed, rel=1e-9)


def test_ratios_of_axes() -> None:
    """Corey 0.47809 (reference sheet); 8/14 and 14/20 by hand."""
    assert shape.corey_shape_factor(*AXES) == pytest.approx(0.47809, abs=5e-6)
    assert shape.flatness(*AXES[1:]) == pytest.approx(8 / 14)
    assert shape.elongation(*AXES[:2]) == pytest.approx(0.7)


def test_circularity() -> None:
    assert shape.circularity(np.pi / 4, np.pi) == pytest.approx(1.0)
    assert shape.circularity(1.0, 4.0) == pytest.approx(0.886227, abs=1e-6)  # square: sqrt(pi)/2


def test_equivalent_diameters() -> None:
    mass = 2650 * np.pi / 6 * 0.003**3
    assert shape.diameter_from_mass(mass, 2650) == pytest.approx(0.003)
    assert shape.diameter_from_axes(8.0, 4.0, 2.0) == pytest.approx(4.0)
    assert shape.diameter_from_area(np.pi) == pytest.approx(2.0)


def test_route_of_the_equivalent_diameter() -> None:
    nan = np.nan
    diameter, route = shape.equivalent_diameter(
        typed=[6e-3, nan, nan, nan, nan],
        from_mass=[5e-3, 4e-3, nan, nan, nan],
        from_axes=[nan, 3e-3, 2e-3, nan, nan],
        from_area=[1e-3, 1e-3, 1e-3, 1e-3, nan],
    )
    assert diameter == pytest.approx([6e-3, 4e-3, 2e-3, 1e-3, nan], nan_ok=True)
    assert route.tolist() == ["typed", "mass and density", "calipers", "silhouette", ""]


@pytest.mark.parametrize("axes", [(1.0, 2.0, 0.5), (2.0, 1.0, 1.5), (2.0, 1.0, 0.0)])
def test_axes_out_of_order(axes: tuple[float, float, float]) -> None:
    with pytest.raises(ValueError, match="in order: long, intermediate, short"):
        shape.corey_shape_factor(*axes)


def test_unknown_axes_stay_unknown() -> None:
    assert np.isnan(shape.ellipsoid_sphericity([np.nan, 2.0], 1.5, 1.0)).tolist() == [True, False]
