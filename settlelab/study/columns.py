"""Readers that take a column of a bench table: SI arrays with uncertainty, and the faults of single cells."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from settlelab.errors import Fault, did_you_mean
from settlelab.study.limits import Limits
from settlelab.study.table import Column, Table
from settlelab.units import Quantity, difference_to_si, parse_number, parse_quantity
from settlelab.units.spelling import SI, conversion

__all__ = ["Cells", "cell_fault", "is_numeric", "near_heading", "read_numbers", "read_quantities"]


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
    reader = _Reader(table, column, spread, dimension, limits)
    for index in range(len(table.rows)):
        quantity = reader.read(index, faults)
        if quantity is not None:
            value[index], u[index] = quantity.value, quantity.u
    return Cells(value, u)


def read_numbers(table: Table, column: Column, faults: list[Fault]) -> Cells:
    """A column as plain numbers, whatever unit its heading names; `faults` grows by the cells that are none."""
    plain = replace(column, unit=None)
    cells = read_quantities(replace(table, columns=(plain,)), column.name, "1", faults)
    assert cells is not None
    return cells


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


@dataclass(frozen=True, slots=True)
class _Reader:
    """Reads the cells of a column together with those of its `u(...)` column."""

    table: Table
    column: Column
    spread: Column | None
    dimension: str
    limits: Limits | None

    def read(self, index: int, faults: list[Fault]) -> Quantity | None:
        """One row; None where there is nothing or a fault, which is added to `faults`."""
        u_text = self.spread.cells[index] if self.spread is not None else ""
        if not self.column.cells[index] and not u_text:
            return None
        at = self.column  # where a fault stands
        try:
            quantity = self._value(index, u_text)
            if self.spread is not None and u_text:
                at = self.spread
                quantity = Quantity(quantity.value, self._u(self.spread, u_text, quantity))
            at = self.column
            if self.limits is not None:
                self.limits.check(quantity, self.dimension)
        except ValueError as error:
            faults.append(cell_fault(self.table, at, index, str(error)))
            return None
        return quantity

    def _value(self, index: int, u_text: str) -> Quantity:
        text, unit = self.column.cells[index], self.column.unit or ""
        if not text:
            raise ValueError(f"a value to the uncertainty {u_text} beside it")
        return parse_quantity(text, self.dimension, unit=unit, decimal_comma=self.table.decimal_comma)

    def _u(self, spread: Column, text: str, quantity: Quantity) -> float:
        """An uncertainty in SI; in percent of the value where only the `u(...)` column is in percent."""
        number = parse_number(text, decimal_comma=self.table.decimal_comma)
        if quantity.u:
            raise ValueError(f'the only uncertainty: another one stands in column "{self.column.heading}"')
        if number < 0.0:
            raise ValueError("an uncertainty of 0 or above")
        if spread.unit == "%" and self.column.unit != "%":
            return abs(quantity.value) * number * 0.01
        return float(difference_to_si(number, spread.unit or self.column.unit or "1"))


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
