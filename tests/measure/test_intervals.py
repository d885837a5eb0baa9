"""Intervals by propagation beside those by Monte Carlo."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pandas as pd
import pytest

from settlelab.measure import Velocity, measure_study
from settlelab.measure.chain import Bore, Setup, bore_of, fallen, fallen_by_monte_carlo
from settlelab.measure.fluids import fluid_state
from settlelab.measure.intervals import INTERVAL_COLUMNS, departure, departures
from settlelab.measure.particle import Grain, grain_of
from settlelab.study.model import Particle
from settlelab.units import Quantity
from tests.measure.invented import COLUMN, OIL, study, track, tracked

WEIGHED = Particle(name="G", mass=Quantity(5e-5, 1e-7), density=Quantity(2600.0, 20.0))
SETUP = Setup(scale_u=1e-3, clock_u=1e-4, bore=bore_of(COLUMN), fluid=fluid_state(OIL))


def seen(value: float = 0.03, u: float = 1e-4) -> Velocity:
    return Velocity(value=value, u=u, fraction_of_terminal=1.0, first=0, last=10)


def weighed() -> Grain:
    return grain_of(WEIGHED, 4e-3)


def test_small_uncertainties_come_out_alike_both_ways() -> None:
    ways = fallen(seen(), weighed(), SETUP), fallen_by_monte_carlo(seen(), weighed(), SETUP)
    for name in ("velocity", "unbounded_velocity", "reynolds", "drag_coefficient", "wall_factor", "diameter"):
        estimate, drawn = getattr(ways[0], name), ways[1][name]
        assert drawn.u == pytest.approx(estimate.u, rel=0.03), name
        assert drawn.mean == pytest.approx(estimate.value, abs=0.1 * estimate.u), name
        assert drawn.high - drawn.low == pytest.approx(2 * 1.96 * estimate.u, rel=0.04), name


def test_a_size_from_the_silhouette_bends_the_drag_coefficient_of_a_thin_fluid() -> None:
    # Cd ~ d/V^2 here; 12 % in size and 8 % in velocity: ends of exp-like draws are not symmetric
    grain = grain_of(replace(WEIGHED, mass=None), 4e-3)
    drawn = fallen_by_monte_carlo(seen(u=0.08 * 0.03), grain, SETUP, count=50_000)["drag_coefficient"]
    estimate = fallen(seen(u=0.08 * 0.03), grain, SETUP).drag_coefficient
    assert drawn.high - estimate.value > 1.15 * (estimate.value - drawn.low)


def test_draws_that_would_leave_what_can_be_are_not_made() -> None:
    assert fallen_by_monte_carlo(seen(u=0.006), weighed(), SETUP) == {}
    silhouette = grain_of(replace(WEIGHED, mass=None), 4e-3)
    narrow = replace(SETUP, bore=Bore(5e-3, ()))
    assert fallen_by_monte_carlo(seen(), silhouette, narrow) == {}
    assert fallen_by_monte_carlo(seen(math.nan, math.nan), weighed(), SETUP) == {}


def test_of_a_measured_study_for_accepted_drops() -> None:
    grain = replace(WEIGHED, lot="A")
    falls = [track(0.1, seed=1), track(0.1, start=3.0, x=960.0, seed=2)]
    measured = measure_study(study(grain, drops=("G", "G")), [tracked(*falls)])
    assert measured.intervals is not None
    assert tuple(measured.intervals.columns) == INTERVAL_COLUMNS
    assert set(measured.intervals["drop"]) == {1}  # the other fell at the wall
    assert measured.intervals["output"].tolist() == ["velocity", "unbounded_velocity", "reynolds", "drag_coefficient"]
    drop = measured.drops.iloc[0]
    assert measured.intervals["value"].iloc[3] == drop["drag_coefficient"]
    assert departure(measured.intervals).max() < 0.1


def test_where_the_ends_differ_is_told() -> None:
    row = {"drop": 3, "output": "drag_coefficient", "value": 1.0, "u": 0.1, "low": 0.804, "high": 1.196}
    row |= {"mean": 1.02, "u_drawn": 0.11, "low_drawn": 0.83, "high_drawn": 1.25}
    fine = row | {"drop": 4, "low_drawn": 0.806, "high_drawn": 1.19}
    (told,) = departures(pd.DataFrame([row, fine], columns=list(INTERVAL_COLUMNS)))
    assert told.startswith("drag coefficient: the 95 % interval is not symmetric")
    assert "(drop 3)" in told
    assert np.isclose(departure(pd.DataFrame([row])).iloc[0], 0.054 / 0.196)
    assert departures(pd.DataFrame([fine], columns=list(INTERVAL_COLUMNS))) == ()
