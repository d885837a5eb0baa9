"""Bracketed roots against plain bisection."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from settlelab.physics.roots import bracketed_root


def bisected(function, low: float, high: float) -> float:
    for _ in range(200):
        middle = (low + high) / 2
        low, high = (low, middle) if function(np.array([middle]))[0] > 0 else (middle, high)
    return (low + high) / 2


@given(st.floats(-5, 5), st.floats(0.1, 4), st.floats(-3, 3))
def test_same_as_bisection(root: float, slope: float, bend: float) -> None:
    def function(x: np.ndarray) -> np.ndarray:
        return slope * (x - root) + bend**2 * (x - root) ** 3 + np.tanh(5 * (x - root))

    found = bracketed_root(function, np.array([-30.0]), np.array([30.0]))
    assert found[0] == pytest.approx(bisected(function, -30.0, 30.0), abs=1e-11)


def test_jump_through_zero() -> None:
    found = bracketed_root(lambda x: np.where(x < 1.234, -1.0, 2.0), np.array([0.0]), np.array([10.0]))
    assert found[0] == pytest.approx(1.234, abs=1e-11)


def test_many_at_once_each_with_its_own_bracket() -> None:
    target = np.linspace(0.1, 9, 50).reshape(5, 10)
    found = bracketed_root(lambda x: x**3 - target, np.zeros((5, 10)), np.full((5, 10), 3.0))
    assert found == pytest.approx(np.cbrt(target), abs=1e-11)


def test_no_root_gives_the_nearer_end_and_nan_stays() -> None:
    found = bracketed_root(lambda x: x + np.array([5.0, -50.0, np.nan]), np.zeros(3), np.full(3, 10.0))
    assert found == pytest.approx([0.0, 10.0, np.nan], nan_ok=True)


def test_few_calls() -> None:
    calls = []

    def counted(x: np.ndarray) -> np.ndarray:
        calls.append(x)
        return np.exp(x) - 2.0

    bracketed_root(counted, np.array([-60.0]), np.array([20.0]))
    assert len(calls) < 30
