"""Studies that are not the sample: other recordings, numbers of drops, fluids, columns, cameras, light."""

from __future__ import annotations

from pathlib import Path

import pandas as pd
import pytest

from settlelab.simulate import random_study
from tests.end_to_end.truth import COVERAGE_FACTOR, beside_truth, drop_table, settlelab

LIMIT = {True: 0.005, False: 0.015}  # deviation in velocity allowed: control spheres, angular grains


def measured(folder: Path, truth: pd.DataFrame) -> pd.DataFrame:
    result = settlelab("run", folder, "--workers", 1)
    assert result.exit_code == 0, result.output
    return beside_truth(drop_table(folder / "results"), truth)


@pytest.mark.parametrize("seed", [11, 12])
def test_a_random_study_comes_back(seed: int, tmp_path: Path) -> None:
    drops = measured(tmp_path, random_study(tmp_path, seed, recordings=2))
    for control, group in drops.groupby("control"):
        assert group["deviation"].abs().max() < LIMIT[bool(control)]
    assert drops["accepted"].all(), drops.loc[~drops["accepted"], ["recording", "particle", "flags"]]


def test_results_do_not_depend_on_the_number_of_workers(tmp_path: Path) -> None:
    random_study(tmp_path, 13, recordings=2, drops=2)
    for workers in (1, 2):
        assert settlelab("run", tmp_path, "--out", tmp_path / f"with_{workers}", "--workers", workers).exit_code == 0
    one, two = (
        {path.relative_to(folder): path.read_bytes() for path in folder.rglob("*") if path.is_file()}
        for folder in (tmp_path / "with_1", tmp_path / "with_2")
    )
    assert one == two


@pytest.mark.slow
def test_stated_intervals_cover_the_truth(tmp_path: Path) -> None:
    """The 95 % interval of the velocity in the column holds the truth in 90 to 99 % of at least 60 drops.

    One recording a study: the drops of a study share the error of its scale, and would count as one.
    """
    parts = []
    for seed in range(100, 130):
        folder = tmp_path / str(seed)
        parts.append(measured(folder, random_study(folder, seed, recordings=1, drops=4)))
    drops = pd.concat(parts, ignore_index=True)
    assert len(drops) >= 60
    for control, group in drops.groupby("control"):
        assert group["deviation"].abs().max() < LIMIT[bool(control)]
    assert 0.90 <= (drops["score"].abs() <= COVERAGE_FACTOR).mean() <= 0.99
