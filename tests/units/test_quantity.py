"""Quantities typed by hand: every spelling that the design promises, and the text of each refusal."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from settlelab.units import Quantity, parse_number, parse_quantity, show, uses_decimal_comma
from settlelab.units.spelling import SI


@pytest.mark.parametrize(
    ("typed", "dimension", "value", "u"),
    [
        ("62 ± 0.3 %", "1", 0.62, 0.003),
        ("21.4 ± 0.2 °C", "K", 294.55, 0.2),
        ("21.4 °C ± 0.2 K", "K", 294.55, 0.2),
        ("70 ± 1.8 °F", "K", 294.2611111, 1.0),  # (70 - 32) / 1.8 + 273.15; 1.8 °F is 1 K
        ("1006 ± 0.5 kg/m3", "kg/m3", 1006.0, 0.5),
        ("1,006 ± 0,0005 g/cm³", "kg/m3", 1006.0, 0.5),  # the uncertainty shows that the comma is a decimal one
        ("1.006 ± 0.0005 g/cm³", "kg/m3", 1006.0, 0.5),
        ("190.0 ± 0.5 mm", "m", 0.19, 5e-4),
        ("190.0 ± 0.5 mm (k=2)", "m", 0.19, 2.5e-4),
        ("190,0 +- 0,5 mm ( k = 2 )", "m", 0.19, 2.5e-4),
        ("(190.0 +/- 0.5) mm", "m", 0.19, 5e-4),
        ("190.0 mm ± 0.05 cm", "m", 0.19, 5e-4),
        ("200 mm ± 1 %", "m", 0.2, 2e-3),
        ("0.2113 ± 0.0003 mm/px", "m/px", 2.113e-4, 3e-7),
        ("42.0 ± 0.8 mPa s", "Pa s", 0.042, 8e-4),
        ("42 mPa·s", "Pa s", 0.042, 0.0),
        ("42 cP", "Pa s", 0.042, 0.0),
        ("0.35 Pa s^n", "Pa s^n", 0.35, 0.0),
        ("0.35 Pa·sⁿ", "Pa s^n", 0.35, 0.0),
        ("120 Hz", "Hz", 120.0, 0.0),
        ("170.2 1/s", "1/s", 170.2, 0.0),
        ("-3 °C", "K", 270.15, 0.0),
        ("−3 °C", "K", 270.15, 0.0),
        ("1e-3 m", "m", 1e-3, 0.0),
        ("1.234,5 mm", "m", 1.2345, 0.0),
        ("1,234.5 mm", "m", 1.2345, 0.0),
        ("12.4 µm", "m", 12.4e-6, 0.0),
        ("0.82", "1", 0.82, 0.0),
        ("0.82 -", "1", 0.82, 0.0),
    ],
)
def test_spelling(typed: str, dimension: str, value: float, u: float) -> None:
    assert parse_quantity(typed, dimension) == Quantity(pytest.approx(value), pytest.approx(u))


# factors: ../shared/reference/methods_lab.md, "Units" (exact by definition of the pound, the foot, the US gallon)
@pytest.mark.parametrize(
    ("typed", "dimension", "value", "places"),
    [
        ("1 lbm/gal", "kg/m3", 119.8264, 5e-5),
        ("1 ppg", "kg/m3", 119.8264, 5e-5),
        ("1 lbf/100 ft²", "Pa", 0.478803, 5e-7),
        ("1 lb/100 ft2", "Pa", 0.478803, 5e-7),
        ("1 lbf s^n/100 ft2", "Pa s^n", 0.478803, 5e-7),
        ("5.11 dyn/cm2", "Pa", 0.511, 1e-12),
        ("1 ft/min", "m/s", 5.08e-3, 1e-12),
        ("1 in", "m", 0.0254, 1e-15),
    ],
)
def test_field_units(typed: str, dimension: str, value: float, places: float) -> None:
    assert parse_quantity(typed, dimension).value == pytest.approx(value, abs=places)


@pytest.mark.parametrize(
    ("typed", "dimension", "sentence"),
    [
        ("12,5.3 mm", "m", "a number such as 12.5 or 12,5"),
        ("1,006 kg/m3", "kg/m3", "certain: write 1006 or 1.006, whichever it is"),
        ("12.4", "m", 'a length such as "12.4 ± 0.1 mm" (its unit is missing)'),
        ("", "m", 'a length such as "12.4 ± 0.1 mm"'),
        ("wide", "m", 'a length such as "12.4 ± 0.1 mm"'),
        ("nan mm", "m", 'a length such as "12.4 ± 0.1 mm"'),
        ("1e999 mm", "m", "a finite number such as 12.5"),
        (
            "12 px",
            "m",
            'a length such as "12.4 ± 0.1 mm" (unit "px" does not fit; known here: mm, cm, m, um, in, ft)',
        ),
        (
            "3 furlong",
            "m",
            'a length such as "12.4 ± 0.1 mm" (unit "furlong" is unknown; known here: mm, cm, m, um, in, ft)',
        ),
        (
            "120 fps",
            "Hz",
            'a frequency such as "120 Hz" (unit "fps" could be feet or frames per second: write Hz, 1/s or ft/s)',
        ),
        ("21 C", "K", 'a temperature such as "21.4 ± 0.2 °C" (unit "C" is the coulomb: write °C)'),
        (
            "21 °C ± 1 %",
            "K",
            'a temperature such as "21.4 ± 0.2 °C" (a temperature has no relative uncertainty)',
        ),
        ("12 ± -1 mm", "m", 'a length such as "12.4 ± 0.1 mm" (an uncertainty and its k are above 0)'),
        ("7200 rpm", "Hz", 'a frequency such as "120 Hz" (unit "rpm" does not fit; known here: Hz, 1/s)'),
    ],
)
def test_refusal(typed: str, dimension: str, sentence: str) -> None:
    with pytest.raises(ValueError) as refused:  # noqa: PT011 (the whole text is compared below)
        parse_quantity(typed, dimension)
    assert str(refused.value) == sentence


def test_unit_of_the_heading_serves_a_cell_without_one() -> None:
    assert parse_quantity("12.4 ± 0.1", "kg", unit="mg") == Quantity(pytest.approx(12.4e-6), pytest.approx(1e-7))
    assert parse_quantity("12.4 ± 1 %", "kg", unit="mg") == Quantity(pytest.approx(12.4e-6), pytest.approx(1.24e-7))
    assert parse_quantity("0.0124 g", "kg", unit="mg").value == pytest.approx(12.4e-6)
    assert parse_quantity("62 ± 0.3", "1", unit="%") == Quantity(pytest.approx(0.62), pytest.approx(0.003))


@pytest.mark.parametrize(
    ("typed", "decimal_comma", "value"),
    [
        ("1,234", True, 1.234),
        ("1,2", False, 1.2),
        ("0,123", False, 0.123),
        ("12.345", False, 12.345),
        ("1.234.567,8", False, 1234567.8),
        (",5", False, 0.5),
    ],
)
def test_comma(typed: str, decimal_comma: bool, value: float) -> None:
    assert parse_number(typed, decimal_comma=decimal_comma) == value


@pytest.mark.parametrize(("typed", "decimal_comma"), [("1,234", False), ("1.234", True), ("-12,345", False)])
def test_what_could_be_thousands_or_thousandths_is_refused(typed: str, decimal_comma: bool) -> None:
    with pytest.raises(ValueError, match=r"certain: write [-\d.,]+ or [-\d.,]+, whichever it is"):
        parse_number(typed, decimal_comma=decimal_comma)


def test_certainly_a_decimal_comma() -> None:
    certain = ["12,5", "0,123", "1,2345", "-,5", "12,5e3"]
    assert all(uses_decimal_comma(text) for text in certain)
    assert not any(uses_decimal_comma(text) for text in ["1,234", "12.5", "12", "A,1", ""])


@pytest.mark.parametrize("dimension", SI)
def test_every_example_of_a_message_is_accepted(dimension: str) -> None:
    parse_quantity(SI[dimension].example, dimension)


@given(
    value=st.floats(1e-3, 1e4),
    share=st.floats(1e-4, 0.5),
    dimension_and_unit=st.sampled_from([(si, unit) for si, kind in SI.items() for unit in kind.units]),
)
def test_value_to_text_and_back(value: float, share: float, dimension_and_unit: tuple[str, str]) -> None:
    """A quantity shown in any unit is read back to within the digits shown."""
    dimension, unit = dimension_and_unit
    typed = parse_quantity(f"{value!r} ± {value * share!r} {unit}", dimension)
    back = parse_quantity(show(typed, unit), dimension)
    assert back.u == pytest.approx(typed.u, rel=0.05)
    assert abs(back.value - typed.value) <= 0.05 * typed.u + 1e-9 * abs(typed.value)


@given(value=st.floats(-1e6, 1e6).filter(lambda number: number == 0 or abs(number) > 1e-6))
def test_point_and_comma_say_the_same(value: float) -> None:
    text = f"{value:.7f}"
    assert parse_number(text) == parse_number(text.replace(".", ",")) == float(text)


@given(text=st.text(max_size=20))
def test_any_text_is_read_or_refused_with_a_sentence(text: str) -> None:
    """No text ends in an error of another kind."""
    for dimension in ("m", "K", "1"):
        try:
            parse_quantity(text, dimension)
        except ValueError as error:
            assert str(error).startswith(("a ", "certain"))  # noqa: PT017 (other errors must come through)
