"""Terminal velocity: balance, worked examples in print, yield stress, several roots."""

from __future__ import annotations

from functools import partial

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from settlelab.physics.drag import (
    CRITICAL_YIELD_NUMBER,
    DRAG,
    DragLaw,
    creeping_correction,
    drag_coefficient_from_velocity,
    generalised_reynolds,
    power_law_correction,
    terminal_velocity,
)
from settlelab.physics.rheology import Rheology
from tests.physics.outside import published

CHENG = DRAG["cheng-2009"].drag_coefficient
STOKES = DRAG["stokes-1851"].drag_coefficient
WATER = Rheology(consistency=1e-3)


# Laws of worked examples that are not on board.
OTHERS = {
    "24/Re (1 + 0.14 Re^0.7)": lambda reynolds: 24 / reynolds * (1 + 0.14 * reynolds**0.7),
    "0.2924 (1 + 9.06/sqrt(Re))^2": lambda reynolds: 0.2924 * (1 + 9.06 / np.sqrt(reynolds)) ** 2,
}


def law(row: dict[str, str]) -> DragLaw:
    if row["law"] in OTHERS:
        return OTHERS[row["law"]]
    descriptors = {name: float(row[name]) for name in DRAG[row["law"]].needs}
    return partial(DRAG[row["law"]].drag_coefficient, **descriptors)


@pytest.mark.parametrize("row", published("terminal_velocities.csv"), ids=lambda row: f"{row['law']}-{row['value']}")
def test_worked_example(row: dict[str, str]) -> None:
    settling = terminal_velocity(
        law(row),
        diameter=float(row["diameter"]),
        particle_density=float(row["particle_density"]),
        fluid_density=float(row["fluid_density"]),
        rheology=Rheology(consistency=float(row["viscosity"])),
        gravity=float(row["gravity"]),
    )
    found = getattr(settling, row["quantity"])
    assert found == pytest.approx(float(row["value"]), abs=float(row["half_digit"])), row["source"]


@given(
    diameter=st.floats(1e-5, 5e-2),
    particle_density=st.floats(800, 8000),
    fluid_density=st.floats(900, 2200),
    consistency=st.floats(1e-4, 10),
    flow_index=st.floats(0.2, 1.2),
    yield_share=st.floats(0, 0.9),
)
def test_drag_balances_weight(
    diameter: float,
    particle_density: float,
    fluid_density: float,
    consistency: float,
    flow_index: float,
    yield_share: float,
) -> None:
    difference = particle_density - fluid_density
    limit = CRITICAL_YIELD_NUMBER * 9.80665 * diameter * abs(difference)
    mud = Rheology(consistency=consistency, flow_index=flow_index, yield_stress=yield_share * limit)
    settling = terminal_velocity(
        CHENG, diameter=diameter, particle_density=particle_density, fluid_density=fluid_density, rheology=mud
    )
    if abs(difference) < 1e-6:
        return
    assert not settling.held
    assert np.sign(settling.velocity) == np.sign(difference)
    speed = abs(settling.velocity)
    reynolds = fluid_density * speed * diameter / mud.viscosity(speed / diameter)
    assert settling.reynolds == pytest.approx(reynolds, rel=1e-12)
    cd = CHENG(reynolds / creeping_correction(speed, diameter=diameter, rheology=mud))
    force = cd * fluid_density * speed**2 / 2 * np.pi / 4 * diameter**2
    assert force == pytest.approx(np.pi / 6 * diameter**3 * abs(difference) * 9.80665, rel=1e-9, abs=0)
    assert settling.drag_coefficient == pytest.approx(cd, rel=1e-9)


def test_stokes_velocity() -> None:
    settling = terminal_velocity(
        STOKES, diameter=1e-4, particle_density=2650, fluid_density=1000, rheology=Rheology(consistency=1.0)
    )
    assert settling.velocity == pytest.approx(9.80665 * 1650 * 1e-8 / 18, rel=1e-10)  # g (rho_s - rho) d^2 / (18 mu)


