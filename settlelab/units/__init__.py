"""Text quantities and column headings with units, to SI and back: the only place that knows a unit's spelling.

In: cells, TOML values and headings as people type them. Out: SI floats with a standard uncertainty, and tables whose
columns name their unit.
"""

from __future__ import annotations

from settlelab.units.headings import Heading, Unit, from_headings, heading, parse_heading, with_headings
from settlelab.units.quantity import Quantity, parse_number, parse_quantity, show, uses_decimal_comma, wanted
from settlelab.units.spelling import difference_to_si, from_si, si_unit, to_si, unit_known

__all__ = [
    "Heading",
    "Quantity",
    "Unit",
    "difference_to_si",
    "from_headings",
    "from_si",
    "heading",
    "parse_heading",
    "parse_number",
    "parse_quantity",
    "show",
    "si_unit",
    "to_si",
    "unit_known",
    "uses_decimal_comma",
    "wanted",
    "with_headings",
]
