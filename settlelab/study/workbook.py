"""The first sheet of an XLSX workbook, its cells as the text that the spreadsheet shows."""

from __future__ import annotations

import re
import warnings
from datetime import date, datetime
from pathlib import Path
from zipfile import BadZipFile

from openpyxl import load_workbook
from openpyxl.utils.exceptions import InvalidFileException

from settlelab.errors import Fault, InputFaults

__all__ = ["read_workbook"]


def read_workbook(path: Path) -> tuple[list[list[str]], tuple[str, ...]]:
    """Rows of the first sheet as text, and a note where there are further sheets.

    Raises
    ------
    InputFaults
        The file is missing, is no XLSX workbook, or holds a formula whose value was never calculated.
    """
    try:
        with warnings.catch_warnings():
            warnings.simplefilter("ignore", UserWarning)  # openpyxl tells which features of a workbook it leaves out
            values, formulas = (load_workbook(path, data_only=kept) for kept in (True, False))
    except OSError as error:
        raise InputFaults([Fault(file=path, found=None, accepted="a workbook that can be read")]) from error
    except (BadZipFile, InvalidFileException, KeyError, ValueError) as error:
        raise InputFaults([Fault(file=path, found=path.name, accepted="an XLSX workbook")]) from error
    sheet, typed = values.worksheets[0], formulas.worksheets[0]
    rows, faults = [], []
    for number, (cells, sources) in enumerate(zip(sheet.iter_rows(), typed.iter_rows(), strict=True), start=1):
        rows.append([_shown(cell.value, cell.number_format) for cell in cells])
        for cell, source in zip(cells, sources, strict=True):
            if cell.value is None and source.value is not None:
                accepted = f"a value (cell {source.coordinate}: save the workbook once, so that it is calculated)"
                faults.append(Fault(file=path, row=number, found=str(source.value), accepted=accepted))
    if faults:
        raise InputFaults(faults)
    others = ", ".join(f'"{name}"' for name in values.sheetnames[1:])
    return rows, (f'{path.name}: sheet "{sheet.title}" was read, not {others}',) if others else ()


def _shown(value: object, number_format: str) -> str:
    """A cell as text: 7 with the format `000` is the name 007, 0.62 with the format `0 %` is 62 %."""
    if isinstance(value, datetime | date):
        return value.isoformat()
    if isinstance(value, bool) or not isinstance(value, int | float):
        return "" if value is None else str(value)
    if "%" in number_format:
        return f"{value * 100:.15g} %"
    if float(value).is_integer() and abs(value) < 1e15:
        whole = str(int(value))
        return whole.zfill(len(number_format)) if re.fullmatch("0+", number_format) else whole
    return repr(value)
