"""Arithmetic of the lab table against figures worked by hand; Student factors as in any printed t table."""

from __future__ import annotations

import math
from types import SimpleNamespace

import numpy as np
import pandas as pd
import pytest

from settlelab.measure.model import Measured
from settlelab.report import LabRow, lab_table
from tests.report.invented import calibration_of, drop, invented_drops, measured_of


def two_drops(**given: object) -> list[dict[str, object]]:
    return [
        drop(1, particle="A-01", lot="A", velocity=0.099, velocity_u=0.0005, **given),
        drop(2, particle="A-01", lot="A", velocity=0.101, velocity_u=0.0005, **given),
    ]


def with_shares(drops: list[dict[str, object]], **shares: float) -> Measured:
    """The budget of every drop's velocity as given."""
    budget = pd.DataFrame(
        [
            {"drop": row["drop"], "output": "velocity", "input": name, "share": share}
            for row in drops
            for name, share in shares.items()
        ],
        columns=["drop", "output", "input", "share"],
    )
    return measured_of(drops, budget=budget)


def test_mean_of_two_drops_worked_by_hand() -> None:
    table = lab_table(with_shares(two_drops(), track=0.36, scale=0.64), None)
    row = table.iloc[0]
    assert row["velocity"] == pytest.approx(0.100)
    assert (row["drops"], row["accepted"]) == (2, 2)
    # replicates: s = 0.002/sqrt 2 = 0.0014142, so s/mean = 1.4142 % with one degree of freedom;
    # t(95.45 %, 1) = 13.968, so u = 13.968/2 * 0.0014142 / sqrt 2 = 0.006984; common: 0.0005 * 0.8 = 0.0004
    assert row["velocity_scatter"] == pytest.approx(0.014142, rel=1e-4)
    assert row["velocity_expanded_u"] == pytest.approx(2 * math.hypot(0.006984, 0.0004), rel=1e-4)


def test_common_uncertainty_does_not_average_down() -> None:
    same = [drop(n, particle="A-01", lot="A", velocity=0.1, velocity_u=0.002) for n in range(1, 101)]
    row = lab_table(with_shares(same, track=0.75, scale=0.25), None).iloc[0]
    # the fit's part 0.002 * sqrt 0.75 = 0.001732 falls with the root of 100, the scale's 0.001 stays
    assert row["velocity_expanded_u"] == pytest.approx(2 * math.hypot(0.0001732, 0.001), rel=1e-3)


def test_uncertainty_without_a_budget_counts_as_common() -> None:
    same = [drop(n, particle="A-01", lot="A", velocity=0.1, velocity_u=0.002) for n in range(1, 101)]
    assert lab_table(with_shares(same), None).iloc[0]["velocity_expanded_u"] == pytest.approx(0.004)


def test_repeatability_is_pooled_over_particles() -> None:
    rows = [*two_drops(), drop(3, particle="A-02", lot="A", velocity=0.2, velocity_u=0.001)]
    rows += [drop(n, particle="A-03", lot="A", velocity=v, velocity_u=0.001) for n, v in ((4, 0.3), (5, 0.3), (6, 0.3))]
    table = lab_table(with_shares(rows, track=0.0, scale=1.0), None).set_index("particle")
    # sums of squares 2 * 0.01^2 over 1 + 2 degrees of freedom: s = 0.8165 %; t(95.45 %, 3) = 3.3068
    single = 3.3068 / 2 * 0.008165 * 0.2
    assert table.loc["A-02", "velocity_expanded_u"] == pytest.approx(2 * math.hypot(single, 0.001), rel=1e-3)


