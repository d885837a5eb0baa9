from __future__ import annotations

import pandas as pd

from settlelab.report.predicted import predicted_velocities


def test_velocity_over_size_with_bands_and_hollow_extrapolations() -> None:
    velocity = pd.Series([0.03, 0.05, 0.08])
    prediction = pd.DataFrame(
        {
            "equivalent_diameter": [0.002, 0.003, 0.005],
            "velocity": velocity,
            "confidence_low": 0.97 * velocity,
            "confidence_high": 1.03 * velocity,
            "prediction_low": 0.9 * velocity,
            "prediction_high": 1.1 * velocity,
            "in_range": [True, True, False],
        }
    )
    ax = predicted_velocities(prediction, title="power")
    labels = ["95 %, one particle", "95 %, the law", "velocity", "outside the calibration"]
    assert ax.get_legend_handles_labels()[1] == labels
    line, inside, outside = ax.lines
    assert list(line.get_ydata()) == [30.0, 50.0, 80.0]  # mm/s
    assert (len(inside.get_xdata()), list(outside.get_xdata())) == (2, [5.0])
    assert outside.get_markerfacecolor() == "white"
