"""How a velocity answers to what it depends on."""

from __future__ import annotations

import numpy as np
import pytest

from settlelab.calibrate.falls import INPUTS, Falls, sensitivity, settle
from settlelab.calibrate.forms import FORMS, build_form, recipe
from settlelab.physics.drag import DRAG
from tests.calibrate.lots import published


def falls(viscosity: float) -> Falls:
    """Three particles in a liquid; with 1000 Pa s creeping, with 1e-6 Pa s at high Reynolds numbers."""
    size = np.array([1e-3, 2e-3, 3e-3])
    same = np.ones(3)
    return Falls(
        diameter=size,
        particle_density=2600 * same,
        fluid_density=1000 * same,
        consistency=viscosity * same,
        flow_index=same,
        yield_stress=0 * same,
        descriptors={"sphericity": np.array([0.6, 0.7, 0.8])},
    )


# Stokes: V = (rho_s - rho) g d^2 / (18 mu); constant Cd: V = sqrt(4 g d (rho_s - rho) / (3 rho Cd)). By hand.
@pytest.mark.parametrize(
    ("name", "creeping", "fast"),
    [
        ("diameter", 2.0, 0.5),
        ("viscosity", -1.0, 0.0),
        ("particle_density", 2600 / 1600, 2600 / 1600 / 2),
        ("fluid_density", -1000 / 1600, -2600 / 1600 / 2),
    ],
)
def test_sensitivity_in_the_limits(name: str, creeping: float, fast: float) -> None:
    slow = falls(1000.0)
    stokes = published("stokes-1851")
    found = sensitivity(stokes, slow, settle(stokes, slow).velocity, name)
    np.testing.assert_allclose(found, creeping, rtol=1e-6)
    quick = falls(1e-3)
    found = sensitivity(lambda reynolds, _: np.full_like(reynolds, 0.44), quick, np.array([0.2, 0.3, 0.4]), name)
    np.testing.assert_allclose(found, fast, atol=1e-6)


@pytest.mark.parametrize("name", [*INPUTS, "sphericity"])
def test_sensitivity_equals_solving_anew(name: str) -> None:
    law, some = published("haider-levenspiel-1989"), falls(0.01)
    up, down = (settle(law, some.scaled(name, factor)).velocity for factor in (1.001, 1 / 1.001))
    plain = np.log(up / down) / (2 * np.log(1.001))
    np.testing.assert_allclose(sensitivity(law, some, settle(law, some).velocity, name), plain, rtol=1e-4)


@pytest.mark.parametrize("base", ["cheng-2009", "clift-gauvin-1971", "ganser-1993"])
def test_the_factor_scales_the_velocity_of_a_newtonian_fluid(base: str) -> None:
    some = falls(0.01)
    slower = settle(build_form(recipe("factor", base=base)).law((0.8,)), some).velocity
    np.testing.assert_allclose(slower, 0.8 * settle(published(base), some).velocity, rtol=1e-9)


@pytest.mark.parametrize("kind", ["stokes-newton-power", "velocity-power"])
def test_shape_one_is_the_sphere(kind: str) -> None:
    form = build_form(recipe(kind, descriptor="sphericity"))
    reynolds = np.geomspace(0.01, 1e4, 50)
    first = 1.0 if kind == "velocity-power" else 0.4
    found = form.law((first, 2.5))(reynolds, {"sphericity": np.ones(50)})
    np.testing.assert_allclose(found, DRAG["cheng-2009"].formula(reynolds), rtol=1e-12)


def test_shape_factors_are_the_limits_of_the_drag() -> None:
    """K1 is the creeping velocity ratio, K2 the drag ratio at high Re (Ganser 1993)."""
    form = build_form(recipe("stokes-newton"))
    law = form.law((0.8, 3.0))
    assert float(law(np.array(1e-6), {})) == pytest.approx(24 / (1e-6 * 0.8), rel=1e-4)
    assert float(law(np.array(1e12), {})) == pytest.approx(3.0 * 0.47, rel=0.01)


def test_chien_with_the_coefficients_in_print() -> None:
    reynolds = np.geomspace(0.01, 1e4, 20)
    shape = {"sphericity": np.full(20, 0.78)}
    form = build_form(recipe("chien-refit"))
    in_print = [parameter.start for parameter in form.parameters]
    np.testing.assert_allclose(form.law(in_print)(reynolds, shape), published("chien-1994")(reynolds, shape))


def test_names_of_forms_are_different_and_their_formulas_name_every_coefficient() -> None:
    forms = [build_form(recipe(kind, descriptor="flatness" if kind.endswith("-power") else "")) for kind in FORMS]
    assert len({form.name for form in forms}) == len(forms)
    for form in forms:
        for parameter in form.parameters:
            assert parameter.low < parameter.start < parameter.high
            assert parameter.name in form.formula
