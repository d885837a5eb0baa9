"""Bench readings: errors as large as stated, texts as people type them."""

from __future__ import annotations

import re

import numpy as np
import pytest

from settlelab.physics.liquids import LIQUIDS, glycerol_water_viscosity
from settlelab.physics.rheology import Rheology
from settlelab.simulate import Particle, Sphere, cuttings, glycerol_water
from settlelab.simulate.bench import PARTICLE_HEADINGS, Bench, decimals
from settlelab.simulate.lots import SHALE
from settlelab.units import parse_quantity


@pytest.mark.parametrize(("u", "places"), [(0.05, 3), (0.3, 2), (8.0, 1), (0.00016, 5), (25.0, 0)])
def test_uncertainty_is_shown_with_two_digits(u: float, places: int) -> None:
    assert decimals(u) == places


@pytest.mark.parametrize("expanded", [False, True])
def test_readings_scatter_by_the_uncertainty_that_they_state(expanded: bool) -> None:
    bench = Bench(np.random.default_rng(1))
    texts = [bench.read(4e-3, 5e-5, "mm", 1e3, expanded=expanded) for _ in range(2000)]
    read = [parse_quantity(text, "m") for text in texts]
    assert {round(quantity.u, 12) for quantity in read} == {5e-5}
    values = np.array([quantity.value for quantity in read])
    assert values.mean() == pytest.approx(4e-3, abs=4 * 5e-5 / np.sqrt(2000))
    assert values.std() == pytest.approx(5e-5, rel=0.06)
    assert texts[0].endswith("± 0.100 mm (k=2)" if expanded else "± 0.050 mm")


def test_a_scale_is_found_once_for_all_recordings() -> None:
    bench = Bench(np.random.default_rng(1))
    assert bench.scale(2e-4) == bench.scale(2e-4) != bench.scale(1.6e-4)
    assert bench.bore(0.1) == bench.bore(0.1)


def test_particle_row_holds_mass_density_and_ordered_axes() -> None:
    bench = Bench(np.random.default_rng(1))
    ball = Particle(name="K", body=Sphere(3e-3), density=2500.0)
    for _ in range(20):  # equal axes: the readings come in any order
        row = bench.particle_row(ball)
        assert len(row) == len(PARTICLE_HEADINGS)
        assert float(row[5]) >= float(row[6]) >= float(row[7])
        assert float(row[2]) == pytest.approx(2500 * np.pi / 6 * 0.003**3 * 1e6, abs=2.0)  # mg
    assert re.fullmatch(r"2\d{3}\.\d ± 8\.0", row[4])


def test_viscometer_reads_the_flow_curve_in_degrees() -> None:
    bench = Bench(np.random.default_rng(1))
    rows = bench.viscometer_rows(Rheology(consistency=0.5, flow_index=0.6))
    speed, dial = np.array([[float(cell) for cell in row[:2]] for row in rows]).T
    # R1B1: 1.7023 1/s per rpm, 0.5107 Pa per degree (lab reference 7.3)
    expected = 0.5 * (speed * 1.7023) ** 0.6 / 0.5107
    assert list(speed) == [600, 300, 200, 100, 60, 30, 6, 3]
    assert dial == pytest.approx(expected, abs=4 * 0.3)


def test_real_mixtures_miss_the_published_equation_by_its_uncertainty() -> None:
    rng = np.random.default_rng(3)
    equation = float(glycerol_water_viscosity(0.6, 295.0))
    drawn = [float(glycerol_water("g", 0.6, 295.0, rng).liquid.rheology.consistency) for _ in range(800)]
    assert np.std(np.array(drawn) / equation) == pytest.approx(LIQUIDS["cheng-2008"].relative_u, rel=0.1)


def test_lot_has_its_sizes_densities_and_shapes() -> None:
    grains = cuttings(SHALE, 12, np.random.default_rng(9))
    sizes = sorted(grain.body.equivalent_diameter for grain in grains)
    assert sizes == pytest.approx(np.linspace(*SHALE.size, 12))
    assert [grain.name for grain in grains[:2]] == ["B-01", "B-02"]
    assert np.mean([grain.density for grain in grains]) == pytest.approx(SHALE.density, rel=0.006)
    assert np.mean([grain.body.axes[2] / grain.body.axes[1] for grain in grains]) < 0.55  # platy
    only = cuttings(SHALE, 1, np.random.default_rng(9))[0]
    assert only.body.equivalent_diameter == pytest.approx(np.mean(SHALE.size))
