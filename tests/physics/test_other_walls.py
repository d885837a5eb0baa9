"""Walls other than a round tube; single values are in test_values.py."""

from __future__ import annotations

import numpy as np
import pytest

from settlelab.physics.other_walls import OTHER_WALLS, off_axis_coefficient
from settlelab.physics.wall_methods import WallMethod
from settlelab.physics.walls import equivalent_bore, wall_factor
from tests.physics.outside import published


@pytest.mark.parametrize("method", OTHER_WALLS.values(), ids=lambda method: method.name)
def test_contract(method: WallMethod) -> None:
    name = method.parameters[0]
    low, high = method.valid[name]
    nearness = np.linspace(low, high, 80)
    factor = method.evaluate(**{name: nearness})
    assert factor[0] == pytest.approx(1.0, abs=1e-5)
    assert np.all(np.diff(factor) < 0)
    assert np.all((factor > 0) & (factor <= 1))
    assert np.isnan(method.evaluate(**{name: np.nan}))


def test_every_method_has_a_value_from_outside_or_is_marked() -> None:
    rows = {row["inputs"].partition(";")[0].partition("=")[2] for row in published("values.csv")}
    assert [
        name for name, method in OTHER_WALLS.items() if name not in rows | {"lorentz-1907"} and method.confirmed
    ] == []


def test_lorentz_is_the_first_order_of_brenner() -> None:
    near = 0.01
    lorentz, brenner = (OTHER_WALLS[name].evaluate(nearness=near) for name in ("lorentz-1907", "brenner-1961"))
    assert lorentz == pytest.approx(brenner, abs=2e-4)


def test_slit_and_square_column_by_the_equivalent_bore() -> None:
    """The house's short cut, against the solutions for the very geometry: 2 % of the drag."""
    square = OTHER_WALLS["square-duct"].evaluate(side_ratio=0.25)
    assert wall_factor(0.25 / equivalent_bore(1.0, 1.0), 0.0).factor == pytest.approx(square, rel=0.02)
    slit = OTHER_WALLS["faxen-1923-slit"].evaluate(nearness=0.2)
    assert wall_factor(0.2 / equivalent_bore(1.0, np.inf), 0.0).factor == pytest.approx(slit, rel=0.02)


def test_off_axis() -> None:
    """Reference sheet: 2.17(1) and 2.45(3) at 0.6 and 0.7 of the radius; nothing known beyond."""
    assert off_axis_coefficient([0.6, 0.7]) == pytest.approx([2.17, 2.45], abs=0.03)
    assert np.isnan(off_axis_coefficient(0.8))
