from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from settlelab.measure import Velocity, terminal_velocity
from settlelab.physics.drag import DRAG
from settlelab.physics.drag import terminal_velocity as steady_velocity
from settlelab.physics.motion import Body, Medium, fall_from_release
from settlelab.physics.rheology import Rheology
from tests.measure.invented import ar1


def stokes_fall(time: np.ndarray, time_constant: float, start: float = 0.0) -> np.ndarray:
    """Distance at terminal velocity 1: exact for Stokes' drag (z = Vt [t - tau (1 - exp(-t/tau))])."""
    return time - time_constant * (1 - start) * (1 - np.exp(-time / time_constant))


def covered(rng: np.random.Generator, count: int, phi: float, time_constant: float) -> tuple[bool, float]:
    time = np.linspace(0.0, 1.0, count)
    noise = rng.standard_normal(count) + (ar1(rng, count, phi) if phi else 0.0)
    found = terminal_velocity(time, stokes_fall(time, time_constant) + 5e-4 * noise)
    return abs(found.value - 1) <= 2 * found.u, (found.value - 1) / found.u


def test_95_percent_intervals_cover_the_truth() -> None:
    """White and AR(1) noise, with and without an approach, all of one seed."""
    rng = np.random.default_rng(11)
    cases = [(n, phi, tau) for n in (40, 100, 200) for phi in (0.0, 0.5, 0.8, 0.9) for tau in (1e-3, 0.02, 0.08)]
    results = [covered(rng, *case) for case in cases for _ in range(14)]
    assert len(results) >= 500
    coverage = np.mean([inside for inside, _ in results])
    assert 0.92 <= coverage <= 0.98
    assert abs(np.mean([score for _, score in results])) < 0.15  # unbiased


def test_uncertainty_in_white_noise_is_that_of_the_slope() -> None:
    """u = sigma sqrt(12/(N (N^2 - 1)))/dt; reference sheet OP-09: 3.41e-6 m/s for 101 frames of 10 ms, sigma 10 um."""
    rng = np.random.default_rng(2)
    time = 0.01 * np.arange(101)
    found = [terminal_velocity(time, 0.1 * time + 1e-5 * rng.standard_normal(101)) for _ in range(200)]
    assert np.std([each.value for each in found]) == pytest.approx(3.41e-6, rel=0.12)
    typical = float(np.median([each.u for each in found]))
    assert 3.41e-6 < typical < 1.5 * 3.41e-6  # a little more: correlation can never be excluded


@pytest.mark.parametrize(("phi", "inflation"), [(0.5, 3.0), (0.8, 8.3)])
def test_correlated_residuals_widen_the_uncertainty(phi: float, inflation: float) -> None:
    """Reference sheet, section 8: the variance of a slope of 200 points grows by these factors (simulation).

    The uncertainty stated is larger still, by up to 1.9: so few points do not tell how long the correlation lasts.
    """
    rng = np.random.default_rng(3)
    time = np.linspace(0.0, 1.0, 200)
    plain = math.sqrt(12 / 200) * 1e-4
    widened = [terminal_velocity(time, time + 1e-4 * ar1(rng, 200, phi)).u / plain for _ in range(150)]
    assert math.sqrt(inflation) * 0.85 < float(np.median(widened)) < math.sqrt(inflation) * 1.9


@pytest.mark.parametrize("time_constant", [0.02, 0.05, 0.1, 0.15])
def test_no_worse_than_straight_lines_and_better_where_acceleration_is_on(time_constant: float) -> None:
    rng = np.random.default_rng(4)
    time = np.linspace(0.0, 1.0, 120)
    ours, whole, half = [], [], []
    for _ in range(60):
        distance = stokes_fall(time, time_constant) + 1e-4 * rng.standard_normal(120)
        ours.append(terminal_velocity(time, distance).value - 1)
        whole.append(np.polyfit(time, distance, 1)[0] - 1)
        half.append(np.polyfit(time[60:], distance[60:], 1)[0] - 1)
    rms = [float(np.sqrt(np.mean(np.square(errors)))) for errors in (ours, whole, half)]
    assert rms[0] < rms[1] / 5
    assert rms[0] < rms[2]


def test_a_steady_fall_is_measured_as_well_as_by_a_straight_line() -> None:
    rng = np.random.default_rng(5)
    time = np.linspace(0.0, 1.0, 120)
    pairs = []
    for _ in range(100):
        distance = time + 1e-4 * rng.standard_normal(120)
        pairs.append((terminal_velocity(time, distance).value - 1, np.polyfit(time, distance, 1)[0] - 1))
    ours, line = np.sqrt(np.mean(np.square(pairs), axis=0))
    assert ours < 1.1 * line


