"""The table that sets both ways to an interval side by side."""

from __future__ import annotations

import pandas as pd

from settlelab.report.intervals import intervals_view


def test_medians_and_the_largest_difference() -> None:
    rows = []
    for drop, (u, u_drawn, high_drawn) in enumerate(
        [(0.01, 0.0101, 1.0196), (0.02, 0.021, 1.0392), (0.03, 0.03, 1.0647)]
    ):
        ends = {"low": 1 - 1.96 * u, "high": 1 + 1.96 * u, "low_drawn": 1 - 1.96 * u, "high_drawn": high_drawn}
        rows.append({"drop": drop, "output": "drag_coefficient", "value": 1.0, "u": u, "u_drawn": u_drawn} | ends)
    view = intervals_view(pd.DataFrame(rows))
    shown = dict(zip((cell.text for cell in view.headings), (cell.text for cell in view.rows[0]), strict=True))
    assert shown["output"] == "drag coefficient"
    assert shown["u by propagation, %"] == "2.0"
    assert shown["u by Monte Carlo, %"] == "2.1"
    assert shown["largest difference of an end, % of the half-width"] == "10"
