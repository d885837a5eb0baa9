"""A particle that swings on its way: a periodic residual about the straight line of a fall."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from settlelab.measure.noise import blocks
from settlelab.physics.constants import FloatArray

FEWEST_SWINGS = 2.0  # periods in the window
SWING_SHARE = 0.6  # of the variance of the residuals


@dataclass(frozen=True, slots=True)
class Swing:
    """A swing over the unit of time: its sine and cosine (N, 2), and the amplitude of its velocity."""

    columns: FloatArray
    speed: float


def find_swing(s: FloatArray, distance: FloatArray) -> Swing | None:
    """The sine about a straight line that explains most, if that is enough to be one.

    It has two periods or more, explains 60 % of the variance about the line, and chance would show one like it less
    than once in a hundred falls.

    Parameters
    ----------
    s : (N,) array
        Time over the length of the window, from 0 to 1.
    distance : (N,) array
        Positions along gravity.
    """
    y = blocks(distance[:, None])[:, 0]
    coarse = np.arange(FEWEST_SWINGS, len(y) / 4, 0.25)
    if coarse.size == 0:
        return None
    near = coarse[int(np.argmax(_explained(s, y, coarse)[0]))]
    cycles = near + np.linspace(-0.25, 0.25, 21)
    explained, amplitude = _explained(s, y, cycles)
    best = int(np.argmax(explained))
    by_chance = coarse.size * (1 - explained[best]) ** ((len(y) - 4) / 2)
    if explained[best] < SWING_SHARE or by_chance > 0.01:
        return None
    angle = 2 * np.pi * cycles[best] * s
    speed = 2 * np.pi * float(cycles[best] * amplitude[best])
    return Swing(columns=np.column_stack([np.cos(angle), np.sin(angle)]), speed=speed)


def _explained(s: FloatArray, y: FloatArray, cycles: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Share of the variance about a line that a sine of so many cycles explains, and its amplitude."""
    angle = 2 * np.pi * s[:, None] * cycles
    waves = np.stack([blocks(np.cos(angle)), blocks(np.sin(angle))], axis=-1)  # (n, M, 2)
    line, _ = np.linalg.qr(blocks(np.column_stack([np.ones_like(s), s])))
    residual = y - line @ (line.T @ y)
    across = waves - np.einsum("np,pmq->nmq", line, np.einsum("np,nmq->pmq", line, waves))
    basis, triangle = np.linalg.qr(np.moveaxis(across, 1, 0))
    part = np.einsum("mnq,n->mq", basis, residual)
    explained = np.sum(part**2, axis=1) / max(float(residual @ residual), 1e-300)
    amplitude = np.linalg.norm(np.linalg.solve(triangle, part[..., None])[..., 0], axis=1)
    return explained, np.asarray(amplitude)
