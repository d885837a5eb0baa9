"""Tables as a page shows them: text in cells, the unit once in the heading, numbers rounded to their uncertainty."""

from __future__ import annotations

import math
import re
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Literal

import numpy as np
import pandas as pd

from settlelab.report.numbers import percent, significant, with_uncertainty
from settlelab.units import from_si

__all__ = ["Cell", "Show", "TableView", "UnitSystem", "quantity_text", "table_view", "unit_text"]

UnitSystem = Literal["lab", "field", "si"]
# unit of the lab -> unit shown in that system
SYSTEMS: dict[UnitSystem, dict[str, str]] = {
    "lab": {},
    "field": {"mm/s": "ft/min", "mm": "in", "kg/m3": "lbm/gal", "mPa s": "cP", "Pa": "lbf/100 ft2"},
    "si": {"mm/s": "m/s", "mm": "m", "mPa s": "Pa s"},
}


@dataclass(frozen=True, slots=True, kw_only=True)
class Show:
    """One column of a table on the page."""

    heading: str
    field: str
    u: str = ""  # column with the uncertainty, set behind the value as ±
    deviation: str = ""  # column with a relative deviation, set behind the value in brackets as a percentage
    unit: str | None = None  # lab unit of an SI column, "1" for a pure number; None for text
    digits: int = 4  # significant digits where no uncertainty is known
    form: Callable[[object], str] | None = None  # own way to write a cell


@dataclass(frozen=True, slots=True)
class Cell:
    """What stands in a cell, and whether it lines up as a number."""

    text: str
    number: bool


@dataclass(frozen=True, slots=True)
class TableView:
    """A table ready for the page; `kinds` holds one style name per row, mostly empty."""

    headings: tuple[Cell, ...]
    rows: tuple[tuple[Cell, ...], ...]
    kinds: tuple[str, ...]


def table_view(
    frame: pd.DataFrame,
    columns: Sequence[Show],
    system: UnitSystem = "lab",
    kind: Callable[[pd.Series], str] = lambda _: "",
) -> TableView:
    """The columns to show of a table in SI, in the units of the system; columns that are empty throughout fall away."""
    present = [column for column in columns if column.field in frame.columns and not _empty(frame[column.field])]
    rows = [row for _, row in frame.iterrows()]
    return TableView(
        tuple(Cell(_heading(column, system), column.unit is not None) for column in present),
        tuple(tuple(Cell(_text(row, column, system), column.unit is not None) for column in present) for row in rows),
        tuple(kind(row) for row in rows),
    )


def unit_text(unit: str) -> str:
    """A unit as it is printed: `kg/m3` as `kg/m³`, `mPa s` as `mPa·s`."""
    return unit.replace("100 ft2", "100\N{NO-BREAK SPACE}ft²").replace("m3", "m³").replace(" ", "·")


def quantity_text(value: float, u: float, unit: str, system: UnitSystem = "lab") -> str:
    """An SI value with its standard uncertainty in the unit shown for `unit`."""
    shown = SYSTEMS[system].get(unit, unit)
    text = with_uncertainty(from_si(value, shown), from_si(u, shown) - from_si(0.0, shown))
    return f"{text} {unit_text(shown)}".removesuffix(" 1")


def _empty(column: pd.Series) -> bool:
    return all(value == "" or (isinstance(value, float) and math.isnan(value)) for value in column.tolist())


def _heading(column: Show, system: UnitSystem) -> str:
    if column.unit in (None, "1"):
        return column.heading
    return f"{column.heading}, {unit_text(SYSTEMS[system].get(column.unit, column.unit))}"


def _text(row: pd.Series, column: Show, system: UnitSystem) -> str:
    value = row[column.field]
    if column.form is not None:
        return column.form(value)
    if column.unit is None:
        return _words(value)
    if isinstance(value, int | np.integer):
        return str(value)
    unit = SYSTEMS[system].get(column.unit, column.unit)
    shown = from_si(float(value), unit)
    if column.u:
        return with_uncertainty(shown, from_si(float(row[column.u]), unit))
    text = significant(shown, column.digits)
    if column.deviation and math.isfinite(shown):
        return f"{text} ({percent(100 * float(row[column.deviation]))} %)"
    return text


def _words(value: object) -> str:
    if isinstance(value, bool | np.bool_):
        return "yes" if value else "no"
    if isinstance(value, float):
        return significant(value)
    return re.sub(r";(?! )", ", ", str(value))  # flags
