"""Terminal velocity of a million particles against a loop over the scalar solver of `fluids`, in the same process."""

from __future__ import annotations

import time

import fluids.drag
import numpy as np
from pytest_benchmark.fixture import BenchmarkFixture

from settlelab.physics.drag import DRAG, velocities_of_many

COUNT, SAMPLE = 1_000_000, 300


def test_many_against_a_scalar_loop(benchmark: BenchmarkFixture) -> None:
    draw = np.random.default_rng(7)
    diameter = np.exp(draw.uniform(np.log(3e-4), np.log(1e-2), COUNT))
    density = draw.uniform(2400, 2800, COUNT)
    law = DRAG["cheng-2009"].drag_coefficient
    found = benchmark(velocities_of_many, law, diameter=diameter, densities=(density, 1000.0), viscosity=1e-3)
    start = time.perf_counter()
    loop = [
        fluids.drag.v_terminal(D=d, rhop=rho, rho=1000.0, mu=1e-3, Method="Cheng")
        for d, rho in zip(diameter[:SAMPLE], density[:SAMPLE], strict=True)
    ]
    scaled = (time.perf_counter() - start) * COUNT / SAMPLE
    assert np.allclose(found[:SAMPLE], loop, rtol=1e-6)
    if benchmark.stats is not None:  # timed only where benchmarks are asked for
        assert scaled / benchmark.stats.stats.median > 200
