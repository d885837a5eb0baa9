"""A value with unit and uncertainty from one text, such as `190.0 ± 0.5 mm (k=2)`."""

from __future__ import annotations

import math
import re
from dataclasses import dataclass

from settlelab.units.spelling import REFUSED, SI, conversion

__all__ = ["Quantity", "parse_number", "parse_quantity", "show", "uses_decimal_comma", "wanted"]

_NUMBER = r"[+-]?(?:\d[\d.,]*|[.,]\d+)(?:[eE][+-]?\d+)?"
_TEXT = re.compile(
    rf"(?P<value>{_NUMBER})\s*(?P<unit>[^±]*?)\s*"
    rf"(?:±\s*(?P<u>{_NUMBER})\s*(?P<u_unit>[^±]*?)\s*)?"
    r"(?:\(\s*k\s*=\s*(?P<k>[\d.,]+)\s*\))?"
)
_BRACKETED = re.compile(r"\((?P<inside>[^()]*±[^()]*)\)(?P<after>.*)")  # (12.4 ± 0.1) mm
_PLUS_MINUS = re.compile(r"\+\s*/?\s*[-−]")
_COMMA_IS_CERTAIN = re.compile(r"[+-]?(0*,\d+|\d+,(\d{1,2}|\d{4,})|\d{4,},\d+)([eE][+-]?\d+)?")
_THOUSANDS = re.compile(r"[+-]?[1-9]\d{0,2}([.,])\d{3}")
_GROUPED = re.compile(r"[+-]?[1-9]\d{0,2}(?:(,\d{3})+\.\d+|(\.\d{3})+,\d+)")


@dataclass(frozen=True, slots=True)
class Quantity:
    """A value in SI with its standard uncertainty (k = 1); `u` is 0 where none was stated."""

    value: float
    u: float = 0.0


def uses_decimal_comma(text: str) -> bool:
    """Whether a number is certainly written with a decimal comma: `12,5` is, `1,234` and `12.5` are not."""
    return _COMMA_IS_CERTAIN.fullmatch(text.strip().replace("−", "-")) is not None


def parse_number(text: str, *, decimal_comma: bool = False) -> float:
    """A finite number with decimal point or comma.

    Parameters
    ----------
    text : str
        Such as `12.5`, `12,5`, `1e-3`. With both signs the last one is the decimal sign if the other groups thousands
        (`1,234.5` and `1.234,5`). `1,234` alone could be either and is refused, unless `decimal_comma`.
    decimal_comma : bool
        The table is known to write decimal commas: `1,234` is 1.234, and now `1.234` is refused as ambiguous.

    Raises
    ------
    ValueError
        What would be accepted, as text that follows "is not".
    """
    plain = text.strip().replace("−", "-")
    if not re.fullmatch(_NUMBER, plain):
        raise ValueError("a number such as 12.5 or 12,5")
    if _GROUPED.fullmatch(plain):
        thousands = "," if plain.rfind(",") < plain.rfind(".") else "."
        plain = plain.replace(thousands, "")
    elif plain.count(",") + plain.count(".") > 1:
        raise ValueError("a number such as 12.5 or 12,5")
    elif (match := _THOUSANDS.fullmatch(plain)) and (match[1] == ".") == decimal_comma:
        whole = plain.replace(match[1], "")
        fraction = plain.replace(".", ",") if decimal_comma else plain.replace(",", ".")
        raise ValueError(f"certain: write {whole} or {fraction}, whichever it is")
    number = float(plain.replace(",", "."))
    if math.isinf(number):
        raise ValueError("a finite number such as 12.5")
    return number