def test_power_law_creeping_velocity() -> None:
    """Drag X 3 pi K V^n d^(2-n) against the weight, solved by hand for V; X(0.5) = 1.476 (reference sheet)."""
    mud = Rheology(consistency=2.0, flow_index=0.5)
    settling = terminal_velocity(STOKES, diameter=2e-3, particle_density=2500, fluid_density=1000, rheology=mud)
    by_hand = (1500 * 9.80665 * (2e-3) ** 1.5 / (18 * 1.476 * 2.0)) ** 2
    assert settling.velocity == pytest.approx(by_hand, rel=2e-4)


def test_explicit_solution_of_the_same_paper() -> None:
    """Cheng (2009) gives an explicit velocity too (from memory): within 1 % in Re up to Ar 1e6, reference sheet."""
    for archimedes in (1e0, 1e1, 1e3, 1e5):
        dstar = archimedes ** (1 / 3)
        cd = 432 / dstar**3 * (1 + 0.022 * dstar**3) ** 0.54 + 0.47 * (1 - np.exp(-0.15 * dstar**0.45))
        settling = terminal_velocity(
            CHENG,
            diameter=1e-2,
            particle_density=2000,
            fluid_density=1000,
            rheology=_viscosity(archimedes),
            gravity=1.0,
        )
        assert settling.reynolds == pytest.approx(np.sqrt(4 * archimedes / (3 * cd)), rel=0.02)


def _viscosity(archimedes: float) -> Rheology:
    """The fluid in which a sphere of 1 cm, twice as dense, has this Archimedes number at unit gravity."""
    return Rheology(consistency=1000 * np.sqrt(1e-6 / archimedes))


@pytest.mark.parametrize(
    ("archimedes", "reynolds"), [(1, 0.055), (18, 0.893), (1e2, 3.99), (1e3, 23.1), (1e4, 115), (1e5, 489), (1e6, 1762)]
)
def test_standard_curve(archimedes: float, reynolds: float) -> None:
    """Reynolds numbers on the standard curve, computed apart in the reference sheet."""
    settling = terminal_velocity(
        DRAG["clift-grace-weber-1978"].drag_coefficient,
        diameter=1e-2,
        particle_density=2000,
        fluid_density=1000,
        rheology=_viscosity(archimedes),
        gravity=1.0,
    )
    assert settling.reynolds == pytest.approx(reynolds, rel=4e-3)


def test_jump_and_gap_of_the_standard_curve() -> None:
    """Around Re 20 the curve leaves a gap in Cd Re^2; the answer is then 20 (reference sheet)."""
    law = DRAG["clift-grace-weber-1978"].drag_coefficient
    products = law(np.array([20.0, 20.0 * (1 + 1e-12)])) * 400
    assert products[1] > products[0]
    settling = terminal_velocity(
        law,
        diameter=1e-2,
        particle_density=2000,
        fluid_density=1000,
        rheology=_viscosity(0.75 * products.mean()),
        gravity=1.0,
    )
    assert settling.reynolds == pytest.approx(20, rel=1e-9)


def test_slowest_of_several_roots() -> None:
    """In the drag crisis one weight belongs to three velocities: the slowest is below the crisis."""
    law = DRAG["clift-grace-weber-1978"].drag_coefficient
    reynolds = np.geomspace(1e5, 1e6, 4000)
    target = law(np.array(3.3e5)) * 3.3e5**2
    crossings = np.flatnonzero(np.diff(np.sign(law(reynolds) * reynolds**2 - target)))
    assert crossings.size == 3
    settling = terminal_velocity(
        law, diameter=1e-2, particle_density=2000, fluid_density=1000, rheology=_viscosity(0.75 * target), gravity=1.0
    )
    assert settling.reynolds == pytest.approx(3.3e5, rel=1e-6)
    above = terminal_velocity(
        law, diameter=1e-2, particle_density=2000, fluid_density=1000, rheology=_viscosity(1.5 * target), gravity=1.0
    )
    assert above.reynolds > 4e5


