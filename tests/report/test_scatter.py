"""The section on replicate drops and lots."""

from __future__ import annotations

from dataclasses import replace

from settlelab.measure import scatter_of
from settlelab.report.scatter import scatter_view
from tests.report.invented import invented_drops, measured_of


def test_tables_of_the_section() -> None:
    scatter = scatter_of(measured_of(invented_drops()).drops)
    assert scatter is not None
    view = scatter_view(scatter)
    headings = [cell.text for cell in view.lots.headings]
    assert headings[:4] == ["lot", "fluid", "particles", "drops"]
    assert [row[0].text for row in view.lots.rows] == ["A", "B", "C", "all"]
    within = headings.index("within particles, %")
    assert all(0.2 < float(row[within].text) < 4 for row in view.lots.rows)  # drawn with 1.2 %
    assert view.replicated
    assert view.trends is not None


def test_marks_only_where_there_are_some() -> None:
    scatter = scatter_of(measured_of(invented_drops()).drops)
    assert scatter is not None
    assert scatter_view(replace(scatter, marks=scatter.marks.iloc[:0])).marks is None
    mark = {"lot": "A", "fluid": "glycerol", "particle": "A-01", "drop": "3", "test": "Grubbs, drops of a particle"}
    marked = scatter.marks.iloc[:0].copy()
    marked.loc[0] = mark | {"statistic": 2.41, "critical": 2.29, "mark": "straggler"}
    view = scatter_view(replace(scatter, marks=marked))
    assert view.marks is not None
    assert view.marks.rows[0][0].text == "straggler"
