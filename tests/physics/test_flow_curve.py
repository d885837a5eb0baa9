"""Fits of fluid models: recovery, uncertainty, choice of the model, bounds."""

from __future__ import annotations

import numpy as np
import pytest

from settlelab.errors import FitError
from settlelab.physics.flow_curve import MODELS, fit_rheology
from settlelab.physics.rheology import SHEAR_RATE_PER_RPM, Rheology

RATE = np.array([3, 6, 30, 60, 100, 200, 300, 600]) * SHEAR_RATE_PER_RPM
FLUIDS = {
    "newtonian": Rheology(consistency=0.02),
    "power-law": Rheology(consistency=0.8, flow_index=0.55),
    "bingham": Rheology(consistency=0.02, yield_stress=3.0),
    "herschel-bulkley": Rheology(consistency=0.8, flow_index=0.55, yield_stress=3.0),
}


@pytest.mark.parametrize("model", FLUIDS)
def test_exact_readings_give_the_fluid_back(model: str) -> None:
    fluid = FLUIDS[model]
    for choice in (model, "best"):
        fit = fit_rheology(RATE, fluid.shear_stress(RATE), 0.25, choice)
        assert fit.model == model
        assert fit.names == MODELS[model]
        assert [*map(float, fit.rheology.arrays())] == pytest.approx([*map(float, fluid.arrays())], rel=1e-6, abs=1e-9)
        assert fit.degrees_of_freedom == 8 - len(MODELS[model])


@pytest.mark.parametrize("model", FLUIDS)
def test_stated_uncertainty_is_the_scatter(model: str) -> None:
    """Of 150 noisy repeats, standardised errors have unit scatter: 1 ± 0.058 (k = 1) for 150 normal numbers."""
    rng = np.random.default_rng(5)
    fluid, u = FLUIDS[model], 0.25
    errors = []
    for _ in range(150):
        fit = fit_rheology(RATE, fluid.shear_stress(RATE) + rng.normal(0, u, RATE.size), u, model)
        errors.append([(getattr(fit.rheology, name) - getattr(fluid, name)) / fit.u(name) for name in fit.names])
    assert np.std(errors, axis=0) == pytest.approx(np.ones(len(MODELS[model])), abs=0.2)
    assert np.mean(errors, axis=0) == pytest.approx(np.zeros(len(MODELS[model])), abs=0.3)


def test_covariance_of_a_straight_line() -> None:
    """A Bingham fluid is a straight line: the textbook covariance of weighted least squares."""
    u = np.linspace(0.1, 0.4, RATE.size)
    fit = fit_rheology(RATE, FLUIDS["bingham"].shear_stress(RATE), u, "bingham")
    design = np.column_stack([RATE, np.ones_like(RATE)]) / u[:, None]
    assert fit.covariance == pytest.approx(np.linalg.inv(design.T @ design), rel=1e-5)


def test_consistency_and_index_of_a_power_law_are_tied() -> None:
    """Delta method against a straight line in logarithms with the same weights (u small): ln tau = ln K + n ln rate."""
    fluid, u = FLUIDS["power-law"], 1e-3
    fit = fit_rheology(RATE, fluid.shear_stress(RATE), u, "power-law")
    weight = fluid.shear_stress(RATE) / u
    design = np.column_stack([np.ones_like(RATE), np.log(RATE)]) * weight[:, None]
    logarithmic = np.linalg.inv(design.T @ design)
    scale = np.diag([0.8, 1.0])  # u(K) = K u(ln K)
    assert fit.covariance == pytest.approx(scale @ logarithmic @ scale, rel=1e-4)
    assert fit.covariance[0, 1] / np.sqrt(np.prod(np.diag(fit.covariance))) < -0.9


def test_yield_stress_at_its_bound_has_no_uncertainty() -> None:
    fit = fit_rheology(RATE, FLUIDS["power-law"].shear_stress(RATE), 0.25, "herschel-bulkley")
    assert fit.at_bound == ("yield_stress",)
    assert fit.names == ("consistency", "flow_index")
    assert np.isnan(fit.u("yield_stress"))
    assert fit.rheology.yield_stress == pytest.approx(0.0, abs=1e-6)
    power_law = fit_rheology(RATE, FLUIDS["power-law"].shear_stress(RATE), 0.25, "power-law")
    assert fit.covariance == pytest.approx(power_law.covariance, rel=1e-4)
    assert power_law.u("yield_stress") == 0.0


def test_criterion_by_hand() -> None:
    """AICc = chi^2 + 2k + 2k(k+1)/(N-k-1) for known uncertainties; exact readings have chi^2 = 0."""
    fit = fit_rheology(RATE, FLUIDS["newtonian"].shear_stress(RATE), 0.25)
    expected = {"newtonian": 2 + 4 / 6, "power-law": 4 + 12 / 5, "bingham": 4 + 12 / 5, "herschel-bulkley": 6 + 24 / 4}
    assert fit.aicc == pytest.approx(expected, abs=1e-6)


def test_model_with_too_few_readings_is_not_tried() -> None:
    fit = fit_rheology(RATE[[1, 4, 7]], FLUIDS["power-law"].shear_stress(RATE[[1, 4, 7]]), 0.25)
    assert fit.model == "newtonian"
    assert fit.aicc["power-law"] == float("inf")
    with pytest.raises(FitError, match="2 viscometer readings cannot tell which fluid model is best"):
        fit_rheology(RATE[:2], [1.0, 2.0], 0.25)
    with pytest.raises(
        FitError, match="a herschel-bulkley fluid needs viscometer readings at 3 or more shear rates, 2"
    ):
        fit_rheology(RATE[:2], [1.0, 2.0], 0.25, "herschel-bulkley")


def test_readings_that_cannot_be() -> None:
    with pytest.raises(FitError, match="no viscometer reading shows a stress above 0"):
        fit_rheology(RATE, -RATE, 0.25)
    with pytest.raises(ValueError, match="must be above 0"):
        fit_rheology(RATE, RATE, 0.0)
    with pytest.raises(ValueError, match='"casson" is not one of newtonian'):
        fit_rheology(RATE, RATE, 0.25, "casson")