@pytest.mark.parametrize("flow_index", [0.3, 0.6, 1.0])
def test_yield_stress_holds_at_the_critical_number(flow_index: float) -> None:
    """Beris et al. (1985), abstract: 2 pi r^2 tau0 / weight in fluid = 0.143."""
    diameter, difference = 3e-3, 1400.0
    critical = 0.143 * (np.pi / 6 * diameter**3 * difference * 9.80665) / (2 * np.pi * (diameter / 2) ** 2)
    tau0 = critical * np.array([0.5, 0.999, 1.001, 2.0])
    mud = Rheology(consistency=0.5, flow_index=flow_index, yield_stress=tau0)
    settling = terminal_velocity(CHENG, diameter=diameter, particle_density=2500, fluid_density=1100, rheology=mud)
    assert settling.held.tolist() == [False, False, True, True]
    assert settling.velocity[2:].tolist() == [0.0, 0.0]
    assert np.all(np.isnan(settling.drag_coefficient[2:]))
    assert settling.velocity[1] < 0.02 * settling.velocity[0]  # no jump: it comes to rest as the limit is neared


@pytest.mark.parametrize(
    ("flow_index", "bingham", "drag_ratio"),
    [
        (1, 0.1, 1.712),
        (1, 1, 3.995),
        (1, 10, 18.05),
        (1, 100, 133.4),
        (0.5, 0.1, 1.72),
        (0.5, 1, 3.24),
        (0.5, 10, 14.9),
    ],
)
def test_creeping_drag_with_yield_stress(flow_index: float, bingham: float, drag_ratio: float) -> None:
    """Variational solutions of the reference sheet: Cd Re_n/24 with Re_n on the consistency alone."""
    diameter, velocity = 2e-3, 1e-3
    rate = velocity / diameter
    mud = Rheology(consistency=1.0, flow_index=flow_index, yield_stress=bingham * rate**flow_index)
    correction = creeping_correction(velocity, diameter=diameter, rheology=mud)
    assert correction * (1 + bingham) == pytest.approx(drag_ratio, rel=0.045)


@pytest.mark.parametrize(
    ("flow_index", "correction"),
    [(1.0, 1.0), (0.9, 1.138), (0.8, 1.258), (0.7, 1.355), (0.5, 1.476), (0.3, 1.485), (0.1, 1.344)],
)
def test_power_law_correction(flow_index: float, correction: float) -> None:
    """Finite elements (n 0.3 to 0.9) and a variational solution (0.1) of the reference sheet."""
    assert power_law_correction(flow_index) == pytest.approx(correction, abs=0.0015)


def test_power_law_correction_between_the_nodes() -> None:
    """Gu & Tanner (1985) as tabulated by Chhabra, from memory: 1 to 4 % lower, the trend is the same."""
    assert power_law_correction(0.75) == pytest.approx((1.258 + 1.356) / 2, abs=0.004)
    assert power_law_correction(1.05) < 1 < power_law_correction(0.95)


def test_rising_and_still() -> None:
    settling = terminal_velocity(CHENG, diameter=1e-3, particle_density=[950, 1000], fluid_density=1000, rheology=WATER)
    assert settling.velocity[0] < 0
    assert settling.velocity[1] == 0
    assert settling.reynolds[1] == 0
    assert not np.any(settling.held)


def test_shapes_and_nan() -> None:
    settling = terminal_velocity(
        CHENG,
        diameter=[[1e-3], [np.nan]],
        particle_density=[2000.0, 3000.0, np.nan],
        fluid_density=1000,
        rheology=WATER,
    )
    assert settling.velocity.shape == settling.held.shape == (2, 3)
    assert np.isfinite(settling.velocity).tolist() == [[True, True, False], [False, False, False]]
    single = terminal_velocity(CHENG, diameter=1e-3, particle_density=3000, fluid_density=1000, rheology=WATER)
    assert single.velocity == settling.velocity[0, 1]


