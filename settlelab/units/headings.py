"""Column headings that name their unit, and tables to and from them."""

from __future__ import annotations

import math
import re
from dataclasses import dataclass
from functools import cache
from typing import TYPE_CHECKING, Any, NamedTuple, get_type_hints

import numpy as np

from settlelab.units.spelling import SI, from_si, to_si

if TYPE_CHECKING:
    import pandas as pd

__all__ = ["Heading", "Unit", "from_headings", "heading", "parse_heading", "with_headings"]


@dataclass(frozen=True, slots=True)
class Unit:
    """The unit in which a field is shown, as `Annotated[float, Unit("mm/s")]`; inside the package it is SI."""

    symbol: str


class Heading(NamedTuple):
    """A column heading taken apart."""

    name: str  # lower case with underscores: long_axis
    unit: str | None  # as typed; None where the heading names none
    is_uncertainty: bool


_WITH_UNIT = re.compile(r"(?P<name>[^\[\]]*?)\s*/?\s*(?:\[(?P<square>[^\[\]]*)\]|\((?P<round>[^()]*)\))")
_UNCERTAINTY = re.compile(r"(?P<letter>[uU])\s*\((?P<name>[^()]*)\)\s*(?P<rest>.*)")


def _suffix(unit: str) -> str:
    """A unit as it stands at the end of a heading: `kg/m3` as `kg_m3`, nothing for a pure number."""
    if unit == "1":
        return ""
    return unit.replace("%", "percent").replace("°", "deg").translate(str.maketrans(" /^", "___"))


@cache
def _suffixes() -> dict[str, str]:
    """Heading endings with their unit, the longest first: `_Pa_s` before `_s`."""
    units = [unit for dimension in SI.values() for unit in dimension.units if unit != "1"]
    return {f"_{_suffix(unit)}": unit for unit in sorted(units, key=len, reverse=True)}


def heading(field_name: str, unit_symbol: str) -> str:
    """The heading of a field as written to files: `velocity_u` in "mm/s" is `velocity_u_mm_s`."""
    suffix = _suffix(unit_symbol)
    return f"{field_name}_{suffix}" if suffix else field_name


def parse_heading(text: str) -> Heading:
    """A heading as people type it: `mass [mg]`, `mass (mg)`, `mass / mg`, `u(mass) [mg]`, `mass_mg`, `mass_u_mg`.

    The unit is not judged here. Without brackets or slash, a known unit after an underscore is taken as one.

    Raises
    ------
    ValueError
        `U(mass)`: an expanded uncertainty without its coverage factor.
    """
    typed = " ".join(text.split())
    if match := _UNCERTAINTY.fullmatch(typed):
        if match["letter"] == "U":
            raise ValueError(f'certain: give the standard uncertainty (k = 1) as "u({match["name"]})"')
        inner, outer = parse_heading(match["name"]), parse_heading(f"x {match['rest']}")
        return Heading(inner.name, outer.unit if outer.unit is not None else inner.unit, True)
    if match := _WITH_UNIT.fullmatch(typed):
        unit = match["square"] if match["square"] is not None else match["round"]
        return Heading(*_plain(match["name"])[:1], unit.strip(), _plain(match["name"])[1])
    if "/" in typed:
        name, _, unit = typed.partition("/")
        return Heading(_plain(name)[0], unit.strip().strip("()"), _plain(name)[1])
    for suffix, unit in _suffixes().items():
        if typed.endswith(suffix) and len(typed) > len(suffix):
            return Heading(_plain(typed.removesuffix(suffix))[0], unit, _plain(typed.removesuffix(suffix))[1])
    return Heading(_plain(typed)[0], None, _plain(typed)[1])


def _plain(name: str) -> tuple[str, bool]:
    """A name in lower case with underscores, and whether it ended in the `_u` of an uncertainty."""
    lower = re.sub(r"[\s\-]+", "_", name.strip()).lower()
    return (lower.removesuffix("_u"), True) if lower.endswith("_u") else (lower, False)


@cache
def _fields(schema: type) -> dict[str, tuple[Any, str | None]]:
    """Field -> its plain type and the unit of its annotation, in the order of the schema."""
    found: dict[str, tuple[Any, str | None]] = {}
    for name, hint in get_type_hints(schema, include_extras=True).items():
        units = [extra.symbol for extra in getattr(hint, "__metadata__", ()) if isinstance(extra, Unit)]
        found[name] = (getattr(hint, "__origin__", hint), units[0] if units else None)
    return found


def with_headings(frame: pd.DataFrame, schema: type) -> pd.DataFrame:
    """A table in SI as it is shown: values in the units of the schema, headings that name them.

    Columns that the schema lacks pass through unchanged, as do its columns without unit; `frame` is not changed.
    """
    shown, names = frame.copy(), {}
    for name, (_, unit) in _fields(schema).items():
        if unit is not None and name in shown.columns:
            names[name] = heading(name, unit)
            shown[name] = from_si(shown[name].to_numpy(dtype=np.float64), unit)
    return shown.rename(columns=names)


def from_headings(frame: pd.DataFrame, schema: type) -> pd.DataFrame:
    """A table as it was written, back in SI under bare field names; the way back of `with_headings`.

    Cells may be text, as a CSV file gives them: empty numbers become nan, empty text "", `true` and `false` booleans.

    Raises
    ------
    ValueError
        A cell that is not what its field holds; names the heading.
    """
    read, names = frame.copy(), {}
    for name, (kind, unit) in _fields(schema).items():
        column = heading(name, unit or "1")
        if column not in read.columns:
            continue
        names[column] = name
        try:
            cells = [_cell(cell, kind) for cell in read[column].tolist()]
        except ValueError as error:
            raise ValueError(f'column "{column}": {error}') from error
        if unit is not None:
            read[column] = to_si(np.asarray(cells, dtype=np.float64), unit)
        else:
            read[column] = cells
    return read.rename(columns=names)


def _cell(cell: object, kind: object) -> object:
    """One cell of a written table as its field's type."""
    empty = cell is None or cell == "" or (isinstance(cell, float) and math.isnan(cell))
    if kind is str:
        return "" if empty else str(cell)
    if kind is float:
        return math.nan if empty else float(str(cell))
    if kind is bool:
        if str(cell).lower() not in ("true", "false"):
            raise ValueError(f'"{cell}" is not true or false')
        return str(cell).lower() == "true"
    return int(float(str(cell))) if kind is int else cell
