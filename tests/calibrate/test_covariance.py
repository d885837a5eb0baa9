"""The covariance by its causes against the same written out in full."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from settlelab.calibrate.covariance import (
    Covariance,
    deviance,
    known_covariance,
    law_effects,
    restricted_scatter,
)
from settlelab.calibrate.falls import settle
from settlelab.calibrate.observations import observe, particle_means
from tests.calibrate.lots import Lots, draw, power_law_of_shape, published


@pytest.fixture
def some() -> Covariance:
    """Seven observations of four particles in two fluids, not in order."""
    rng = np.random.default_rng(4)
    fluid = np.array([0, 0, 1, 1, 0, 1, 1])
    effect = rng.normal(0, 0.03, 7)
    return Covariance(
        own=rng.uniform(1e-4, 4e-4, 7),
        particle=np.array([2, 0, 2, 1, 3, 2, 0]),
        of_particle=rng.normal(0, 0.02, (7, 2)),
        common=np.column_stack([np.where(fluid == 0, effect, 0), np.where(fluid == 1, effect, 0)]),
    )


def in_full(covariance: Covariance) -> np.ndarray:
    same = covariance.particle[:, None] == covariance.particle
    within = same * (covariance.of_particle @ covariance.of_particle.T)
    return np.diag(covariance.own) + within + covariance.common @ covariance.common.T


def test_whitening_is_the_inverse_root(some: Covariance) -> None:
    root = some.whitening().apply(np.eye(7))
    np.testing.assert_allclose(root.T @ root, np.linalg.inv(in_full(some)), rtol=1e-9, atol=1e-6)
    assert some.whitening().log_determinant == pytest.approx(np.linalg.slogdet(in_full(some))[1])
    np.testing.assert_allclose(some.variance, np.diag(in_full(some)))


def test_scatter_is_added(some: Covariance) -> None:
    assert some.scatters == 2
    same = some.particle[:, None] == some.particle
    expected = in_full(some) + same * 0.05**2 + np.eye(7) * 0.02**2
    np.testing.assert_allclose(in_full(some.with_scatter(np.array([0.05, 0.02]))), expected)


def test_deviance_is_that_of_the_normal_density(some: Covariance) -> None:
    """Restricted: with the determinant of the information of the parameters (Patterson & Thompson 1971)."""
    rng = np.random.default_rng(1)
    residual, jacobian = rng.normal(0, 0.05, 7), rng.normal(0, 1, (7, 2))
    inverse = np.linalg.inv(in_full(some))
    information = jacobian.T @ inverse @ jacobian
    left = residual - jacobian @ np.linalg.solve(information, jacobian.T @ inverse @ residual)
    plain = np.linalg.slogdet(2 * np.pi * in_full(some))[1] + left @ inverse @ left
    assert deviance(residual, jacobian, some, restricted=False) == pytest.approx(plain)
    restricted = plain + np.linalg.slogdet(information)[1] - 2 * np.log(2 * np.pi)
    assert deviance(residual, jacobian, some, restricted=True) == pytest.approx(restricted)


def test_restricted_scatter_of_a_mean_is_the_sample_deviation() -> None:
    """One parameter, a common mean, nothing known: n - 1 in the denominator."""
    residual = np.random.default_rng(3).normal(0, 0.1, 25)
    nothing = Covariance(
        own=np.full(25, 1e-12), particle=np.arange(25), of_particle=np.empty((25, 0)), common=np.empty((25, 0))
    )
    (found,) = restricted_scatter(residual, np.ones((25, 1)), nothing)
    assert found == pytest.approx(np.std(residual, ddof=1), rel=2e-3)


def test_what_is_common_to_a_fluid_is_common() -> None:
    seen = particle_means(observe(draw(power_law_of_shape(), Lots(particles=9, viscosity_u=0.03), 1))[0])
    law = power_law_of_shape()
    full = in_full(known_covariance(seen, law, settle(law, seen.falls).velocity))
    other_fluid = seen.fluid[:, None] != seen.fluid
    assert np.all(full[other_fluid] == 0)
    assert np.all(full[~other_fluid] > 0)


def test_an_error_of_the_law_is_common_to_like_reynolds_numbers() -> None:
    """Stokes' law: V goes as 1/Cd, so the velocity is as uncertain as the drag coefficient."""
    seen = particle_means(observe(draw(published("stokes-1851"), Lots(particles=9), 1))[0])
    seen = replace(seen, reynolds=np.logspace(-2, 2, len(seen.drop)))
    law = published("stokes-1851")
    effects = law_effects(seen, law, settle(law, seen.falls).velocity, 0.025)
    together = effects @ effects.T / 0.025**2
    np.testing.assert_allclose(np.diag(together), 1.0, rtol=1e-6)
    apart = np.abs(np.log10(seen.reynolds)[:, None] - np.log10(seen.reynolds))
    assert np.all(np.abs(together[apart >= 2]) < 1e-12)
    assert np.all(together[apart <= 0.5] > 0.7)
