"""The calibrated form as the page shows it: formula, coefficients with uncertainty, where it holds."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import pandas as pd

from settlelab.report.views import Show, TableView, table_view

if TYPE_CHECKING:
    from settlelab.calibrate import Calibration

__all__ = ["CalibrationView", "calibration_view"]


@dataclass(frozen=True, slots=True)
class CalibrationView:
    """What the page tells about the chosen form."""

    name: str
    formula: str
    coefficients: TableView
    remarks: tuple[str, ...]


def calibration_view(calibration: Calibration) -> CalibrationView:
    """The chosen form.

    Raises
    ------
    ValueError
        No form was chosen.
    """
    fit = calibration.chosen
    if fit is None:
        raise ValueError("no calibrated form was chosen")
    coefficients = pd.DataFrame({"name": list(fit.names), "value": fit.values, "u": fit.u})
    columns = (Show(heading="coefficient", field="name"), Show(heading="value ± u", field="value", u="u", unit="1"))
    return CalibrationView(fit.name, fit.formula, table_view(coefficients, columns), calibration.notes)
