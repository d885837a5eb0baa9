"""Bench tables as text: CSV or XLSX to columns of cells that nobody has interpreted yet.

A cell stays the text that was typed (`007`, `1E5`, `NA` are names as good as any) until a reader of `columns.py` takes
its column. Rows count as a spreadsheet counts: the heading is row 1, a row of units below it is row 2.
"""

from __future__ import annotations

import csv
import io
import re
from collections import Counter
from dataclasses import dataclass, replace
from pathlib import Path

from settlelab.errors import Fault, InputFaults
from settlelab.study.workbook import read_workbook
from settlelab.units import Heading, parse_heading, unit_known, uses_decimal_comma

__all__ = ["Column", "Table", "read_table", "scan_table"]

DELIMITERS = ";\t,"
_BYTE_ORDER_MARKS = {b"\xef\xbb\xbf": "utf-8-sig", b"\xff\xfe": "utf-16", b"\xfe\xff": "utf-16"}
_PLUS_MINUS = re.compile(r"±|\+\s*/?\s*-")
_ENCODINGS = "text in UTF-8, UTF-16 with byte order mark, or Windows-1252"


@dataclass(frozen=True, slots=True, kw_only=True)
class Column:
    """One column, cells as typed; an empty cell is ""."""

    heading: str  # as typed
    name: str  # lower case with underscores: long_axis
    unit: str | None  # as typed, of the heading or of the row below it
    is_uncertainty: bool
    cells: tuple[str, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Table:
    """A bench table; every column has one cell for each entry of `rows`."""

    file: Path
    columns: tuple[Column, ...]
    heading_row: int
    rows: tuple[int, ...]  # number of each row in the file
    decimal_comma: bool  # the table certainly writes decimal commas
    notes: tuple[str, ...] = ()  # what was assumed on reading, one sentence each

    def column(self, name: str, *, is_uncertainty: bool = False) -> Column | None:
        """The column of that name, such as `long_axis`, or None."""
        for column in self.columns:
            if column.name == name and column.is_uncertainty == is_uncertainty:
                return column
        return None


@dataclass(frozen=True, slots=True)
class _Record:
    row: int
    cells: tuple[str, ...]


def read_table(path: Path) -> Table:
    """A CSV or XLSX table with all cells as text.

    Parameters
    ----------
    path : Path
        CSV (comma, semicolon or tab; UTF-8 with or without byte order mark, UTF-16 with one, Windows-1252) or XLSX
        (first sheet). First row the headings in one of the styles `mass [mg]`, `mass (mg)`, `mass / mg`, `mass_mg`,
        or with the units in a row below. Blank rows are skipped.

    Raises
    ------
    InputFaults
        All that is wrong with the table as a table: missing, not text, no closing quote, rows of the wrong length,
        a heading twice.
    """
    table, faults = scan_table(path)
    if faults or table is None:
        raise InputFaults(faults)
    return table


def scan_table(path: Path) -> tuple[Table | None, list[Fault]]:
    """Like `read_table`, with the faults beside what could be read: the usable rows, or None."""
    try:
        records, delimiter, notes = _records(path)
    except InputFaults as error:
        return None, list(error.faults)
    if not records:
        return None, [Fault(file=path, found=None, accepted="a row of headings and rows below it")]
    width = max((i + 1 for i, cell in enumerate(records[0].cells) if cell), default=0)
    usable, faults = _of_width(records, width, path)
    columns, rows, more = _columns(usable, path)
    if not rows and not faults:
        more.append(Fault(file=path, row=records[-1].row + 1, found=None, accepted="a row below the headings"))
    numbers = [part.strip() for column in columns for cell in column.cells for part in _PLUS_MINUS.split(cell)]
    comma = any(map(uses_decimal_comma, numbers)) or (
        delimiter == ";" and any(re.fullmatch(r"[+-]?\d+,\d+", number) for number in numbers)
    )
    table = Table(file=path, columns=columns, heading_row=records[0].row, rows=rows, decimal_comma=comma, notes=notes)
    return table, faults + more


def _records(path: Path) -> tuple[list[_Record], str, tuple[str, ...]]:
    """Rows that are not blank, the delimiter of a text file, and notes."""
    kind = path.suffix.lower()
    notes: tuple[str, ...] = ()
    if kind in (".xlsx", ".xlsm"):
        (rows, notes), delimiter = read_workbook(path), ""
    elif kind in (".csv", ".txt", ".tsv"):
        text = _decoded(path)
        delimiter = _delimiter(text)
        rows = _split(text, delimiter, path)
    else:
        raise InputFaults([Fault(file=path, found=path.name, accepted="a table as CSV or XLSX file")])
    records = [_Record(i, tuple(cell.strip() for cell in row)) for i, row in enumerate(rows, start=1)]
    return [record for record in records if any(record.cells)], delimiter, notes


def _decoded(path: Path) -> str:
    try:
        data = path.read_bytes()
    except OSError as error:
        raise InputFaults([Fault(file=path, found=None, accepted="a table that can be read")]) from error
    marked = [name for mark, name in _BYTE_ORDER_MARKS.items() if data.startswith(mark)]
    for encoding in marked or ["utf-8", "cp1252"]:
        try:
            text = data.decode(encoding)
        except UnicodeDecodeError:
            continue
        if "\0" not in text:
            return text
    raise InputFaults([Fault(file=path, found="other bytes", accepted=_ENCODINGS)])


def _delimiter(text: str) -> str:
    """The sign that stands most often outside quotes in the heading row."""
    first = next((line for line in text.splitlines() if line.strip()), "")
    counts = Counter(re.sub(r'"[^"]*"', "", first))
    return max(DELIMITERS, key=lambda sign: counts[sign])


def _split(text: str, delimiter: str, path: Path) -> list[list[str]]:
    rows = csv.reader(io.StringIO(text, newline=""), delimiter=delimiter, strict=True, skipinitialspace=True)
    try:
        return list(rows)
    except csv.Error as error:
        fault = Fault(file=path, found=str(error), accepted="a table whose quotes are closed", row=rows.line_num)
        raise InputFaults([fault]) from error


def _of_width(records: list[_Record], width: int, path: Path) -> tuple[list[_Record], list[Fault]]:
    """Rows with as many cells as there are headings; empty cells beyond the last heading do not count."""
    usable, faults = [], []
    for record in records:
        if len(record.cells) >= width and not any(record.cells[width:]):
            usable.append(replace(record, cells=record.cells[:width]))
            continue
        count = len(record.cells) if len(record.cells) < width else max(i + 1 for i, c in enumerate(record.cells) if c)
        accepted = f"a row of {width} cells as the headings have (it has {count})"
        faults.append(Fault(file=path, row=record.row, found=" | ".join(record.cells)[:60], accepted=accepted))
    return usable, faults


def _columns(records: list[_Record], path: Path) -> tuple[tuple[Column, ...], tuple[int, ...], list[Fault]]:
    """Columns with their headings taken apart, units from the heading or from a row of units below it."""
    head, body = records[0], records[1:]
    units = body.pop(0).cells if body and _is_unit_row(body[0]) else ("",) * len(head.cells)
    columns: list[Column] = []
    faults: list[Fault] = []
    for index, typed in enumerate(head.cells):
        cells = tuple(record.cells[index] for record in body)
        if not typed and not any(cells):
            continue
        try:
            name, unit, is_uncertainty = _heading(typed, units[index])
        except ValueError as error:
            faults.append(Fault(file=path, row=head.row, found=typed or None, accepted=str(error)))
            continue
        if any((name, is_uncertainty) == (other.name, other.is_uncertainty) for other in columns):
            faults.append(Fault(file=path, row=head.row, found=typed, accepted="a heading that stands only once"))
        columns.append(Column(heading=typed, name=name, unit=unit, is_uncertainty=is_uncertainty, cells=cells))
    return tuple(columns), tuple(record.row for record in body), faults


def _heading(typed: str, unit_below: str) -> Heading:
    if not typed:
        raise ValueError("a heading for the cells below it")
    found = parse_heading(typed)
    if not unit_below:
        return found
    below = unit_below.strip("[]()")
    if found.unit is not None and found.unit != below:
        raise ValueError(f'in one unit: the row below says "{below}"')
    return found._replace(unit=below)


def _is_unit_row(record: _Record) -> bool:
    """Whether the row below the headings holds nothing but units."""
    words = [cell.strip("[]()") for cell in record.cells if cell]
    return all(unit_known(word) and not word.isdigit() for word in words) and any(word != "-" for word in words)
