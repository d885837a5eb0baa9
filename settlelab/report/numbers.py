"""Numbers as a person reads them: an uncertainty to two significant digits, its value to the same place."""

from __future__ import annotations

import math

__all__ = ["MISSING", "percent", "rounded", "significant", "with_uncertainty"]

MISSING = "–"
_SUPERSCRIPT = str.maketrans("-0123456789", "⁻⁰¹²³⁴⁵⁶⁷⁸⁹")


def _place(value: float, digits: int) -> int:
    """Decimal place of the last of `digits` significant digits: 2 for hundredths, -1 for tens."""
    exponent = int(f"{abs(value):.{digits - 1}e}".partition("e")[2])
    return digits - 1 - exponent


def _at_place(value: float, place: int) -> str:
    text = f"{round(value, place):.{max(place, 0)}f}"
    if float(text) == 0.0:
        text = text.removeprefix("-")
    return text.replace("-", "−")


def rounded(value: float, u: float) -> tuple[str, str]:
    """Value and uncertainty as text, the uncertainty to two significant digits (JCGM 100, 7.2.6).

    An unknown value gives a dash; an unknown uncertainty, or one of zero, leaves four digits of the value.
    """
    if not math.isfinite(value):
        return MISSING, ""
    if not math.isfinite(u) or u <= 0.0:
        return significant(value), ""
    place = _place(u, 2)
    return _at_place(value, place), _at_place(u, place)


def with_uncertainty(value: float, u: float) -> str:
    """`12.34 ± 0.15`; the value alone where no uncertainty is known."""
    text, u_text = rounded(value, u)
    return f"{text} ± {u_text}" if u_text else text


def significant(value: float, digits: int = 4) -> str:
    """A number to so many significant digits, as a power of ten below 1e-4 and from 1e7; a dash where unknown."""
    if not math.isfinite(value):
        return MISSING
    if value == 0.0:
        return "0"
    if 1e-4 <= abs(value) < 1e7:
        return _at_place(value, _place(value, digits))
    mantissa, _, exponent = f"{value:.{digits - 1}e}".partition("e")
    return f"{mantissa}×10{str(int(exponent)).translate(_SUPERSCRIPT)}".replace("-", "−")


def percent(value: float, decimals: int = 1) -> str:
    """A percentage with its sign, such as +2.1; a dash where unknown."""
    if not math.isfinite(value):
        return MISSING
    text = _at_place(value, decimals)
    return text if text.startswith("−") or float(text) == 0.0 else f"+{text}"
