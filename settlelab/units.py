"""Text quantities and column headings with units, to SI and back: the only place that knows a unit's spelling.

In: cells, TOML values and headings as people type them. Out: SI floats with a standard uncertainty.
"""

from __future__ import annotations

from dataclasses import dataclass

__all__ = ["Quantity", "Unit"]


@dataclass(frozen=True, slots=True)
class Unit:
    """The unit in which a field is shown, as `Annotated[float, Unit("mm/s")]`; inside the package it is SI."""

    symbol: str


@dataclass(frozen=True, slots=True)
class Quantity:
    """A value in SI with its standard uncertainty (k = 1); `u` is 0 where none was stated."""

    value: float
    u: float = 0.0
