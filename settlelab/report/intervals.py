"""The two ways to an interval side by side, over all accepted drops."""

from __future__ import annotations

import numpy as np
import pandas as pd

from settlelab.measure.intervals import departure
from settlelab.report.numbers import significant
from settlelab.report.sections import OUTPUTS
from settlelab.report.views import Show, TableView, table_view

__all__ = ["intervals_view"]


def _percent(value: object) -> str:
    return significant(100 * float(str(value)), 2)


INTERVALS = (
    Show(heading="output", field="output"),
    Show(heading="drops", field="drops", unit="1"),
    Show(heading="u by propagation, %", field="u", unit="1", form=_percent),
    Show(heading="u by Monte Carlo, %", field="u_drawn", unit="1", form=_percent),
    Show(heading="largest difference of an end, % of the half-width", field="departure", unit="1", form=_percent),
)


def intervals_view(intervals: pd.DataFrame) -> TableView:
    """Median relative standard uncertainty of each output both ways, and how far the intervals are apart at most.

    Parameters
    ----------
    intervals : DataFrame
        As the measuring room computed them.
    """
    rows = []
    for output, part in intervals.groupby("output", sort=False):
        size = part["value"].abs()
        rows.append(
            {
                "output": OUTPUTS[str(output)],
                "drops": len(part),
                "u": float(np.nanmedian(part["u"] / size)) if part["u"].notna().any() else np.nan,
                "u_drawn": float(np.nanmedian(part["u_drawn"] / size)) if part["u_drawn"].notna().any() else np.nan,
                "departure": departure(part).max(),
            }
        )
    return table_view(pd.DataFrame(rows), INTERVALS)
