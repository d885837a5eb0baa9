"""Our own list of unit spellings, and the way from each to SI.

A units library knows the factors, but it also reads `fps` as feet per second, `px` as 1/96 inch and `C` as coulomb.
So a spelling is taken apart here, each part is looked up in our list, and only then does the library see its own name.
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from functools import cache
from typing import TYPE_CHECKING, TypeVar

import numpy as np
from numpy.typing import NDArray

if TYPE_CHECKING:
    from pint import UnitRegistry

__all__ = [
    "SI",
    "Conversion",
    "Dimension",
    "conversion",
    "difference_to_si",
    "from_si",
    "si_unit",
    "to_si",
    "unit_known",
]

Number = TypeVar("Number", float, NDArray[np.float64])

# part of a spelling -> name in the units library
PARTS = {
    "m": "meter", "cm": "centimeter", "dm": "decimeter", "mm": "millimeter", "um": "micrometer",
    "in": "inch", "inch": "inch", "ft": "foot",
    "kg": "kilogram", "g": "gram", "mg": "milligram", "ug": "microgram", "lbm": "pound", "lb": "pound",
    "s": "second", "ms": "millisecond", "us": "microsecond", "min": "minute", "h": "hour",
    "Hz": "hertz", "kHz": "kilohertz",
    "l": "liter", "L": "liter", "ml": "milliliter", "mL": "milliliter", "cc": "milliliter", "gal": "gallon",
    "Pa": "pascal", "mPa": "millipascal", "kPa": "kilopascal", "psi": "pound_force_per_square_inch",
    "P": "poise", "cP": "centipoise",
    "N": "newton", "mN": "millinewton", "lbf": "pound_force", "dyn": "dyne", "dyne": "dyne",
    "K": "kelvin",
    "px": "picture_point", "s^n": "second_to_the_n", "deg": "dial_degree", "rpm": "turn_per_minute",
}  # fmt: skip
TEMPERATURES = {"°C": "degree_Celsius", "°F": "degree_Fahrenheit"}
# whole spellings that stand for another one
SAME = {
    "": "1", "-": "1", "percent": "%", "degC": "°C", "degF": "°F", "°": "deg", "r/min": "rpm",
    "ppg": "lbm/gal", "lb/100 ft2": "lbf/100 ft2", "lbf s^n/100 ft2": "s^n lbf/100 ft2",
}  # fmt: skip
# px is counted, dial degrees are a scale, turns are no hertz, and s^n has no fixed power: dimensions of their own
OWN_UNITS = (
    "picture_point = [picture_length]",
    "dial_degree = [dial]",
    "turn_per_minute = [turning]",
    "second_to_the_n = [time_to_the_n]",
)
REFUSED = {
    "fps": 'unit "fps" could be feet or frames per second: write Hz, 1/s or ft/s',
    "C": 'unit "C" is the coulomb: write °C',
    "F": 'unit "F" is the farad: write °F',
}
_SIGNS = str.maketrans(
    {"µ": "u", "μ": "u", "·": " ", "⋅": " ", "*": " ", "º": "°", "−": "-", "⁻": "-", "\N{NO-BREAK SPACE}": " "}
    | {sign: digit for sign, digit in zip("¹²³", "123", strict=True)}
    | {"ⁿ": "^n"}
)
_FACTOR = re.compile(r"(?P<part>s\^n|[A-Za-z]+)(?:\^?(?P<power>-?[1-3]))?|(?P<number>1(?:00)?)")


@dataclass(frozen=True, slots=True)
class Dimension:
    """What a quantity is called, how it is typed, and the units a lab uses for it."""

    name: str
    example: str
    units: tuple[str, ...]


# SI unit -> what is measured in it
SI = {
    "m": Dimension("a length", "12.4 ± 0.1 mm", ("mm", "cm", "m", "um", "in", "ft")),
    "kg": Dimension("a mass", "12.4 ± 0.1 mg", ("mg", "g", "kg", "ug", "lbm")),
    "s": Dimension("a time", "2.0 ms", ("s", "ms", "min")),
    "K": Dimension("a temperature", "21.4 ± 0.2 °C", ("°C", "K", "°F")),
    "1": Dimension("a number", "0.82 ± 0.01", ("1", "%")),
    "kg/m3": Dimension("a density", "2650 ± 5 kg/m3", ("kg/m3", "g/cm3", "lbm/gal")),
    "m/s": Dimension("a velocity", "82.5 ± 0.4 mm/s", ("mm/s", "cm/s", "m/s", "ft/s", "in/s", "ft/min")),
    "Pa s": Dimension("a viscosity", "42.0 ± 0.8 mPa s", ("mPa s", "Pa s", "cP", "P")),
    "Pa s^n": Dimension("a consistency", "0.35 ± 0.01 Pa s^n", ("Pa s^n", "mPa s^n", "lbf s^n/100 ft2", "dyn s^n/cm2")),
    "Pa": Dimension("a stress", "3.2 ± 0.1 Pa", ("Pa", "mPa", "lbf/100 ft2", "dyn/cm2")),
    "1/s": Dimension("a shear rate", "170.2 1/s", ("1/s",)),
    "Hz": Dimension("a frequency", "120 Hz", ("Hz", "1/s")),
    "m/px": Dimension("a scale", "0.2113 ± 0.0003 mm/px", ("mm/px", "um/px", "m/px")),
    "rpm": Dimension("a turning speed", "300 rpm", ("rpm",)),
    "deg": Dimension("a dial reading", "24.5 deg", ("deg",)),
}


@dataclass(frozen=True, slots=True)
class Conversion:
    """SI value = factor * typed value + offset."""

    factor: float
    offset: float
    dimension: str  # equal for units that can be turned into each other


@cache
def _registry() -> UnitRegistry[float]:
    import pint  # noqa: PLC0415 (workers and commands that parse nothing shall not wait for it)

    registry: UnitRegistry[float] = pint.UnitRegistry()
    for definition in OWN_UNITS:
        registry.define(definition)
    return registry


def _tidy(symbol: str) -> str:
    """The spelling in plain signs: single spaces, none around the slash, `2` for `²`."""
    plain = " ".join(symbol.translate(_SIGNS).replace("^(n)", "^n").split())
    plain = re.sub(r"\s*/\s*\(?\s*", "/", plain).rstrip(")") if "/" in plain else plain.strip("()")
    return SAME.get(plain, plain)


def _factors(symbol: str) -> list[tuple[str, int]]:
    """Parts of a tidy spelling with their powers; the number 100 stands as part `100`."""
    found = []
    for sign, product in zip([1, *[-1] * symbol.count("/")], symbol.split("/"), strict=True):
        for word in product.split(" "):
            match = _FACTOR.fullmatch(word)
            if match is None or not (match["number"] or match["part"] in PARTS):
                raise ValueError(REFUSED.get(word, f'unit "{symbol}" is unknown'))
            found.append((match["number"] or match["part"], sign * int(match["power"] or 1)))
    return found


@cache
def conversion(symbol: str) -> Conversion:
    """The way from a unit to SI.

    Raises
    ------
    ValueError
        The spelling is not on our list; says which part, and what to write instead where that is known.
    """
    plain = _tidy(symbol)
    registry = _registry()
    if plain in TEMPERATURES:
        name = TEMPERATURES[plain]
        factor = registry.Quantity(1.0, f"delta_{name}").to_base_units().magnitude
        offset = registry.Quantity(0.0, name).to_base_units().magnitude
        return Conversion(_clean(factor), _clean(offset), conversion("K").dimension)
    if plain == "%":
        return Conversion(0.01, 0.0, conversion("1").dimension)
    product = registry.Quantity(1.0)
    for part, power in _factors(plain):
        one = registry.Quantity(float(part)) if part.isdigit() else registry.Quantity(1.0, PARTS[part])
        product = product * one**power
    base = product.to_base_units()
    return Conversion(_clean(base.magnitude), 0.0, str(base.dimensionality))


def _clean(factor: float) -> float:
    """Without the last digit's noise of a chain of products, so that 1 g/cm3 is 1000 kg/m3."""
    return float(f"{factor:.15g}")