@pytest.mark.parametrize("history", [False, True])
@pytest.mark.parametrize(
    ("diameter", "density", "fluid", "viscosity"),
    [(1e-3, 2650.0, 998.0, 1e-3), (6e-3, 2500.0, 1150.0, 11e-3), (4e-3, 2600.0, 1155.0, 11.5e-3)],
    ids=["sand in water", "6 mm glass", "4 mm grain"],
)
def test_releases_by_the_equation_of_motion(
    diameter: float, density: float, fluid: float, viscosity: float, history: bool
) -> None:
    """250 mm of fall from rest at 120 Hz: within 0.15 % of the law's terminal velocity, history force or not."""
    law, oil = DRAG["cheng-2009"].drag_coefficient, Rheology(consistency=viscosity)
    settling = steady_velocity(law, diameter=diameter, particle_density=density, fluid_density=fluid, rheology=oil)
    terminal = float(settling.velocity)
    time = np.arange(0.0, 0.3 / terminal + 0.3, 1 / 120)
    body, medium = Body(diameter=diameter, density=density), Medium(density=fluid, rheology=oil)
    fall = fall_from_release(law, body, medium, time, history=history)
    seen = fall.distance < 0.25
    noise = 1e-5 * np.random.default_rng(6).standard_normal(int(seen.sum()))
    found = terminal_velocity(time[seen], fall.distance[seen] + noise)
    assert found.value == pytest.approx(terminal, rel=1.5e-3)
    assert found.first > 0
    assert found.flags == ()


@pytest.mark.parametrize("time_constant", [0.3, 0.5])
def test_a_fall_still_accelerating_is_flagged_and_extrapolated(time_constant: float) -> None:
    time = np.linspace(0.0, 1.0, 120)
    noise = 1e-4 * np.random.default_rng(7).standard_normal(120)
    found = terminal_velocity(time, stokes_fall(time, time_constant) + noise)
    assert found.flags == ("accelerating",)
    assert found.fraction_of_terminal == pytest.approx(1 - math.exp(-1 / time_constant), abs=0.01)
    assert abs(found.value - 1) < 2 * found.u
    assert found.u > 0.01


def test_a_particle_that_enters_too_fast_is_cut_as_well() -> None:
    time = np.linspace(0.0, 1.0, 120)
    noise = 1e-4 * np.random.default_rng(8).standard_normal(120)
    found = terminal_velocity(time, stokes_fall(time, 0.05, start=2.0) + noise)
    assert found.value == pytest.approx(1.0, abs=2 * found.u)
    assert found.first > 10


def test_outliers_do_no_harm() -> None:
    rng = np.random.default_rng(9)
    time = np.linspace(0.0, 1.0, 100)
    scores = []
    for _ in range(60):
        distance = time + 1e-4 * rng.standard_normal(100)
        struck = rng.choice(100, 8, replace=False)
        distance[struck] += rng.uniform(-0.02, 0.02, 8)
        found = terminal_velocity(time, distance)
        scores.append((found.value - 1) / found.u)
    assert np.std(scores) < 1.2


def test_gaps_do_no_harm() -> None:
    time = np.concatenate([np.linspace(0.0, 0.3, 40), np.linspace(0.6, 1.0, 50)])
    noise = 1e-4 * np.random.default_rng(10).standard_normal(90)
    found = terminal_velocity(time, time + noise)
    assert found.value == pytest.approx(1.0, abs=3 * found.u)
    assert (found.first, found.last) == (0, 89)


def test_a_swing_is_flagged_and_fitted_along() -> None:
    rng = np.random.default_rng(12)
    time = np.linspace(0.0, 1.0, 200)
    found, lines = [], []
    for _ in range(40):
        swing = 2e-3 * np.sin(2 * np.pi * 3.3 * time + rng.uniform(0, 2 * np.pi))
        distance = time + swing + 1e-4 * rng.standard_normal(200)
        found.append(terminal_velocity(time, distance))
        lines.append(np.polyfit(time, distance, 1)[0] - 1)
    assert all(each.flags == ("wobbling",) for each in found)
    assert np.std([each.value for each in found]) < np.std(lines) / 10
    assert np.std([(each.value - 1) / each.u for each in found]) < 1.3


