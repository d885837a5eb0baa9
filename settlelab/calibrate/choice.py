"""Published or calibrated: the honest choice.

The rule. A calibrated form is taken only if, on particles left out of its fit, it deviates less from a particle, on
average over the particles, than the best published method does, by more than twice the standard error of that gain
(bootstrap by particle). Deviations are compared, not their squares: one particle that a law misses by far would swamp
the standard error of a difference of squares, and hide a gain that every particle shows.
Of several such forms the one with the fewest parameters is taken among those that the best of them does not beat by
more than one standard error. Otherwise the published method is kept: a gain that could be noise is none.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from settlelab.calibrate.observations import Observations
from settlelab.calibrate.ranking import Contender, by_particle, particle_draws, squared_error
from settlelab.physics.constants import FloatArray

__all__ = ["CLEAR_GAIN", "Verdict", "choose"]

CLEAR_GAIN = 2.0  # standard errors


@dataclass(frozen=True, slots=True, kw_only=True)
class Verdict:
    """The contender to use; `chosen` is None where the published method is kept. `sentence` says why."""

    chosen: str | None
    sentence: str


def choose(published: Contender, calibrated: Sequence[tuple[Contender, int]], seen: Observations) -> Verdict:
    """Choose between the best published method and calibrated forms, given with their numbers of parameters."""
    if not calibrated:
        return Verdict(
            chosen=None, sentence=f"The published {published.name} is kept: no calibrated form could be fitted."
        )
    draws = particle_draws(len(np.unique(seen.particle)))
    base = _deviations(published, seen)
    errors = [_deviations(contender, seen) for contender, _ in calibrated]
    gains = [_gain(base, own, draws) for own in errors]
    clear = [number for number, (gain, error) in enumerate(gains) if gain > CLEAR_GAIN * error]
    if not clear:
        nearest = min(range(len(errors)), key=lambda number: float(np.mean(errors[number])))
        return Verdict(chosen=None, sentence=_kept(published, calibrated[nearest][0], errors[nearest], base))
    best = min(clear, key=lambda number: float(np.mean(errors[number])))
    behind = [_gain(errors[number], errors[best], draws) for number in clear]
    near = [number for number, (gap, error) in zip(clear, behind, strict=True) if gap <= error]
    taken = min(near, key=lambda number: (calibrated[number][1], float(np.mean(errors[number]))))
    gain, error = gains[taken]
    name = calibrated[taken][0].name
    return Verdict(
        chosen=name,
        sentence=f"{name} is used: on particles left out of the fit it deviates by {_rms(errors[taken])} % (root mean "
        f"square), the best published method, {published.name}, by {_rms(base)} %; the gain is {gain / error:.1f} of "
        f"its standard errors ({CLEAR_GAIN:g} are asked for).",
    )


def _deviations(contender: Contender, seen: Observations) -> FloatArray:
    """Relative deviation from each particle (root mean square of its drops), left out of the fit where there is one."""
    return np.sqrt(by_particle(seen, squared_error(contender)))


def _gain(base: FloatArray, own: FloatArray, draws: FloatArray) -> tuple[float, float]:
    """Mean gain over the particles, and its standard error."""
    return float(np.mean(base - own)), float(np.std(draws @ (base - own)))


def _kept(published: Contender, nearest: Contender, errors: FloatArray, base: FloatArray) -> str:
    return (
        f"The published {published.name} is kept: it deviates by {_rms(base)} % (root mean square), the best "
        f"calibrated form, {nearest.name}, by {_rms(errors)} % on particles left out of the fit: no gain beyond "
        "noise."
    )


def _rms(deviations: FloatArray) -> str:
    return f"{100 * float(np.sqrt(np.mean(deviations**2))):.1f}"
