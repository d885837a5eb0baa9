"""The graduation printed on a column, found in the still picture as evenly spaced marks one below the other."""

from __future__ import annotations

from typing import NamedTuple

import cv2
import numpy as np
from numpy.typing import NDArray

from settlelab.video.model import FloatArray

FEWEST_MARKS = 5
STRIPS = 40  # upright strips of the picture, overlapping by half
CLOSEST = 6.0  # px between marks
CLEAR = 6.0  # times the usual change along a strip: a mark
OUT_OF_STEP = 0.15  # of the spacing: not a mark of the graduation
AGREEING = 0.7  # of the places where marks are due must show one


class Spacing(NamedTuple):
    """Marks of a graduation."""

    spacing: float  # px
    spacing_u: float  # px, standard uncertainty from the scatter of the marks about even spacing
    marks: int


def graduation_spacing(background: NDArray[np.floating]) -> Spacing | None:
    """Spacing of the marks along gravity, from the strip of the picture that shows most of them in step.

    Parameters
    ----------
    background : (H, W) array
        Turned so that y grows along gravity, grey levels.

    Returns
    -------
    Spacing or None
        None where no strip shows five evenly spaced marks.
    """
    width = background.shape[1]
    strip = max(4, 2 * width // STRIPS)
    best: Spacing | None = None
    for left in range(0, max(1, width - strip + 1), max(1, strip // 2)):
        profile = np.median(background[:, left : left + strip].astype(np.float64), axis=1)
        for marks in (_marks(profile), _marks(-profile)):
            found = _even(marks)
            if found is not None and (best is None or _better(found, best)):
                best = found
    return best


def _better(one: Spacing, other: Spacing) -> bool:
    return one.spacing_u / one.spacing < other.spacing_u / other.spacing


def _marks(profile: FloatArray) -> FloatArray:
    """Sub-pixel places of the dark marks along a strip: grey-weighted centres of what stands out."""
    length = len(profile)
    column = profile.reshape(-1, 1).astype(np.float32)
    slow = cv2.GaussianBlur(column, (1, 0), sigmaX=0.1, sigmaY=max(4.0, length / 60)).ravel().astype(np.float64)
    dip = slow - profile
    usual = 1.4826 * float(np.median(np.abs(dip))) + 0.05
    above = np.concatenate([[False], dip > CLEAR * usual, [False]])
    starts, ends = np.flatnonzero(above[1:] & ~above[:-1]), np.flatnonzero(~above[1:] & above[:-1])
    places = []
    for start, end in zip(starts, ends, strict=True):
        if start == 0 or end == length:
            continue
        around = np.arange(max(0, int(start) - 2), min(length, int(end) + 2))
        weight = np.maximum(dip[around], 0.0)
        places.append(float(weight @ around / weight.sum()))
    return np.array(places)


def _even(places: FloatArray) -> Spacing | None:
    """Straight line through the places against their number."""
    if len(places) < FEWEST_MARKS:
        return None
    step = float(np.median(np.diff(places)))
    if step < CLOSEST:
        return None
    start = places[np.argmin(np.abs(places - np.median(places)))]
    for _ in range(4):
        number = np.rint((places - start) / step)
        fair = np.abs(places - start - step * number) < OUT_OF_STEP * step
        if np.count_nonzero(fair) < FEWEST_MARKS or len(np.unique(number[fair])) < FEWEST_MARKS:
            return None
        step, start = (float(value) for value in np.polyfit(number[fair], places[fair], 1))
    due = number[fair].max() - number[fair].min() + 1
    in_step, seen = np.count_nonzero(fair), len(np.unique(number[fair]))
    if in_step < AGREEING * len(places) or seen < AGREEING * due:
        return None
    away = places[fair] - start - step * number[fair]
    scatter = float(np.sqrt(away @ away / (in_step - 2)))
    spread = number[fair] - number[fair].mean()
    return Spacing(step, max(scatter, 0.02) / float(np.sqrt(spread @ spread)), int(in_step))
