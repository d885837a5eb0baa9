"""Known coefficients of drawn lots come back within their stated intervals; fits that carry nothing say so."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import replace

import numpy as np
import pytest
from scipy.optimize import least_squares as scipy_least_squares

from settlelab.calibrate.attenuation import expected_inputs
from settlelab.calibrate.falls import settle
from settlelab.calibrate.fit import fit_form, judge_law, least_squares
from settlelab.calibrate.forms import FORMS, SPHERE_LAW, Form, Parameter, build_form, recipe
from settlelab.calibrate.observations import Observations, observe, particle_means
from settlelab.calibrate.validation import parameters_without
from settlelab.errors import FitError
from settlelab.physics.drag import drag_coefficient_from_velocity
from tests.calibrate.lots import POWER_FORM, POWER_TRUTH, Lots, draw, power_law_of_shape, published

NARROW = Lots(particles=60, replicates=1, diameter_u=0.05, scatter=0.08, sizes=(2e-3, 5e-3), fluids=((1110.0, 0.020),))
EXACT_BASE = replace(POWER_FORM, law_u=0.0)  # to judge the statistics alone, where the truth stands on the same law
GOOD_LAWS = ("clift-gauvin-1971", "clift-grace-weber-1978", "brown-lawler-2003", "haider-levenspiel-1989-sphere")


def means_of(lots: Lots, seed: int) -> Observations:
    return expected_inputs(particle_means(observe(draw(power_law_of_shape(), lots, seed))[0]))


def covered(form: Form, bases: Sequence[str], lots: Lots, seeds: range) -> np.ndarray:
    """Share of seeds in which each 95 % interval holds the truth, which stands on the sphere laws in turn."""
    truths = [build_form(replace(POWER_FORM.recipe, base=base)).law(POWER_TRUTH) for base in bases]
    hits = []
    for seed in seeds:
        means = expected_inputs(particle_means(observe(draw(truths[seed % len(truths)], lots, seed))[0]))
        fit = fit_form(form, means)
        hits.append(np.abs(fit.values - POWER_TRUTH) <= fit.coverage_factor * np.sqrt(np.diag(fit.covariance)))
    return np.mean(hits, axis=0)


def test_known_coefficients_come_back() -> None:
    # 20 seeds of 95 % intervals: 16 and fewer hits have a chance of 0.3 % (binomial)
    assert np.all(covered(EXACT_BASE, [SPHERE_LAW], Lots(), range(20)) >= 17 / 20)


@pytest.mark.slow
@pytest.mark.parametrize(
    "lots",
    [Lots(), Lots(diameter_u=0.05), Lots(several_fluids=True, particles=15), Lots(particles=12)],
    ids=["usual", "size known to 5 %", "every particle in every fluid", "twelve particles"],
)
def test_intervals_cover_the_truth(lots: Lots) -> None:
    coverage = covered(EXACT_BASE, [SPHERE_LAW], lots, range(200))
    assert np.all(coverage >= 0.92)
    assert np.all(coverage <= 0.98)


@pytest.mark.slow
def test_intervals_cover_the_truth_on_whichever_good_sphere_law_it_stands() -> None:
    """Every particle in every fluid with little scatter: what the sphere law gets wrong is most of the error."""
    precise = Lots(particles=15, several_fluids=True, scatter=0.02)
    assert np.all(covered(POWER_FORM, GOOD_LAWS, precise, range(200)) >= 0.92)
    # as an exact law the base would have the intervals far too narrow
    assert np.all(covered(EXACT_BASE, GOOD_LAWS, precise, range(100)) < 0.75)


def test_a_fluid_read_wrong_does_not_average_out() -> None:
    """An error of viscosity is common to all drops in the fluid, so more particles do not make it go away."""
    u = {}
    for viscosity_u in (0.0, 0.05):
        one_fluid = Lots(
            particles=40, viscosity_u=viscosity_u, scatter=0.02, sizes=(0.3e-3, 0.5e-3), fluids=((1110.0, 0.02),)
        )
        spheres = draw(published("cheng-2009"), one_fluid, 1)
        fit = fit_form(build_form(recipe("factor")), particle_means(observe(spheres)[0]))
        u[viscosity_u] = np.sqrt(fit.covariance[0, 0]) / fit.values[0]
    # creeping flow: the velocity is as uncertain as the viscosity, in 40 particles as in one
    assert u[0.05] == pytest.approx(0.05, rel=0.1)
    assert u[0.0] < 0.005


def test_errors_in_size_bias_less_than_regressing_cd_on_re() -> None:
    bias, usual_bias = biases(range(24))
    assert np.all(usual_bias > 0.1)
    assert np.all(bias < usual_bias)


@pytest.mark.slow
def test_errors_in_size_bias_less_than_a_third_of_regressing_cd_on_re() -> None:
    bias, usual_bias = biases(range(300))
    assert np.all(bias < usual_bias / 3)


def biases(seeds: range) -> tuple[np.ndarray, np.ndarray]:
    """Of our fit, and of one of Cd on Re as usually made (on logarithms), biased by what both share."""
    ours, usual = [], []
    for seed in seeds:
        means = means_of(NARROW, seed)
        ours.append(fit_form(POWER_FORM, means).values)
        usual.append(cd_on_re(particle_means(observe(draw(power_law_of_shape(), NARROW, seed))[0])))
    first, second = (np.abs(np.mean(found, axis=0) - POWER_TRUTH) for found in (ours, usual))
    return first, second


def cd_on_re(seen: Observations) -> np.ndarray:
    cd = drag_coefficient_from_velocity(
        seen.velocity,
        diameter=seen.falls.diameter,
        particle_density=seen.falls.particle_density,
        fluid_density=seen.falls.fluid_density,
    )

    def residual(values: np.ndarray) -> np.ndarray:
        return np.log(POWER_FORM.drag(values, seen.reynolds, seen.falls.descriptors)) - np.log(cd)

    return scipy_least_squares(residual, [parameter.start for parameter in POWER_FORM.parameters]).x


def test_scatter_between_particles_is_found() -> None:
    found = [fit_form(POWER_FORM, means_of(Lots(scatter=0.06, particles=40), seed)) for seed in range(8)]
    assert np.mean([fit.scatter[0] for fit in found]) == pytest.approx(0.06, rel=0.1)
    assert np.mean([fit.repeatability for fit in found]) == pytest.approx(0.01, rel=0.1)


def test_a_few_particles_far_off_hardly_move_a_fit() -> None:
    """Two of 40 particles half as fast again, where the others scatter by 3 %: against the fit without the two."""
    means = means_of(Lots(particles=40, scatter=0.03), 1)
    wrong = np.isin(means.particle, means.particle[:2])
    clean = fit_form(POWER_FORM, means.take(~wrong))
    held = fit_form(POWER_FORM, replace(means, velocity=np.where(wrong, 1.5, 1.0) * means.velocity))
    assert np.all(held.distance[wrong] > 4)
    assert held.scatter[0] < 1.6 * clean.scatter[0]  # root mean square of all 40: 0.09
    moved = np.abs(held.values - clean.values)
    assert np.all(moved < 1.0 * np.sqrt(np.diag(clean.covariance)))
    weighed_alike = fit_without_holding(replace(means, velocity=np.where(wrong, 1.5, 1.0) * means.velocity))
    assert np.all(moved < np.abs(weighed_alike - clean.values) / 2)


def fit_without_holding(seen: Observations) -> np.ndarray:
    """Plain least squares of ln V, every particle alike."""

    def residual(values: np.ndarray) -> np.ndarray:
        return np.log(settle(POWER_FORM.law(values), seen.falls).velocity / seen.velocity)

    return scipy_least_squares(residual, [parameter.start for parameter in POWER_FORM.parameters]).x


def test_no_scatter_where_the_stated_uncertainty_explains_all() -> None:
    found = [fit_form(POWER_FORM, means_of(Lots(scatter=0.0), seed)).scatter[0] for seed in range(8)]
    assert np.median(found) < 0.002


@pytest.mark.parametrize("kind", list(FORMS))
def test_every_form_is_exact_on_its_own_law(kind: str) -> None:
    """Without noise a fit returns the coefficients that the drops were drawn with."""
    descriptor = "sphericity" if kind.endswith("-power") else ""
    form = build_form(recipe(kind, descriptor=descriptor))
    truth = np.array([0.9 * parameter.start + 0.02 for parameter in form.parameters])
    quiet = Lots(scatter=0.0, repeatability=0.0, diameter_u=0.0, replicates=1)

    def law(reynolds: np.ndarray, shapes: Mapping[str, np.ndarray]) -> np.ndarray:
        return form.law(truth)(reynolds, {**shapes, "corey_shape_factor": shapes["sphericity"]})

    drops = draw(law, quiet, 2)
    drops["corey_shape_factor"] = drops["sphericity"]
    fit = fit_form(form, particle_means(observe(drops)[0]))
    np.testing.assert_allclose(fit.values, truth, rtol=1e-6)


def test_leaving_a_particle_out_equals_fitting_without_it() -> None:
    """The shortcut against the plain way: a new fit without the particle."""
    means = means_of(Lots(particles=14, scatter=0.08), 5)
    fit = fit_form(POWER_FORM, means)
    short = parameters_without(POWER_FORM, fit, means.particle)
    u = np.sqrt(np.diag(fit.covariance))
    for index in range(0, 14, 3):
        kept = means.particle != means.particle[index]
        plain = fit_form(POWER_FORM, means.take(kept)).values
        np.testing.assert_allclose(short[:, index], plain, atol=0.12 * u.min())


def test_a_parameter_at_its_bound_has_no_uncertainty() -> None:
    """Particles faster than any sphericity allows push the effective sphericity to 1."""
    form = build_form(recipe("effective-sphericity"))
    seen = particle_means(observe(draw(published("cheng-2009"), Lots(scatter=0.01, fluids=((1110.0, 0.4),)), 0))[0])
    fit = fit_form(form, replace(seen, velocity=1.3 * seen.velocity))
    assert fit.values[0] == pytest.approx(1.0, abs=1e-3)
    assert fit.at_bound[0]
    assert np.isnan(fit.covariance[0, 0])


def test_too_few_particles_are_refused() -> None:
    means = means_of(Lots(particles=4), 0)
    with pytest.raises(FitError, match="4 particles, at least 5 are needed for 2 parameters"):
        fit_form(POWER_FORM, means)


def test_one_shape_does_not_determine_an_exponent() -> None:
    means = means_of(Lots(), 0)
    alike = replace(means.falls, descriptors={**means.falls.descriptors, "sphericity": np.ones(len(means.drop))})
    with pytest.raises(FitError, match=r"do not determine the parameters|no parameters fit better"):
        fit_form(POWER_FORM, replace(means, falls=alike))


def test_a_fit_no_better_than_its_start_is_a_failure() -> None:
    with pytest.raises(FitError, match="no parameters fit better than those at which the search starts"):
        least_squares(lambda values: np.ones(5) + 0 * values[0], [Parameter("p", 1.0, 0.0, 2.0, "without effect")])


def test_residuals_that_are_no_numbers_are_a_failure() -> None:
    with pytest.raises(FitError, match="gives no velocity"):
        least_squares(lambda values: np.full(5, np.nan) * values[0], [Parameter("p", 1.0, 0.0, 2.0, "nonsense")])


def test_a_published_law_is_judged_without_parameters() -> None:
    seen = particle_means(observe(draw(published("ganser-1993"), Lots(scatter=0.11, particles=60), 3))[0])
    judged = judge_law(published("ganser-1993"), seen)
    assert judged.residual_scatter == pytest.approx(0.11, rel=0.2)
    assert judged.degrees == 60
    assert judged.values.size == 0
