from __future__ import annotations

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from settlelab.report.numbers import percent, rounded, significant, with_uncertainty


@pytest.mark.parametrize(
    ("value", "u", "text"),
    [
        (100.02147, 0.00035, "100.02147 ± 0.00035"),  # JCGM 100:2008, 7.2.2 (from memory)
        (12.3449, 0.149, "12.34 ± 0.15"),
        (12.3449, 0.0996, "12.34 ± 0.10"),  # the second digit survives a carry
        (1234.4, 56.0, "1234 ± 56"),
        (12344.0, 560.0, "12340 ± 560"),
        (-0.00004, 0.13, "0.00 ± 0.13"),
        (-3.21, 0.13, "−3.21 ± 0.13"),
        (2.5, math.nan, "2.500"),
        (2.5, 0.0, "2.500"),
        (math.nan, 0.1, "–"),
    ],
)
def test_uncertainty_to_two_digits_and_value_to_the_same_place(value: float, u: float, text: str) -> None:
    assert with_uncertainty(value, u) == text


@given(st.floats(-1e6, 1e6), st.floats(1e-6, 1e5))
def test_rounding_moves_a_value_by_less_than_a_twentieth_of_its_uncertainty(value: float, u: float) -> None:
    text, u_text = rounded(value, u)
    assert abs(float(text.replace("−", "-")) - value) <= 0.0501 * u
    assert float(u_text) == pytest.approx(u, rel=0.051)
    assert len(u_text.replace(".", "").strip("0")) <= 2


@pytest.mark.parametrize(
    ("value", "digits", "text"),
    [
        (0.04567, 3, "0.0457"),
        (45670.0, 3, "45700"),
        (1.5e-6, 2, "1.5×10⁻⁶"),
        (-2.0e8, 2, "−2.0×10⁸"),
        (0.0, 3, "0"),
        (math.inf, 3, "–"),
    ],
)
def test_significant_digits(value: float, digits: int, text: str) -> None:
    assert significant(value, digits) == text


@pytest.mark.parametrize(("value", "text"), [(2.06, "+2.1"), (-2.06, "−2.1"), (0.01, "0.0"), (math.nan, "–")])
def test_percent_carries_its_sign(value: float, text: str) -> None:
    assert percent(value) == text