def test_lot_is_the_mean_of_its_particles_with_their_scatter() -> None:
    rows = [
        drop(n, particle=f"A-0{n}", lot="A", velocity=v, velocity_u=0.001) for n, v in ((1, 0.1), (2, 0.11), (3, 0.12))
    ]
    rows.append(rows[0] | {"drop": 4})  # a second drop of A-01 gives that particle no more weight
    table = lab_table(with_shares(rows, track=0.2, size=0.44, scale=0.36), None)
    lot = table[table["particle"] == ""].iloc[0]
    assert (lot["lot"], lot["particles"], lot["drops"], lot["accepted"]) == ("A", 3, 4, 4)
    assert lot["velocity"] == pytest.approx(0.11)
    assert lot["velocity_scatter"] == pytest.approx(0.01 / 0.11)
    # peculiar to each of the three: track and size, 0.001 * 0.8 (the scatter of A-01 is nil); shared: 0.001 * 0.6;
    # A-01's own part is a little smaller: its fit averages over two drops, 0.001 * (0.2 / 2 + 0.44)^0.5 = 0.000735
    own = math.sqrt(0.000735**2 + 2 * 0.0008**2) / 3
    assert lot["velocity_expanded_u"] == pytest.approx(2 * math.hypot(own, 0.0006), rel=1e-3)


def test_lot_of_one_particle_has_that_particles_uncertainty() -> None:
    table = lab_table(with_shares(two_drops(), track=0.36, scale=0.64), None)
    assert table.iloc[1]["velocity_expanded_u"] == pytest.approx(table.iloc[0]["velocity_expanded_u"])


def test_refused_drops_are_counted_but_not_averaged() -> None:
    rows = two_drops()
    rows[1] |= {"accepted": False, "flags": "accelerating;edge", "velocity": 0.05}
    row = lab_table(with_shares(rows), None).iloc[0]
    assert (row["drops"], row["accepted"], row["flags"]) == (2, 1, "accelerating;edge")
    assert row["velocity"] == pytest.approx(0.099)


def test_particle_without_an_accepted_drop_keeps_its_row() -> None:
    rows = [row | {"accepted": False, "flags": "near-wall"} for row in two_drops()]
    table = lab_table(with_shares(rows), None)
    assert list(table["accepted"]) == [0, 0]
    assert table["velocity"].isna().all()
    assert table["velocity_expanded_u"].isna().all()


def test_fluids_are_not_mixed() -> None:
    rows = two_drops()
    rows[1] |= {"fluid": "polymer", "velocity": 0.02}
    table = lab_table(with_shares(rows), None)
    assert list(zip(table["particle"], table["fluid"], table["velocity"], strict=True)) == [
        ("A-01", "glycerol", 0.099),
        ("A-01", "polymer", 0.02),
        ("", "glycerol", 0.099),
        ("", "polymer", 0.02),
    ]


def test_rows_come_by_lot_then_controls_then_lots_and_unnamed_falls_stay_out() -> None:
    rows = [*invented_drops(), drop(99)]
    table = lab_table(measured_of(rows), None)
    assert list(table["particle"]) == [f"{lot}-0{n}" for lot in "ABC" for n in range(1, 5)] + ["S-1", "S-2", "", "", ""]
    assert list(table["lot"])[-5:] == ["control", "control", "A", "B", "C"]
    assert list(table.columns) == list(LabRow.__dataclass_fields__)


def test_predictions_stand_beside_the_unbounded_velocity() -> None:
    measured = with_shares(two_drops())
    predictions = pd.DataFrame(
        {
            "drop": [1, 2, 1, 2],
            "method": ["ganser-1993", "ganser-1993", "power", "power"],
            "predicted_velocity": [0.1092, 0.1092, 0.103, 0.105],
        }
    )
    calibration = SimpleNamespace(
        predictions=predictions, best_published="ganser-1993", chosen=SimpleNamespace(name="power")
    )
    row = lab_table(measured, calibration).iloc[0]
    assert row["published_deviation"] == pytest.approx(0.1092 / 0.104 - 1)  # unbounded velocity of the drops: 0.104
    assert row["calibrated_velocity"] == pytest.approx(0.104)
    assert row["calibrated_deviation"] == pytest.approx(0.0)
    assert (row["published_method"], row["calibrated_method"]) == ("ganser-1993", "power")


def test_controls_are_compared_with_no_correlation() -> None:
    measured = measured_of(invented_drops())
    table = lab_table(measured, calibration_of(measured))
    controls = table[table["lot"] == "control"]
    assert np.isnan(controls["published_velocity"]).all()
    assert set(controls["published_method"]) == {""}


def test_empty_drop_table_gives_an_empty_lab_table() -> None:
    table = lab_table(measured_of([]), None)
    assert len(table) == 0
    assert list(table.columns) == list(LabRow.__dataclass_fields__)
