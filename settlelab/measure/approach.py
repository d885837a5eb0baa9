"""The approach to terminal velocity, as far as a track shows one.

V = Vt - D exp(-t/tau): exact for Stokes' drag, and the last stage of any approach. D may have either sign (a particle
that enters from air is too fast). A range of time constants is tried, then a closer one about the likely ones; the
position is linear in all the rest.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from scipy.special import logsumexp

from settlelab.measure.noise import Regression, blocks, mixture, noise_models, regress, weights
from settlelab.physics.constants import FloatArray

_SHORTEST, _LONGEST = 0.01, 1.5  # time constants that are tried, over the length of the track
_TRIED = 25  # time constants at a time
_ROUNDS = 3
_LOG_ODDS = np.log(20)  # an approach is taken as real where it is so much likelier than a straight line
_BEYOND_WANDER = 3.0
_SLOWEST, _FASTEST = -0.1, 3.0  # velocity at the first point over terminal velocity, of a possible approach


@dataclass(frozen=True, slots=True, kw_only=True)
class Approach:
    """An approach found in a track; times are those of the track."""

    terminal: float  # m/s, velocity at the end of it
    u: float  # m/s, standard uncertainty, that of the time constant included
    start: float  # s, time of the first point
    time_constant: float  # s, the most likely one
    deficit: float  # share of the terminal velocity that is missing at `start`; negative where the particle is too fast

    def missing(self, time: FloatArray) -> FloatArray:
        """Share of the terminal velocity that is still missing at these times [s]."""
        return np.asarray(self.deficit * np.exp(-(time - self.start) / self.time_constant))

    def straightened(self, time: FloatArray, distance: FloatArray) -> FloatArray:
        """Positions [m] without the part of the approach, as if the fall had gone at the terminal velocity."""
        return np.asarray(distance - self.terminal * self.time_constant * self.missing(time))

    def steady_from(self, share: float) -> float:
        """Time [s] from which on no more than this share is missing."""
        return float(self.start + self.time_constant * np.log(max(abs(self.deficit) / share, 1.0)))


@dataclass(frozen=True, slots=True)
class _Trial:
    """Regressions on a straight line and one decay, for H noise models and K time constants: (H, K) arrays."""

    time_constant: FloatArray  # (K,)
    terminal: FloatArray
    variance: FloatArray
    deficit: FloatArray
    bend: FloatArray  # largest distance of the decay from a straight line
    rss: FloatArray
    log_likelihood: FloatArray


def find_approach(
    time: FloatArray, distance: FloatArray, *, wander: float = 0.0, slowest: float = math.inf
) -> Approach | None:
    """The approach that a track shows, or None where a straight line does as well.

    It counts where it is 20 times likelier than a straight line, errors correlated or not. The velocity at its end is
    averaged over time constants and noise models, weighted by their likelihood.

    Parameters
    ----------
    time, distance : (N,) array
        Growing times [s] and distances [m], without outliers.
    wander : float
        How far the points may stray from the body's own path in a slow and smooth way [m]; an approach must bend the
        path by three times as much.
    slowest : float
        Longest time constant that the body can have [s].

    Returns
    -------
    Approach or None
        None also where the points are too few to tell: fewer than 7.
    """
    length = time[-1] - time[0]
    scaled = (time - time[0]) / length
    longest = min(_LONGEST, slowest / length)
    if len(time) < 7 or longest <= _SHORTEST:
        return None
    line = np.column_stack([np.ones_like(scaled), scaled])
    fit = regress(blocks(line), blocks(distance[:, None] - distance[0])[:, 0])
    trial = _try(fit, scaled, blocks(line), np.geomspace(_SHORTEST, longest, _TRIED))
    if not _log_odds(fit, trial) > _LOG_ODDS:
        return None
    for _ in range(_ROUNDS):
        trial = _try(fit, scaled, blocks(line), _closer(trial, longest))
    best = np.unravel_index(np.argmax(trial.log_likelihood), trial.log_likelihood.shape)
    if trial.bend[best] < _BEYOND_WANDER * wander:
        return None
    terminal, u = mixture(trial.terminal, trial.variance, weights(trial.log_likelihood))
    return Approach(
        terminal=float(terminal / length),
        u=float(u / length),
        start=float(time[0]),
        time_constant=float(trial.time_constant[best[1]] * length),
        deficit=float(trial.deficit[best]),
    )


def _try(fit: Regression, scaled: FloatArray, line: FloatArray, time_constant: FloatArray) -> _Trial:
    """Add one decay at a time to a fitted line: everything follows from the part of the decay across the line."""
    decay = blocks(np.exp(-scaled[:, None] / time_constant))
    bent = decay - line @ np.linalg.lstsq(line, decay, rcond=None)[0]
    size = np.linalg.norm(bent, axis=0)
    whitened = noise_models(len(decay)).whitening @ (decay / size)
    along = np.einsum("hnp,hnk->hpk", fit.basis, whitened)
    across = whitened - np.einsum("hnp,hpk->hnk", fit.basis, along)
    square = np.sum(across**2, axis=1)
    amount = np.einsum("hnk,hn->hk", across, fit.response) / square
    rss = np.maximum(fit.rss[:, None] - amount**2 * square, 1e-12 * fit.rss[:, None])
    tilt = np.einsum("hp,hpk->hk", fit.inverse[:, 1], along)  # slope of the decay's straight part
    terminal = fit.coefficients[:, 1, None] - amount * tilt
    falling = terminal > 0
    deficit = amount / size / time_constant / np.where(falling, terminal, 1.0)
    possible = falling & (1 - deficit > _SLOWEST) & (1 - deficit < _FASTEST)
    log_likelihood = fit.log_without_rss[:, None] - 0.5 * np.log(square) - (fit.degrees - 1) / 2 * np.log(rss)
    return _Trial(
        time_constant=time_constant,
        terminal=terminal,
        variance=rss / (fit.degrees - 3) * (np.sum(fit.inverse[:, 1] ** 2, axis=1)[:, None] + tilt**2 / square),
        deficit=deficit,
        bend=np.abs(amount) * np.max(np.abs(bent), axis=0) / size,
        rss=rss,
        log_likelihood=np.where(possible, log_likelihood, -np.inf),
    )


def _log_odds(fit: Regression, trial: _Trial) -> float:
    """Log of how much likelier an approach is than a straight line.

    By the criterion of Schwarz (1978), Ann. Stat. 6, 461-464, over all noise models and time constants.
    """
    count = fit.degrees + fit.basis.shape[2]
    approach = fit.log_without_rss[:, None] - fit.degrees / 2 * np.log(trial.rss)
    approach = np.where(np.isfinite(trial.log_likelihood), approach, -np.inf)
    return float(logsumexp(approach) - np.log(_TRIED) - np.log(count) / 2 - logsumexp(fit.log_likelihood))


def _closer(trial: _Trial, longest: float) -> FloatArray:
    """Time constants four standard deviations about the likely ones, at least a grid step, within the first range."""
    logs = np.log(trial.time_constant)
    weight = weights(trial.log_likelihood).sum(axis=0)
    mean = np.sum(weight * logs)
    reach = np.maximum(4 * np.sqrt(np.sum(weight * (logs - mean) ** 2)), logs[1] - logs[0])
    ends = np.clip([mean - reach, mean + reach], np.log(_SHORTEST), np.log(longest))
    return np.exp(np.linspace(ends[0], ends[1], _TRIED))
