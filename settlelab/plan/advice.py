"""Verdicts on a setup: how it stands, and what to change where it does not do."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import Literal

import numpy as np

from settlelab.measure.particle import Grain
from settlelab.measure.velocity import FEWEST
from settlelab.physics.walls import wall_factor
from settlelab.plan.model import Planned, Verdict
from settlelab.plan.situation import Situation
from settlelab.report.numbers import significant

__all__ = ["verdicts"]

STRONG_WALL, TOO_STRONG_WALL = 0.10, 0.30  # loss of velocity to the wall
SMALL, TOO_SMALL = 10.0, 5.0  # px: below, the silhouette says little of size, or is lost among specks
BLURRED = 0.25  # of the size; more is flagged `blurred`
FEW_FRAMES = 20.0  # below, a swing or an approach to terminal velocity cannot be told from noise
LOST, TOO_LOST = 0.3, 0.6  # of the view, before terminal velocity is reached
LONG_WAIT = 300.0  # s
IMPROVE = {
    "scale": "two marks further apart in the plane of fall",
    "clock": "film a timer and state the true frame rate with its uncertainty",
    "size": "a finer balance, or calipers where nothing was weighed",
    "particle density": "a pycnometer reading with more grains",
    "fluid density": "a weighed density of the fluid",
    "viscosity": "a viscosity measured on the day",
    "temperature": "a better thermometer, and a fluid at rest with the room",
    "mass fraction": "density and viscosity measured instead of computed",
    "bore": "the bore measured with an inside caliper",
    "walls": "a wider column",
    "track": "a higher view, or more frames in it",
}


@dataclass(frozen=True, slots=True)
class _Case:
    """A setup with the particles that fall in it."""

    rows: list[Planned]
    grains: Mapping[str, Grain]
    situation: Situation

    def diameter(self, row: Planned) -> float:
        return self.grains[row.particle].diameter

    def blur(self, row: Planned) -> float:
        """Motion blur over the size."""
        return row.velocity * self.situation.film.exposure / self.diameter(row)


def verdicts(rows: list[Planned], grains: Mapping[str, Grain], situation: Situation) -> tuple[Verdict, ...]:
    """Every verdict on a setup, in the order of the work.

    Parameters
    ----------
    rows : list of Planned
        One per particle.
    grains : mapping
        The particles by name.
    situation : Situation
        Column, fluid, camera, aims.
    """
    falling = [row for row in rows if math.isfinite(row.velocity)]
    found = [_particles(rows)]
    if falling:
        case = _Case(falling, grains, situation)
        found += [check(case) for check in CHECKS]
    return tuple(verdict for verdict in found if verdict is not None)


def _particles(rows: list[Planned]) -> Verdict | None:
    lost = [row for row in rows if not math.isfinite(row.velocity)]
    if not lost:
        return None
    told = "; ".join(f"{row.particle}: {row.regime}" for row in lost)
    return Verdict("bad", "particles", f"{told}. Weigh or measure what is unknown; a fluid must be lighter and yield.")


def _laws(case: _Case) -> Verdict | None:
    outside = [row.particle for row in case.rows if not row.in_range]
    if not outside:
        return None
    bare = all("cheng" in row.laws for row in case.rows if not row.in_range)
    change = "measure three axes or the sphericity" if bare else "expect larger deviations"
    return Verdict("doubt", "prediction", f"{_some(outside)}: no law for the shape inside its range; {change}.")


def _walls(case: _Case) -> Verdict | None:
    bore = case.situation.setup.bore.diameter
    if math.isinf(bore):
        return Verdict("doubt", "walls", "The inner size of the column is not stated: no wall correction can be made.")
    worst = min(case.rows, key=lambda row: row.wall_factor)
    loss = 1 - worst.wall_factor
    told = f"The wall takes up to {significant(100 * loss, 2)} % of the velocity ({worst.particle})"
    if loss <= STRONG_WALL:
        return Verdict("good", "walls", f"{told}; the correction is good.")
    wider = _wide_enough(case.diameter(worst), worst.reynolds, case.situation)
    change = (
        f"a column {1e3 * wider:.0f} mm wide brings that to {100 * STRONG_WALL:.0f} %"
        if wider
        else "no column would do, change the fluid"
    )
    return Verdict("bad" if loss > TOO_STRONG_WALL else "doubt", "walls", f"{told}: {change}.")


def _wide_enough(diameter: float, reynolds: float, situation: Situation) -> float:
    """The bore at which the wall takes no more than a tenth [m]; 0 where even a 50 times wider one would not do."""
    bores = situation.setup.bore.diameter * np.geomspace(1, 50, 400)
    _, flow_index, _ = situation.setup.fluid.rheology.arrays()
    factors = wall_factor(diameter / bores, reynolds, flow_index=flow_index).factor
    enough = np.flatnonzero(1 - factors <= STRONG_WALL)
    return float(bores[enough[0]]) if enough.size else 0.0


def _run_up(case: _Case) -> Verdict | None:
    worst = max(case.rows, key=lambda row: row.run_up_distance)
    told = (
        f"99 % of terminal velocity within {significant(1e3 * worst.run_up_distance, 2)} mm and "
        f"{significant(worst.run_up_time, 2)} s ({worst.particle}, margin of 1.5 included)"
    )
    height, bore, view = case.situation.column.height, case.situation.setup.bore.diameter, case.situation.film.view
    if height is None or not math.isfinite(view) or math.isinf(bore):
        return Verdict("good", "run-up", f"{told}: release that far above the view or further.")
    path = max(height.value - bore, 0.0)  # the last bore above the bottom is not measured
    seen, steady = min(view, path), max(path - worst.run_up_distance, 0.0)
    if steady >= seen:
        return Verdict("good", "run-up", f"{told}; released at the top, the fall is steady in the whole view.")
    told = f"{told}; released at the top, the fall is steady over {1e3 * steady:.0f} of {1e3 * seen:.0f} mm in view"
    if steady >= (1 - LOST) * seen:
        return Verdict("good", "run-up", f"{told}.")
    mark: Literal["doubt", "bad"] = "doubt" if steady >= (1 - TOO_LOST) * seen else "bad"
    return Verdict(mark, "run-up", f"{told}: a taller column, a lower view, or a thicker fluid.")


def _size(case: _Case) -> Verdict | None:
    worst = min(case.rows, key=lambda row: row.size_px)
    if not math.isfinite(worst.size_px):
        return Verdict(
            "doubt", "size", "The scale of the camera is not known yet: state mm_per_px to plan the picture."
        )
    told = f"Particles are {significant(worst.size_px, 2)} px across and more ({worst.particle})"
    if worst.size_px >= SMALL:
        return Verdict("good", "size", f"{told}.")
    scale = case.diameter(worst) / SMALL
    change = f"lens nearer, to {significant(1e3 * scale, 2)} mm/px or less"
    return Verdict("bad" if worst.size_px < TOO_SMALL else "doubt", "size", f"{told}: {change}.")


def _blur(case: _Case) -> Verdict | None:
    longest = min(BLURRED * case.diameter(row) / row.velocity for row in case.rows)
    limit = f"{significant(1e3 * longest, 2)} ms"
    if not math.isfinite(case.situation.film.exposure):
        return Verdict("doubt", "blur", f"The exposure is not stated; {limit} or shorter keeps blur below a quarter.")
    worst = max(case.rows, key=case.blur)
    px = f"{significant(worst.blur_px, 2)} px, " if math.isfinite(worst.blur_px) else ""
    told = f"Motion blur up to {px}{significant(100 * case.blur(worst), 2)} % of the size ({worst.particle})"
    if case.blur(worst) <= BLURRED:
        return Verdict("good", "blur", f"{told}.")
    return Verdict("doubt", "blur", f"{told}: shorter exposure, {limit} or less, with more light.")


def _frames(case: _Case) -> Verdict | None:
    worst = min(case.rows, key=lambda row: row.frames)
    if not math.isfinite(worst.frames):
        return None
    told = f"{worst.frames:.0f} frames or more of each fall ({worst.particle})"
    if worst.frames >= FEW_FRAMES:
        return Verdict("good", "frames", f"{told}.")
    if worst.frames == 0:
        return Verdict("bad", "frames", f"{worst.particle} is larger than the view: lens further away.")
    rate = case.situation.film.frame_rate * FEW_FRAMES / worst.frames
    change = f"{significant(rate, 2)} Hz or more, lens further away, or a thicker fluid"
    return Verdict("bad" if worst.frames < FEWEST else "doubt", "frames", f"{told}, too few: {change}.")


def _uncertainty(case: _Case) -> Verdict | None:
    known = [row for row in case.rows if math.isfinite(row.drag_coefficient_u)]
    if not known:
        return None
    worst = max(known, key=lambda row: row.drag_coefficient_u / row.drag_coefficient)
    expanded, target = 200 * worst.drag_coefficient_u / worst.drag_coefficient, 100 * case.situation.aims.target
    told = (
        f"U(Cd) of one drop up to {significant(expanded, 2)} % (k = 2, {worst.particle}), most of it from "
        f"{worst.main_source}"
    )
    if expanded <= target:
        return Verdict("good", "uncertainty", f"{told}; the target is {significant(target, 2)} %.")
    return Verdict("doubt", "uncertainty", f"{told}: {IMPROVE[worst.main_source]}.")


def _drops(case: _Case) -> Verdict | None:
    target = f"U(Cd) of {significant(100 * case.situation.aims.target, 2)} % for the mean of a particle"
    never = [row.particle for row in case.rows if math.isinf(row.drops)]
    if never:
        return Verdict("bad", "drops", f"{target} is out of reach of {_some(never)}, however many drops: see above.")
    known = [row for row in case.rows if math.isfinite(row.drops)]
    if not known:
        return None
    worst = max(known, key=lambda row: row.drops)
    count = "1 drop" if worst.drops == 1 else f"{worst.drops:.0f} drops"
    most = f" ({worst.particle} needs most)" if worst.drops > min(row.drops for row in known) else ""
    return Verdict("good", "drops", f"{target} takes {count} of each{most}.")


def _waiting(case: _Case) -> Verdict | None:
    longest = max(case.rows, key=lambda row: row.waiting_time)
    if not math.isfinite(longest.waiting_time):
        return None
    time = longest.waiting_time
    told = f"{time / 60:.0f} min" if time >= LONG_WAIT else f"{max(time, 1):.0f} s"
    text = f"Wait {told} between drops until the fluid is at rest"
    _, flow_index, yield_stress = case.situation.setup.fluid.rheology.arrays()
    if float(yield_stress) > 0 or float(flow_index) < 1:
        text += "; a gel needs its rest besides: the same for every drop"
    return Verdict("doubt" if time >= LONG_WAIT else "good", "waiting", f"{text}.")


def _some(names: list[str]) -> str:
    return ", ".join(names) if len(names) <= 4 else f"{', '.join(names[:3])} and {len(names) - 3} more"


CHECKS: tuple[Callable[[_Case], Verdict | None], ...] = (
    _laws,
    _walls,
    _run_up,
    _size,
    _blur,
    _frames,
    _uncertainty,
    _drops,
    _waiting,
)
