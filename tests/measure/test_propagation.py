from __future__ import annotations

import math
from collections.abc import Mapping

import numpy as np
import pytest
from numpy.typing import NDArray

from settlelab.measure.propagation import Effect, monte_carlo, propagate

Arrays = Mapping[str, NDArray[np.float64]]

# NIST TN 1900 (2015), example E3: viscosity of a liquid by a falling ball, against a reference liquid.
BALL = {
    "viscosity_reference": 4.63,  # mPa s
    "time_reference": 36.6,  # s
    "time": 61.0,
    "ball": 2217.0,  # kg/m3
    "liquid": 1180.0,
    "reference": 810.0,
}
BALL_U = {
    "viscosity_reference": 0.01 * 4.63,
    "time_reference": 0.15 * 36.6,
    "time": 0.10 * 61.0,
    "ball": 0.5,
    "liquid": 0.5,
    "reference": 0.5,
}
EFFECTS = tuple(Effect(name, {name: u}) for name, u in BALL_U.items())


def viscosity(inputs: Arrays) -> dict[str, NDArray[np.float64]]:
    buoyancy = (inputs["ball"] - inputs["liquid"]) / (inputs["ball"] - inputs["reference"])
    return {"viscosity": inputs["viscosity_reference"] * inputs["time"] / inputs["time_reference"] * buoyancy}


def test_falling_ball_of_nist_tn_1900() -> None:
    """5.69 mPa s printed; u 1.03 recomputed by Gauss's formula in the reference sheet (print seems to give 1.11)."""
    found = propagate(viscosity, BALL, EFFECTS)["viscosity"]
    assert found.value == pytest.approx(5.69, abs=0.005)
    assert found.u == pytest.approx(1.03, abs=0.03)  # one-u steps see a little of the curvature
    assert max(found.shares, key=lambda name: found.shares[name]) == "time_reference"
    assert sum(found.shares.values()) == pytest.approx(1.0)


def test_monte_carlo_of_nist_tn_1900() -> None:
    """Mean 5.82, standard deviation 1.11, 95 % interval [4.05, 8.39], all inputs normal: public test and memory."""
    drawn = monte_carlo(viscosity, BALL, EFFECTS, count=400_000)["viscosity"]
    assert drawn.mean == pytest.approx(5.82, abs=0.01)
    assert drawn.u == pytest.approx(1.11, abs=0.015)
    assert (drawn.low, drawn.high) == pytest.approx((4.05, 8.39), abs=0.02)
    assert monte_carlo(viscosity, BALL, EFFECTS, count=100) == monte_carlo(viscosity, BALL, EFFECTS, count=100)


def test_a_common_source_adds_up_before_it_is_squared() -> None:
    """JCGM 100:2008, 5.2.2, note 1: u of a sum of N inputs with correlation 1 is the sum of their u."""
    inputs = {"a": 1.0, "b": 2.0}
    common = (Effect("scale", {"a": 0.1, "b": 0.2}),)
    apart = (Effect("one", {"a": 0.1}), Effect("other", {"b": 0.2}))
    total = lambda moved: {"sum": moved["a"] + moved["b"]}  # noqa: E731
    assert propagate(total, inputs, common)["sum"].u == pytest.approx(0.3)
    assert propagate(total, inputs, apart)["sum"].u == pytest.approx(math.hypot(0.1, 0.2))


def test_parts_of_one_source_share_a_line_of_the_budget() -> None:
    effects = (Effect("axes", {"a": 0.3}), Effect("axes", {"b": 0.4}), Effect("scale", {"a": 0.5}))
    found = propagate(lambda moved: {"sum": moved["a"] + moved["b"]}, {"a": 0.0, "b": 0.0}, effects)["sum"]
    assert found.shares == pytest.approx({"axes": 0.5, "scale": 0.5})


def test_an_unknown_input_spoils_only_what_depends_on_it() -> None:
    outputs = propagate(
        lambda moved: {"known": moved["a"], "unknown": moved["a"] * moved["b"]},
        {"a": 1.0, "b": math.nan},
        (Effect("a", {"a": 0.1}),),
    )
    assert outputs["known"].u == pytest.approx(0.1)
    assert math.isnan(outputs["unknown"].u)
    assert outputs["unknown"].shares == {}


def test_exact_inputs_have_no_budget() -> None:
    found = propagate(lambda moved: {"a": moved["a"]}, {"a": 3.0}, ())["a"]
    assert (found.value, found.u, found.shares) == (3.0, 0.0, {})