def parse_quantity(text: str, dimension: str, *, unit: str = "", decimal_comma: bool = False) -> Quantity:
    """A value with its standard uncertainty in SI.

    Parameters
    ----------
    text : str
        Value, optional `±` (also `+-`, `+/-`) and uncertainty, unit, optional coverage factor: `62 ± 0.3 %`,
        `(190.0 ± 0.5) mm (k=2)`, `21.4 °C ± 0.2 K`, relative `12.4 mm ± 1 %`. A unit typed once counts for both.
    dimension : str
        SI unit of the answer, such as "m", "kg/m3", "1"; only for "1" may the unit be left out everywhere.
    unit : str
        Unit of a text that names none: that of the column heading.
    decimal_comma : bool
        See `parse_number`; known as well where value or uncertainty show it: `1,006 ± 0,0005 g/cm3`.

    Raises
    ------
    ValueError
        What would be accepted, as text that follows "is not": `a length such as "12.4 ± 0.1 mm"`.
    """
    match = _TEXT.fullmatch(_tidy(text))
    if match is None:
        raise ValueError(wanted(dimension))
    u_unit = match["u_unit"] or ""
    from_u = "" if unit and u_unit == "%" else u_unit  # 12.4 ± 1 % in a column in mg: relative
    unit = match["unit"] or from_u or unit
    if not unit and dimension != "1":
        raise ValueError(f"{wanted(dimension)} (its unit is missing)")
    _must_fit(unit, dimension)
    way, si = conversion(unit), conversion(dimension)
    decimal_comma = decimal_comma or any(uses_decimal_comma(number) for number in match.group("value", "u") if number)
    value = parse_number(match["value"], decimal_comma=decimal_comma)
    u = parse_number(match["u"], decimal_comma=decimal_comma) if match["u"] else 0.0
    k = parse_number(match["k"]) if match["k"] else 1.0
    if u < 0.0 or k <= 0.0:
        raise ValueError(f"{wanted(dimension)} (an uncertainty and its k are above 0)")
    in_si = (value * way.factor + way.offset) / si.factor
    return Quantity(in_si, _uncertainty(u, u_unit or unit, in_si, unit, dimension) / k)


def _tidy(text: str) -> str:
    """The text with plain signs and without the brackets of `(12.4 ± 0.1) mm`."""
    tidy = _PLUS_MINUS.sub("±", text.strip().replace("\N{NO-BREAK SPACE}", " ").replace("−", "-"))
    if bracketed := _BRACKETED.fullmatch(tidy):
        tidy = f"{bracketed['inside']} {bracketed['after']}"
    return tidy.strip()


def _uncertainty(u: float, u_unit: str, value: float, unit: str, dimension: str) -> float:
    """An uncertainty in SI: a difference, so no offset of temperatures; relative where only it is in percent."""
    if u_unit == "%" and unit != "%":
        if conversion(unit).offset:
            raise ValueError(f"{wanted(dimension)} (a temperature has no relative uncertainty)")
        return abs(value) * u * 0.01
    _must_fit(u_unit, dimension)
    return u * conversion(u_unit).factor / conversion(dimension).factor


def _must_fit(unit: str, dimension: str) -> None:
    try:
        fits = conversion(unit).dimension == conversion(dimension).dimension
    except ValueError as error:
        known = "" if unit in REFUSED else f"; known here: {', '.join(SI[dimension].units)}"
        raise ValueError(f"{wanted(dimension)} ({error}{known})") from error
    if not fits:
        units = ", ".join(SI[dimension].units)
        raise ValueError(f'{wanted(dimension)} (unit "{unit}" does not fit; known here: {units})')


def show(quantity: Quantity, unit: str) -> str:
    """A quantity as text in a unit, its uncertainty to two significant digits: `190.00 ± 0.50 mm`."""
    way = conversion(unit)
    value, u = (quantity.value - way.offset) / way.factor, quantity.u / way.factor
    suffix = "" if unit == "1" else f" {unit}"
    if u <= 0.0:
        return f"{value:.6g}{suffix}"
    decimals = max(1 - int(f"{u:.1e}".partition("e")[2]), 0)
    return f"{value:.{decimals}f} ± {u:.{decimals}f}{suffix}"


def wanted(dimension: str) -> str:
    """How a quantity of that SI unit is typed: `a length such as "12.4 ± 0.1 mm"`."""
    return f'{SI[dimension].name} such as "{SI[dimension].example}"'
