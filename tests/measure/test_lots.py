"""Replicates and lots of a drop table whose scatter is known."""

from __future__ import annotations

import numpy as np
import pandas as pd
import pytest

from settlelab.measure import measure_study, scatter_of
from settlelab.study.model import Particle
from settlelab.units import Quantity
from tests.measure.invented import study, track, tracked


def drop_table(
    *, within: float = 0.01, between: float = 0.1, particles: int = 8, replicates: int = 3, drift: float = 0.0
) -> pd.DataFrame:
    """Drops of one lot in rounds: every particle once, then all again; seed fixed."""
    rng = np.random.default_rng(21)
    level = rng.normal(0, between, particles)
    number = np.arange(particles * replicates)
    log = level[number % particles] + rng.normal(0, within, len(number)) + drift * number
    return pd.DataFrame(
        {
            "drop": number + 1,
            "particle": [f"A-{n % particles:02d}" for n in number],
            "lot": "A",
            "fluid": "oil",
            "accepted": True,
            "control": False,
            "unbounded_velocity": 0.1 * np.exp(log),
        }
    )


def test_scatter_within_and_between_particles() -> None:
    scatter = scatter_of(drop_table(particles=40))
    assert scatter is not None
    row = scatter.lots.iloc[0]
    assert (row["particles"], row["drops"]) == (40, 120)
    assert row["within"] == pytest.approx(0.01, rel=0.2)
    assert row["between"] == pytest.approx(0.1, rel=0.25)
    assert row["repeatability_limit"] == pytest.approx(2.8 * row["within"])
    assert row["p_value"] < 1e-6


def test_a_drop_that_stands_out_is_marked_told_and_kept() -> None:
    drops = drop_table(replicates=5)
    drops.loc[drops["drop"] == 20, "unbounded_velocity"] *= 1.3
    scatter = scatter_of(drops)
    assert scatter is not None
    assert "20" in scatter.marks["drop"].tolist()
    assert any("drop 20 of particle A-03" in told and "it was kept" in told for told in scatter.told)
    assert scatter.lots["drops"].tolist() == [40]
    badly = scatter.marks[scatter.marks["test"].str.startswith("Cochran")]
    assert badly["particle"].tolist() == ["A-03"]


def test_a_particle_unlike_its_lot_is_marked() -> None:
    drops = drop_table()
    drops.loc[drops["particle"] == "A-05", "unbounded_velocity"] *= 2.5
    scatter = scatter_of(drops)
    assert scatter is not None
    assert scatter.marks.loc[scatter.marks["test"] == "Grubbs, particles of a lot", "particle"].tolist() == ["A-05"]


def test_a_warming_fluid_shows_as_drift() -> None:
    scatter = scatter_of(drop_table(drift=0.003))
    assert scatter is not None
    row = scatter.trends.iloc[0]
    assert abs(row["per_drop"] - 0.003) < 3 * row["per_drop_u"]
    assert any("oil: replicate drops become faster with drop order" in told for told in scatter.told)
    steady = scatter_of(drop_table())
    assert steady is not None
    assert steady.told == ()


def test_refused_drops_and_control_spheres_have_no_part() -> None:
    drops = drop_table()
    drops.loc[drops["drop"] <= 8, "accepted"] = False
    drops.loc[drops["particle"] == "A-07", "control"] = True
    scatter = scatter_of(drops)
    assert scatter is not None
    assert scatter.lots[["particles", "drops"]].to_numpy().tolist() == [[7, 14]]
    assert scatter_of(drops.assign(accepted=False)) is None


def test_fluids_and_lots_stand_apart() -> None:
    drops = pd.concat(
        [
            drop_table(),
            drop_table(within=0.02).assign(fluid="water"),
            drop_table().assign(lot="B", particle=lambda drops: "B" + drops["particle"]),
        ]
    )
    scatter = scatter_of(drops)
    assert scatter is not None
    assert scatter.lots[["lot", "fluid"]].to_numpy().tolist() == [
        ["A", "oil"],
        ["A", "water"],
        ["B", "oil"],
        ["all"] * 2,
    ]
    alone = scatter.lots["within"].to_numpy()
    assert alone[3] == pytest.approx(np.sqrt(np.mean(alone[:3] ** 2)))  # equal degrees of freedom


def test_a_measured_study_carries_it() -> None:
    grain = Particle(name="G", lot="A", mass=Quantity(5e-5, 1e-8), density=Quantity(2600.0, 5.0))
    falls = [track(0.100 + 0.001 * number, start=2.0 * number, seed=number) for number in range(4)]
    measured = measure_study(study(grain, drops=("G",) * 4), [tracked(*falls)])
    assert measured.scatter is not None
    assert measured.scatter.lots["drops"].tolist() == [4]
    assert measured.scatter.lots["within"].iloc[0] == pytest.approx(
        np.std(np.log([0.1, 0.101, 0.102, 0.103]), ddof=1), rel=0.05
    )
    assert any("become faster with drop order" in doubt for doubt in measured.doubts)