def unit_known(symbol: str) -> bool:
    """Whether a unit's spelling is on our list."""
    try:
        conversion(symbol)
    except ValueError:
        return False
    return True


def si_unit(symbol: str) -> str:
    """The SI unit in which a unit's values are held, such as "kg/m3" for "lbm/gal".

    Raises
    ------
    ValueError
        An unknown unit, or one that measures nothing settlelab deals with.
    """
    dimension = conversion(symbol).dimension
    for si in SI:
        if conversion(si).dimension == dimension:
            return si
    raise ValueError(f'unit "{symbol}" measures nothing that settlelab reads')


def to_si(value: Number, unit: str) -> Number:
    """A value, or an array of them, typed in `unit`, in SI (dial degrees and rpm stay as they are).

    Raises
    ------
    ValueError
        The unit is not on our list.
    """
    way = conversion(unit)
    return value * way.factor + way.offset


def difference_to_si(value: Number, unit: str) -> Number:
    """A difference, such as an uncertainty, typed in `unit`, in SI: 1 °F is 0.556 K.

    Raises
    ------
    ValueError
        The unit is not on our list.
    """
    return value * conversion(unit).factor


def from_si(value: Number, unit: str) -> Number:
    """An SI value, or an array of them, in `unit`; the way back of `to_si`."""
    way = conversion(unit)
    return (value - way.offset) / way.factor
