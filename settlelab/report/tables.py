"""The one place where a table becomes a CSV file."""

from __future__ import annotations

import csv
import math
from pathlib import Path

import numpy as np
import pandas as pd

from settlelab.units import with_headings

__all__ = ["write_csv"]


def write_csv(frame: pd.DataFrame, schema: type | None, path: Path, *, digits: int = 6) -> Path:
    """Write a table: UTF-8, commas, bare newlines, `true` and `false`; unknown cells stay empty.

    Parameters
    ----------
    frame : DataFrame
        Bare SI columns where there is a schema; else written as it stands.
    schema : type or None
        Dataclass whose annotations name the unit of each column as shown, such as `Drop`.
    path : Path
        File to write; its folder is made where missing.
    digits : int
        Significant digits. A slow fall lasts minutes: its times need more than six to tell frames apart.

    Returns
    -------
    Path
        The file written.
    """
    shown = frame if schema is None else with_headings(frame, schema)
    columns = [[_cell(value, digits) for value in shown[name].tolist()] for name in shown.columns]
    path.parent.mkdir(parents=True, exist_ok=True)
    with path.open("w", encoding="utf-8", newline="") as file:
        writer = csv.writer(file, lineterminator="\n")
        writer.writerow(shown.columns)
        writer.writerows(zip(*columns, strict=True))
    return path


def _cell(value: object, digits: int) -> str:
    if isinstance(value, bool | np.bool_):
        return "true" if value else "false"
    if isinstance(value, float | np.floating):
        return "" if math.isnan(value) else f"{value:.{digits}g}"
    return "" if value is None or value is pd.NA or value is pd.NaT else str(value)
