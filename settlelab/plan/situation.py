"""One fluid before one camera in one column, and what is expected of a particle in it."""

from __future__ import annotations

import math
from dataclasses import dataclass, fields

from settlelab.measure.chain import Fallen, Setup, fallen
from settlelab.measure.controls import expected_velocity
from settlelab.measure.model import Velocity
from settlelab.measure.particle import Grain
from settlelab.physics.drag import DragLaw
from settlelab.physics.motion import Body, Medium, time_to_fraction
from settlelab.plan.film import Film
from settlelab.plan.laws import expected_law, settle, tabulated
from settlelab.plan.model import Aims, Planned
from settlelab.study.model import Column

__all__ = ["SCATTER", "Situation", "planned"]

# Measured approaches take up to 13 % longer than the equation of motion with the history force gives (Mordant & Pinton
# 2000, Eur. Phys. J. B 18, 343), and a grain seldom starts from rest as it should.
MARGIN = 1.5
NEARLY = 0.99
SCATTER = {"typed": 0.005, "": 0.02}  # relative standard deviation of replicate drops: spheres, grains
# Stirred-up liquid in a closed tube decays as exp(-26.37 nu t/R^2) (first axial mode without net flow, lab reference
# 4.5); it has to fall to a thousandth.
DECAY, THOUSANDTH = 26.37, math.log(1000)
CREEPING, NEWTON = 0.3, 1000.0  # ends of the regimes


@dataclass(frozen=True, slots=True, kw_only=True)
class Situation:
    """What a drop finds."""

    setup: Setup
    film: Film
    column: Column
    aims: Aims


def planned(name: str, grain: Grain, situation: Situation) -> Planned:
    """What is expected of a particle; where it cannot be told, `regime` says why and numbers are nan."""
    obstacle = _obstacle(grain, situation.setup)
    if obstacle:
        return _nothing(name, obstacle)
    setup, film = situation.setup, situation.film
    expected = expected_law(grain, setup.fluid)
    free = settle(expected.law, grain, setup.fluid)
    if bool(free.held):
        return _nothing(name, "held by the yield stress")
    velocity = expected_velocity(grain, setup, expected.law)
    track_u = film.track_u(velocity.value, grain)
    told = math.isfinite(track_u)  # else the scale is unknown, or no fall fits into the view
    measured = _measured(velocity.value, track_u if told else 0.0, grain, setup)
    cd = measured.drag_coefficient
    cd_u, shares = (cd.u, cd.shares) if told else (math.nan, {})
    time, distance = _run_up(
        grain, setup, tabulated(expected.law.drag, float(free.reynolds)), measured.wall_factor.value
    )
    return Planned(
        particle=name,
        velocity=velocity.value,
        velocity_u=velocity.u,
        reynolds=float(free.reynolds),
        regime=_regime(float(free.reynolds)),
        laws=", ".join(expected.names),
        in_range=expected.in_range,
        wall_factor=measured.wall_factor.value,
        run_up_time=MARGIN * time,
        run_up_distance=MARGIN * distance,
        size_px=film.size(grain.diameter),
        blur_px=film.blur(velocity.value),
        frames=film.frames(velocity.value, grain.diameter),
        drag_coefficient=cd.value,
        drag_coefficient_u=cd_u,
        main_source=max(shares, key=lambda source: shares[source]) if shares else "",
        drops=_drops(cd_u / cd.value, shares.get("track", 0.0), grain, situation.aims),
        waiting_time=_waiting(setup, velocity.value / grain.diameter),
    )


def _obstacle(grain: Grain, setup: Setup) -> str:
    """Why a particle gives no fall to plan for; empty if it does."""
    if not math.isfinite(grain.diameter) or not math.isfinite(grain.density):
        return "size unknown" if not math.isfinite(grain.diameter) else "density unknown"
    if grain.diameter >= setup.bore.diameter:
        return "wider than the column"
    return "does not sink" if grain.density <= setup.fluid.density else ""


def _nothing(name: str, why: str) -> Planned:
    empty = {field.name: math.nan for field in fields(Planned) if field.type == "float"}
    return Planned(particle=name, regime=why, laws="", in_range=False, main_source="", **empty)


def _measured(velocity: float, track_u: float, grain: Grain, setup: Setup) -> Fallen:
    """What the measurement of such a fall will give, by the code that measures."""
    seen = Velocity(value=velocity, u=track_u, fraction_of_terminal=1.0, first=0, last=0)
    return fallen(seen, grain, setup)


def _run_up(grain: Grain, setup: Setup, drag: DragLaw, wall_factor: float) -> tuple[float, float]:
    """Time and distance from rest to 99 % of terminal velocity."""
    body = Body(diameter=grain.diameter, density=grain.density)
    medium = Medium(density=setup.fluid.density, rheology=setup.fluid.rheology)
    return time_to_fraction(drag, body, medium, NEARLY, wall_factor=wall_factor)


def _regime(reynolds: float) -> str:
    if reynolds < CREEPING:
        return "creeping"
    return "intermediate" if reynolds < NEWTON else "Newton"


def _drops(relative_u: float, track_share: float, grain: Grain, aims: Aims) -> float:
    """Drops of one particle for the target; infinite where what drops share is too uncertain for it.

    The mean of n drops has u² = shared² + (track² + (2 s)²)/n, s the scatter of the velocity of replicates.
    """
    if not math.isfinite(relative_u):
        return math.nan
    scatter = aims.scatter if aims.scatter is not None else SCATTER.get(grain.diameter_from, SCATTER[""])
    own = track_share * relative_u**2
    room = (aims.target / 2) ** 2 - (relative_u**2 - own)
    return math.inf if room <= 0 else float(max(math.ceil((own + (2 * scatter) ** 2) / room), 1))


def _waiting(setup: Setup, shear_rate: float) -> float:
    """Time until the liquid has come to rest [s], with the apparent viscosity at the shear rate of the fall."""
    if math.isinf(setup.bore.diameter):
        return math.nan
    kinematic = float(setup.fluid.rheology.viscosity(shear_rate)) / setup.fluid.density
    return THOUSANDTH / DECAY * (setup.bore.diameter / 2) ** 2 / kinematic
