"""Profile intervals against their definition, met by fits anew."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from settlelab.calibrate.attenuation import expected_inputs
from settlelab.calibrate.fit import LawFit, fit_form, least_squares, log_velocity
from settlelab.calibrate.form import Form
from settlelab.calibrate.forms import build_form, recipe
from settlelab.calibrate.observations import Observations, observe, particle_means
from settlelab.calibrate.profile import profile_intervals
from tests.calibrate.lots import POWER_FORM, Lots, draw, power_law_of_shape

EXACT_BASE = replace(POWER_FORM, law_u=0.0)


def means_of(lots: Lots) -> Observations:
    return expected_inputs(particle_means(observe(draw(power_law_of_shape(), lots, 2))[0]))


def excess(form: Form, fit: LawFit, seen: Observations, values: dict[int, float]) -> float:
    """Sum of squares with some parameters fixed and all others fitted anew, over that of the fit."""
    whitening, free = fit.weights.whitening(), [n for n in range(len(fit.values)) if n not in values]

    def residual(trial: np.ndarray) -> np.ndarray:
        full = np.empty(len(fit.values))
        full[free], full[list(values)] = trial, list(values.values())
        return whitening.apply(np.log(seen.velocity) - log_velocity(form.law(full), seen))

    best = float(np.sum(whitening.apply(fit.residual) ** 2))
    found = least_squares(residual, [form.parameters[n] for n in free])
    return found.square - best


@pytest.mark.parametrize("lots", [Lots(), Lots(particles=9, scatter=0.15)], ids=["usual", "few and scattered"])
def test_ends_stand_where_the_likelihood_says(lots: Lots) -> None:
    means = means_of(lots)
    fit = fit_form(EXACT_BASE, means)
    for number, ends in enumerate(profile_intervals(EXACT_BASE, fit, means)):
        for end in ends:
            assert excess(EXACT_BASE, fit, means, {number: end}) == pytest.approx(fit.coverage_factor**2, rel=0.03)


def test_a_factor_of_the_velocity_has_a_nearly_symmetric_interval() -> None:
    means, form = means_of(Lots()), build_form(recipe("factor", base="ganser-1993"))
    fit = fit_form(form, means)
    ((low, high),) = profile_intervals(form, fit, means)
    half = fit.coverage_factor * np.sqrt(fit.covariance[0, 0])
    assert high - fit.values[0] == pytest.approx(half, rel=0.1)
    assert fit.values[0] - low == pytest.approx(half, rel=0.1)


def test_an_uncertain_sphere_law_widens_the_interval() -> None:
    means = means_of(Lots())
    exact, honest = (profile_intervals(form, fit_form(form, means), means) for form in (EXACT_BASE, POWER_FORM))
    assert np.all(honest[:, 0] < exact[:, 0])
    assert np.all(honest[:, 1] > exact[:, 1])
