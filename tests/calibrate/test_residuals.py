"""Residual checks find what was put in, and find nothing where nothing was."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from settlelab.calibrate.attenuation import expected_inputs
from settlelab.calibrate.fit import LawFit, fit_form
from settlelab.calibrate.observations import Observations, observe, particle_means
from settlelab.calibrate.residuals import check_notes, influence, residual_checks
from tests.calibrate.lots import POWER_FORM, Lots, draw, power_law_of_shape


def fitted(seed: int, factor: float = 1.0, of: str = "") -> tuple[LawFit, Observations]:
    """A fit to 40 particles in random order, velocities multiplied by a factor where `of` says."""
    drops = draw(power_law_of_shape(), Lots(particles=40, scatter=0.03, replicates=1), seed)
    drops["drop"] = 1 + np.random.default_rng(seed).permutation(len(drops))
    late = drops["drop"] > len(drops) / 2
    where = {"lot": drops["lot"] == "north", "drop": late, "": late & False}[of]
    drops["unbounded_velocity"] *= np.where(where, factor, 1.0)
    means = expected_inputs(particle_means(observe(drops)[0]))
    return fit_form(POWER_FORM, means), means


def test_nothing_is_found_where_nothing_is() -> None:
    """At most 5 % of lots carry a false alarm: 4 and more of 20 have a chance of 2 % (binomial)."""
    alarms = [bool(residual_checks(*fitted(seed))["remarkable"].any()) for seed in range(20)]
    assert sum(alarms) < 4


@pytest.mark.parametrize(("of", "check", "told"), [("lot", "lots", "The lots deviate"), ("drop", "trend", "order of")])
def test_what_was_put_in_is_found(of: str, check: str, told: str) -> None:
    checks = residual_checks(*fitted(3, 1.12, of))
    assert checks.loc[checks["check"] == check, "remarkable"].any()
    assert any(told in note for note in check_notes("the law", checks, None))


def test_few_particles_are_not_tested() -> None:
    means = fitted(0)[1].take(np.arange(7))
    assert residual_checks(fit_form(POWER_FORM, means), means).empty


def test_the_particle_that_a_fit_hangs_on_is_named() -> None:
    """One particle of another shape than all others, and twice as slow, sets the exponents."""
    _, means = fitted(1)
    shape = np.where(means.particle == means.particle[4], 0.3, 0.9 + 0.02 * np.cos(np.arange(len(means.drop))))
    slow = np.where(shape < 0.5, 0.5, 1.0) * means.velocity
    odd = replace(means, velocity=slow, falls=replace(means.falls, descriptors={"sphericity": shape}))
    fit = fit_form(POWER_FORM, odd)
    moved = influence(POWER_FORM, fit, odd)
    assert moved["drop"][0] == odd.drop[4]
    assert moved["largest"][0] > 1
    assert list(moved.columns) == ["drop", "a", "b", "largest"]
    note = check_notes("the law", residual_checks(fit, odd), moved)[-1]
    assert f"without the particle of drop {odd.drop[4]}" in note
