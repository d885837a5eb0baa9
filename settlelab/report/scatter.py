"""The section on replicate drops and lots: scatter within and between particles, what stands out, drift."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from settlelab.measure.model import Scatter
from settlelab.report.numbers import significant
from settlelab.report.views import Show, TableView, table_view

__all__ = ["ScatterView", "scatter_view"]


@dataclass(frozen=True, slots=True)
class ScatterView:
    """Tables of the section; None where there is nothing to show."""

    lots: TableView
    marks: TableView | None
    trends: TableView | None
    replicated: bool


def _percent(value: object) -> str:
    """A share as a percentage to two digits."""
    return significant(100 * float(str(value)), 2)


def _three(value: object) -> str:
    return significant(float(str(value)), 3)


def _chance(value: object) -> str:
    chance = 100 * float(str(value))
    return "< 0.1" if chance < 0.1 else significant(chance, 2)


LOTS = (
    Show(heading="lot", field="lot"),
    Show(heading="fluid", field="fluid"),
    Show(heading="particles", field="particles", unit="1"),
    Show(heading="drops", field="drops", unit="1"),
    Show(heading="within particles, %", field="within", unit="1", form=_percent),
    Show(heading="repeatability limit r, %", field="repeatability_limit", unit="1", form=_percent),
    Show(heading="between particles, %", field="between", unit="1", form=_percent),
    Show(heading="u of the lot mean, %", field="mean_u", unit="1", form=_percent),
    Show(heading="F", field="f_ratio", unit="1", form=_three),
    Show(heading="by chance, %", field="p_value", unit="1", form=_chance),
)
MARKS = (
    Show(heading="mark", field="mark"),
    Show(heading="lot", field="lot"),
    Show(heading="fluid", field="fluid"),
    Show(heading="particle", field="particle"),
    Show(heading="drop", field="drop"),
    Show(heading="test", field="test"),
    Show(heading="statistic", field="statistic", unit="1", form=_three),
    Show(heading="critical value", field="critical", unit="1", form=_three),
)
TRENDS = (
    Show(heading="fluid", field="fluid"),
    Show(heading="drops", field="drops", unit="1"),
    Show(heading="change per drop, %", field="per_drop_percent", u="per_drop_u_percent", unit="1"),
    Show(heading="by chance, %", field="p_value", unit="1", form=_chance),
)


def scatter_view(scatter: Scatter) -> ScatterView:
    """The tables of the section.

    Parameters
    ----------
    scatter : Scatter
        As the measuring room computed it.
    """
    trends = scatter.trends.assign(
        per_drop_percent=100 * scatter.trends["per_drop"].astype(np.float64),
        per_drop_u_percent=100 * scatter.trends["per_drop_u"].astype(np.float64),
    )
    return ScatterView(
        lots=table_view(scatter.lots, LOTS, kind=lambda row: "lot" if row["lot"] == "all" else ""),
        marks=table_view(scatter.marks, MARKS) if len(scatter.marks) else None,
        trends=table_view(trends, TRENDS) if len(trends) else None,
        replicated=bool((scatter.lots["drops"] > scatter.lots["particles"]).any()),
    )
