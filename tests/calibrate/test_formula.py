"""A user's own formula: read without running anything, fitted like the forms on board, refused in plain words."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from settlelab.calibrate import calibrate_drops, predict, read_card, write_card
from settlelab.calibrate.forms import build_form, recipe
from settlelab.errors import FitError
from settlelab.physics.rheology import Rheology
from settlelab.study.model import CalibrationChoice
from tests.calibrate.lots import Lots, draw

TEXT = "formula: 24/Re*(1+a*Re**b)+c*exp(-d*sphericity)"
TRUTH = (0.2, 0.6, 12.0, 2.5)


def law(reynolds: np.ndarray, shapes: dict[str, np.ndarray]) -> np.ndarray:
    a, b, c, d = TRUTH
    return 24 / reynolds * (1 + a * reynolds**b) + c * np.exp(-d * shapes["sphericity"])


def test_means_what_it_says() -> None:
    form = build_form(recipe("formula: max(a/Re, -min(log(2), -sqrt(b))) - log10(100)*tanh(0)/+3"))
    assert [parameter.name for parameter in form.parameters] == ["a", "b"]
    cd = form.law([24.0, 0.16])(np.array([0.5, 1000.0]), {})
    np.testing.assert_allclose(cd, [48.0, 0.4])  # the smaller of log 2 and -0.4, its sign turned


def test_every_name_is_a_parameter_a_descriptor_or_the_reynolds_number() -> None:
    form = build_form(recipe(TEXT))
    assert [parameter.name for parameter in form.parameters] == ["a", "b", "c", "d"]
    assert form.needs == ("sphericity",)
    shapes = {"sphericity": np.array([0.8])}
    np.testing.assert_allclose(form.law(TRUTH)(np.array([7.0]), shapes), law(np.array([7.0]), shapes))


def test_known_coefficients_come_back_and_stand_on_the_card(tmp_path: Path) -> None:
    lots = Lots(scatter=0.01, particles=60)
    found = calibrate_drops(draw(law, lots, 1), CalibrationChoice(forms=(TEXT,)))
    (fit,) = found.fits
    assert fit.name == "formula 24/Re*(1+a*Re**b)+c*exp(-d*sphericity)"
    assert np.all(np.abs(fit.values - TRUTH) < 3.5 * fit.u)
    assert found.chosen is fit
    card = read_card(write_card(found.card, tmp_path / "card.json"))
    assert card.law.expression == TEXT.removeprefix("formula: ")
    row = predict(
        card,
        diameter=2e-3,
        particle_density=2600,
        fluid_density=1110,
        rheology=Rheology(consistency=0.02),
        descriptors={"sphericity": 0.8},
    ).iloc[0]
    assert row["drag_coefficient"] == pytest.approx(
        law(np.array(row["reynolds"]), {"sphericity": np.array(0.8)}), rel=0.02
    )


def test_starts_where_it_is_told() -> None:
    form = build_form(recipe(f"{TEXT}; a = 0.15, d=-2e0"))
    assert [parameter.start for parameter in form.parameters] == [0.15, 1.0, 1.0, -2.0]


def test_trial_parameters_without_a_drag_do_no_harm() -> None:
    """Of a/Re - b a trial with a large b would be negative: it gives the least drag instead, and no warning."""
    form = build_form(recipe("formula: a/Re - b"))
    assert np.all(form.law([1.0, 50.0])(np.array([1e-100, 1.0, 1e8]), {}) > 0)


@pytest.mark.parametrize(
    ("text", "why"),
    [
        ("24/Re*(1+a*Re^b)", "write ** for a power, not ^"),
        ("24/Re*(1+a", "it cannot be read"),
        ("24/Re", "there is no parameter to fit, such as a in a/Re"),
        ("a*expp(Re)", 'expp is no function (did you mean "exp"?)'),
        ("a*open('x')", "open is no function; known: exp, log"),
        ("a*__import__('os').system('ls')", "none of numbers, names"),
        ("a*Re.real", "Re.real is none of numbers, names"),
        ("[a for a in Re]", "none of numbers, names"),
        ("(lambda: a)()", "none of numbers, names"),
        ("a if Re > 1 else 2", "none of numbers, names"),
        ("a*'text'", "none of numbers, names"),
        ("a*True", "True is none of numbers, names"),
        ("a*exp(Re, 2)", "exp takes 1 value"),
        ("a*max(Re)", "max takes 2 values"),
        ("a*exp", "the function exp needs brackets"),
        ("a//Re", "holds an operator that is none of"),
        ("~a", "holds an operator that is none of"),
        ("a*sphericty/Re", '"sphericty" is no shape descriptor (did you mean "sphericity"?)'),
        ("a/Re; b=2", '"b" is to start from a value but is no parameter; known: a'),
        ("a/Re; a=two", '"a=two" is no value to start from, such as a=0.15'),
        ("a/Re; a=inf", "is no finite value"),
        ("a+" * 200 + "a", "it is longer than 400 characters"),
        ("a*" + "9" * 350, "none of numbers, names"),
    ],
)
def test_what_a_formula_may_not_hold_is_refused(text: str, why: str) -> None:
    with pytest.raises(FitError) as caught:
        build_form(recipe(f"formula: {text}"))
    assert why in str(caught.value)
    assert str(caught.value).startswith('the formula "')


def test_depth_does_no_harm() -> None:
    assert build_form(recipe(f"formula: {'-' * 390}a")).law([2.0])(np.array([1.0]), {}) == 2.0


def test_a_tower_of_powers_takes_no_time() -> None:
    form = build_form(recipe("formula: a/Re + 9**9**9**9"))
    assert np.isinf(form.law([1.0])(np.array([1.0]), {}))