def test_a_faint_swing_is_not_flagged() -> None:
    time = np.linspace(0.0, 1.0, 200)
    assert terminal_velocity(time, time + 5e-4 * np.sin(20 * time)).flags == ()


def slow_turn(time: np.ndarray, wander: float) -> np.ndarray:
    """A grain at velocity 1 whose silhouette's centre wanders as it makes half a turn."""
    return time + wander * np.cos(3.0 * time + 0.5)


def test_a_wandering_centre_is_no_approach() -> None:
    time = np.linspace(0.0, 1.0, 80)
    distance = slow_turn(time, 1e-3) + 2e-5 * np.random.default_rng(13).standard_normal(80)
    assert terminal_velocity(time, distance).fraction_of_terminal < 1  # so smooth a bend looks like one
    found = terminal_velocity(time, distance, wander=1e-3)
    assert (found.fraction_of_terminal, found.first) == (1.0, 0)
    assert found.value == pytest.approx(1.0, abs=3 * found.u)
    assert found.u > 1e-3


def test_what_is_slower_than_the_particle_can_be_is_no_approach() -> None:
    time = np.linspace(0.0, 1.0, 80)
    distance = slow_turn(time, 1e-3) + 2e-5 * np.random.default_rng(13).standard_normal(80)
    assert terminal_velocity(time, distance, slowest=0.05).fraction_of_terminal == 1.0


def test_a_real_approach_is_seen_beyond_the_wandering() -> None:
    time = np.linspace(0.0, 1.0, 120)
    distance = stokes_fall(time, 0.03) + 1e-4 * np.random.default_rng(14).standard_normal(120)
    found = terminal_velocity(time, distance, wander=1e-3, slowest=0.1)
    assert found.value == pytest.approx(1.0, abs=2 * found.u)
    assert found.first > 5


@pytest.mark.parametrize("count", [0, 1, 7])
def test_too_few_points(count: int) -> None:
    found = terminal_velocity(np.arange(count), np.arange(count))
    assert found.flags == ("short-track",)
    assert math.isnan(found.value)
    assert math.isnan(found.u)


def test_times_must_grow() -> None:
    with pytest.raises(ValueError, match="times must grow"):
        terminal_velocity([0, 1, 2, 3, 3, 4, 5, 6], range(8))


def test_eight_points_are_enough() -> None:
    time = np.arange(8) / 120
    found = terminal_velocity(time, 0.2 * time + 1e-5 * np.random.default_rng(1).standard_normal(8))
    assert found.value == pytest.approx(0.2, abs=3 * found.u)
    assert found.flags == ()


def same(one: Velocity, other: Velocity, *, factor: float) -> bool:
    return (
        math.isclose(one.value * factor, other.value, rel_tol=1e-9)
        and math.isclose(one.u * abs(factor), other.u, rel_tol=1e-6)
        and (one.first, one.last, one.flags) == (other.first, other.last, other.flags)
    )


@settings(max_examples=60, deadline=None)
@given(
    steps=st.lists(st.tuples(st.floats(1e-3, 1e-1), st.floats(-1.0, 1.0)), min_size=8, max_size=80),
    wander=st.sampled_from([0.0, 0.1]),
    slowest=st.sampled_from([1e-6, 0.1, math.inf]),
)
def test_any_path_gives_an_answer(steps: list[tuple[float, float]], wander: float, slowest: float) -> None:
    time, distance = np.cumsum(np.array(steps), axis=0).T
    found = terminal_velocity(time, distance, wander=wander, slowest=slowest)
    assert math.isfinite(found.value)
    assert math.isfinite(found.u)
    assert found.u >= 0
    assert 0.0 <= found.fraction_of_terminal <= 1.0
    assert 0 <= found.first < found.last < len(steps)


@settings(max_examples=25, deadline=None)
@given(
    length=st.floats(1e-3, 1e3),
    duration=st.floats(1e-3, 1e3),
    count=st.integers(8, 150),
    time_constant=st.sampled_from([1e-3, 0.05, 0.4]),
)
def test_units_and_direction_do_not_matter(length: float, duration: float, count: int, time_constant: float) -> None:
    time = np.linspace(0.0, 1.0, count)
    distance = stokes_fall(time, time_constant) + 1e-4 * np.random.default_rng(count).standard_normal(count)
    found = terminal_velocity(time, distance)
    assert same(found, terminal_velocity(5.0 + time * duration, 3.0 - length * distance), factor=-length / duration)
    assert found == terminal_velocity(time, distance)  # deterministic
