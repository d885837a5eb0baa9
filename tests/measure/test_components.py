"""Analysis of variance and outlier tests against certified and published numbers."""

from __future__ import annotations

import csv
from pathlib import Path

import numpy as np
import pytest
from scipy import stats

from settlelab.measure.components import cochran, drift, grubbs, one_way

REFERENCE = Path(__file__).parents[3] / "shared" / "reference"
needs_reference = pytest.mark.skipif(not REFERENCE.is_dir(), reason="the reference data lie beside the repository")

# ASTM E691, example glucose, material A: 8 laboratories, 3 results each, mg/dL (public data set, print from memory)
GLUCOSE = (
    (41.03, 41.45, 41.37), (41.17, 42.00, 41.15), (41.01, 40.68, 42.66), (39.37, 42.37, 42.63),
    (41.88, 41.19, 41.32), (43.28, 40.50, 42.28), (41.08, 41.27, 39.02), (43.36, 42.65, 41.72),
)  # fmt: skip


@needs_reference
@pytest.mark.parametrize("name", ["SiRstv", "AtmWtAg"])
def test_certified_analysis_of_variance(name: str) -> None:
    # NIST StRD, certified; the second breaks sums of squares taken in one pass
    with (REFERENCE / "nist_strd" / f"{name}.csv").open(encoding="utf-8") as file:
        rows = [tuple(map(float, row)) for row in list(csv.reader(file))[1:]]
    with (REFERENCE / "nist_strd" / "certified_anova.csv").open(encoding="utf-8") as file:
        certified = {row["quantity"]: float(row["certified"]) for row in csv.DictReader(file) if row["set"] == name}
    group, values = np.transpose(rows)
    found = one_way(values, group)
    digits = {"SiRstv": 1e-10, "AtmWtAg": 1e-7}[name]
    assert found.within**2 == pytest.approx(certified["within_mean_square"], rel=digits)
    assert found.f_ratio == pytest.approx(certified["f_statistic"], rel=digits)
    size = len(values) / found.groups
    assert found.between**2 * size + found.within**2 == pytest.approx(certified["between_mean_square"], rel=digits)
    assert found.p_value == pytest.approx(stats.f_oneway(*(values[group == g] for g in np.unique(group))).pvalue)


def test_voltage_standard_over_ten_days() -> None:
    # JCGM 100 H.5: daily means (V) and standard deviations (uV) of 5 readings each; print rounds F to 2.25
    means = 10 + 1e-6 * np.array([172, 116, 13, 144, 106, 31, 60, 125, 163, 41])
    deviations = 1e-6 * np.array([60, 77, 111, 101, 67, 93, 80, 73, 88, 86])
    pattern = np.array([-1, -0.5, 0, 0.5, 1]) / np.std([-1, -0.5, 0, 0.5, 1], ddof=1)
    values = means[:, None] + deviations[:, None] * pattern
    found = one_way(values.ravel(), np.repeat(np.arange(10), 5))
    assert found.within == pytest.approx(85e-6, abs=0.5e-6)
    assert found.between == pytest.approx(43e-6, abs=0.5e-6)
    assert found.f_ratio == pytest.approx(2.26, abs=0.01)
    assert found.mean_u == pytest.approx(18e-6, abs=0.5e-6)  # 57 uV over the root of 10
    assert 0.025 < found.p_value < 0.05  # critical values 2.12 (5 %) and 2.45 (2.5 %)


def test_repeatability_of_the_glucose_example() -> None:
    found = one_way(np.ravel(GLUCOSE), np.repeat(np.arange(8), 3))
    assert found.mean == pytest.approx(41.5183, abs=5e-5)
    assert found.within == pytest.approx(1.0632, abs=5e-5)
    assert found.repeatability_limit == pytest.approx(2.98, abs=0.005)
    assert found.between == 0.0  # laboratories scatter no more than repeatability explains


