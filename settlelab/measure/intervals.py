"""Both ways to an interval side by side: the law of propagation (k = 1.96) and Monte Carlo, drop by drop."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence

import numpy as np
import pandas as pd

from settlelab.measure.chain import Fallen
from settlelab.measure.propagation import Drawn

__all__ = ["INTERVAL_COLUMNS", "compared", "departure", "departures"]

NORMAL = 1.96  # of a 95 % interval
APART = 0.1  # of the half-width: from here on an end of the interval by propagation is told to be off
INTERVAL_COLUMNS = ("drop", "output", "value", "u", "low", "high", "mean", "u_drawn", "low_drawn", "high_drawn")


def compared(
    drop: int, result: Fallen, drawn: Mapping[str, Drawn], outputs: Sequence[str]
) -> Iterator[dict[str, object]]:
    """A row for each output that was drawn: value and interval by propagation, mean and interval by Monte Carlo."""
    for name in outputs:
        if name not in drawn:
            continue
        estimate, draws = getattr(result, name), drawn[name]
        yield {
            "drop": drop,
            "output": name,
            "value": estimate.value,
            "u": estimate.u,
            "low": estimate.value - NORMAL * estimate.u,
            "high": estimate.value + NORMAL * estimate.u,
            "mean": draws.mean,
            "u_drawn": draws.u,
            "low_drawn": draws.low,
            "high_drawn": draws.high,
        }


def departures(intervals: pd.DataFrame) -> tuple[str, ...]:
    """Where the interval by propagation is off by more than a tenth of its half-width, one sentence for each output.

    Parameters
    ----------
    intervals : DataFrame
        Columns of `INTERVAL_COLUMNS`.
    """
    told = []
    for output, part in intervals.groupby("output", sort=False):
        off = part[departure(part) > APART]
        if len(off):
            drops = ", ".join(str(drop) for drop in off["drop"])
            told.append(
                f"{str(output).replace('_', ' ')}: the 95 % interval is not symmetric; its ends by Monte Carlo differ "
                f"by more than a tenth of its half-width (drop {drops})"
            )
    return tuple(told)


def departure(intervals: pd.DataFrame) -> pd.Series:
    """Larger difference between the ends of both intervals, over the half-width by propagation."""
    ends = np.maximum(
        (intervals["low"] - intervals["low_drawn"]).abs(), (intervals["high"] - intervals["high_drawn"]).abs()
    )
    return ends / (NORMAL * intervals["u"])
