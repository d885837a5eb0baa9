"""The side walls of the column, found in the background."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from settlelab.video.model import FloatArray

APART = 0.04  # relative: how far the distance of the edges may be from the inner diameter
CLEAR = 8.0  # times the usual change from column to column: an edge
BANDS = 9  # of rows that must agree


def find_walls(background: NDArray[np.floating], bore: float) -> tuple[float, float] | None:
    """Inner edges of the two side walls, px.

    Parameters
    ----------
    background : (H, W) array
        Turned so that y grows along gravity, grey levels.
    bore : float
        Expected distance of the walls, px.

    Returns
    -------
    (float, float) or None
        x of the left and the right wall; None where no pair of upright edges stands that far apart.
    """
    change = _upright_edges(background)
    usual = float(np.median(change)) + 1e-3
    width = len(change)
    nearest, farthest = int(np.floor(bore * (1 - APART))), int(np.ceil(bore * (1 + APART)))
    best, walls = CLEAR * usual, None
    for apart in range(max(nearest, 4), min(farthest, width - 1) + 1):
        weaker = np.minimum(change[:-apart], change[apart:])
        left = int(weaker.argmax())
        if weaker[left] > best:
            best, walls = float(weaker[left]), (left, left + apart)
    if walls is None:
        return None
    return _refined(change, walls[0]), _refined(change, walls[1])


def _upright_edges(background: NDArray[np.floating]) -> FloatArray:
    """Change of grey from column to column that most bands of rows agree on; index i lies at x = i."""
    bands = np.array_split(background.astype(np.float64), BANDS, axis=0)
    rows = np.stack([np.median(band, axis=0) for band in bands])
    slope = np.zeros_like(rows)
    slope[:, 1:-1] = rows[:, 2:] - rows[:, :-2]
    return np.asarray(np.abs(np.median(slope, axis=0)))


def _refined(change: FloatArray, at: int) -> float:
    """Top of the parabola through an edge and its neighbours."""
    if not 0 < at < len(change) - 1:
        return float(at)
    before, here, after = change[at - 1 : at + 2]
    bend = before - 2 * here + after
    return float(at + 0.5 * (before - after) / bend) if bend < 0 else float(at)