def test_groups_of_unequal_size_by_simulation() -> None:
    rng = np.random.default_rng(11)
    sizes = [1, 2, 3, 5, 2, 4]
    group = np.repeat(np.arange(6), sizes)
    found = [one_way(rng.normal(0, 0.2, 6)[group] + rng.normal(0, 0.05, len(group)), group) for _ in range(1500)]
    assert np.mean([each.within**2 for each in found]) == pytest.approx(0.05**2, rel=0.05)
    assert np.mean([each.between**2 for each in found]) == pytest.approx(0.2**2, rel=0.06)
    spread = np.std([each.mean for each in found])
    assert np.sqrt(np.mean([each.mean_u**2 for each in found])) == pytest.approx(spread, rel=0.06)


def test_without_replicates_the_scatters_are_not_told_apart() -> None:
    found = one_way([1.0, 2.0, 4.0], ["a", "b", "c"])
    assert np.isnan(found.within)
    assert found.between == pytest.approx(np.std([1, 2, 4], ddof=1))


def test_one_group_has_a_repeatability_only() -> None:
    found = one_way([1.0, 2.0, 4.0], ["a", "a", "a"])
    assert found.within == pytest.approx(np.std([1, 2, 4], ddof=1))
    assert np.isnan(found.between)


# ISO 5725-2, tables of critical values, from memory: groups, replicates, 5 % and 1 % points
GRUBBS = [(6, 0, 1.887, 1.973), (8, 0, 2.126, 2.274), (10, 0, 2.290, 2.482), (20, 0, 2.709, 3.001)]
COCHRAN = [(8, 2, 0.680, 0.794), (5, 3, 0.684, 0.789), (8, 3, 0.516, 0.615), (10, 3, 0.445, 0.536)]


@pytest.mark.parametrize("row", GRUBBS, ids=str)
def test_grubbs_critical_values(row: tuple[float, ...]) -> None:
    found = grubbs(np.arange(row[0]))
    assert found is not None
    assert found.critical_straggler == pytest.approx(row[2], abs=1e-3)
    assert found.critical_outlier == pytest.approx(row[3], abs=1e-3)


@pytest.mark.parametrize("row", COCHRAN, ids=str)
def test_cochran_critical_values(row: tuple[float, ...]) -> None:
    found = cochran(np.arange(1, row[0] + 1), int(row[1]))
    assert found is not None
    assert found.critical_straggler == pytest.approx(row[2], abs=1e-3)
    assert found.critical_outlier == pytest.approx(row[3], abs=1e-3)


def test_outliers_are_found_and_normal_values_are_not() -> None:
    values = [10.1, 10.0, 9.9, 10.05, 9.95, 10.02, 11.5]
    found = grubbs(values)
    assert found is not None
    assert (found.index, found.mark) == (6, "outlier")
    within = grubbs(values[:-1])
    assert within is not None
    assert within.mark == ""
    largest = cochran([0.1, 0.12, 0.09, 0.11, 0.9], 3)
    assert largest is not None
    assert (largest.index, largest.mark) == (4, "outlier")
    assert grubbs([1.0, 1.0, 1.0]) is None
    assert cochran([0.0, 0.0], 2) is None


def test_marks_come_by_chance_as_often_as_stated() -> None:
    rng = np.random.default_rng(3)
    marks = [found.mark for found in map(grubbs, rng.standard_normal((2000, 7))) if found is not None]
    assert marks.count("outlier") / 2000 == pytest.approx(0.01, abs=0.007)
    assert (marks.count("outlier") + marks.count("straggler")) / 2000 == pytest.approx(0.05, abs=0.015)


def test_drift_common_to_groups() -> None:
    rng = np.random.default_rng(4)
    group = np.tile(np.arange(5), 4)
    order = np.arange(20)
    values = np.array([0.1, 0.5, -0.3, 0.0, 0.2])[group] + 0.004 * order + rng.normal(0, 0.003, 20)
    found = drift(values, order, group)
    assert found is not None
    assert abs(found.slope - 0.004) < 3 * found.u
    assert found.p_value < 1e-6
    assert drift(values, group, group) is None  # all drops of a particle at one time tell nothing
    chance = [drift(rng.standard_normal(20), order, group) for _ in range(1000)]
    assert np.mean([each.p_value < 0.05 for each in chance if each is not None]) == pytest.approx(0.05, abs=0.025)
