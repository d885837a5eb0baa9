from __future__ import annotations

from itertools import pairwise

import numpy as np
import pandas as pd
import pytest
from matplotlib.figure import Figure

from settlelab.report import drawing, figures
from settlelab.report.curves import drag_curves
from settlelab.report.sections import budget_shares
from tests.report.invented import calibration_of, drop, invented_drops, measured_of


def labels(ax: object) -> list[str]:
    return ax.get_legend_handles_labels()[1]  # type: ignore[attr-defined]


def pairs(in_range: list[bool]) -> pd.DataFrame:
    count = len(in_range)
    return pd.DataFrame(
        {"lot": "A", "measured": 0.1, "measured_u": 0.001, "predicted": 0.11, "in_range": in_range}, index=range(count)
    )


def test_drag_chart_shows_accepted_drops_by_lot_controls_and_curves() -> None:
    measured = measured_of(invented_drops())
    calibration = calibration_of(measured)
    ax = figures.drag_chart(measured.drops, drag_curves(measured.drops, calibration))
    assert (ax.get_xscale(), ax.get_yscale()) == ("log", "log")
    laws = [calibration.best_published, "velocity-power of sphericity"]
    shape = ", at each lot's median shape"
    assert labels(ax) == ["A", "B", "C", "control spheres", "sphere", *(law + shape for law in laws)]
    points = sum(len(container.lines[0].get_xdata()) for container in ax.containers)
    assert points == 25  # the refused one is not drawn


def test_drops_in_a_polymer_are_told_apart() -> None:
    drops = measured_of([drop(1, lot="A"), drop(2, lot="A", flow_index=0.6), drop(3, lot="A", yield_stress=0.2)]).drops
    ax = figures.drag_chart(drops, [])
    filled = {container.lines[0].get_fillstyle(): len(container.lines[0].get_xdata()) for container in ax.containers}
    assert filled == {"full": 1, "left": 2}


def test_sphere_curve_is_the_standard_one() -> None:
    drops = measured_of([drop(1, reynolds=100.0)]).drops
    (curve,) = drag_curves(drops, None)
    cd = np.interp(100.0, curve.reynolds, curve.drag_coefficient)
    # Clift, Grace & Weber (1978), table 5.2: 24/Re (1 + 0.1935 Re^0.6305) at 100
    assert cd == pytest.approx(1.087, abs=0.005)


def test_measured_against_predicted_marks_what_is_outside_the_range() -> None:
    ax = figures.measured_against_predicted(pairs([True, False]), title="ganser-1993")
    assert labels(ax) == ["hollow: outside the method's range", "A"]
    assert ax.get_title() == "ganser-1993"
    assert ax.get_xlim() == ax.get_ylim() == pytest.approx((0, 1.12 * 110))


def test_measured_against_predicted_takes_no_drop_at_all() -> None:
    assert figures.measured_against_predicted(pairs([])).get_xlim() == (0, 1)


def test_ranking_has_the_best_on_top() -> None:
    measured = measured_of(invented_drops())
    ranking = calibration_of(measured).ranking
    ax = figures.ranking_bars(ranking)
    names = [label.get_text().split("   ")[0] for label in ax.get_yticklabels()]
    assert names[::-1] == list(ranking["method"])
    assert "on particles left out of the fit" in labels(ax)
    assert ax.get_xlim()[1] < 100 < ranking["rms_percent"].max()  # stokes-1851 is far off and must not set the scale


def test_budget_bars_fill_the_width() -> None:
    shares = budget_shares(measured_of(invented_drops()))
    assert shares.sum(axis=1).to_numpy() == pytest.approx(1.0)
    ax = figures.budget_bars(shares)
    ends = [bar.get_x() + bar.get_width() for bar in ax.containers[-1]]
    assert ends == pytest.approx([100.0] * 3)
    assert labels(ax) == list(shares.columns)


def test_charts_draw_on_given_axes_and_leave_the_data_alone() -> None:
    measured = measured_of(invented_drops())
    before = measured.drops.copy()
    ax = Figure().subplots()
    assert figures.drag_chart(measured.drops, [], ax=ax) is ax
    pd.testing.assert_frame_equal(measured.drops, before)


def test_equal_charts_give_equal_bytes() -> None:
    shares = budget_shares(measured_of(invented_drops()))
    first, second = (drawing.picture(figures.budget_bars(shares), "svg") for _ in range(2))
    assert first == second


def test_neighbouring_series_differ_in_marker_and_in_grey() -> None:
    def grey(colour: str) -> float:
        red, green, blue = (int(colour[i : i + 2], 16) for i in (1, 3, 5))
        return 0.299 * red + 0.587 * green + 0.114 * blue

    greys = [grey(colour) for colour, _ in drawing.SERIES]
    assert min(abs(a - b) for a, b in pairwise(greys)) > 25
    assert len({marker for _, marker in drawing.SERIES}) == len(drawing.SERIES)
