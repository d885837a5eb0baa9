"""Readers that take a column of a bench table: SI arrays with uncertainty, and the faults of single cells."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from settlelab.errors import Fault, did_you_mean
from settlelab.study.limits import Limits
from settlelab.study.table import Column, Table
from settlelab.units import Quantity, difference_to_si, parse_number, parse_quantity
from settlelab.units.spelling import SI, conversion

__all__ = ["Cells", "cell_fault", "is_numeric", "near_heading", "read_quantities"]


@dataclass(frozen=True, slots=True)
class Cells:
    """A column in SI; nan where a cell is empty or at fault."""

    value: NDArray[np.float64]  # (N,)
    u: NDArray[np.float64]  # (N,) standard uncertainty; 0 where none was stated

    def quantity(self, index: int) -> Quantity | None:
        """The cell of one row, or None where it is empty."""
        value = float(self.value[index])
        return None if np.isnan(value) else Quantity(value, float(self.u[index]))


def read_quantities(
    table: Table, name: str, dimension: str, faults: list[Fault], limits: Limits | None = None
) -> Cells | None:
    """A column and its uncertainty in SI, or None where the table has no such column.

    Parameters
    ----------
    table : Table
        As `read_table` gives it.
    name : str
        Name of the column, such as `long_axis`; its uncertainty is taken from the cells or from
        a column `u(long axis)`.
    dimension : str
        SI unit of the answer, such as "m".
    faults : list of Fault
        Grows by one entry for each heading or cell that cannot be used.
    limits : Limits, optional
        What is physically possible.
    """
    column, spread = table.column(name), table.column(name, is_uncertainty=True)
    if column is None:
        if spread is not None:
            faults.append(heading_fault(table, spread, f'beside a column "{name.replace("_", " ")}"'))
        return None
    value, u = np.full((2, len(table.rows)), np.nan)
    unfit = [(each, why) for each in (column, spread) if each is not None and (why := _unfit(table, each, dimension))]
    if unfit:
        faults.extend(heading_fault(table, each, why) for each, why in unfit)
        return Cells(value, u)
    for index in range(len(table.rows)):
        if not column.cells[index] and not (spread and spread.cells[index]):
            continue
        try:
            quantity = _quantity(table, column, spread, dimension, index)
            if limits is not None:
                limits.check(quantity, dimension)
        except ValueError as error:
            faults.append(cell_fault(table, column, index, str(error)))
            continue
        value[index], u[index] = quantity.value, quantity.u
    return Cells(value, u)


def is_numeric(table: Table, column: Column) -> bool:
    """Whether any cell of a column is a number (with or without uncertainty) and nothing else."""
    for cell in column.cells:
        try:
            parse_quantity(cell, "1", decimal_comma=table.decimal_comma)
        except ValueError:
            continue
        return True
    return False


def near_heading(table: Table, column: Column, known: Iterable[str]) -> Fault | None:
    """A fault for a heading that is no known one but looks like a slip of one: `mas [mg]`, `long [mm]`."""
    names = {name.replace("_", " ") for name in known}
    typed = column.name.replace("_", " ")
    hint = did_you_mean(typed, names, cutoff=0.8)
    if not hint:
        begun = sorted(name for name in names if name.startswith(f"{typed} "))
        hint = f' (did you mean "{begun[0]}"?)' if begun else ""
    return heading_fault(table, column, f"a heading of this table{hint}") if hint else None


def heading_fault(table: Table, column: Column, accepted: str) -> Fault:
    """A fault of a column's heading."""
    return Fault(file=table.file, row=table.heading_row, found=column.heading, accepted=accepted)


def cell_fault(table: Table, column: Column, index: int, accepted: str) -> Fault:
    """A fault of one cell; of something missing where the cell is empty."""
    found = column.cells[index] or None
    return Fault(file=table.file, row=table.rows[index], column=column.heading, found=found, accepted=accepted)


def _quantity(table: Table, column: Column, spread: Column | None, dimension: str, index: int) -> Quantity:
    """One cell with the uncertainty that stands in it or in the `u(...)` column."""
    u_text = spread.cells[index] if spread else ""
    if not column.cells[index]:
        raise ValueError(f"a value to the uncertainty {u_text} beside it")
    cell = parse_quantity(column.cells[index], dimension, unit=column.unit or "", decimal_comma=table.decimal_comma)
    if spread is None or not u_text:
        return cell
    if cell.u:
        raise ValueError(f'with one uncertainty: another one, {u_text}, stands in column "{spread.heading}"')
    try:
        number = parse_number(u_text, decimal_comma=table.decimal_comma)
    except ValueError as error:
        raise ValueError(f'beside a readable uncertainty: "{u_text}" is not {error}') from error
    if number < 0.0:
        raise ValueError(f"beside an uncertainty of 0 or above: {u_text} is less")
    if spread.unit == "%" and column.unit != "%":
        return Quantity(cell.value, abs(cell.value) * number * 0.01)
    return Quantity(cell.value, float(difference_to_si(number, spread.unit or column.unit or "1")))


def _unfit(table: Table, column: Column, dimension: str) -> str:
    """Why the unit of a heading cannot be used, as text that follows "is not"; "" where it can."""
    kind = SI[dimension]
    wanted = f"a heading with a unit of {kind.name.removeprefix('a ')}, such as [{kind.units[0]}]"
    known = f"; known here: {', '.join(kind.units)}"
    if column.unit is None:
        bare = dimension != "1" and is_numeric(table, column)
        return f"{wanted} (its unit is missing{known})" if bare else ""
    if column.is_uncertainty and column.unit == "%":
        return ""
    try:
        fits = conversion(column.unit).dimension == conversion(dimension).dimension
    except ValueError as error:
        return f"{wanted} ({error}{known})"
    return "" if fits else f'{wanted} (unit "{column.unit}" does not fit{known})'