def test_impossible_inputs() -> None:
    with pytest.raises(ValueError, match="diameters and densities must be above 0"):
        terminal_velocity(CHENG, diameter=0.0, particle_density=2000, fluid_density=1000, rheology=WATER)
    thickening = Rheology(consistency=1.0, flow_index=2.0)
    with pytest.raises(ValueError, match="flow index must be below 2"):
        terminal_velocity(CHENG, diameter=1e-3, particle_density=2000, fluid_density=1000, rheology=thickening)


def test_drag_coefficient_from_velocity_is_the_inverse() -> None:
    settling = terminal_velocity(CHENG, diameter=2e-3, particle_density=2650, fluid_density=1000, rheology=WATER)
    cd = drag_coefficient_from_velocity(settling.velocity, diameter=2e-3, particle_density=2650, fluid_density=1000)
    assert cd == pytest.approx(CHENG(settling.reynolds), rel=1e-9)
    assert np.isnan(drag_coefficient_from_velocity(0.0, diameter=2e-3, particle_density=2650, fluid_density=1000))


def test_generalised_reynolds() -> None:
    mud = Rheology(consistency=0.8, flow_index=0.6)
    reynolds = generalised_reynolds([0.1, -0.1, 0.0, np.nan], diameter=5e-3, fluid_density=1100, rheology=mud)
    by_hand = 1100 * 0.1**1.4 * 5e-3**0.6 / 0.8  # rho V^(2-n) d^n / K
    assert reynolds == pytest.approx([by_hand, by_hand, 0.0, np.nan], rel=1e-12, nan_ok=True)


@pytest.mark.parametrize("name", ["almedeij-2008", "barati-2014-eq23", "clift-grace-weber-1978", "perry-three-piece"])
def test_drag_crisis_gives_the_slowest_balance_and_tells_of_others(name: str) -> None:
    """Against a plain scan: every sign change of Cd Re^2 - 4/3 Ar on a fine grid of Reynolds numbers."""
    law = DRAG[name].drag_coefficient
    reynolds = np.geomspace(1e4, 2e6, 200_000)
    product = law(reynolds) * reynolds**2
    for archimedes in np.geomspace(2e9, 3e10, 12):
        crossings = reynolds[1:][np.diff(np.sign(product - 4 / 3 * archimedes)) != 0]
        settling = terminal_velocity(
            law, diameter=1e-2, particle_density=2000, fluid_density=1000, rheology=_viscosity(archimedes), gravity=1.0
        )
        assert settling.reynolds == pytest.approx(crossings[0], rel=1e-4)
        gap = (
            crossings.size > 1
            and product[np.searchsorted(reynolds, crossings[0]) + 1 :].min()
            < 0.9 * product[np.searchsorted(reynolds, crossings[0])]
        )
        if gap:  # wide enough for the steps of the search
            assert settling.several


def test_ordinary_falls_have_one_balance() -> None:
    settling = terminal_velocity(
        DRAG["clift-grace-weber-1978"].drag_coefficient,
        diameter=[1e-4, 5e-3, 2e-2, np.nan],
        particle_density=2650,
        fluid_density=1000,
        rheology=WATER,
    )
    assert settling.several.tolist() == [False] * 4


def test_jump_of_a_law_in_pieces() -> None:
    """moore-1974 falls by 5 % at Re 3: weights between its two branches balance on one of them, or at the jump."""
    law = DRAG["moore-1974"].drag_coefficient
    for archimedes in (85.0, 88.0, 92.0):
        settling = terminal_velocity(
            law, diameter=1e-2, particle_density=2000, fluid_density=1000, rheology=_viscosity(archimedes), gravity=1.0
        )
        assert 2.8 < settling.reynolds < 3.2
